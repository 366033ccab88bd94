package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// capacitorLeakageShare is the share of the standing load that the capacitor's own leakage may take [common-practice].
const capacitorLeakageShare = 0.10

var capacitorLeakage = &rule.Rule{
	ID: "capacitor/leakage", Title: "Leakage of the bootstrap capacitor", Since: first,
	Equation: "I_C/I_0, I_C as given, V/R_ins, or 0.01·C·V for electrolytics",
	Limit:    "10 % of the standing load", Guard: "10 % below the limit", Applies: "every stage",
	Needs:   []string{"bootstrap.capacitor.leakage", "bootstrap.capacitor.insulation", "driver.floatingQuiescentCurrent", "driver.offsetLeakage"},
	Sources: []string{"kemet-c1002", "aluminium-makers"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Share of the capacitor's leakage in the standing load", Against: "permitted share", Dimension: quantity.Ratio, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		l := c.Loads()
		share := l.CapacitorLeakage / (l.Total() + l.PullDown*c.Supply())
		if l.CapacitorLeakage == 0 { // of whatever load, none at all included
			share = 0 * (l.Total() + l.PullDown)
		}
		return rule.Check{Value: share, Limit: capacitorLeakageShare, Guard: below(c, capacitorLeakageShare)}
	},
}
