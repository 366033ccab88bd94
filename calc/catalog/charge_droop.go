package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeDroop = &rule.Rule{
	ID: "charge/droop", Title: "Droop of the floating supply in one period", Since: first,
	Equation: "ΔV = (Q_G + Q_LS + Q_rr + Q_j + I_0·t_on)/C_eff, at the periodic steady state",
	Limit:    "the policy's share of V_BS", Guard: "10 % below the limit", Applies: "operating points with switching periods",
	Needs: []string{"gateSupply.voltage", "driver.floatingQuiescentCurrent", "driver.offsetLeakage", "driver.levelShiftCharge",
		"highSide.gateCharge", "bootstrap.capacitor", "bootstrap.diode", "bootstrap.resistor"},
	Sources: []string{"an6076", "ir2114"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Droop of V_BS in one period", Against: "permitted ripple", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Inapplicable: switching,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		st := c.Steady()
		v, limit := st.BeforeEdge-st.Low, c.Policy.RippleRatio*st.BeforeEdge
		if st.Collapses {
			p := c.Period()
			v = (p.Charge + p.ChargePerVolt*c.Required() + p.On.Load*p.OnTime) / p.Capacitance
			limit = c.Policy.RippleRatio * c.Required()
		}
		return rule.Check{Value: v, Limit: limit, Guard: below(c, limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string { return collapseNote(c) },
}
