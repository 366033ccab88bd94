package catalog

import (
	"math"
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/derive"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// justBelow is by how much a duty that does not hold is shown above one that just does [1].
const justBelow = 1e-3

var dutyLargestDuty = &rule.Rule{
	ID: "duty/largest-duty", Title: "Largest duty or modulation index that the floating supply holds", Since: first,
	Equation: "largest d, of a sinusoidal modulation largest m, with V_BS,low at or above the required voltage, by root finding on the periodic steady state",
	Limit:    "largest d or m", Guard: "10 % of the remaining low-side share below the largest d; 10 % below the largest m",
	Applies: "operating points with switching periods",
	Needs: []string{"operatingPoints.fixedDuty.duty", "operatingPoints.switchingFrequency", "driver.uvloFalling", "highSide.driveVoltageMin",
		"bootstrap.capacitor", "bootstrap.resistor", "bootstrap.diode"},
	Sources: []string{"im393", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Duty or modulation index", Against: "largest one", Dimension: quantity.Ratio, Sense: rule.AtMost,
	Inapplicable: switching,
	Proxy:        func(c *circuit.Circuit, _ string) float64 { return derive.Hold(c) }, ProxyDimension: quantity.Voltage,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil {
			return rule.Check{Value: c.NoPoint()}
		}
		if low := c.Low(); low != low {
			return rule.Check{Value: low}
		}
		d := c.Need(derive.DutyOf(c.Point))
		l := derive.LargestDuty(c)
		limit := l.Value
		if !l.Found && !l.Whole {
			limit = 0
		}
		if derive.Hold(c) < 0 && rule.Significant(limit) >= rule.Significant(d) { // it lies closer below the duty than a shown number tells
			limit = (1 - justBelow) * d
		}
		if d == 0 && derive.Hold(c) < 0 { // not even the least one holds
			limit = math.Inf(-1)
		}
		if c.Point.Sinusoidal != nil {
			if l.Whole && derive.Hold(c) >= 0 { // no index breaks it
				return rule.Check{Value: d, Limit: math.Inf(1), Guard: math.Inf(1)}
			}
			return rule.Check{Value: d, Limit: limit, Guard: below(c, limit)}
		}
		return rule.Check{Value: d, Limit: limit, Guard: limit - c.Policy.GuardRatio*(1-limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		return slices.Concat(collapseNote(c), cancelNote(c), vanishNotes(c))
	},
}
