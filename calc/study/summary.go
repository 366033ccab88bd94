package study

import (
	"cmp"
	"math"
	"slices"
	"strings"

	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

const (
	mostRanked  = 10 // inputs in a ranking
	leastRanked = 3  // standard deviations, of a correlation that is none, below which an input is not ranked
)

// results sums up every column.
func (s *run) results(workers []*worker, findings []finding.Finding) []Result {
	reads := make([]corner.Reads, len(s.columns))
	for k := range reads {
		for _, w := range workers {
			reads[k].Join(&w.reads[k])
		}
	}
	orders := s.ascending(reads)
	worst := extremes(findings)
	out := make([]Result, len(s.columns))
	sideBySide(len(s.columns), func(k int) {
		if s.stopped() {
			return
		}
		out[k] = s.result(k, &reads[k], orders)
		out[k].Extreme = worst[site{out[k].Rule, out[k].Role, out[k].Point}]
	})
	for k := range out {
		if first := slices.Index(s.columns[k].outcome, finding.Open); first >= 0 && !s.stopped() {
			out[k].Missing, out[k].Reasons = workers[0].explain(k, first)
		}
	}
	return out
}

// ascending are the draws in the ascending order of every variate that any column read; nil for the others.
func (s *run) ascending(reads []corner.Reads) [][]int32 {
	out := make([][]int32, len(s.variates))
	sideBySide(len(out), func(i int) {
		if slices.ContainsFunc(s.columns, func(c column) bool { return s.concerns(&s.variates[i], c.point) }) && !s.stopped() &&
			(s.variates[i].temperature() || slices.ContainsFunc(reads, func(r corner.Reads) bool { return r.Has(s.variates[i].input.ID) })) {
			out[i] = s.variates[i].stream.ascending(s.seed, len(s.worst))
		}
	})
	return out
}

// result sums up one column.
func (s *run) result(k int, reads *corner.Reads, orders [][]int32) Result {
	c := &s.columns[k]
	r := c.rule
	draws := len(c.outcome)
	out := Result{Rule: r.ID, Role: c.role, Point: name(s.points[c.point]), Smallest: r.Measure(math.NaN()), Largest: r.Measure(math.NaN()),
		LeastMargin: r.Margin(math.NaN(), math.NaN()), column: c}
	passed := 0
	for _, o := range c.outcome {
		switch o {
		case finding.Fail:
			out.Failed++
		case finding.Open:
			out.Open++
		case finding.Marginal:
			out.Marginal++
		default:
			passed++
		}
	}
	out.Yield, out.Guarded = NewShare(passed+out.Marginal, draws), NewShare(passed, draws)
	ranks := make([]int32, draws)
	sorted := midranks(c.value, ranks, make([]place, 0, draws))
	if len(sorted) == 0 {
		return out
	}
	at := func(i int) finding.Measure {
		if i == 0 {
			return r.Measure(math.NaN())
		}
		return r.Measure(float64(sorted[i-1].value))
	}
	out.Smallest, out.Largest = at(1), at(len(sorted))
	for i, p := range Percents() {
		o := s.orders[i]
		if len(sorted) < draws {
			o = orderOf(len(sorted), p/100)
		}
		out.Percentiles = append(out.Percentiles, Percentile{Percent: p, Value: at(o.at), Low: at(o.low), High: at(o.high)})
	}
	if sorted = midranks(c.margin, ranks, sorted); len(sorted) == 0 {
		return out
	}
	out.LeastDraw = int(sorted[0].draw)
	if i := smallest(c.share); i >= 0 {
		out.LeastDraw = i
	}
	out.LeastMargin.Absolute = r.Margin(float64(c.margin[out.LeastDraw]), math.NaN()).Absolute
	out.LeastMargin.Relative = rule.Significant(float64(c.share[out.LeastDraw]))
	out.Ranking = s.ranking(c, reads, orders, ranks)
	return out
}

// smallest is the place of the first smallest number, -1 where there is none.
func smallest(values []float32) int {
	at := -1
	for i, v := range values {
		if v == v && (at < 0 || v < values[at]) {
			at = i
		}
	}
	return at
}

// ranking correlates the margin of a column with every variate that the column read, and with the temperatures of its operating point. What so many
// draws cannot tell from no correlation at all is left out.
func (s *run) ranking(c *column, reads *corner.Reads, orders [][]int32, ranks []int32) []Correlation {
	var out []Correlation
	for i := range s.variates {
		v := &s.variates[i]
		if orders[i] == nil || !s.concerns(v, c.point) || !v.temperature() && !reads.Has(v.input.ID) {
			continue
		}
		if rho := spearman(orders[i], ranks); math.Abs(rho) > leastRanked/math.Sqrt(float64(max(len(ranks)-1, 1))) {
			out = append(out, Correlation{Field: v.field(), Symbol: v.input.Declare.Symbol, Rho: rho})
		}
	}
	slices.SortFunc(out, func(a, b Correlation) int {
		return cmp.Or(cmp.Compare(math.Abs(b.Rho), math.Abs(a.Rho)), strings.Compare(a.Field, b.Field), strings.Compare(a.Symbol, b.Symbol))
	})
	return out[:min(len(out), mostRanked)]
}
