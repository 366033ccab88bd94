package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var nodeOverload = &rule.Rule{
	ID: "node/overload", Title: "Overload among the operating points", Since: second,
	Equation: "number of operating points that are marked overload",
	Limit:    "at least one", Guard: "as the limit", Applies: "every stage",
	Needs:   []string{"operatingPoints.overload"},
	Events:  true,
	Sources: []string{"common-practice"},
	Open:    stage.Major, Never: "an operating point that nobody gave cannot be judged",
	Quantity: "Operating points for overload", Against: "needed", Dimension: quantity.Count, Sense: rule.AtLeast,
	Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		n := 0.0
		for i := range c.Stage.OperatingPoints.Items {
			if c.Stage.OperatingPoints.Items[i].Overload {
				n++
			}
		}
		if n == 0 {
			c.Open("no operating point is marked overload, so that the current at which the driver is stressed most is not judged")
			n = nan
		}
		return rule.Check{Value: n, Limit: 1, Guard: 1}
	},
}
