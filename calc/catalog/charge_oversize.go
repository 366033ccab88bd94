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
		limit := math.Min(byReservoir(c), byTime(c))
		return rule.Check{Value: c.Fresh(), Limit: limit, Guard: below(c, limit)}
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, _ string) float64 { return byReservoir(c) - c.Fresh() },
		func(c *circuit.Circuit, _ string) float64 { return byTime(c) - c.Fresh() },
	},
	Explain: func(c *circuit.Circuit, _ string, ch rule.Check) []string {
		available, t := chargeTime(c)
		if ch.Limit < ch.Value*available/t {
			return []string{"the reservoir bounds it"}
		}
		if math.IsInf(t, 1) {
			return []string{"no capacitance is charged in time: " + neverArrives(c)}
		}
		return []string{fmt.Sprintf("the first charge bounds it: %s of %s available", quantity.Format(t, quantity.Time), quantity.Format(available, quantity.Time))}
	},
}

// byReservoir is the capacitance that the reservoir permits; +Inf without one [F].
func byReservoir(c *circuit.Circuit) float64 {
	r := &c.Stage.GateSupply.Reservoir
	switch {
	case r.Presence() == stage.NotFitted:
		return math.Inf(1)
	case !present(c, r):
		return nan
	}
	return c.Effective(r, c.Supply) / c.Policy.ReservoirRatio
}

// byTime is the capacitance that the time available charges [F].
func byTime(c *circuit.Circuit) float64 {
	value := c.Fresh()
	available, t := chargeTime(c)
	return value * math.Max(available, 0) / t
}

// chargeTime is the time available for the first charge of the stages on the supply and the time that their C_B take to the rising lockout with margin,
// both without what passes between given starts [s].
func chargeTime(c *circuit.Circuit) (available, taken float64) {
	taken, _ = c.FirstChargeTime()
	delay := c.FirstChargeDelay()
	return c.Need(&c.Stage.Startup.TimeAvailable) - delay, taken - delay
}
