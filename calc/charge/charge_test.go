package charge_test

import (
	"math"
	"testing"

	"floatrail/calc/charge"
)

var unknown = math.NaN()

// split is a device whose gate-charge curve is known: 6.6 nF above the plateau.
func split() charge.GateCharge {
	return charge.GateCharge{
		Specified: 63 * nano, SpecifiedAt: 10, GateSource: 10 * nano, GateDrain: 20 * nano, Plateau: 5,
		InputCapacitanceMin: unknown, InputCapacitanceMax: unknown,
	}
}

// total is a device of which only the total charge is known: 6.3 nF on average.
func total(ciss ...float64) charge.GateCharge {
	g := charge.GateCharge{
		Specified: 63 * nano, SpecifiedAt: 10, GateSource: unknown, GateDrain: unknown, Plateau: unknown,
		InputCapacitanceMin: unknown, InputCapacitanceMax: unknown,
	}
	if len(ciss) == 2 {
		g.InputCapacitanceMin, g.InputCapacitanceMax = ciss[0], ciss[1]
	}
	return g
}

func TestGateChargeAtDrive(t *testing.T) {
	noPlateau := split()
	noPlateau.Plateau = unknown
	plateauAbove := split()
	plateauAbove.Plateau = 11
	partsAboveTotal := split()
	partsAboveTotal.GateDrain = 60 * nano
	for _, c := range []struct {
		name  string
		gate  charge.GateCharge
		drive float64 // [V]
		want  float64 // [C]
		slope float64 // [F]
		known bool
	}{
		{"split, at the test voltage", split(), 10, 63 * nano, 6.6 * nano, true},
		{"split, above", split(), 15, 96 * nano, 6.6 * nano, true},
		{"split, below", split(), 8, 49.8 * nano, 6.6 * nano, true},
		{"split, at the plateau Q_GS + Q_GD", split(), 5, 30 * nano, 6.6 * nano, true},
		{"split, far below the plateau Q_GS·V/V_pl", split(), 0.2, 0.4 * nano, 6.6 * nano, true},
		{"split, no drive", split(), 0, 0, 6.6 * nano, true},
		{"split, negative drive", split(), -5, 0, 6.6 * nano, true},
		{"total only, at the test voltage", total(), 10, 63 * nano, 6.3 * nano, false},
		{"total only, above", total(), 15, 94.5 * nano, 6.3 * nano, false},
		{"total only, below", total(), 5, 31.5 * nano, 6.3 * nano, false},
		{"total only, negative drive", total(), -5, 0, 6.3 * nano, false},
		{"C_iss below the mean slope, above", total(2*nano, 3*nano), 15, 94.5 * nano, 6.3 * nano, false},
		{"C_iss below the mean slope, below", total(2*nano, 3*nano), 5, 53 * nano, 2 * nano, false},
		{"C_iss above the mean slope, above", total(7*nano, 8*nano), 15, 103 * nano, 8 * nano, false},
		{"C_iss above the mean slope, below", total(7*nano, 8*nano), 5, 31.5 * nano, 6.3 * nano, false},
		{"plateau unknown", noPlateau, 15, 94.5 * nano, 6.3 * nano, false},
		{"plateau above the test voltage", plateauAbove, 15, 94.5 * nano, 6.3 * nano, false},
		{"parts above the total", partsAboveTotal, 15, 94.5 * nano, 6.3 * nano, false},
	} {
		t.Run(c.name, func(t *testing.T) {
			slope, known := c.gate.Slope(c.drive)
			if known != c.known {
				t.Errorf("known = %v, want %v", known, c.known)
			}
			exact(t, "slope", slope, c.slope)
			if got := c.gate.At(c.drive); !(math.Abs(got-c.want) <= 1e-12*63*nano) {
				t.Errorf("Q_G(%g V) = %g, want %g", c.drive, got, c.want)
			}
		})
	}
}

