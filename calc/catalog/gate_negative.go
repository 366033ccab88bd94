package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var gateNegative = &rule.Rule{
	ID: "gate/negative", Title: "Lowest gate voltage", Since: second,
	Equation: "v_GS = V_off - R_g·C_gd·dv/dt through the gate's time constant while the switch's own voltage falls; V_off - L_cs·di/dt while its diode loses the current",
	Limit:    "absolute minimum of the gate voltage", Guard: "10 % above the limit", Applies: "positions with a gate",
	Needs: []string{"highSide.gateVoltageMin", "lowSide.gateVoltageMin", "highSide.offBias", "lowSide.offBias", "lowSide.reverseTransferCapacitance",
		"lowSide.gateOff", "layout.lowSideCommonSource", "layout.highSideCommonSource"},
	Events: true, Simulated: everyRole,
	Sources: []string{"slup169", "textbook"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Lowest gate voltage", Against: "absolute minimum", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles: []string{roleHighSide, roleLowSide}, Inapplicable: withSwitch,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		limit := c.Need(&position(c, role).GateVoltageMin)
		v := c.Need(&position(c, role).OffBias)
		for _, e := range everyEvent {
			if c.Occurs(e) {
				v = min(v, c.GateLow(e, position(c, role)))
			}
		}
		return rule.Check{Value: v, Limit: limit, Guard: raised(c, limit)}
	},
	EventOf: everyEvent,
	Alternatives: each(everyEvent, func(c *circuit.Circuit, role string, e circuit.Event) float64 {
		s := position(c, role)
		return c.GateLow(e, s) - c.Need(&s.GateVoltageMin)
	}),
}
