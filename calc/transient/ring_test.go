package transient

import (
	"math"
	"testing"
)

// crest marches the undamped loop, L·C times the second derivative of v plus v equal to force, and returns the largest v.
func crest(l, c, slew, end float64, force func(t float64) float64, kink float64) float64 {
	most := 0.0
	rate := func(shift float64) func(t float64, y, dy []float64) {
		return func(t float64, y, dy []float64) {
			dy[0] = y[1]
			dy[1] = (force(t+shift) - y[0]) / (l * c)
		}
	}
	seen := func(_ float64, y []float64) { most = math.Max(most, y[0]) }
	y := []float64{0, slew}
	if kink > 0 && kink < end {
		march(y, kink*(1-1e-12), 20000, rate(0), seen)
		march(y, end-kink, 20000, rate(kink*(1+1e-12)), seen)
	} else {
		march(y, end, 40000, rate(0), seen)
	}
	return most
}

func TestLoopSlopeAgainstIntegration(t *testing.T) {
	const l, c, s = 20e-9, 200e-12, 2e9 // 1/ω = 2 ns
	root := math.Sqrt(l * c)
	for _, turns := range []float64{0.01, 0.3, 1, 1.7, 2.5, 3.1, 3.3, 5, 6.28, 9, 40} {
		for _, d := range []float64{0, 0.2, 1, 4, -0.5} { // r0/(ω·L·s)
			r0 := d * l * s / root
			tf := turns * root
			want := crest(l, c, r0, tf+7*root, func(now float64) float64 {
				if now < tf {
					return l * s
				}
				return 0
			}, tf) / l
			same(t, "slope", LoopSlope(s, tf, l, c, r0), want, 2e-6) // sampled crest: (h·ω)²/8
		}
	}
}

func TestLoopSlopeLimits(t *testing.T) {
	const l, c, s = 20e-9, 200e-12, 2e9
	same(t, "cut at once", LoopSlope(10/1e-15, 1e-15, l, c, 0), 10/math.Sqrt(l*c), 1e-9)
	same(t, "fast loop", LoopSlope(s, 50e-9, l, 0, 0), 2*s, 0)
	same(t, "small capacitance", LoopSlope(s, 50e-9, l, 1e-15, 0), 2*s, 0)
	same(t, "slew alone", LoopSlope(0, 50e-9, l, c, 30e9), 30e9*math.Sqrt(c/l), 1e-14)
	same(t, "no time", LoopSlope(s, 0, l, c, 30e9), 30e9*math.Sqrt(c/l), 1e-14)
	same(t, "no time, no capacitance", LoopSlope(s, 0, l, 0, 0), 0, 0)
	same(t, "at rest", LoopSlope(0, 50e-9, l, c, 0), 0, 0)
	// capacitive commutation: r0 = i/C, no channel current left: v = i·sqrt(L/C)
	same(t, "capacitive", l*LoopSlope(0, 0, l, c, 10/c), 10*math.Sqrt(l/c), 1e-14)
	// between s and 2·s from the quarter turn on, rising with the time
	before := 0.0
	for theta := 0.01; theta < 4; theta += 0.01 {
		v := LoopSlope(s, theta*math.Sqrt(l*c), l, c, 0)
		if v < before || v > 2*s || theta > math.Pi/3 && v < s {
			t.Fatalf("ωt %v: %v after %v", theta, v, before)
		}
		before = v
	}
}

func TestRecoveryOvershootAgainstIntegration(t *testing.T) {
	const l, c, irm = 20e-9, 200e-12, 15.0
	root, z := math.Sqrt(l*c), math.Sqrt(l/c)
	for _, x := range []float64{1e-3, 0.03, 0.2, 0.7, 1, 1.4, 5, 50} { // 1/(ω·τ)
		for _, d := range []float64{0, 0.1, 1, 10} { // r/(ω·Z·I_RM)
			tau, r := root/x, d*z*irm/root
			want := crest(l, c, r, 7*root, func(now float64) float64 { return l * irm / tau * math.Exp(-now/tau) }, 0)
			got := RecoveryOvershoot(irm, tau, l, c, r)
			same(t, "overshoot", got, want, 2e-6)
			a := irm * l / tau / (1 + x*x)
			if got > (a+math.Hypot(a, r*root+a*x))*(1+1e-12) || got > (z*irm+r*root)*(1+1e-12) {
				t.Errorf("x %v, d %v: %v above its bounds", x, d, got)
			}
		}
	}
}