func TestGateChargeOfUnknownIsUnknown(t *testing.T) {
	noTest := split()
	noTest.SpecifiedAt = unknown
	noCharge := split()
	noCharge.Specified = unknown
	for name, c := range map[string]struct {
		gate  charge.GateCharge
		drive float64
	}{
		"test voltage": {noTest, 12}, "charge": {noCharge, 12}, "drive": {split(), unknown},
	} {
		if slope, known := c.gate.Slope(c.drive); !math.IsNaN(slope) || known {
			t.Errorf("%s unknown: slope %g, known %v", name, slope, known)
		}
		if q := c.gate.At(c.drive); !math.IsNaN(q) {
			t.Errorf("%s unknown: Q_G = %g", name, q)
		}
	}
}

// Q_G never falls with rising drive, and without the split no credible slope
// gives a larger charge than the one that is used.
func TestGateChargeIsMonotonicAndConservative(t *testing.T) {
	for _, g := range []charge.GateCharge{split(), total(), total(2*nano, 3*nano), total(5*nano, 8*nano), total(7*nano, 9*nano)} {
		last := 0.0
		for drive := -5.0; drive <= 25; drive += 0.125 {
			q := g.At(drive)
			if q < last {
				t.Errorf("%+v: Q_G falls to %g at %g V", g, q, drive)
			}
			last = q
			for _, credible := range []float64{g.InputCapacitanceMin, g.InputCapacitanceMax, g.Specified / g.SpecifiedAt} {
				if _, known := g.Slope(drive); known || math.IsNaN(credible) {
					continue
				}
				if other := g.Specified + credible*(drive-g.SpecifiedAt); q < other*(1-1e-12) {
					t.Errorf("%+v: at %g V slope %g gives %g, more than %g", g, drive, credible, other, q)
				}
			}
		}
	}
}

func TestOffBias(t *testing.T) {
	separate, shared := charge.OffBias{Voltage: -4}, charge.OffBias{Voltage: -4, Split: true}
	exact(t, "drive, separate bias", separate.Drive(18), 18)
	exact(t, "drive, split bias", shared.Drive(18), 14)
	exact(t, "charge", separate.Charge(2*nano), 8*nano)
	exact(t, "charge, split", shared.Charge(2*nano), 8*nano)
	if q := (charge.OffBias{}).Charge(unknown); q != 0 {
		t.Errorf("no bias: %g C", q)
	}
	if q := separate.Charge(unknown); !math.IsNaN(q) {
		t.Errorf("bias with unknown C_iss: %g C", q)
	}
}

// Every item carries its own input, once, in the fixed order.
func TestItems(t *testing.T) {
	loads := charge.Loads{
		Quiescent: 1 * micro, OffsetLeakage: 2 * micro, GateLeakage: 4 * micro, DiodeLeakage: 8 * micro,
		CapacitorLeakage: 16 * micro, ClampLeakage: 32 * micro, Other: 64 * micro, PullDown: 1e-4,
	}
	edge := charge.Edge{Gate: 1 * nano, OffBias: 2 * nano, LevelShift: 4 * nano, Recovery: 8 * nano, Junction: 16 * nano}
	items := charge.Items(loads, edge, charge.Interval{Period: milli, OnTime: milli / 4, Voltage: 12})
	want := []charge.Item{
		{Name: charge.ItemGate, Charge: 1 * nano},
		{Name: charge.ItemOffBias, Charge: 2 * nano},
		{Name: charge.ItemLevelShift, Charge: 4 * nano},
		{Name: charge.ItemRecovery, Charge: 8 * nano},
		{Name: charge.ItemJunction, Charge: 16 * nano},
		{Name: charge.ItemQuiescent, Charge: 1 * nano},
		{Name: charge.ItemOffsetLeakage, Charge: 2 * nano},
		{Name: charge.ItemGateLeakage, Charge: 4 * nano},
		{Name: charge.ItemDiodeLeakage, Charge: 8 * nano},
		{Name: charge.ItemCapacitorLeakage, Charge: 16 * nano},
		{Name: charge.ItemClampLeakage, Charge: 32 * nano},
		{Name: charge.ItemOther, Charge: 64 * nano},
		{Name: charge.ItemPullDown, Charge: 300 * nano},
	}
	if len(items) != len(want) {
		t.Fatalf("%d items, want %d", len(items), len(want))
	}
	for i := range want {
		if items[i].Name != want[i].Name {
			t.Errorf("item %d is %q, want %q", i, items[i].Name, want[i].Name)
		}
		exact(t, want[i].Name, items[i].Charge, want[i].Charge)
	}
	exact(t, "I_0", loads.Total(), 127*micro)
	exact(t, "edge", edge.Total(), 31*nano)
	exact(t, "edge consumed", edge.Consumed(), 15*nano)
	exact(t, "Q_B", charge.Total(items), 458*nano)
	exact(t, "Q_B without the returned junction charge", charge.Consumed(items), 442*nano)

	loads.ClampLeakage = unknown
	if q := charge.Total(charge.Items(loads, edge, charge.Interval{Period: milli})); !math.IsNaN(q) {
		t.Errorf("an unknown load gave Q_B = %g", q)
	}
}

