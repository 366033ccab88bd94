package catalog

import (
	"math"
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeCapacitance = &rule.Rule{
	ID: "charge/capacitance", Title: "Bootstrap capacitance", Since: first,
	Equation: "C_min = Q_B/ΔV, ΔV = V_DD - V_F - V_LS - I·R - V_required at the mean recharge current, or the permitted ripple where smaller",
	Limit:    "C_min to the required voltage", Guard: "10 % above the limit, or C_min to the required voltage with margin where larger", Applies: "every operating point",
	Needs: []string{"bootstrap.capacitor", "gateSupply.voltage", "driver.uvloFalling", "highSide.driveVoltageMin", "highSide.gateCharge",
		"driver.levelShiftCharge", "bootstrap.diode", "bootstrap.resistor"},
	Sources: []string{"an6076", "ir2114", "slus486b"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Effective bootstrap capacitance", Against: "smallest sufficient capacitance", Dimension: quantity.Capacitance, Sense: rule.AtLeast,
	Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil {
			return rule.Check{Value: c.NoPoint(), Limit: nan, Guard: nan}
		}
		limit := c.MinimumCapacitance(c.Required())
		return rule.Check{Value: c.Capacitance(), Limit: limit, Guard: math.Max(above(c, limit), c.MinimumCapacitance(c.Kept()))}
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, _ string) float64 {
			if c.Point == nil {
				return c.NoPoint()
			}
			return c.Capacitance() - c.MinimumCapacitance(c.Required())
		},
		func(c *circuit.Circuit, _ string) float64 { return spare(c, false) },
		func(c *circuit.Circuit, _ string) float64 { return spare(c, true) },
		func(c *circuit.Circuit, _ string) float64 {
			switch {
			case c.Point == nil:
				return c.NoPoint()
			case c.Point.HeldOn != nil: // no period, no ripple
				return math.Inf(1)
			}
			return c.RippleSpare()
		},
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		out := slices.Concat(collapseNote(c), cancelNote(c))
		if drop := c.Drop(c.Required()); drop <= 0 && !math.IsInf(drop, -1) {
			out = append(out, "no capacitance suffices: recharge leaves nothing above the required voltage (budget "+
				quantity.Format(drop, quantity.Voltage)+")")
		}
		return out
	},
}

// spare is what the charge of a period leaves above the voltage that V_BS must keep, whatever ripple is permitted [V]. It has the sign of the
// distance of C_B to the smallest capacitance that keeps the voltage, without its pole where nothing is left.
func spare(c *circuit.Circuit, margin bool) float64 {
	switch {
	case c.Point == nil:
		return c.NoPoint()
	case c.Point.HeldOn != nil:
		keep := c.Required()
		if margin {
			keep = c.Kept()
		}
		h, t := c.Hold()
		return h.Voltage(t) - keep
	}
	return c.SpareVoltage(margin)
}
