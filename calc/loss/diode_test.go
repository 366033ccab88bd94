package loss_test

import (
	"math"
	"testing"

	"floatrail/calc/loss"
)

const perKelvin = math.Ln2 / 10

// The rise is a solution, the lower one, and grows with everything that heats.
func TestRiseSolves(t *testing.T) {
	for _, rth := range []float64{1, 60, 300} {
		for _, constant := range []float64{0, 1e-3, 0.05, 0.3} {
			last, stable := -1.0, true
			for k := range 60 {
				leakage := 1e-9 * math.Pow(1.5, float64(k))
				x, ok := loss.Rise(rth, constant, leakage)
				if ok && !stable {
					t.Fatalf("%g K/W, %g W: stable again at %g W of leakage", rth, constant, leakage)
				}
				stable = ok
				if !ok {
					if !math.IsInf(x, 1) {
						t.Errorf("runaway of %g K", x)
					}
					continue
				}
				near(t, "balance", rth*(constant+loss.Hot(leakage, x)), x, 1e-9*math.Max(x, 1e-6))
				// slope of the heating against the temperature: below 1 at the lower solution
				if slope := rth * loss.Hot(leakage, x) * perKelvin; !(slope <= 1) {
					t.Errorf("%g K/W, %g W, %g W: slope %g", rth, constant, leakage, slope)
				}
				if !(x > last) {
					t.Errorf("%g K after %g K", x, last)
				}
				last = x
			}
			if rth > 1 && stable {
				t.Errorf("%g K/W, %g W: no runaway", rth, constant)
			}
		}
	}
}

// Runaway begins where k·R_th·P_R·e^(1 + k·R_th·P_0) = 1; the last rise is R_th·P_0 + 1/k, 14.4 K above that without leakage.
func TestRunaway(t *testing.T) {
	const rth, constant = 100.0, 0.2
	edge := math.Exp(-1-perKelvin*rth*constant) / (perKelvin * rth)
	x, ok := loss.Rise(rth, constant, edge*(1-1e-12))
	if !ok {
		t.Fatal("runaway below its edge")
	}
	near(t, "rise at the edge", x, rth*constant+1/perKelvin, 1e-4)
	if x, ok := loss.Rise(rth, constant, edge*(1+1e-12)); ok {
		t.Errorf("%g K beyond the edge of runaway", x)
	}
	// so strong that nothing can be computed
	if x, ok := loss.Rise(1e3, 1e6, 1); ok || !math.IsInf(x, 1) {
		t.Errorf("%g K", x)
	}
}

func TestRiseLimits(t *testing.T) {
	for _, c := range []struct{ rth, constant, leakage, want float64 }{
		{0, 1, 1, 0}, {200, 0.1, 0, 20}, {200, 0, 0, 0}, {100, 0.1, 1e-12, 10 + 2e-10}, {100, 0, 1e-9, 1e-7 * (1 + 1e-7*perKelvin)},
	} {
		x, ok := loss.Rise(c.rth, c.constant, c.leakage)
		if !ok {
			t.Errorf("%v: runaway", c)
		}
		near(t, "rise", x, c.want, 1e-14*math.Max(1, c.want))
	}
	for _, c := range [][3]float64{{-1, 0.1, 1e-6}, {100, 0.1, -1e-6}, {nan, 0.1, 1e-6}, {100, nan, 1e-6}, {100, 0.1, nan}} {
		if x, ok := loss.Rise(c[0], c[1], c[2]); x == x || !ok { // unknown is not runaway
			t.Errorf("%v: %g K, %v", c, x, ok)
		}
	}
}
