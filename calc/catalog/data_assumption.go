package catalog

import (
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
	"math"
)

var dataAssumption = &rule.Rule{
	ID: "data/assumption", Title: "Optimistic assumptions", Since: second,
	Equation: "number of values that nobody gave and for which a value was taken that may flatter the result",
	Limit:    "none", Guard: "no such assumption", Applies: "every stage",
	Needs:    []string{"assumptions"},
	Sources:  []string{"common-practice"},
	Marginal: stage.Minor, Open: stage.Note, Never: "an assumption proves nothing wrong",
	Quantity: "Optimistic assumptions", Against: "none", Dimension: quantity.Count, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: always,
	Tally: func(assumed []stage.Assumption, open int) (rule.Check, []string) {
		n := 0
		var notes []string
		for _, a := range assumed {
			if a.Direction == stage.Optimistic {
				n++
				notes = append(notes, fmt.Sprintf("%s: %s: %s", stage.Relative(a.Field), a.Assumed, a.Reason))
			}
		}
		k := rule.Check{Value: float64(n), Limit: math.Inf(1)}
		if n == 0 && open > 0 {
			k.Value = nan
			notes = []string{fmt.Sprintf("none in what was evaluated, but %d findings are open, and what they would assume is not known", open)}
		}
		return k, notes
	},
}
