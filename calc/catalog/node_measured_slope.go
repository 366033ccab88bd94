package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
)

// slopesApart is the ratio of a measured slope and a simulated one from which on one of both is taken to be wrong [common-practice].
const slopesApart = 2

// slopesNear is the guard of that ratio [common-practice].
const slopesNear = 1.5

var nodeMeasuredSlope = &rule.Rule{
	ID: "node/measured-slope", Title: "Measured slopes against the simulated ones", Since: third,
	Equation: "the larger over the smaller of a measured slope and the simulated one, of currents and of voltages from 10 to 90 %",
	Limit:    "a factor of two", Guard: "a factor of 1.5", Applies: "stages with measured slopes whose events are simulated",
	Needs:  []string{"layout.measured"},
	Events: true, Simulated: everyRole, OnlySimulated: true,
	Sources: []string{"common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Minor,
	Quantity: "Ratio of measured and simulated slope", Against: "largest credible", Dimension: quantity.Ratio, Sense: rule.AtMost,
	Roles: []string{roleCurrent, roleVoltage},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if !circuit.Largest(s, op) {
			return "slopes are measured at the largest current, which flows at another operating point"
		}
		for _, e := range everyEvent {
			if circuit.Occurs(s, op, e) && circuit.MeasuredSlope(s, e, role == roleCurrent).Given() {
				return ""
			}
		}
		return "no slope of an event that occurs is measured"
	},
	Check: func(c *circuit.Circuit, role string) rule.Check {
		v := c.Usual(func(c *circuit.Circuit) float64 { return slopeRatio(c, role) })
		return rule.Check{Value: v, Limit: slopesApart, Guard: slopesNear}
	},
	Explain: func(c *circuit.Circuit, role string, _ rule.Check) []string {
		var out []string
		dim := quantity.VoltageSlew
		if role == roleCurrent {
			dim = quantity.CurrentSlew
		}
		for _, e := range everyEvent {
			if measured, simulated, ok := slopes(c, role, e); ok {
				out = append(out, fmt.Sprintf("%s: measured %s, simulated %s", phrase(e), quantity.Format(measured, dim), quantity.Format(simulated, dim)))
			}
		}
		return out
	},
}

// Roles of a measured slope.
const (
	roleCurrent = "current slope"
	roleVoltage = "voltage slope"
)

// slopeRatio is the larger over the smaller of a measured and a simulated slope, the largest of all events [1].
func slopeRatio(c *circuit.Circuit, role string) float64 {
	ratio := 0.0
	for _, e := range everyEvent {
		if c.Occurs(e) && circuit.MeasuredSlope(c.Stage, e, role == roleCurrent).Given() && !c.Simulates(e) {
			return c.Unsimulated()
		}
		if measured, simulated, ok := slopes(c, role, e); ok {
			ratio = max(ratio, simulated/measured, measured/simulated)
		}
	}
	if ratio == 0 {
		return c.Open("no event with a measured slope happens at typical values")
	}
	return ratio
}

// slopes are those of an event as measured and as simulated; false where one of them is none.
func slopes(c *circuit.Circuit, role string, e circuit.Event) (measured, simulated float64, ok bool) {
	q := circuit.MeasuredSlope(c.Stage, e, role == roleCurrent)
	if !c.Occurs(e) || !q.Given() || !c.Acts(e) {
		return 0, 0, false
	}
	measured, simulated = c.Need(q), c.MeanSlew(e)
	if role == roleCurrent {
		simulated = c.Steepness(e)
	}
	return measured, simulated, measured != 0 && simulated != 0
}
