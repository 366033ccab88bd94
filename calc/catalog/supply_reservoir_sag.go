package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var supplyReservoirSag = &rule.Rule{
	ID: "supply/reservoir-sag", Title: "Supply while the bootstrap capacitors are charged from its reservoir", Since: second,
	Equation: "exact law with 1/C' = n/C_VDD + 1/C_B: V_DD is lowest where n·i = I_limit; without a limit toward V_DD·C_VDD/(C_VDD + n·C_B); " +
		"in groups V_DD and V_BS carry over from one to the next",
	Limit: "falling lockout threshold on V_DD, largest", Guard: "limit + max(0.3 V, 5 % of the limit)", Applies: "stages with a reservoir",
	Needs: []string{"gateSupply.voltage", "gateSupply.uvloFalling", "gateSupply.reservoir", "gateSupply.currentLimit", "bootstrap.capacitor",
		"bootstrap.resistor", "bootstrap.diode.forwardPoints", "startup.simultaneous", "startup.stageInterval",
		"gateSupply.stagesSharing"},
	Sources: []string{"textbook", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Lowest V_DD at first charge", Against: "lockout on V_DD", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles: []string{roleReservoir}, Stagewide: true, Inapplicable: fittedCapacitor,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.GateSupply.UVLOFalling)
		return rule.Check{Value: c.ReservoirLow(), Limit: limit, Guard: limit + c.Margin(limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string { return orderNote(c) },
}
