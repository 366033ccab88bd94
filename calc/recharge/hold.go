package recharge

import "math"

// Hold returns the voltage [V] of a capacitor c [F] after the time t [s] under a constant load current [A] and a conductance [S]
// across it, from v0 [V] and without recharge: v = (v0 + I/G)·e^(-G·t/C) - I/G; G -> 0: v0 - I·t/C.
func Hold(v0, current, conductance, c, t float64) float64 {
	x := conductance * t / c
	if x == 0 {
		return v0 - current*t/c
	}
	return v0*math.Exp(-x) + current*t/c*math.Expm1(-x)/x
}

// HoldTime returns the time [s] after which Hold comes down to level [V]: 0 when v0 is there already, +Inf when it never does.
func HoldTime(v0, current, conductance, c, level float64) float64 {
	if level >= v0 {
		return 0
	}
	drawn := current + conductance*level // at the level [A]
	if drawn <= 0 {
		return math.Inf(1)
	}
	x := conductance * (v0 - level) / drawn
	if x < 1e-9 {
		return c * (v0 - level) / drawn * (1 - x/2)
	}
	return c / conductance * math.Log1p(x)
}
