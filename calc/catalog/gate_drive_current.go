package catalog

import (
	"strings"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var gateDriveCurrent = &rule.Rule{
	ID: "gate/drive-current", Title: "Peak gate current against what the driver can deliver", Since: second,
	Equation: "V_swing/(R_ext + R_int), with the driver's resistance where it is given; V_swing from off bias to drive",
	Limit:    "peak source current at turn-on, peak sink current at turn-off, smallest", Guard: "10 % below the limit", Applies: "positions with a gate",
	Needs: []string{"driver.peakSourceCurrent", "driver.peakSinkCurrent", "highSide.gateOn", "highSide.gateOff", "highSide.internalGateResistance",
		"lowSide.gateOn", "lowSide.gateOff", "lowSide.internalGateResistance", "gateSupply.voltage"},
	Events:  true,
	Sources: []string{"sluscj9", "an6076"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Peak gate current", Against: "the driver's peak current", Dimension: quantity.Current, Sense: rule.AtMost,
	Roles: []string{roleHighSide + turningOn, roleHighSide + turningOff, roleLowSide + turningOn, roleLowSide + turningOff},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		side, _ := direction(role)
		return withSwitch(s, op, side)
	},
	Check: func(c *circuit.Circuit, role string) rule.Check {
		side, on := direction(role)
		peak := &c.Stage.Driver.PeakSinkCurrent
		if on {
			peak = &c.Stage.Driver.PeakSourceCurrent
		}
		limit := c.Need(peak)
		return rule.Check{Value: c.GateCurrent(position(c, side), on), Limit: limit, Guard: below(c, limit)}
	},
	Explain: func(*circuit.Circuit, string, rule.Check) []string {
		return []string{"beyond it the driver, not the resistor, sets the speed of the edge"}
	},
}

// Directions of a gate current, as ends of roles.
const (
	turningOn  = " turn-on"
	turningOff = " turn-off"
)

// direction splits a role into position and direction.
func direction(role string) (side string, on bool) {
	if side, on = strings.CutSuffix(role, turningOn); on {
		return side, true
	}
	return strings.TrimSuffix(role, turningOff), false
}
