package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var nodeUndershootStatic = &rule.Rule{
	ID: "node/undershoot-static", Title: "Plateau of the node below COM", Since: second,
	Equation: "V_S = -(V_SD(I) + I·R_shunt) during the dead time, -I·(R_DS(on) + R_shunt) while the low side is on",
	Limit:    "deepest row of the driver's table that lasts as long", Guard: "10 % above the limit", Applies: "every operating point",
	Needs: []string{"driver.nodeUndershoot", "lowSide.reverse.forwardPoints", "lowSide.kind", "operatingPoints.loadCurrent",
		"operatingPoints.deadTime", "lowSide.onResistance", "layout.shunt", "driver.minimumPulse"},
	Events:  true,
	Sources: []string{"lmg1210", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Plateau of the node", Against: "permitted for its length", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles: []string{roleDriver}, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		return worst(rule.AtLeast, plateau(c, 0), plateau(c, 1), plateau(c, 2))
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, _ string) float64 { k := plateau(c, 0); return k.Value - k.Limit },
		func(c *circuit.Circuit, _ string) float64 { k := plateau(c, 1); return k.Value - k.Limit },
		func(c *circuit.Circuit, _ string) float64 { k := plateau(c, 2); return k.Value - k.Limit },
	},
}

// plateau is one of the plateaus against the table.
func plateau(c *circuit.Circuit, k int) rule.Check {
	p := c.Plateaus()[k]
	limit := c.Permitted(p.Duration)
	return rule.Check{Value: p.Node, Limit: limit, Guard: raised(c, limit)}
}
