package recharge

import (
	"math"

	"floatrail/calc/internal/numeric"
)

// leaky is the law with a conductance across the capacitor while the element may conduct, about its equilibrium, eq. (8).
type leaky struct {
	law     *law
	drive   float64 // E [V]
	g, c    float64 // conductance [S], capacitance [F]
	rest    float64 // v*, the equilibrium [V]
	logS, s float64 // ln s* and s* [A]
}

// advanceLeaky inverts t = ∫dw/k by Newton's method, the integral carried on from step to step.
func (w *law) advanceLeaky(v0 float64, iv *Interval, c float64) (v1, slope, charge float64) {
	y := leaky{law: w, drive: iv.Drive, g: iv.Conductance, c: c}
	// s·(1 + G·R) + G·n·V_T·ln s = I + I_S + G·(E + I_S·R + n·V_T·ln I_S)
	lift := math.Log((1 + y.g*w.r) / (y.g * w.slope))
	y.logS = numeric.LogLambert((iv.Load+w.is)/(y.g*w.slope)+(iv.Drive+w.is*w.r)/w.slope+w.logIS+lift) - lift
	y.s = math.Exp(y.logS)
	y.rest = w.voltage(iv.Drive, y.logS, y.s)
	x0 := v0 - y.rest
	k0, kRest := y.rate(v0), y.rate(y.rest)
	if x0 != x0 || k0 != k0 || kRest != kRest {
		nan := math.NaN()
		return nan, nan, nan
	}
	at, sum := y.depth(x0, k0, kRest, iv.Duration)
	v1 = y.rest + x0*math.Exp(at)
	slope = math.Exp(at) * y.rate(v1) / k0 // the flow is autonomous: dv1/dv0 = f(v1)/f(v0)
	area := y.rest*iv.Duration + x0*sum
	return v1, slope, c*(v1-v0) + iv.Load*iv.Duration + y.g*area
}

// deepest is the w at which v is the equilibrium to the last digit.
const deepest = -46

// depth returns w = ln((v - v*)/(v0 - v*)) after the time t [s] and ∫(v - v*)/(v0 - v*) dt [s].
func (y *leaky) depth(x0, k0, kRest, t float64) (at, sum float64) {
	panels := func(w float64) (float64, float64) {
		e := math.Exp(w)
		k := y.rate(y.rest + x0*e)
		return 1 / k, e / k
	}
	low, high := math.Max(deepest, -math.Max(k0, kRest)*t), math.Min(0, -math.Min(k0, kRest)*t)
	if high <= deepest {
		high, low = deepest, deepest
	}
	left, k := t, k0
	for range 60 {
		next := math.Min(math.Max(at-k*left, low), high)
		if next == at {
			break
		}
		// from next up to at: positive when time goes on
		used, part := numeric.Integrate(panels, next, at, 1e-13)
		step := next - at
		at, left, sum = next, left-used, sum+part
		if left > 0 && at <= deepest {
			return at, sum
		}
		if !(math.Abs(left) > 1e-14*t) || !(math.Abs(step) > 1e-15) {
			break
		}
		k = y.rate(y.rest + x0*math.Exp(at))
	}
	return at, sum
}

// rate returns k of eq. (8) [1/s] at the voltage v [V].
func (y *leaky) rate(v float64) float64 {
	logS, s := y.law.saturated(y.drive - v)
	d := logS - y.logS
	mean := (s - y.s) / d
	if math.Abs(d) < 1 {
		mean = y.s * expm1Ratio(d)
	}
	return (y.g + 1/(y.law.r+y.law.slope/mean)) / y.c
}
