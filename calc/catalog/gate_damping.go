package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// leastDamping is the damping of a gate loop below which its overshoot exceeds 16 % of the step [textbook].
const leastDamping = 0.5

var gateDamping = &rule.Rule{
	ID: "gate/damping", Title: "Damping of the gate loop", Since: second,
	Equation: "ζ = R_g/2·sqrt(C_iss/L_G), the smaller of both directions",
	Limit:    "0.5", Guard: "10 % above the limit", Applies: "positions with a gate",
	Needs: []string{"highSide.gateLoopInductance", "lowSide.gateLoopInductance", "highSide.inputCapacitance", "lowSide.inputCapacitance",
		"highSide.gateOn", "highSide.gateOff", "lowSide.gateOn", "lowSide.gateOff"},
	Events:  true,
	Sources: []string{"slup169", "textbook"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Damping of the gate loop", Against: "least damping", Dimension: quantity.Ratio, Sense: rule.AtLeast,
	Roles: []string{roleHighSide, roleLowSide}, Inapplicable: withSwitch,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		return rule.Check{Value: c.GateDamping(position(c, role)), Limit: leastDamping, Guard: above(c, leastDamping)}
	},
}
