package transient

import (
	"math"
	"testing"
)

// TestSourceLift compares the peak with the filter's response sampled in time, and with its limits.
func TestSourceLift(t *testing.T) {
	const l, irm, tau = 2e-9, 10.0, 20e-9
	u0 := l * irm / tau
	for _, k := range []float64{0.01, 0.3, 0.999, 1.5, 20} {
		a, peak := k*tau, 0.0
		for i := range 200000 {
			x := float64(i) * 1e-3 * math.Min(a, tau)
			peak = math.Max(peak, u0/(1-k)*(math.Exp(-x/tau)-math.Exp(-x/a)))
		}
		if v := SourceLift(l, irm, tau, a); math.Abs(v-peak) > 1e-5*u0 {
			t.Errorf("k = %g: %g, sampled %g", k, v, peak)
		}
	}
	for _, c := range []struct{ a, want float64 }{{0, u0}, {tau, u0 / math.E}, {1e6 * tau, u0 / 1e6}} {
		if v := SourceLift(l, irm, tau, c.a); math.Abs(v-c.want) > 2e-5*c.want {
			t.Errorf("time constant %g: %g, want %g", c.a, v, c.want)
		}
	}
	if v := SourceLift(l, irm, 0, tau); v != 0 {
		t.Errorf("%g without recovery", v)
	}
	if v := SourceLift(l, math.NaN(), tau, tau); v == v {
		t.Errorf("%g of a number that is not known", v)
	}
}
