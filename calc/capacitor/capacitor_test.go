package capacitor_test

import (
	"math"
	"slices"
	"testing"

	"floatrail/calc/capacitor"
)

var unknown = math.NaN()

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s = %.12g, want %.12g within %g", what, got, want, tolerance)
	}
}

// Design case 2: 1 µF, -10 %, -15 %, bias -60 %, ageing -5 %: 0.291 µF, and
// 200 nC then make 0.688 V where the nominal value promises 0.20 V.
func TestEffectiveCapacitance(t *testing.T) {
	c := capacitor.Effective(1e-6, -0.10, -0.15, 0.40, 0.95)
	near(t, "C_eff", c, 1e-6*0.9*0.85*0.4*0.95, 1e-18)
	near(t, "C_eff to three digits", c, 0.291e-6, 0.0005e-6)
	near(t, "drop to three digits", 200e-9/c, 0.688, 0.0005)

	ranked := capacitor.NewDerating(-0.10, -0.15, 0.40, 0.95).Ranked()
	order := []string{capacitor.FactorBias, capacitor.FactorTemperature, capacitor.FactorTolerance, capacitor.FactorAgeing}
	for i, name := range order {
		if ranked[i].Name != name {
			t.Errorf("rank %d is %q, want %q", i+1, ranked[i].Name, name)
		}
	}
}

func TestLargestCapacitance(t *testing.T) {
	near(t, "C_eff", capacitor.Effective(1e-6, 0.10, 0.15, 1, 1), 1.265e-6, 1e-18)
}

func TestDeratingOrder(t *testing.T) {
	d := capacitor.NewDerating(-0.2, unknown, 0.8, 1)
	want := capacitor.Derating{
		{Name: capacitor.FactorTolerance, Value: 0.8}, {Name: capacitor.FactorTemperature, Value: unknown},
		{Name: capacitor.FactorBias, Value: 0.8}, {Name: capacitor.FactorAgeing, Value: 1},
	}
	same := func(a, b capacitor.Factor) bool {
		return a.Name == b.Name && (a.Value == b.Value || math.IsNaN(a.Value) && math.IsNaN(b.Value))
	}
	ranked := d.Ranked()
	if !slices.EqualFunc(d, want, same) {
		t.Errorf("factors %v, want %v; ranking must not reorder them", d, want)
	}
	rankedWant := capacitor.Derating{want[1], want[0], want[2], want[3]}
	if !slices.EqualFunc(ranked, rankedWant, same) {
		t.Errorf("ranked %v, want %v: unknown first, equal ones in their order", ranked, rankedWant)
	}
	if p := d.Product(); !math.IsNaN(p) {
		t.Errorf("product with an unknown factor: %g", p)
	}
}

// Lowering any factor lowers the effective capacitance.
func TestEffectiveIsMonotonic(t *testing.T) {
	base := [4]float64{-0.1, -0.15, 0.7, 0.9}
	of := func(f [4]float64) float64 { return capacitor.Effective(2.2e-6, f[0], f[1], f[2], f[3]) }
	for i := range base {
		worse := base
		last := of(base)
		for range 10 {
			worse[i] -= 0.05
			if c := of(worse); !(c < last) {
				t.Errorf("factor %d at %g: %g F, before %g F", i, worse[i], c, last)
			} else {
				last = c
			}
		}
	}
}

func TestBiasRemaining(t *testing.T) {
	falling := []capacitor.BiasPoint{{Voltage: 5, Remaining: 0.9}, {Voltage: 10, Remaining: 0.6}, {Voltage: 20, Remaining: 0.4}}
	anchored := []capacitor.BiasPoint{{Voltage: 0, Remaining: 0.98}, {Voltage: 10, Remaining: 0.58}}
	rising := []capacitor.BiasPoint{{Voltage: 10, Remaining: 0.90}, {Voltage: 20, Remaining: 0.95}}
	for _, c := range []struct {
		name   string
		curve  []capacitor.BiasPoint
		v      float64 // [V]
		want   float64 // [1]
		beyond bool
	}{
		{"no bias", falling, 0, 1, false},
		{"before the first point, from 1 at 0 V", falling, 2.5, 0.95, false},
		{"on the first point", falling, 5, 0.9, false},
		{"between points", falling, 7.5, 0.75, false},
		{"on an inner point", falling, 10, 0.6, false},
		{"last segment", falling, 15, 0.5, false},
		{"on the last point", falling, 20, 0.4, false},
		{"beyond, last slope", falling, 25, 0.3, true},
		{"far beyond, floor", falling, 100, 0, true},
		{"negative voltage", falling, -7.5, 0.75, false},
		{"own point at 0 V", anchored, 0, 0.98, false},
		{"from the own point", anchored, 5, 0.78, false},
		{"beyond a rising end stays level", rising, 30, 0.95, true},
		{"rising segment", rising, 15, 0.925, false},
		{"one point, before", falling[:1], 2.5, 0.95, false},
		{"one point, beyond", falling[:1], 10, 0.8, true},
		{"one point at 0 V", anchored[:1], 10, 0.98, true},
	} {
		got, beyond := capacitor.BiasRemaining(c.curve, c.v)
		near(t, c.name, got, c.want, 1e-12)
		if beyond != c.beyond {
			t.Errorf("%s: beyond = %v, want %v", c.name, beyond, c.beyond)
		}
	}
	for name, got := range map[string]func() (float64, bool){
		"no curve":        func() (float64, bool) { return capacitor.BiasRemaining(nil, 5) },
		"unknown voltage": func() (float64, bool) { return capacitor.BiasRemaining(falling, unknown) },
		"unknown point": func() (float64, bool) {
			return capacitor.BiasRemaining([]capacitor.BiasPoint{{Voltage: unknown, Remaining: 0.5}}, 5)
		},
	} {
		if r, _ := got(); !math.IsNaN(r) {
			t.Errorf("%s: %g", name, r)
		}
	}
}

