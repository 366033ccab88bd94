package catalog

import (
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
	Sources: []string{"sluscj9", "an6076"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Peak gate current", Against: "the driver's peak current", Dimension: quantity.Current, Sense: rule.AtMost,
	Roles: []string{roleHighSide, roleLowSide}, Inapplicable: withSwitch,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		on, off := gateCurrent(c, role, true), gateCurrent(c, role, false)
		source, sink := c.Need(&c.Stage.Driver.PeakSourceCurrent), c.Need(&c.Stage.Driver.PeakSinkCurrent)
		if !(on/source > off/sink) { // the less sufficient of the two
			return rule.Check{Value: off, Limit: sink, Guard: below(c, sink)}
		}
		return rule.Check{Value: on, Limit: source, Guard: below(c, source)}
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, role string) float64 {
			return c.Need(&c.Stage.Driver.PeakSourceCurrent) - gateCurrent(c, role, true)
		},
		func(c *circuit.Circuit, role string) float64 {
			return c.Need(&c.Stage.Driver.PeakSinkCurrent) - gateCurrent(c, role, false)
		},
	},
	Explain: func(*circuit.Circuit, string, rule.Check) []string {
		return []string{"beyond it the driver, not the resistor, sets the speed of the edge"}
	},
}

// gateCurrent is the peak current that the gate resistors of a position let through in one direction [A].
func gateCurrent(c *circuit.Circuit, role string, on bool) float64 {
	return c.GateCurrent(position(c, role), on)
}
