package catalog

import (
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var resistorPower = &rule.Rule{
	ID: "resistor/power", Title: "Mean power of the bootstrap resistor", Since: first,
	Equation: "f_sw·∫i²·R_B dt over a period of the steady state; exactly R·C·∫i dv + R·I_0·C·Δv + R·I_0²·t an interval",
	Limit:    "rated power", Guard: "60 % of the rating", Applies: "stages with a bootstrap resistor, switching",
	Needs:   []string{"bootstrap.resistor.power", "bootstrap.resistor.resistance", "bootstrap.capacitor.capacitance", "operatingPoints.switchingFrequency"},
	Sources: []string{"nasa-eee-inst-002", "textbook"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Mean power of R_B", Against: "rated power", Dimension: quantity.Power, Sense: rule.AtMost,
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if r := withResistor(s, op, role); r != "" {
			return r
		}
		return switching(s, op, role)
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Bootstrap.Resistor.Power)
		v := c.ResistorPower()
		if c.Steady().Collapses { // at most what the settled supply drives through the branch all the time
			p := c.Period()
			i := p.Element.Current(math.Max(0, c.Supply()))
			v = i * i * c.Need(&c.Stage.Bootstrap.Resistor.Resistance) * p.Window / p.T
		}
		return rule.Check{Value: v, Limit: limit, Guard: limit * c.Policy.ResistorPowerRatio}
	},
}
