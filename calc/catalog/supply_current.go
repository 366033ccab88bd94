package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// supplyShare is the share of its current limit at which a supply may work continuously [common-practice].
const supplyShare = 0.8

var supplyCurrent = &rule.Rule{
	ID: "supply/current", Title: "Current from the gate supply", Since: second,
	Equation: "n·[(Q_B + Q_G,low)·f_sw + I_QDD], n stages on the supply; without switching the standing loads in the place of the charges",
	Limit:    "the supply's current limit", Guard: "80 % of the limit", Applies: "every operating point",
	Needs: []string{"gateSupply.currentLimit", "gateSupply.stagesSharing", "driver.quiescentCurrent", "highSide.gateCharge", "lowSide.gateCharge",
		"operatingPoints.switchingFrequency"},
	Sources: []string{"ucc27523", "an6076", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Minor,
	Quantity: "Current from the gate supply", Against: "current limit", Dimension: quantity.Current, Sense: rule.AtMost,
	Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.GateSupply.CurrentLimit)
		return rule.Check{Value: c.SupplyCurrent(), Limit: limit, Guard: supplyShare * limit}
	},
}
