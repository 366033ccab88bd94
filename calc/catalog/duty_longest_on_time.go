package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/derive"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var dutyLongestOnTime = &rule.Rule{
	ID: "duty/longest-on-time", Title: "Longest on-time that the floating supply holds", Since: first,
	Equation: "t = (C/G)·ln((V_0 + I_0/G)/(V_required + I_0/G)); G → 0: C·(V_0 - V_required)/I_0",
	Limit:    "hold time to the required voltage", Guard: "10 % below the limit",
	Applies: "operating points in which the high side is held on, or the modulation leaves C_B without recharge for longer than a period",
	Needs: []string{"operatingPoints.heldOn.duration", "operatingPoints.heldOn.initialVoltage", "driver.uvloFalling", "driver.floatingQuiescentCurrent",
		"driver.offsetLeakage", "highSide.gatePullDown", "bootstrap.capacitor"},
	Sources: []string{"l6386e", "microchip-buck", "textbook"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Longest time without recharge to the end of an on-time", Against: "hold time", Dimension: quantity.Time, Sense: rule.AtMost,
	Proxy: func(c *circuit.Circuit, _ string) float64 {
		switch {
		case c.Point == nil:
			return c.NoPoint()
		case c.Point.HeldOn == nil:
			return derive.Hold(c)
		}
		h, t := c.Hold()
		return h.Voltage(t) - c.Required()
	},
	ProxyDimension: quantity.Voltage,
	Inapplicable: func(_ *stage.Stage, op *stage.OperatingPoint, _ string) string {
		switch {
		case op == nil:
		case op.FixedDuty != nil:
			return "every period of a fixed duty recharges C_B; charge/lowest-voltage judges its on-time"
		case op.Burst != nil:
			return "the pause between bursts is judged by duty/idle-refresh"
		case op.Sinusoidal != nil && op.Sinusoidal.RefreshesAlways():
			return "every period recharges C_B; charge/lowest-voltage judges its on-time"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		switch {
		case c.Point == nil:
			return rule.Check{Value: c.NoPoint()}
		case c.Point.HeldOn == nil:
			limit := c.Endures()
			return rule.Check{Value: c.Unrefreshed(), Limit: limit, Guard: below(c, limit)}
		}
		h, t := c.Hold()
		limit := h.Time(c.Required())
		return rule.Check{Value: t, Limit: limit, Guard: below(c, limit)}
	},
}
