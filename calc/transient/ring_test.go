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

// A current that falls along a line makes a loop ring whose capacitance is small: 10 A in 50 ns through 100 nH are 20 V by L·di/dt, and 40 V at
// the crest beside 50 pF. What keeps a real switch below that is its Miller current, which the estimate leaves out with the ringing.
func TestRampRings(t *testing.T) {
	const l, c, s, tf = 100e-9, 50e-12, 10 / 50e-9, 50e-9
	same(t, "L·di/dt", l*s, 20, 1e-14)
	same(t, "crest", crest(l, c, 0, tf, func(float64) float64 { return l * s }, 0), 40, 1e-4)
	same(t, "cut at once", TurnOffSlope(math.Inf(1), 10, l, c)*l, 10*math.Sqrt(l/c), 1e-14)
	same(t, "as the channel", TurnOffSlope(s, 10, l, c), s, 0)
}

func TestRecoveryOvershootAgainstIntegration(t *testing.T) {
	const l, c, irm = 20e-9, 200e-12, 15.0
	root, z := math.Sqrt(l*c), math.Sqrt(l/c)
	for _, x := range []float64{1e-3, 0.03, 0.2, 0.7, 1, 1.4, 5, 50} { // 1/(ω·τ)
		for _, d := range []float64{0, 0.1, 1, 10} { // r/(ω·Z·I_RM)
			tau, r := root/x, d*z*irm/root
			want := crest(l, c, r, 7*root, func(now float64) float64 { return l * irm / tau * math.Exp(-now/tau) }, 0)
			if got := RecoveryOvershoot(irm, tau, l, c, r); got < want*(1-1e-6) || got > 1.6*want {
				t.Errorf("x %v, d %v: %v of a crest of %v", x, d, got, want)
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
		y := [5]float64{15, 5e-9, 20e-9, 200e-12, 1e9}
		y[k] = nan
		if v := RecoveryOvershoot(y[0], y[1], y[2], y[3], y[4]); v == v {
			t.Errorf("argument %d: %v", k, v)
		}
	}
	for _, v := range []float64{TurnOffSlope(nan, 1, 1, 1), TurnOffSlope(1, nan, 1, 1), TurnOffSlope(1, 1, nan, 1), TurnOffSlope(1, 1, 1, nan)} {
		if v == v {
			t.Errorf("%v of a number that is not known", v)
		}
	}
	if v := (Ring{L: nan, C: 1, Quality: nan}); v.Frequency() == v.Frequency() || v.Damping() == v.Damping() {
		t.Error("ring accepts NaN")
	}
}
