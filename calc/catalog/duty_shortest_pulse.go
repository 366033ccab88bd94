package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// shortPulse is the multiple of the driver's minimum pulse from which on a pulse is taken to come through unchanged [common-practice].
const shortPulse = 1.5

var dutyShortestPulse = &rule.Rule{
	ID: "duty/shortest-pulse", Title: "Shortest pulse of the high side", Since: second,
	Equation: "d·T - t_dt; with a low side that is a diode d·T; of a modulation the shortest one that reaches the switch",
	Limit:    "shortest pulse that the driver passes", Guard: "1.5 times the limit", Applies: "operating points in which the high side is pulsed",
	Needs: []string{"driver.minimumPulse", "operatingPoints.fixedDuty.duty", "operatingPoints.switchingFrequency", "operatingPoints.deadTime",
		"lowSide.kind"},
	Sources: []string{"common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Shortest pulse of the high side", Against: "minimum pulse", Dimension: quantity.Time, Sense: rule.AtLeast,
	Roles: []string{roleDriver},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if op != nil && op.FixedDuty != nil {
			switch d := &op.FixedDuty.Duty; {
			case d.Known() && d.Max <= 0:
				return "the high side is never turned on"
			case d.Known() && d.Min >= 1:
				return "the high side is never turned off"
			}
		}
		if op != nil && op.SixStep != nil && op.SixStep.Chopping == "LOW_SIDE" {
			return "the high side is not pulsed"
		}
		return switching(s, op, role)
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.MinimumPulse)
		k := rule.Check{Value: c.HighPulse(), Limit: limit, Guard: shortPulse * limit}
		if c.Point != nil && c.Point.Sinusoidal != nil && k.Value < limit { // those that reach the switch are no shorter
			k.Value = limit
		}
		return k
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		if c.Point == nil || c.Point.Sinusoidal == nil || !(c.HighPulse() < c.Need(&c.Stage.Driver.MinimumPulse)) {
			return nil
		}
		return []string{"at some angles the commanded pulse is shorter than the driver passes and is lost: drop such pulses in the modulator, so that none is cut short"}
	},
}
