package catalog

import (
	"fmt"
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// hotLeakageShare is the share of the charge per period that the diode's leakage may take [common-practice].
const hotLeakageShare = 0.10

var diodeHotLeakage = &rule.Rule{
	ID: "diode/hot-leakage", Title: "Hot leakage of the bootstrap diode", Since: first,
	Equation: "I_R(T_j)·T/Q_B, I_R doubling every 10 K, T_j = T_A + R_th·(V_F·I_av + Q_rr·V_R·f + V_R·I_R(T_j)·t_on/T)",
	Limit:    "10 % of the charge per period; no solution for T_j is thermal runaway and fails", Guard: "10 % below the limit",
	Applies: "stages with a discrete bootstrap diode, switching",
	Needs:   []string{"bootstrap.diode.reverseLeakage", "bootstrap.diode.thermalResistance", "operatingPoints.busVoltage", "operatingPoints.ambientTemperature"},
	Sources: []string{"common-practice", "textbook"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Share of the diode's leakage in the charge per period", Against: "permitted share", Dimension: quantity.Ratio, Sense: rule.AtMost,
	Inapplicable: withDiode,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil {
			return rule.Check{Value: c.NoPoint()}
		}
		share, rise := leakageShare(c)
		ch := rule.Check{Value: share, Limit: hotLeakageShare, Guard: below(c, hotLeakageShare)}
		if math.IsInf(rise, 1) {
			ch.Floor = finding.Fail
		}
		return ch
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		_, rise := leakageShare(c)
		switch {
		case math.IsInf(rise, 1):
			return []string{"thermal runaway: the leakage heats the diode faster than it cools"}
		case rise > 1:
			return []string{fmt.Sprintf("the diode runs %s above its surroundings", quantity.Format(rise, quantity.TemperatureDifference))}
		}
		return nil
	},
}

// leakageShare is the share of the diode's leakage in the charge of a period, and the diode's temperature rise [K]; both +Inf at thermal
// runaway.
func leakageShare(c *circuit.Circuit) (share, rise float64) {
	ambient, items := c.Need(&c.Stage.Bootstrap.Diode.ReverseLeakage), c.Budget()
	rise, stable := c.DiodeRise()
	if !stable {
		return math.Inf(1), math.Inf(1)
	}
	return ambient * math.Exp2(rise/10) * c.Period().T / charge.Total(items), rise
}
