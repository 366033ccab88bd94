package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var supplyFloatingSlew = &rule.Rule{
	ID: "supply/floating-slew", Title: "Rise of the floating supply at first charge", Since: second,
	Equation: "i/C_B at V_DD across the empty branch, near (V_DD - V_F)/(R·C_B)",
	Limit:    "rated slew of V_BS", Guard: "10 % below the limit", Applies: "every stage",
	Needs:   []string{"driver.floatingSlewMax", "gateSupply.voltage", "bootstrap.resistor", "bootstrap.diode.forwardPoints", "bootstrap.capacitor"},
	Sources: []string{"sluscj9", "common-practice"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Slew of V_BS at first charge", Against: "rated slew", Dimension: quantity.VoltageSlew, Sense: rule.AtMost,
	Roles: []string{roleDriver}, Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.FloatingSlewMax)
		return rule.Check{Value: c.FirstSlew(), Limit: limit, Guard: below(c, limit)}
	},
}