func TestVoltageBudgetSigns(t *testing.T) {
	b := charge.VoltageBudget{Supply: 12, ElementDrop: 1, NodeLow: 0, Required: 9}
	exact(t, "node at COM", b.Available(), 2)
	b.NodeLow = 0.5
	exact(t, "sinking: node above COM", b.Available(), 1.5)
	b.NodeLow = -0.5
	exact(t, "sourcing: node below COM", b.Available(), 2.5)
	exact(t, "ripple binds", charge.AllowedDrop(2.5, 0.6), 0.6)
	exact(t, "budget binds", charge.AllowedDrop(0.4, 0.6), 0.4)
}

func TestRequiredVoltage(t *testing.T) {
	m := charge.Margin{Absolute: 0.3, Relative: 0.05}
	exact(t, "lockout governs", charge.RequiredVoltage(8.9, 6, m), 8.9+0.445)
	exact(t, "drive governs", charge.RequiredVoltage(8.9, 15, m), 15.75)
	exact(t, "absolute margin governs", charge.RequiredVoltage(4, 3, m), 4.3)
	if v := charge.RequiredVoltage(8.9, unknown, m); !math.IsNaN(v) {
		t.Errorf("unknown drive: %g V", v)
	}
}

func TestMinimumCapacitanceWithoutAnswer(t *testing.T) {
	for _, drop := range []float64{0, -0.1, math.Inf(-1)} {
		if c, ok := charge.MinimumCapacitance(100*nano, drop); ok || !math.IsInf(c, 1) {
			t.Errorf("ΔV = %g V: %g, %v", drop, c, ok)
		}
	}
	for _, in := range [][2]float64{{unknown, 1}, {100 * nano, unknown}, {-1, 1}} {
		if c, ok := charge.MinimumCapacitance(in[0], in[1]); ok || !math.IsNaN(c) {
			t.Errorf("Q = %g C, ΔV = %g V: %g, %v", in[0], in[1], c, ok)
		}
	}
}

// Design case 1: held on 10.64 ms from 11 V, 6 µF, 150 µA and 10 kΩ. The
// constant current alone would take 0.27 V; R_GS is 87 % of the load.
func TestHoldWithPullDown(t *testing.T) {
	h := charge.Hold{Start: 11, Capacitance: 6 * micro, Loads: charge.Loads{Quiescent: 150 * micro, PullDown: 1e-4}}
	const on = 10.64 * milli
	v := h.Voltage(on)
	exact(t, "V_BS", v, 12.5*math.Exp(-on/(10e3*6*micro))-1.5)
	printed(t, "V_BS", v, 8.97, 0.01)
	taken := h.Capacitance * (h.Start - v)
	printed(t, "share of the pull-down", (taken-150*micro*on)/taken, 0.87, 0.01)
	naive := h
	naive.Loads.PullDown = 0
	printed(t, "drop without the pull-down", 11-naive.Voltage(on), 0.27, 0.01)
}

