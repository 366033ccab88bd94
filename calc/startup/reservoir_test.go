package startup_test

import (
	"math"
	"testing"

	"floatrail/calc/recharge"
	"floatrail/calc/startup"
)

// three charges 3 × 1 µF from 10 µF at 15 V through 10 ohm and a silicon diode each.
func three() startup.Reservoir {
	return startup.Reservoir{Element: silicon(10), Bootstrap: 1e-6, Reservoir: 10e-6, Count: 3, Supply: 15}
}

// Charge balance of capacitors that end at one voltage: V_DD·C_VDD/(C_VDD + n·C_B), and with a fixed drop that much higher.
func TestReservoirBalance(t *testing.T) {
	r := three()
	near(t, "share", r.Share(), 15*10./13, 1e-12)
	r.Initial = 3
	near(t, "share of charged ones", r.Share(), (15*10.+3*3)/13, 1e-12)
	r.Element = recharge.Element{Resistance: 10, Switch: true}
	near(t, "no drop, no load", r.Lowest(), r.Share(), 1e-12)
	if !math.IsInf(r.LowestTime(), 1) {
		t.Errorf("an exponential ends after %g s", r.LowestTime())
	}
	r.Element, r.Load = fixedDrop(0.7, 10), 1e-9
	near(t, "fixed drop", r.Lowest(), (15*10.+3*(3+0.7))/13, 1e-3)
	near(t, "peak", r.PeakCurrent(), 3*(12-0.7)/10, 1e-3)
}

// A switch makes two linear equations. With I_s and no load: x = n·i obeys τ·dx/dt = n·I' - x, τ = R·C', and V_DD is lowest where x = I_s.
func TestReservoirLinear(t *testing.T) {
	const ohm, cb, cv, limit = 10.0, 1e-6, 10e-6, 0.5
	r := startup.Reservoir{Element: recharge.Element{Resistance: ohm, Switch: true}, Bootstrap: cb, Reservoir: cv, Count: 3, Supply: 15, SupplyCurrent: limit}
	x0, end := 3*15/ohm, limit*3*cb/(cv+3*cb) // n·i at the start and in the end [A]
	tau := ohm / (3/cv + 1/cb)
	time := tau * math.Log((x0-end)/(limit-end))
	carried := end*time + tau*(x0-limit) // ∫x dt [C]
	near(t, "time", r.LowestTime(), time, 1e-12*time)
	near(t, "lowest", r.Lowest(), 15-(carried-limit*time)/cv, 1e-12)
}

func TestReservoirLimits(t *testing.T) {
	r := three()
	r.Load = 0.5e-3
	peak := r.PeakCurrent()
	for _, limit := range []float64{peak, 2 * peak, math.Inf(1)} {
		r.SupplyCurrent = limit
		near(t, "supply as strong as the peak", r.Lowest(), 15, 0)
		near(t, "at once", r.LowestTime(), 0, 0)
	}
	r.SupplyCurrent = peak * (1 - 1e-6)
	near(t, "almost as strong", r.Lowest(), 15, 1e-6)
	r.Initial = 16
	r.SupplyCurrent = 0
	near(t, "nothing to charge", r.Lowest(), 15, 0)

	// across I_s = n·I_0, where the time grows without limit, the lowest voltage is continuous
	r = three()
	r.Load = 0.5e-3
	at := func(x float64) float64 { r.SupplyCurrent = 1.5e-3 * x; return r.Lowest() }
	for _, d := range []float64{1e-6, 1e-9, 1e-13} {
		near(t, "below", at(1-d), at(1), 1e-6)
		near(t, "above", at(1+d), at(1), 1e-6)
	}
}

// A stronger supply or a larger reservoir never lets V_DD fall lower; more or larger capacitors, or less in the way, never keep it higher.
func TestReservoirIsMonotone(t *testing.T) {
	better := map[string]func(*startup.Reservoir, float64){
		"supply current": func(r *startup.Reservoir, x float64) { r.SupplyCurrent = 6 * x },
		"reservoir":      func(r *startup.Reservoir, x float64) { r.Reservoir *= 1 + 10*x },
		"bootstrap":      func(r *startup.Reservoir, x float64) { r.Bootstrap *= 1 - 0.9*x },
		"resistance":     func(r *startup.Reservoir, x float64) { r.SupplyCurrent = 0.3; r.Element.Resistance *= 1 + 10*x },
		"count":          func(r *startup.Reservoir, x float64) { r.SupplyCurrent = 0.3; r.Count = 100 - int(99*x) },
		"initial":        func(r *startup.Reservoir, x float64) { r.SupplyCurrent = 0.3; r.Initial = 14 * x },
	}
	for what, change := range better {
		last := 0.0
		for k := range 201 {
			r := three()
			r.Load = 0.2e-3
			change(&r, float64(k)/200)
			got := r.Lowest()
			if !(got >= last-1e-9) {
				t.Fatalf("%s, step %d: %g V after %g V", what, k, got, last)
			}
			if got > 15 {
				t.Fatalf("%s, step %d: %g V from 15 V", what, k, got)
			}
			if r.SupplyCurrent >= float64(r.Count)*r.Load && got < r.Share()-1e-9 {
				t.Fatalf("%s, step %d: %g V below the balance %g V", what, k, got, r.Share())
			}
			last = got
		}
	}
}

// The balance without loads is no bound where the supply does not carry them: with a large reservoir and slow charge the loads take more off
// V_DD than the drop saves.
func TestLoadsTakeVoltageBelowTheBalance(t *testing.T) {
	r := startup.Reservoir{
		Element: recharge.Element{Resistance: 100, Switch: true}, Bootstrap: 1e-6, Reservoir: 100e-6, Count: 1, Supply: 15, Load: 1e-3,
	}
	if low, share := r.Lowest(), r.Share(); !(low < share-1e-3) {
		t.Errorf("lowest %g V, balance %g V", low, share)
	}
}

func TestReservoirNaN(t *testing.T) {
	for what, change := range map[string]func(*startup.Reservoir){
		"resistance":      func(r *startup.Reservoir) { r.Element.Resistance = nan },
		"bootstrap":       func(r *startup.Reservoir) { r.Bootstrap = nan },
		"no bootstrap":    func(r *startup.Reservoir) { r.Bootstrap = 0 },
		"reservoir":       func(r *startup.Reservoir) { r.Reservoir = nan },
		"no reservoir":    func(r *startup.Reservoir) { r.Reservoir = 0 },
		"count":           func(r *startup.Reservoir) { r.Count = 0 },
		"supply":          func(r *startup.Reservoir) { r.Supply = nan },
		"initial":         func(r *startup.Reservoir) { r.Initial = nan },
		"load":            func(r *startup.Reservoir) { r.Load = nan },
		"negative load":   func(r *startup.Reservoir) { r.Load = -1 },
		"supply current":  func(r *startup.Reservoir) { r.SupplyCurrent = nan },
		"negative supply": func(r *startup.Reservoir) { r.SupplyCurrent = -1 },
	} {
		r := three()
		change(&r)
		if v, s := r.Lowest(), r.LowestTime(); v == v || s == s {
			t.Errorf("%s: %g V, %g s", what, v, s)
		}
	}
}
