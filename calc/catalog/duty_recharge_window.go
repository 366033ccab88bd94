package catalog

import (
	"fmt"
	"math"
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var dutyRechargeWindow = &rule.Rule{
	ID: "duty/recharge-window", Title: "Time that the modulation leaves for recharge", Since: first,
	Equation: "t_c = low side on, and dead time with the node low, of a modulation the mean of all periods; break-even Q_B/i(E - V_required - Q_B/C)",
	Limit:    "the longer of the driver's minimum pulse and the break-even window", Guard: "10 % above the limit",
	Applies: "operating points with switching periods",
	Needs: []string{"driver.minimumPulse", "driver.edgeTime", "operatingPoints.fixedDuty.duty", "operatingPoints.switchingFrequency",
		"operatingPoints.deadTime", "bootstrap.element", "bootstrap.resistor"},
	Sources: []string{"l6388e", "l6392", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Recharge window", Against: "shortest sufficient window", Dimension: quantity.Time, Sense: rule.AtLeast,
	Inapplicable: switching,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		p := c.Period()
		shortest, even := leastPulse(c), c.BreakEvenWindow()
		limit := math.Max(shortest, even)
		if shortest != shortest || even != even {
			limit = nan
		}
		if p.Window == 0 && p.T > 0 { // no recharge whatever the charge
			limit = math.Max(p.T, limit)
		}
		return rule.Check{Value: p.Window, Limit: limit, Guard: above(c, limit)}
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, _ string) float64 {
			if modulated(c.Point) {
				return math.Inf(1)
			}
			return c.Period().Window - leastPulse(c)
		},
		func(c *circuit.Circuit, _ string) float64 { return c.Period().Window - c.BreakEvenWindow() },
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		shortest, even := leastPulse(c), c.BreakEvenWindow()
		notes := slices.Concat(vanishNotes(c), collapseNote(c), cancelNote(c))
		switch {
		case alwaysOn(c):
		case math.IsInf(even, 1):
			notes = append(notes, "no window suffices: the element carries no charge at the required voltage")
		case even > shortest:
			notes = append(notes, fmt.Sprintf("break-even window %s", quantity.Format(even, quantity.Time)))
		}
		return notes
	},
}

// modulated tells whether the periods of an operating point differ from one another.
func modulated(op *stage.OperatingPoint) bool {
	return op != nil && (op.Sinusoidal != nil || op.SixStep != nil || op.Burst != nil)
}

// leastPulse is the driver's minimum pulse where each period must pass one [s]; of a modulation some may vanish.
func leastPulse(c *circuit.Circuit) float64 {
	if modulated(c.Point) {
		return 0
	}
	return c.Need(&c.Stage.Driver.MinimumPulse)
}
