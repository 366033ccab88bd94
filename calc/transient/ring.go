package transient

import "math"

// LoopSlope returns the steepest slope of the current in the power loop [A/s] while the channel lets go of it, eq. (7)-(9): the
// channel current falls at s [A/s] for the time tf [s], beside the capacitance c [F], behind the loop inductance l [H], and the
// voltage arrives at V_BUS with the slew r0 [V/s]. Exact without damping. With c -> 0 it is 2·s: a step in slope rings.
func LoopSlope(s, tf, l, c, r0 float64) float64 {
	if anyNaN(s, tf, l, c, r0) {
		return math.NaN()
	}
	d, theta := 0.0, 0.0
	if r0 != 0 {
		d = r0 * math.Sqrt(c/l)
	}
	if tf != 0 {
		theta = tf / math.Sqrt(l*c)
	}
	crest := math.Atan2(d, -s)
	if crest < 0 {
		crest += 2 * math.Pi
	}
	if theta >= crest {
		return s + math.Hypot(s, d)
	}
	sin, cos := math.Sincos(theta)
	half := math.Sin(theta / 2)
	return math.Hypot(2*s*half*half+d*sin, s*sin+d*cos)
}

// RecoveryOvershoot returns by how much the voltage of the passive switch exceeds V_BUS [V] after its diode's reverse current irm [A]
// has begun to die away with the time constant tau [s] into the capacitance c [F] behind the loop inductance l [H], the voltage
// arriving with the slew r [V/s], eq. (10)-(12). Exact without damping; an upper estimate in that all of irm still flows when V_BUS
// is reached.
func RecoveryOvershoot(irm, tau, l, c, r float64) float64 {
	if anyNaN(irm, tau, l, c, r) {
		return math.NaN()
	}
	root := math.Sqrt(l * c) // 1/ω
	x := root / tau
	switch {
	case l == 0:
		return 0
	case irm == 0:
		return r * root
	case tau == 0 || x > 1e15:
		return irm*math.Sqrt(l/c) + r*root
	}
	a := irm * l / tau / (1 + x*x)
	ax := a * x
	if x > 1 {
		ax = irm * math.Sqrt(l/c) / (1 + 1/(x*x))
		a = ax / x
	}
	d := r*root + ax
	// Between 0 and the largest A·sin + D·cos can last, the slope of (11) is concave and changes sign once: Newton's method from the
	// right end comes down on it without passing it.
	theta := math.Pi - math.Atan2(d, a)
	for range 50 {
		sin, cos := math.Sincos(theta)
		fading := ax * math.Exp(-theta*x)
		step := (a*sin + d*cos - fading) / (a*cos - d*sin + fading*x)
		theta -= step
		if !(math.Abs(step) > 1e-9) {
			break
		}
	}
	sin, cos := math.Sincos(theta)
	return a*math.Exp(-theta*x) - a*cos + d*sin
}

// anyNaN reports whether one of the values is NaN.
func anyNaN(values ...float64) bool {
	for _, v := range values {
		if v != v {
			return true
		}
	}
	return false
}

// Ring is the loop inductance against the capacitance of the switch that blocks, damped by a resistor R_p = q·sqrt(L/C) beside the
// inductance.
type Ring struct {
	L       float64 // loop inductance [H]
	C       float64 // capacitance [F]
	Quality float64 // q [1]
}

// Frequency returns 1/(2π·sqrt(L·C)) [Hz], without damping; damped it is lower by the factor sqrt(1 - Damping²).
func (r Ring) Frequency() float64 { return 1 / (2 * math.Pi * math.Sqrt(r.L*r.C)) }

// Damping returns the damping 1/(2·q) [1]: the denominator is L·C·s² + (L/R_p)·s + 1; 1 is critical.
func (r Ring) Damping() float64 { return 1 / (2 * r.Quality) }
