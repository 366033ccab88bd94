package catalog

import (
	"fmt"
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var dutyIdleRefresh = &rule.Rule{
	ID: "duty/idle-refresh", Title: "Floating supply at the first pulse on a pre-biased node", Since: second,
	Equation: "without a pulse of the low side V_BS tends to where i(V_DD - V_prebias - V_BS) = I_0, at most V_DD - V_F - V_prebias; both ways by the exact law, in t_available",
	Limit:    "rising lockout threshold V_UV+, largest", Guard: "limit + max(0.3 V, 5 % of the limit)",
	Applies: "stages whose node stands at a voltage before the first pulse, and bursts",
	Needs: []string{"startup.prebias", "driver.uvloRising", "gateSupply.voltage", "bootstrap.diode.forwardPoints", "bootstrap.resistor",
		"bootstrap.capacitor", "startup.timeAvailable"},
	Sources: []string{"im393", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "V_BS at the first pulse", Against: "rising lockout threshold", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Stagewide: true,
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, _ string) string {
		p := &s.Startup.Prebias
		if p.Known() && p.Max == 0 && (op == nil || op.Burst == nil) {
			return "the node is not pre-biased"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.UVLORising)
		v := math.Inf(1)
		if c.Point != nil && c.Point.Burst != nil {
			v = circuit.Empty(c.Restart())
		}
		if p := &c.Stage.Startup.Prebias; !(p.Known() && p.Max == 0) {
			v = math.Min(v, c.PrebiasedVoltage())
		}
		return rule.Check{Value: v, Limit: limit, Guard: limit + c.Margin(limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, k rule.Check) []string {
		if c.Point != nil && c.Point.Burst != nil && k.Value == circuit.Empty(c.Restart()) {
			return []string{pauseNote(c)}
		}
		if k.Value >= k.Limit {
			return nil
		}
		var out []string
		if v := c.PrebiasedSettled(); v < k.Limit {
			out = append(out, fmt.Sprintf("the stage never starts: however long it waits, V_BS comes to no more than %s on a node at %s",
				quantity.Format(v, quantity.Voltage), quantity.Format(c.Need(&c.Stage.Startup.Prebias), quantity.Voltage)))
		}
		switch {
		case c.Stage.LowSide.Kind == stage.DiodeOnly:
			out = append(out, "the diode of the low side does not pull the node down: C_B is charged against the raised node only, in startup.timeAvailable")
		case !c.Stage.Startup.PulseWidth.Given():
			out = append(out, "no pulse of the low side pulls the node down (startup.pulseWidth is not given): C_B is charged against the raised node only, in startup.timeAvailable")
		}
		return out
	},
}
