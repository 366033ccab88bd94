package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var resistorPulseEnergy = &rule.Rule{
	ID: "resistor/pulse-energy", Title: "Energy of the first charge in the bootstrap resistor", Since: first,
	Equation: "∫i²·R_B dt = R_B·C·[R·i0²/2 + n·V_T·(i0 - I_S·ln(1 + i0/I_S))], near ½·C·V²",
	Limit:    "rated energy of one pulse", Guard: "10 % below the limit", Applies: "stages with a bootstrap resistor",
	Needs:   []string{"bootstrap.resistor.pulseEnergyMax", "bootstrap.resistor.resistance", "bootstrap.capacitor.capacitance", "gateSupply.voltage"},
	Sources: []string{"slua887a", "textbook"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Energy of the first charge in R_B", Against: "rated pulse energy", Dimension: quantity.Energy, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: withResistor,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Bootstrap.Resistor.PulseEnergyMax)
		return rule.Check{Value: c.FirstEnergy(), Limit: limit, Guard: below(c, limit)}
	},
}
