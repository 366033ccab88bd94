package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// Roles of the diode's peak current.
const (
	firstCharge = "first charge"
	repetitive  = "repetitive"
)

var diodePeakCurrent = &rule.Rule{
	ID: "diode/peak-current", Title: "Peak current of the bootstrap diode", Since: first,
	Equation: "i at V_DD across the empty branch; repetitive: largest i of the periodic steady state",
	Limit:    "rated surge current; repetitive: rated repetitive peak current", Guard: "10 % below the limit",
	Applies: "stages with a discrete bootstrap diode",
	Needs: []string{"bootstrap.diode.surgeCurrentMax", "bootstrap.diode.repetitivePeakCurrentMax", "bootstrap.resistor", "bootstrap.diode.forwardPoints",
		"gateSupply.voltage"},
	Sources: []string{"sluscj9", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Minor,
	Quantity: "Peak current of the bootstrap diode", Against: "rated peak current", Dimension: quantity.Current, Sense: rule.AtMost,
	Roles: []string{firstCharge, repetitive},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if role == repetitive {
			return withDiode(s, op, role)
		}
		return discrete(s, op, role)
	},
	Check: func(c *circuit.Circuit, role string) rule.Check {
		d := &c.Stage.Bootstrap.Diode
		var v, limit float64
		if role == firstCharge {
			v, limit = c.FirstPeak(), c.Need(&d.SurgeCurrentMax)
		} else {
			v, limit = c.RepetitivePeak(), c.Need(&d.RepetitivePeakCurrentMax)
		}
		return rule.Check{Value: v, Limit: limit, Guard: below(c, limit)}
	},
}
