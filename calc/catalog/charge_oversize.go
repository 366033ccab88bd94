package catalog

import (
	"fmt"
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeOversize = &rule.Rule{
	ID: "charge/oversize", Title: "Bootstrap capacitance too large for its reservoir or for start-up", Since: first,
	Equation: "C_B,max against C_VDD/ratio and against C_B·t_avail/t, t the time of the first charge by the exact law to V_UV+ with margin",
	Limit:    "the smaller of the reservoir over the policy's ratio and the capacitance that the time available charges",
	Guard:    "10 % below the limit", Applies: "every stage",
	Needs: []string{"bootstrap.capacitor", "gateSupply.reservoir", "startup.timeAvailable", "driver.uvloRising", "bootstrap.resistor",
		"bootstrap.diode"},
	Sources: []string{"im393", "common-practice"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Note,
	Quantity: "Largest bootstrap capacitance", Against: "largest permitted capacitance", Dimension: quantity.Capacitance, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		value := c.Fresh()
		limit, note := math.Inf(1), ""
		if r := &c.Stage.GateSupply.Reservoir; r.Presence() != stage.NotFitted {
			if !present(c, r) {
				return rule.Check{Value: nan}
			}
			limit = c.Effective(r, c.Supply) / c.Policy.ReservoirRatio
			note = "the reservoir bounds it"
		}
		target := c.Need(&c.Stage.Driver.UVLORising)
		target += c.Margin(target)
		available := c.Need(&c.Stage.Startup.TimeAvailable)
		t := c.Element().TimeTo(value, c.Supply(), c.Loads().Total(), c.Need(&c.Stage.Startup.InitialVoltage), target)
		byTime := value * available / t
		if byTime < limit || byTime != byTime {
			limit = byTime
			note = fmt.Sprintf("the first charge bounds it: %s of %s available", quantity.Format(t, quantity.Time), quantity.Format(available, quantity.Time))
		}
		return rule.Check{Value: value, Limit: limit, Guard: below(c, limit), Notes: []string{note}}
	},
}
