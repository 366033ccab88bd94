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
	Equation: "exact law at the largest C_B to V_UV+ with margin, plus the driver's enable delay; pulsed with ratio δ: the load over δ, the time over δ",
	Limit:    "time available before the first pulse", Guard: "10 % below the limit", Applies: "every stage",
	Needs: []string{"startup.timeAvailable", "startup.pulseWidth", "startup.pulsePeriod", "driver.uvloRising", "driver.enableDelay", "gateSupply.voltage",
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
		if math.IsInf(k.Value, 1) {
			return []string{fmt.Sprintf("V_BS never reaches %s; it settles at %s", quantity.Format(c.FirstTarget(), quantity.Voltage),
				quantity.Format(c.FirstSettled(), quantity.Voltage))}
		}
		switch _, n := c.FirstChargeTime(); {
		case n == 1:
			return []string{"one pulse of the low side"}
		case n > 1:
			return []string{fmt.Sprintf("%d pulses of the low side", n)}
		case c.Stage.LowSide.Kind == stage.DiodeOnly:
			return nil
		}
		return []string{"with the low side held on (startup.pulseWidth is not given)"}
	},
}
