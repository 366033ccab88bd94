package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var nodeRailOvershoot = &rule.Rule{
	ID: "node/rail-overshoot", Title: "Highest V_B to COM", Since: second,
	Equation: "V_BUS + overshoot of the node + V_BS; low side off: V_F + V_fr + L1·di/dt; high side on: ΔV_recovery·L1/(L1 + L2)",
	Limit:    "rated offset voltage", Guard: "90 % of the limit", Applies: "every operating point",
	Needs: []string{"driver.offsetVoltageMax", "operatingPoints.busVoltage", "layout.busLoopInductance", "layout.lowSideInductance",
		"layout.measured", "highSide.reverse", "lowSide.reverse", "bootstrap.clamp"},
	Events: true, Simulated: everyRole,
	Sources: []string{"lauritzen-ma-1991", "textbook", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Highest V_B to COM", Against: "rated offset voltage", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{roleDriver}, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.OffsetVoltageMax)
		return rule.Check{Value: c.NodeHigh() + c.Highest(), Limit: limit, Guard: below(c, limit)}
	},
	EventOf: rising,
	Alternatives: each(rising, func(c *circuit.Circuit, _ string, e circuit.Event) float64 {
		return c.Need(&c.Stage.Driver.OffsetVoltageMax) - c.NodePeak(e) - c.Highest()
	}),
}
