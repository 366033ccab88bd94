package catalog

import (
	"floatrail/calc/capacitor"
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var capacitorEffectiveValue = &rule.Rule{
	ID: "capacitor/effective-value", Title: "What remains of the nominal capacitance", Since: first,
	Equation: "C_eff/C = (1 - tol)·(1 - temperature)·bias·(1 - k·log10(t/1 h))",
	Limit:    "the share that the policy assumes for a class 2 ceramic without a bias curve", Guard: "10 % above the limit",
	Applies: "stages whose effective capacitance is not given as such",
	Needs:   []string{"bootstrap.capacitor.capacitance", "bootstrap.capacitor.dielectric", "bootstrap.capacitor.biasCurve"},
	Sources: []string{"eia-198", "kemet-c1002", "holy-stone"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Remaining share of the nominal capacitance", Against: "least permitted share", Dimension: quantity.Ratio, Sense: rule.AtLeast,
	Stagewide: true,
	Inapplicable: func(s *stage.Stage, _ *stage.OperatingPoint, _ string) string {
		if s.Bootstrap.Capacitor.EffectiveCapacitance.Given() {
			return "the effective capacitance is given as such"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		s := &c.Stage.Bootstrap.Capacitor
		if kind(c, s) == capacitor.ClassTwo && len(s.BiasCurve.Items) == 0 {
			c.Want(s.BiasCurve.Field)
		}
		nominal := s.Capacitance.Typ
		if n := s.Capacitance.Naive; n == n {
			nominal = n
		}
		limit := c.Policy.ClassTwoRemaining
		return rule.Check{Value: c.Capacitance() / nominal, Limit: limit, Guard: above(c, limit)}
	},
}
