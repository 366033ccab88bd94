package catalog

import (
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// conditionDeviation is how far the drive may lie from the voltage of the gate-charge specification [common-practice].
const conditionDeviation = 0.10

var chargeChargeCondition = &rule.Rule{
	ID: "charge/charge-condition", Title: "Gate charge specified at another drive", Since: first,
	Equation: "|V_drive/V_spec - 1|",
	Limit:    "10 %, unless Q_GS, Q_GD and V_pl give the slope of the gate charge", Guard: "the limit",
	Applies: "stages whose gate-charge slope is not known",
	Needs:   []string{"highSide.gateCharge", "highSide.gateChargeVoltage", "gateSupply.voltage"},
	Sources: []string{"slup169", "common-practice"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Major,
	Quantity: "Distance of the drive from the voltage of the gate-charge specification", Against: "permitted distance", Dimension: quantity.Ratio,
	Sense: rule.AtMost, Stagewide: true,
	Inapplicable: func(s *stage.Stage, _ *stage.OperatingPoint, _ string) string {
		h := &s.HighSide
		if h.GateCharge.Known() && h.GateChargeVoltage.Known() && h.GateSourceCharge.Known() && h.GateDrainCharge.Known() && h.PlateauVoltage.Known() {
			return "the slope of the gate charge is known"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		c.Need(&c.Stage.HighSide.GateCharge)
		v := math.Abs(c.Gate(c.Supply())/c.Need(&c.Stage.HighSide.GateChargeVoltage) - 1)
		return rule.Check{Value: v, Limit: conditionDeviation, Guard: conditionDeviation}
	},
}
