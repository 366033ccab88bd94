package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var gateNodeResistor = &rule.Rule{
	ID: "gate/node-resistor", Title: "Gate of the high side lifted by the recharge current through the V_S-line resistor", Since: second,
	Equation: "v_GS = V_off + i_B·R_VS, i_B the peak of the first charge, or of the steady state with undershoot; simulated: the smaller of v_GS and V_off + v_pin - v_node, at its highest after the node has fallen, from V_UV- on",
	Limit:    "smallest threshold at the junction temperature", Guard: "80 % of the limit", Applies: "stages with a resistor in the V_S line",
	Needs: []string{"layout.nodeResistor", "highSide.thresholdVoltage", "highSide.thresholdTemperatureCoefficient", "bootstrap.resistor",
		"bootstrap.diode.forwardPoints", "gateSupply.voltage", "layout.lowSideInductance"},
	Events: true, Simulated: func(role string) bool { return role == repetitive },
	Sources: []string{"sluscj9", "slup169", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Gate voltage of the high side while it is off", Against: "smallest threshold", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{firstCharge, repetitive},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if r := &s.Layout.NodeResistor.Resistance; r.Known() && r.Max == 0 {
			return "there is no resistor in the V_S line"
		}
		if role == repetitive {
			return switching(s, op, role)
		}
		return ""
	},
	Check: func(c *circuit.Circuit, role string) rule.Check {
		limit := c.Threshold(&c.Stage.HighSide)
		r := c.Need(&c.Stage.Layout.NodeResistor.Resistance)
		v := 0.0
		if role == firstCharge { // an off bias may not stand yet
			v = c.FirstPeak() * r
		} else {
			v = c.Need(&c.Stage.HighSide.OffBias) + c.PumpedPeak()*r
			if circuit.Occurs(c.Stage, c.Point, circuit.TurnOff) && c.Simulates(circuit.TurnOff) {
				v = max(v, c.Lifted())
			}
		}
		return rule.Check{Value: v, Limit: limit, Guard: heldOff * limit}
	},
}
