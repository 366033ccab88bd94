package transient

import (
	"math"

	"floatrail/calc/recharge"
)

// Row is one row of a table of permitted negative node voltages.
type Row struct {
	Level    float64 // lowest voltage permitted [V]
	Duration float64 // for this long at most, +Inf at any time [s]
}

// Permitted returns the level of the deepest row whose duration is at least width [s], so that a pulse between two rows counts by the
// longer one, [V]. ok is false, and the level NaN, where no row lasts that long.
func Permitted(rows []Row, width float64) (level float64, ok bool) {
	for _, r := range rows {
		if r.Duration >= width && (!ok || r.Level < level) {
			level, ok = r.Level, true
		}
	}
	if !ok {
		return math.NaN(), false
	}
	return level, true
}

// ClampedPin returns the voltage of the driver's V_S pin to COM [V] where a diode from COM clamps it and the resistor rvs = R_VS [ohm]
// lies between it and the node at the voltage node [V]: pin = node + R_VS·i with -node = V_F(i) + R_VS·i. The floating driver's own
// current through R_VS is not included.
func ClampedPin(node float64, clamp recharge.Junction, rvs float64) float64 {
	if rvs == 0 {
		return node
	}
	e := recharge.Element{Junction: clamp, Resistance: clamp.Resistance + rvs}
	return node + rvs*e.Current(-node)
}
