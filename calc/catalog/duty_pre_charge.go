package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
	"math"
)

var dutyPreCharge = &rule.Rule{
	ID: "duty/pre-charge", Title: "First charge of the floating supply", Since: second,
	Equation: "exact law at the largest C_B to V_UV+ with margin, plus the driver's enable delay; pulsed with ratio δ: the load over δ, the time over δ; " +
		"from a reservoir that sags, until the last stage on the supply has arrived",
	Limit: "time available before the first pulse", Guard: "10 % below the limit", Applies: "every stage",
	Needs: []string{"startup.timeAvailable", "startup.pulseWidth", "startup.pulsePeriod", "driver.uvloRising", "driver.enableDelay", "gateSupply.voltage",
		"gateSupply.reservoir", "gateSupply.currentLimit", "gateSupply.stagesSharing", "startup.simultaneous", "startup.stageInterval",
		"bootstrap.capacitor", "bootstrap.resistor", "bootstrap.diode.forwardPoints"},
	Sources: []string{"im393", "slusce9b"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Time of the first charge", Against: "time available", Dimension: quantity.Time, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Startup.TimeAvailable)
		return rule.Check{Value: c.PrechargeTime(), Limit: limit, Guard: below(c, limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, k rule.Check) []string {
		var out []string
		if math.IsInf(k.Value, 1) {
			out = append(out, neverArrives(c))
		}
		if stages, _, _, _ := c.Order(); stages > 1 {
			out = append(out, orderNote(c)...)
		}
		if math.IsInf(k.Value, 1) {
			return out
		}
		switch _, n := c.FirstChargeTime(); {
		case n == 1:
			return append(out, "one pulse of the low side")
		case n > 1:
			return append(out, fmt.Sprintf("%d pulses of the low side", n))
		case c.Stage.LowSide.Kind == stage.DiodeOnly:
			return out
		}
		return append(out, "with the low side held on (startup.pulseWidth is not given)")
	},
}

// neverArrives tells why the first charge ends below its target: the drop of the element, or a supply that does not carry the stages on it.
func neverArrives(c *circuit.Circuit) string {
	target, settled := quantity.Format(c.FirstTarget(), quantity.Voltage), quantity.Format(c.FirstSettled(), quantity.Voltage)
	if c.FirstSettled() > c.FirstTarget() {
		return fmt.Sprintf("V_BS never reaches %s: the supply's current does not bring V_DD back; on a V_DD that stands it would settle at %s", target, settled)
	}
	return fmt.Sprintf("V_BS never reaches %s; it settles at %s", target, settled)
}
