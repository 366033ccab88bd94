package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
	"math"
	"slices"
)

var nodeUndershootPulse = &rule.Rule{
	ID: "node/undershoot-pulse", Title: "Undershoot of the node as a switch commutates", Since: second,
	Equation: "high side off: -(V_F + V_fr + I·R_shunt + L2·di/dt) for the fall of the current, I/(di/dt) where measured; di/dt at most I/sqrt((L1 + L2)·C_oss); low side on: -ΔV_recovery·L2/(L1 + L2) for half a ringing period; simulated: the time below each row's level, which must not exceed the duration of the next deeper row, nor be any below the last",
	Limit:    "deepest row of the driver's table that lasts as long as the undershoot", Guard: "10 % above the limit",
	Applies: "operating points in which the high side turns off a sourcing current or the low side turns on a sinking one",
	Needs: []string{"driver.nodeUndershoot", "layout.lowSideInductance", "layout.measured.turnOffCurrentSlope", "highSide.gateOff",
		"highSide.inputCapacitance", "highSide.transconductance", "highSide.thresholdVoltage", "lowSide.reverse", "operatingPoints.loadCurrent"},
	Events: true, Simulated: everyRole, Bounds: true,
	Sources: []string{"an6076", "slup169", "lauritzen-ma-1991", "textbook"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Undershoot of the node", Against: "permitted for its width", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles:        []string{roleDriver},
	Inapplicable: during("no event takes the node below COM at this current and duty", falling...),
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		var buf [2]rule.Check
		checks := buf[:0]
		for _, e := range falling {
			if c.Occurs(e) {
				checks = append(checks, undershoot(c, e))
			}
		}
		return worst(rule.AtLeast, checks...)
	},
	EventOf: slices.Concat(falling, falling),
	Alternatives: slices.Concat(
		each(falling, func(c *circuit.Circuit, _ string, e circuit.Event) float64 {
			k := undershoot(c, e)
			return k.Value - k.Limit
		}),
		each(falling, func(c *circuit.Circuit, _ string, e circuit.Event) float64 { // the deepest may not be the longest
			if !c.Simulates(e) {
				return math.Inf(1)
			}
			margin := c.PinDip(e) - c.DeepestRow()
			for i := range c.Stage.Driver.NodeUndershoot.Items {
				margin = math.Min(margin, c.Spare(e, i))
			}
			return margin
		})),
	Explain: func(c *circuit.Circuit, _ string, k rule.Check) []string {
		var out []string
		for _, e := range falling {
			if c.Occurs(e) && c.Current(e) > 0 {
				out = append(out, fmt.Sprintf("%s for %s at %s (%s)", quantity.Format(c.PinDip(e), quantity.Voltage),
					quantity.Format(c.Width(e), quantity.Time), quantity.Format(c.Steepness(e), quantity.CurrentSlew), phrase(e)))
			}
		}
		return out
	},
}

// undershoot is an event against the driver's table.
func undershoot(c *circuit.Circuit, e circuit.Event) rule.Check {
	if !c.Simulates(e) {
		limit := c.Permitted(c.Width(e))
		return rule.Check{Value: c.PinDip(e), Limit: limit, Guard: raised(c, limit)}
	}
	value, limit, near := c.Undershoot(e)
	k := rule.Check{Value: value, Limit: limit, Guard: raised(c, limit)}
	if near {
		k.Floor = finding.Marginal
	}
	return k
}

// phrase tells in words what happens in an event.
func phrase(e circuit.Event) string { return e.Phrase() }
