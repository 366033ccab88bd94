package transient

import "math"

// RecoveryOvershoot returns by how much the voltage of the passive switch exceeds V_BUS [V] after its diode's reverse current irm [A]
// has begun to die away with the time constant tau [s] into the capacitance c [F] behind the loop inductance l [H], the voltage
// arriving with the slew r [V/s]: the upper limit (10) of the undamped crest, exact for a snappy and for a soft diode.
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
	return a + math.Hypot(a, r*root+ax)
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
