package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
)

var nodeUndershootPulse = &rule.Rule{
	ID: "node/undershoot-pulse", Title: "Undershoot of the node as a switch commutates", Since: second,
	Equation: "high side off: -(V_F + V_fr + I·R_shunt + L2·di/dt) for the fall of the current, I/(di/dt) where measured; di/dt at most I/sqrt((L1 + L2)·C_oss); low side on: -ΔV_recovery·L2/(L1 + L2) for half a ringing period",
	Limit:    "deepest row of the driver's table that lasts as long as the undershoot", Guard: "10 % above the limit",
	Applies: "operating points in which the high side turns off a sourcing current or the low side turns on a sinking one",
	Needs: []string{"driver.nodeUndershoot", "layout.lowSideInductance", "layout.measured.turnOffCurrentSlope", "highSide.gateOff",
		"highSide.inputCapacitance", "highSide.transconductance", "highSide.thresholdVoltage", "lowSide.reverse", "operatingPoints.loadCurrent"},
	Events:  true,
	Sources: []string{"an6076", "slup169", "lauritzen-ma-1991", "textbook"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Undershoot of the node", Against: "permitted for its width", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles:        []string{roleDriver},
	Inapplicable: during("no event takes the node below COM at this current and duty", falling...),
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		var buf [2]rule.Check
		checks := buf[:0]
		for _, e := range falling {
			if circuit.Occurs(c.Stage, c.Point, e) {
				limit := c.Permitted(c.Width(e))
				checks = append(checks, rule.Check{Value: c.PinDip(e), Limit: limit, Guard: raised(c, limit)})
			}
		}
		return worst(rule.AtLeast, checks...)
	},
	Alternatives: each(falling, func(c *circuit.Circuit, _ string, e circuit.Event) float64 {
		return c.PinDip(e) - c.Permitted(c.Width(e))
	}),
	Explain: func(c *circuit.Circuit, _ string, k rule.Check) []string {
		var out []string
		for _, e := range falling {
			if circuit.Occurs(c.Stage, c.Point, e) && c.Current(e) > 0 {
				out = append(out, fmt.Sprintf("%s for %s at %s (%s)", quantity.Format(c.PinDip(e), quantity.Voltage),
					quantity.Format(c.Width(e), quantity.Time), quantity.Format(c.CurrentSlope(e), quantity.CurrentSlew), phrase(e)))
			}
		}
		return out
	},
}

// phrase tells in words what happens in an event.
func phrase(e circuit.Event) string {
	return [...]string{"high side off", "high side on", "low side off", "low side on"}[e]
}
