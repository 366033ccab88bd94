package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
	"math"
)

// Roles of a clamp across the floating supply.
const (
	standingOff = "standing off"
	protecting  = "protecting"
)

// clampPowerShare is the share of its rated power at which a clamp may work continuously [common-practice].
const clampPowerShare = 0.5

var gateClampWindow = &rule.Rule{
	ID: "gate/clamp-window", Title: "Clamp across the floating supply between normal V_BS and the ratings", Since: second,
	Equation: "standing off: V_DD - V_F - V_LS < V_clamp,min; protecting: V_clamp,max below the ratings, V_clamp·f·Σ t·i(E - V_clamp) below its power",
	Limit:    "standing off: the clamp's smallest voltage; protecting: the smaller rating of driver and gate, and the clamp's power",
	Guard:    "10 % below the limit; 50 % of the power", Applies: "stages with a clamp",
	Needs:  []string{"bootstrap.clamp", "gateSupply.voltage", "driver.floatingVoltageMax", "highSide.gateVoltageMax"},
	Events: true, Simulated: func(role string) bool { return role == protecting },
	Sources: []string{"snvaa94", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Voltage that the clamp must let pass or hold", Against: "clamp or rating", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{standingOff, protecting},
	Inapplicable: func(s *stage.Stage, _ *stage.OperatingPoint, _ string) string {
		if s.Bootstrap.Clamp.Presence() == stage.NotFitted {
			return "no clamp is fitted"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, role string) rule.Check {
		z := &c.Stage.Bootstrap.Clamp
		if z.Presence() == stage.PresenceUnknown {
			return rule.Check{Value: c.Want(z.Field)}
		}
		if role == standingOff {
			limit := c.Need(&z.Voltage)
			return rule.Check{Value: c.Normal(), Limit: limit, Guard: below(c, limit)}
		}
		limit := clampRating(c)
		k := rule.Check{Value: c.Need(&z.Voltage), Limit: limit, Guard: below(c, limit)}
		switch power, rated := c.ClampPower(), c.Need(&z.Power); {
		case power > rated:
			k.Floor = finding.Fail
		case power > clampPowerShare*rated:
			k.Floor = finding.Marginal
		}
		return k
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, role string) float64 {
			z := &c.Stage.Bootstrap.Clamp
			switch {
			case z.Presence() == stage.PresenceUnknown:
				return c.Want(z.Field)
			case role == standingOff:
				return c.Need(&z.Voltage) - c.Normal()
			}
			return clampRating(c) - c.Need(&z.Voltage)
		},
		func(c *circuit.Circuit, role string) float64 {
			z := &c.Stage.Bootstrap.Clamp
			switch {
			case z.Presence() == stage.PresenceUnknown:
				return c.Want(z.Field)
			case role == standingOff:
				return math.Inf(1)
			}
			return c.Need(&z.Power) - c.ClampPower()
		},
	},
	Explain: func(c *circuit.Circuit, role string, _ rule.Check) []string {
		if role == standingOff {
			return nil
		}
		return []string{fmt.Sprintf("the clamp takes %s of its %s", quantity.Format(c.ClampPower(), quantity.Power),
			quantity.Format(c.Need(&c.Stage.Bootstrap.Clamp.Power), quantity.Power))}
	},
}

// clampRating is the V_BS that driver and gate bear [V].
func clampRating(c *circuit.Circuit) float64 {
	gate := c.Need(&c.Stage.HighSide.GateVoltageMax)
	if b := c.OffBias(&c.Stage.HighSide); b.Split {
		gate -= b.Voltage
	}
	return math.Min(c.Need(&c.Stage.Driver.FloatingVoltageMax), gate)
}
