package catalog

import (
	"fmt"

	"floatrail/calc/charge"
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// standingShare is the share of the charge budget that avoidable loads may take [common-practice].
const standingShare = 0.20

var chargeStandingLoad = &rule.Rule{
	ID: "charge/standing-load", Title: "Avoidable standing loads of the floating supply", Since: first,
	Equation: "(∫V_BS/R_GS dt over the on-time + (I_Z + I_other)·T)/Q_B",
	Limit:    "20 % of the charge per period", Guard: "10 % below the limit", Applies: "every operating point",
	Needs:   []string{"highSide.gatePullDown", "bootstrap.clamp", "bootstrap.otherLoad", "driver.floatingQuiescentCurrent", "bootstrap.capacitor"},
	Sources: []string{"hip4086", "common-practice"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Share of avoidable loads in the charge", Against: "permitted share", Dimension: quantity.Ratio, Sense: rule.AtMost,
	Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil {
			return rule.Check{Value: c.NoPoint()}
		}
		pull, clamp, other, total := standing(c)
		share := (pull + clamp + other) / total
		if total == 0 { // nothing is taken, nothing of it avoidable
			share = 0
		}
		return rule.Check{Value: share, Limit: standingShare, Guard: below(c, standingShare)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		pull, clamp, other, total := standing(c)
		var out []string
		for _, l := range []struct {
			name   string
			charge float64
		}{{"the gate pull-down R_GS", pull}, {"the clamp", clamp}, {"the other load", other}} {
			if share := l.charge / total; share > standingShare/2 {
				out = append(out, fmt.Sprintf("%s takes %.0f %% of the load", l.name, 100*share))
			}
		}
		return out
	},
}

// standing is the charges of the avoidable loads and of all loads in one period, or in the time for which the high side is held on [C].
func standing(c *circuit.Circuit) (pull, clamp, other, total float64) {
	if c.Point.HeldOn != nil {
		h, t := c.Hold()
		total = h.Loads.Total() * t
		if h.Loads.PullDown != 0 {
			taken := h.Capacitance * (h.Start - h.Voltage(t))
			pull, total = taken-total, taken
		}
		return pull, h.Loads.ClampLeakage * t, h.Loads.Other * t, total
	}
	items := c.Budget()
	for _, it := range items {
		switch it.Name {
		case charge.ItemPullDown:
			pull = it.Charge
		case charge.ItemClampLeakage:
			clamp = it.Charge
		case charge.ItemOther:
			other = it.Charge
		}
	}
	return pull, clamp, other, charge.Total(items)
}