func TestRecoveryOvershootLimits(t *testing.T) {
	const l, c, irm, r = 20e-9, 200e-12, 15.0, 30e9
	root, z := math.Sqrt(l*c), math.Sqrt(l/c)
	same(t, "snappy", RecoveryOvershoot(irm, 0, l, c, r), z*irm+r*root, 1e-15)
	same(t, "nearly snappy", RecoveryOvershoot(irm, 1e-7*root, l, c, r), z*irm+r*root, 2e-7)
	same(t, "across the limit", RecoveryOvershoot(irm, 1.0001e-15*root, l, c, r), RecoveryOvershoot(irm, 0.9999e-15*root, l, c, r), 1e-14)
	same(t, "denormal time", RecoveryOvershoot(irm, 5e-324, l, c, r), z*irm+r*root, 1e-14)
	same(t, "soft", RecoveryOvershoot(irm, 1e6*root, l, c, 0), 2*l*irm/(1e6*root), 4e-6) // e^(-π·1e-6)
	same(t, "no capacitance", RecoveryOvershoot(irm, 5e-9, l, 0, r), 2*l*irm/5e-9, 1e-15)
	same(t, "no inductance", RecoveryOvershoot(irm, 5e-9, 0, c, r), 0, 0)
	same(t, "no recovery", RecoveryOvershoot(0, 5e-9, l, c, r), r*root, 1e-15)
	same(t, "nothing", RecoveryOvershoot(0, 0, l, c, 0), 0, 0)
	same(t, "endless", RecoveryOvershoot(irm, inf, l, c, r), r*root, 1e-15)
	if v := RecoveryOvershoot(irm, 0, l, 0, 0); !math.IsInf(v, 1) {
		t.Errorf("a current chopped into nothing: %v", v)
	}
}

// The free decay of the circuit, inductance beside R_p, against both figures.
func TestRingAgainstTheCircuit(t *testing.T) {
	r := Ring{L: 10e-9, C: 250e-12, Quality: 5}
	rp := r.Quality * math.Sqrt(r.L/r.C)
	var crossings, crests []float64
	y := []float64{0, 1} // v of the capacitor, current of the inductance
	before, rising := 0.0, true
	march(y, 60e-9, 600000, func(_ float64, y, dy []float64) {
		// the loop: the capacitor's voltage stands across the pair, whose currents add
		dy[0] = (-y[1] - y[0]/rp) / r.C
		dy[1] = y[0] / r.L
	}, func(now float64, y []float64) {
		if before < 0 && y[0] >= 0 {
			crossings = append(crossings, now)
		}
		if y[0] < before && rising && before > 0 {
			crests = append(crests, before)
		}
		rising, before = y[0] >= before, y[0]
	})
	zeta := r.Damping()
	period := crossings[2] - crossings[1]
	same(t, "frequency", r.Frequency()*math.Sqrt(1-zeta*zeta), 1/period, 1e-4)
	decrement := math.Log(crests[1] / crests[2])
	same(t, "damping", zeta, decrement/math.Hypot(2*math.Pi, decrement), 1e-4)
	same(t, "default", Ring{L: 1, C: 1, Quality: 10}.Damping(), 0.05, 1e-15)
}

func TestRingRefuses(t *testing.T) {
	for k := range 5 {
		x := [5]float64{2e9, 5e-9, 20e-9, 200e-12, 1e9}
		y := [5]float64{15, 5e-9, 20e-9, 200e-12, 1e9}
		x[k], y[k] = nan, nan
		if v := LoopSlope(x[0], x[1], x[2], x[3], x[4]); v == v {
			t.Errorf("argument %d: %v", k, v)
		}
		if v := RecoveryOvershoot(y[0], y[1], y[2], y[3], y[4]); v == v {
			t.Errorf("argument %d: %v", k, v)
		}
	}
	if v := LoopSlope(0, 0, nan, 1e-12, 0); v == v {
		t.Errorf("NaN inductance alone: %v", v)
	}
	if v := (Ring{L: nan, C: 1, Quality: nan}); v.Frequency() == v.Frequency() || v.Damping() == v.Damping() {
		t.Error("ring accepts NaN")
	}
}
