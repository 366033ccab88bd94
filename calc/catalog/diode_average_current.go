package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var diodeAverageCurrent = &rule.Rule{
	ID: "diode/average-current", Title: "Average current of the bootstrap diode", Since: first,
	Equation: "Q_B·f_sw, without the junction charge that returns",
	Limit:    "rated average current", Guard: "10 % below the limit", Applies: "stages with a discrete bootstrap diode, switching",
	Needs:   []string{"bootstrap.diode.averageCurrentMax", "highSide.gateCharge", "operatingPoints.switchingFrequency"},
	Sources: []string{"an6076", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Minor,
	Quantity: "Average current of the bootstrap diode", Against: "rated average current", Dimension: quantity.Current, Sense: rule.AtMost,
	Inapplicable: withDiode,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Bootstrap.Diode.AverageCurrentMax)
		return rule.Check{Value: c.AverageCurrent(), Limit: limit, Guard: below(c, limit)}
	},
}
