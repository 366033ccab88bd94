package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var nodeSwitchOvershoot = &rule.Rule{
	ID: "node/switch-overshoot", Title: "Highest drain-source voltage", Since: second,
	Equation: "turning off: V_BUS + V_F + V_fr + (L1 + L2)·di/dt, di/dt at most I/sqrt((L1 + L2)·C_oss); the other's diode recovering: V_BUS + ΔV_recovery",
	Limit:    "rated blocking voltage", Guard: "90 % of the limit", Applies: "operating points with an edge that stresses the position",
	Needs: []string{"highSide.blockingVoltage", "lowSide.blockingVoltage", "operatingPoints.busVoltage", "layout.busLoopInductance",
		"layout.lowSideInductance", "layout.measured", "highSide.outputCapacitance", "lowSide.outputCapacitance", "highSide.reverse", "lowSide.reverse"},
	Events: true, Simulated: everyRole,
	Sources: []string{"lauritzen-ma-1991", "textbook", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Highest drain-source voltage", Against: "rated blocking voltage", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{roleHighSide, roleLowSide}, Inapplicable: always,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		s := position(c, role)
		limit := c.Need(&s.BlockingVoltage)
		v := largest(c, everyEvent, func(e circuit.Event) float64 { return c.SwitchPeak(e, s) })
		return rule.Check{Value: max(v, c.Bus()), Limit: limit, Guard: below(c, limit)}
	},
	EventOf: everyEvent,
	Alternatives: each(everyEvent, func(c *circuit.Circuit, role string, e circuit.Event) float64 {
		s := position(c, role)
		return c.Need(&s.BlockingVoltage) - c.SwitchPeak(e, s)
	}),
}