// Design case 8: 60° clamp, 180 µA on 2.8 µF.
func TestHoldThroughClamp(t *testing.T) {
	h := charge.Hold{Start: 13.4, Capacitance: 2.8 * micro, Loads: charge.Loads{Quiescent: 180 * micro}}
	printed(t, "droop at 2 Hz", 13.4-h.Voltage(1/(6*2.0)), 5.36, 0.01)
	printed(t, "droop at 20 Hz", 13.4-h.Voltage(1/(6*20.0)), 0.54, 0.01)
}

// The closed form against classical fourth-order Runge-Kutta on
// C·dv/dt = -I_0 - G·v, and its inverse.
func TestHoldAgainstIntegration(t *testing.T) {
	for _, g := range []float64{0, 1e-15, 1e-9, 1e-6, 1e-4, 1e-2} {
		h := charge.Hold{Start: 12, Capacitance: 1 * micro, Loads: charge.Loads{Quiescent: 100 * micro, OffsetLeakage: 20 * micro, PullDown: g}}
		const span, steps = 1 * milli, 4000
		slope := func(v float64) float64 { return -(120*micro + g*v) / h.Capacitance }
		v, dt := h.Start, span/steps
		for range steps {
			k1 := slope(v)
			k2 := slope(v + 0.5*dt*k1)
			k3 := slope(v + 0.5*dt*k2)
			k4 := slope(v + dt*k3)
			v += dt / 6 * (k1 + 2*k2 + 2*k3 + k4)
		}
		got := h.Voltage(span)
		if !(math.Abs(got-v) <= 1e-10) {
			t.Errorf("G = %g S: %.15g V, integrated %.15g V", g, got, v)
		}
		if limit := h.Voltage(span); limit > 0 {
			if back := h.Time(limit); !(math.Abs(back-span) <= 1e-10*span) {
				t.Errorf("G = %g S: Time(Voltage(t)) = %.15g, want %g", g, back, span)
			}
		}
	}
}

func TestHoldTimeLimits(t *testing.T) {
	h := charge.Hold{Start: 12, Capacitance: 1 * micro, Loads: charge.Loads{Quiescent: 100 * micro}}
	if got := h.Time(12); got != 0 {
		t.Errorf("starting at the limit: %g s", got)
	}
	if got := h.Time(13); got != 0 {
		t.Errorf("starting below the limit: %g s", got)
	}
	if got := (charge.Hold{Start: 12, Capacitance: 1 * micro}).Time(9); !math.IsInf(got, 1) {
		t.Errorf("without load: %g s", got)
	}
	if got := h.Time(unknown); !math.IsNaN(got) {
		t.Errorf("unknown limit: %g s", got)
	}
	h.Loads.PullDown = unknown
	if got := h.Time(9); !math.IsNaN(got) {
		t.Errorf("unknown pull-down: %g s", got)
	}
	if got := h.Voltage(milli); !math.IsNaN(got) {
		t.Errorf("unknown pull-down: %g V", got)
	}
}

// More load, less capacitance or a longer time never leaves more voltage.
func TestHoldIsMonotonic(t *testing.T) {
	base := charge.Hold{Start: 12, Capacitance: 2 * micro, Loads: charge.Loads{Quiescent: 100 * micro, PullDown: 1e-5}}
	for on := 1 * micro; on < 0.1; on *= 1.5 {
		v := base.Voltage(on)
		worse := map[string]charge.Hold{"load": base, "pull-down": base, "capacitance": base, "start": base}
		for name, h := range worse {
			switch name {
			case "load":
				h.Loads.ClampLeakage = 10 * micro
			case "pull-down":
				h.Loads.PullDown *= 1.1
			case "capacitance":
				h.Capacitance *= 0.9
			case "start":
				h.Start -= 0.1
			}
			if v > 0 && !(h.Voltage(on) < v) {
				t.Errorf("%s worse after %g s: %g V, before %g V", name, on, h.Voltage(on), v)
			}
		}
	}
}
