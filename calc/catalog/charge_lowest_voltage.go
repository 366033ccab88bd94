package catalog

import (
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeLowestVoltage = &rule.Rule{
	ID: "charge/lowest-voltage", Title: "Lowest floating supply against its lockout", Since: first,
	Equation: "F(v) = v over one period of exact recharge; V_BS,low at the end of the on-time. Held on: (V_0 + I_0/G)·exp(-G·t/C) - I_0/G",
	Limit:    "falling lockout threshold V_UV-, largest", Guard: "limit + max(0.3 V, 5 % of the limit)", Applies: "every operating point",
	Needs: []string{"gateSupply.voltage", "driver.uvloFalling", "driver.floatingQuiescentCurrent", "driver.offsetLeakage",
		"driver.levelShiftCharge", "highSide.gateCharge", "bootstrap.capacitor", "bootstrap.diode", "bootstrap.resistor", "operatingPoints"},
	Sources: []string{"an6076", "im393", "textbook"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Lowest V_BS", Against: "falling lockout threshold", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Inapplicable:   always,
	Proxy:          func(c *circuit.Circuit, _ string) float64 { return c.Low() - c.Need(&c.Stage.Driver.UVLOFalling) },
	ProxyDimension: quantity.Voltage,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.UVLOFalling)
		return rule.Check{Value: circuit.Empty(c.Low()), Limit: limit, Guard: limit + c.Margin(limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		return slices.Concat(collapseNote(c), cancelNote(c), heldNote(c), vanishNotes(c))
	},
}
