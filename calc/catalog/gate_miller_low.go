package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var gateMillerLow = &rule.Rule{
	ID: "gate/miller-low", Title: "Gate of the low side while the high side turns on", Since: second,
	Equation: "v_GS = V_off + R_g·C_gd·dv/dt through the gate's time constant over the rise of the node, and L_cs·I_RM/τ_rr while the diode recovers",
	Limit:    "smallest threshold at the junction temperature", Guard: "80 % of the limit",
	Applies: "operating points in which the high side turns on a sourcing current; the low side a switch",
	Needs: []string{"lowSide.thresholdVoltage", "lowSide.thresholdTemperatureCoefficient", "lowSide.inputCapacitance",
		"lowSide.reverseTransferCapacitance", "lowSide.gateOff", "lowSide.internalGateResistance", "driver.pullDownResistance",
		"layout.measured.turnOnVoltageSlope", "operatingPoints.busVoltage", "lowSide.reverse.recoveryCharge", "layout.lowSideCommonSource"},
	Events: true, Simulated: everyRole,
	Sources: []string{"slup169", "an6076", "lauritzen-ma-1991", "textbook"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Gate voltage induced in the low side", Against: "smallest threshold", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{roleLowSide},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if r := withSwitch(s, op, role); r != "" {
			return r
		}
		return during(noEdge, circuit.TurnOn)(s, op, role)
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		return induced(c, circuit.TurnOn, c.Threshold(&c.Stage.LowSide))
	},
	Explain: func(c *circuit.Circuit, _ string, k rule.Check) []string { return swingNote(c, circuit.TurnOn, k) },
}
