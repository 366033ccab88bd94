package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// leastGain is what an undershoot must add to V_BS to be spoken of [V].
const leastGain = 10e-3

var gateOvervoltage = &rule.Rule{
	ID: "gate/overvoltage", Title: "Highest floating supply against driver and gate ratings", Since: first,
	Equation: "V_BS,high of the periodic steady state, pumped toward V_DD - V_F + V_SD in the dead times and toward V_DD - V_F + |V_S| in the undershoots; " +
		"at the gate less a bias taken out of V_BS",
	Limit: "absolute maximum of V_BS, or of the gate voltage", Guard: "90 % of the limit", Applies: "driver and high-side gate",
	Needs: []string{"driver.floatingVoltageMax", "highSide.gateVoltageMax", "gateSupply.voltage", "lowSide.reverse.forwardPoints",
		"operatingPoints.deadTime", "bootstrap.resistor", "bootstrap.clamp", "layout.lowSideInductance", "layout.measured.turnOffCurrentSlope"},
	Events: true, Simulated: everyRole,
	Sources: []string{"snvaa94", "lmg1210", "snosdg7a", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Highest V_BS", Against: "absolute maximum", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles:        []string{roleDriver, roleHighSide},
	Inapplicable: always,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		v, limit := c.Highest(), c.Need(&c.Stage.Driver.FloatingVoltageMax)
		if role == roleHighSide {
			v, limit = c.Gate(v), c.Need(&c.Stage.HighSide.GateVoltageMax)
		}
		return rule.Check{Value: v, Limit: limit, Guard: limit * c.Policy.GateVoltageRatio}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		notes := pumpNote(c)
		if gain := c.Gain(); gain > leastGain {
			notes = append([]string{"undershoots add " + quantity.Format(gain, quantity.Voltage)}, notes...)
		}
		return notes
	},
}
