package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var diodeReverseVoltage = &rule.Rule{
	ID: "diode/reverse-voltage", Title: "Reverse voltage of the bootstrap diode", Since: first,
	Equation: "V_BUS + overshoot of the node + V_BS - V_DD",
	Limit:    "rated repetitive reverse voltage", Guard: "70 % of the rating", Applies: "stages with a discrete bootstrap diode",
	Needs: []string{"bootstrap.diode.reverseVoltageMax", "operatingPoints.busVoltage", "gateSupply.voltage",
		"layout.busLoopInductance", "layout.measured", "highSide.reverse", "lowSide.reverse"},
	Events: true, Simulated: everyRole,
	Sources: []string{"nasa-eee-inst-002", "src-derating", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Reverse voltage of the bootstrap diode", Against: "rated reverse voltage", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: discrete,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil {
			return rule.Check{Value: c.NoPoint()}
		}
		limit := c.Need(&c.Stage.Bootstrap.Diode.ReverseVoltageMax)
		return rule.Check{Value: c.NodeHigh() + c.Highest() - c.Supply(), Limit: limit, Guard: limit * c.Policy.DiodeReverseRatio}
	},
	EventOf: rising,
	Alternatives: each(rising, func(c *circuit.Circuit, _ string, e circuit.Event) float64 {
		return c.Need(&c.Stage.Bootstrap.Diode.ReverseVoltageMax) - c.NodePeak(e) - c.Highest() + c.Supply()
	}),
}
