package catalog

import (
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeDroop = &rule.Rule{
	ID: "charge/droop", Title: "Droop of the floating supply between two recharges", Since: first,
	Equation: "ΔV = (Q_G + Q_LS + Q_rr + Q_j + I_0·t)/C_eff, at the periodic steady state; t the on-time, or all time until the next recharge",
	Limit:    "the policy's share of V_BS", Guard: "10 % below the limit", Applies: "operating points with switching periods",
	Needs: []string{"gateSupply.voltage", "driver.floatingQuiescentCurrent", "driver.offsetLeakage", "driver.levelShiftCharge",
		"highSide.gateCharge", "bootstrap.capacitor", "bootstrap.diode", "bootstrap.resistor"},
	Sources: []string{"an6076", "ir2114"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Droop of V_BS between two recharges", Against: "permitted ripple", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Inapplicable: switching,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.PermittedRipple()
		return rule.Check{Value: c.Droop(), Limit: limit, Guard: below(c, limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		return slices.Concat(collapseNote(c), heldNote(c))
	},
}
