package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var dutyLongestOnTime = &rule.Rule{
	ID: "duty/longest-on-time", Title: "Longest on-time that the floating supply holds", Since: first,
	Equation: "t = (C/G)·ln((V_0 + I_0/G)/(V_required + I_0/G)); G → 0: C·(V_0 - V_required)/I_0",
	Limit:    "hold time to the required voltage", Guard: "10 % below the limit", Applies: "operating points in which the high side is held on",
	Needs: []string{"operatingPoints.heldOn.duration", "operatingPoints.heldOn.initialVoltage", "driver.uvloFalling", "driver.floatingQuiescentCurrent",
		"driver.offsetLeakage", "highSide.gatePullDown", "bootstrap.capacitor"},
	Sources: []string{"l6386e", "microchip-buck", "textbook"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Time for which the high side is held on", Against: "hold time", Dimension: quantity.Time, Sense: rule.AtMost,
	Inapplicable: func(_ *stage.Stage, op *stage.OperatingPoint, _ string) string {
		if op != nil && op.FixedDuty != nil {
			return "every period of a fixed duty recharges C_B; charge/lowest-voltage judges its on-time"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil || c.Point.HeldOn == nil {
			c.Period() // notes why there is no model
			return rule.Check{Value: nan}
		}
		h, t := c.Hold()
		limit := h.Time(c.Required())
		return rule.Check{Value: t, Limit: limit, Guard: below(c, limit)}
	},
}
