package loss

import (
	"math"

	"floatrail/calc/recharge"
)

// ResistorEnergy returns the energy [J] that a resistance [ohm], part of the element's, takes in an interval of constant node voltage in
// which the capacitor c [F] is charged from v0 [V]; the sum over a period's intervals times f is the power of R_B. Exact: with
// C·dv = (i - I)·dt
//
//	∫i² dt = ∫i·(i - I) dt + I·∫i dt = C·∫i dv + I·[C·(v1 - v0) + I·t]
//
// and C·∫i dv is the difference of what is left to equilibrium without load at both ends, recharge.Element.ResistorEnergy. A conductance
// across the capacitor is outside this: NaN.
func ResistorEnergy(e recharge.Element, iv recharge.Interval, c, v0, resistance float64) float64 {
	switch {
	case iv.Conductance != 0:
		return math.NaN()
	case !iv.Conducts:
		return 0 * (iv.Duration + v0 + c + resistance)
	}
	v1, _ := e.Advance(v0, iv, c)
	carried := c*(v1-v0) + iv.Load*math.Max(iv.Duration, 0)
	return e.ResistorEnergy(c, iv.Drive, v0, resistance) - e.ResistorEnergy(c, iv.Drive, v1, resistance) +
		resistance*iv.Load*carried
}