// More voltage never leaves more capacitance on a falling curve, and the curve
// has no step, its end included.
func TestBiasRemainingIsMonotonicAndContinuous(t *testing.T) {
	curve := []capacitor.BiasPoint{{Voltage: 3.3, Remaining: 0.93}, {Voltage: 6.3, Remaining: 0.71}, {Voltage: 12, Remaining: 0.42}, {Voltage: 16, Remaining: 0.31}}
	const step = 1e-3
	steepest := (0.93 - 0.71) / (6.3 - 3.3)
	last := 1.0
	for v := step; v < 30; v += step {
		r, beyond := capacitor.BiasRemaining(curve, v)
		if r > last || last-r > steepest*step*(1+1e-6) || r < 0 {
			t.Fatalf("at %g V: %.9g after %.9g", v, r, last)
		}
		if beyond != (v > 16) {
			t.Fatalf("at %g V: beyond = %v", v, beyond)
		}
		last = r
	}
}

// Ageing law of ceramic makers; 2.5 % per decade, 4 decades: -10.0 % (derived).
func TestAgeing(t *testing.T) {
	const hour = 3600.0
	for _, c := range []struct {
		name               string
		perDecade, t, want float64 // [1], [s], remaining [1]
	}{
		{"2.5 %, 4 decades", 0.025, 1e4 * hour, 0.900},
		{"3 %, 5 decades", 0.03, 1e5 * hour, 0.85},
		{"7 %, 1 decade", 0.07, 10 * hour, 0.93},
		{"after one hour", 0.07, hour, 1},
		{"before one hour", 0.07, 1, 1},
		{"no time", 0.07, 0, 1},
		{"no ageing, without end", 0, math.Inf(1), 1},
		{"never below nothing", 0.3, 1e5 * hour, 0},
		{"without end", 0.025, math.Inf(1), 0},
	} {
		near(t, c.name, capacitor.Ageing(c.perDecade, c.t), c.want, 1e-12)
	}
	if a := capacitor.Ageing(0.025, unknown); !math.IsNaN(a) {
		t.Errorf("unknown service time: %g", a)
	}
	if a := capacitor.Ageing(unknown, 1e4*hour); !math.IsNaN(a) {
		t.Errorf("unknown ageing: %g", a)
	}
}

// KEMET C1002: 500 MΩ·µF or 10 GΩ, the lower (currents derived).
func TestInsulationLeakage(t *testing.T) {
	for _, c := range []struct {
		name             string
		c, v, insulation float64 // [F], [V], [s]
		want             float64 // [A]
	}{
		{"1 µF 25 V", 1e-6, 25, unknown, 50e-9},
		{"0.1 µF 25 V", 0.1e-6, 25, unknown, 5e-9},
		{"50 nF, where the two limits meet", 50e-9, 25, unknown, 2.5e-9},
		{"1 nF, 10 GΩ", 1e-9, 25, unknown, 2.5e-9},
		{"1 µF with 100 Ω·F of its own", 1e-6, 25, 100, 250e-9},
		{"1 nF with 500 Ω·F of its own, no lower limit", 1e-9, 25, 500, 50e-12},
		{"no voltage", 1e-6, 0, unknown, 0},
	} {
		near(t, c.name, capacitor.InsulationLeakage(c.c, c.v, c.insulation), c.want, 1e-12*c.want)
	}
}

// Aluminium electrolytic leakage of several makers: 0.01·C[µF]·V or 3 µA, the
// greater (currents derived).
func TestElectrolyticLeakage(t *testing.T) {
	near(t, "100 µF 10 V", capacitor.ElectrolyticLeakage(100e-6, 10), 10e-6, 1e-18)
	near(t, "10 µF 25 V", capacitor.ElectrolyticLeakage(10e-6, 25), 3e-6, 1e-18)
	near(t, "470 µF 16 V", capacitor.ElectrolyticLeakage(470e-6, 16), 75.2e-6, 1e-17)
	if i := capacitor.ElectrolyticLeakage(unknown, 10); !math.IsNaN(i) {
		t.Errorf("unknown capacitance: %g A", i)
	}
}

// NASA EEE-INST-002 (from memory); the ceramic figure also
// System Reliability Center, part derating parameters, severe environment.
func TestDeratedVoltage(t *testing.T) {
	policy := capacitor.DefaultVoltagePolicy()
	for _, c := range []struct {
		kind capacitor.Kind
		want float64 // [V] of a 25 V part
	}{
		{capacitor.ClassOne, 15}, {capacitor.ClassTwo, 15}, {capacitor.Film, 20},
		{capacitor.Aluminium, 20}, {capacitor.Tantalum, 12.5},
	} {
		near(t, c.kind.String(), capacitor.DeratedVoltage(25, c.kind, policy), c.want, 1e-12)
	}
	if v := capacitor.DeratedVoltage(25, capacitor.Unspecified, policy); !math.IsNaN(v) {
		t.Errorf("no kind: %g V", v)
	}
	if v := capacitor.DeratedVoltage(25, capacitor.Film, capacitor.VoltagePolicy{Film: 0.5}); v != 12.5 {
		t.Errorf("own policy: %g V", v)
	}
}
