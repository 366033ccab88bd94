package loss_test

import (
	"testing"

	"floatrail/calc/loss"
)

func TestDriverTerms(t *testing.T) {
	near(t, "level shift", loss.LevelShift(400, 15, 5e-9, 20e3), 41.5e-3, 1e-15)
	near(t, "leakage", loss.Leakage(600, 50e-6), 30e-3, 1e-15)
	near(t, "quiescent", loss.Quiescent(15, 1e-3, 14, 150e-6), 17.1e-3, 1e-15)
	near(t, "junction", loss.Junction(60, 100, 0.5), 110, 1e-12)
	near(t, "forward", loss.Forward(0.8, 10e-3), 8e-3, 1e-15)
	near(t, "recovery", loss.Recovery(0.5, 30e-9, 400, 100e3), 0.6, 1e-12)
}

// The driver never takes more than the gate loss, never less with less outside, and together with what is outside it takes all of it.
func TestDriverGateShares(t *testing.T) {
	whole := loss.Gate(60e-9, 12, 100e3)
	last := whole
	for k := range 50 {
		on, off := float64(k)*0.4, float64(k)*0.1
		inside := loss.DriverGate(60e-9, 12, 100e3, 3, 1, on, off)
		outside := loss.DriverGate(60e-9, 12, 100e3, on, off, 3, 1)
		near(t, "sum", inside+outside, whole, 1e-14)
		if inside > last || inside <= 0 {
			t.Fatalf("step %d: %g W after %g W", k, inside, last)
		}
		last = inside
	}
}

// A NaN in any argument shows.
func TestNaN(t *testing.T) {
	for name, f := range map[string]struct {
		args int
		call func(a []float64) float64
	}{
		"gate":        {3, func(a []float64) float64 { return loss.Gate(a[0], a[1], a[2]) }},
		"driver gate": {7, func(a []float64) float64 { return loss.DriverGate(a[0], a[1], a[2], a[3], a[4], a[5], a[6]) }},
		"level shift": {4, func(a []float64) float64 { return loss.LevelShift(a[0], a[1], a[2], a[3]) }},
		"leakage":     {2, func(a []float64) float64 { return loss.Leakage(a[0], a[1]) }},
		"quiescent":   {4, func(a []float64) float64 { return loss.Quiescent(a[0], a[1], a[2], a[3]) }},
		"junction":    {3, func(a []float64) float64 { return loss.Junction(a[0], a[1], a[2]) }},
		"forward":     {2, func(a []float64) float64 { return loss.Forward(a[0], a[1]) }},
		"recovery":    {4, func(a []float64) float64 { return loss.Recovery(a[0], a[1], a[2], a[3]) }},
		"hot":         {2, func(a []float64) float64 { return loss.Hot(a[0], a[1]) }},
		"rise":        {3, func(a []float64) float64 { x, _ := loss.Rise(a[0], a[1], a[2]); return x }},
	} {
		for _, other := range []float64{0, 1} {
			for k := range f.args {
				args := make([]float64, f.args)
				for j := range args {
					args[j] = other
				}
				if got := f.call(args); got != got {
					t.Errorf("%s of %v: NaN", name, args)
				}
				args[k] = nan
				if got := f.call(args); got == got {
					t.Errorf("%s of %v: %g", name, args, got)
				}
			}
		}
	}
}
