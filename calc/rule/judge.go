package rule

import (
	"fmt"
	"math"
	"strings"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// result is what a rule found at one operating point.
type result struct {
	point   *Point
	outcome finding.Outcome
	worst   corner.Worst
	check   Check
	notes   []string
	margin  float64
	reason  string // why not applicable
	refined bool
	search  corner.Function // by which it was found; nil where nothing was searched
	rule    *Rule           // that of the alternative searched; nil: the whole
	thin    bool            // the alternative that was searched may turn where its draw is polished
}

// numbered tells whether the result has numbers, be it open for what they do not contain yet.
func (r *result) numbered() bool { return r.outcome != finding.NotApplicable && r.margin == r.margin }

// worse orders results: by outcome, then by the margin's share of the limit.
func worse(a, b *result) bool {
	if a.outcome != b.outcome {
		return a.outcome > b.outcome
	}
	x, y := a.margin, b.margin
	if a.check.Limit != 0 || b.check.Limit != 0 {
		x, y = relative(x, a.check.Limit), relative(y, b.check.Limit)
	}
	switch { // where the judged numbers agree, what was searched decides; at last the name, so that the order of a request does not
	case x < y || x > y:
		return x < y
	case a.worst.Value < b.worst.Value || a.worst.Value > b.worst.Value:
		return a.worst.Value < b.worst.Value
	}
	return a.point != nil && b.point != nil && a.point.Name() < b.point.Name()
}

// relative is a margin as a share of its limit; of a limit of 0, which other draws do not have, it is infinite.
func relative(margin, limit float64) float64 {
	switch {
	case math.IsInf(limit, 0) || limit != limit || margin == 0:
		return margin
	case limit == 0:
		return math.Inf(1) * margin
	}
	return margin / math.Abs(limit)
}

// margin of a check as it is judged and reported: of value and limit at six digits.
func (r *Rule) margin(c Check) float64 {
	return r.distance(significant(c.Value), significant(c.Limit))
}

// distance of a value to its limit, negative beyond it.
func (r *Rule) distance(value, limit float64) float64 {
	if r.Sense == AtMost {
		return minus(limit, value)
	}
	return minus(value, limit)
}

// minus subtracts; equal infinities are no distance apart.
func minus(a, b float64) float64 {
	if math.IsInf(a, 0) && a == b {
		return 0
	}
	return a - b
}

func (r *Rule) guardSlack(c Check) float64 {
	return r.margin(Check{Value: c.Value, Limit: c.Guard})
}

// function is the rule as the search sees it.
func (r *Rule) function(role string) corner.Function {
	if r.Proxy != nil {
		return func(d *corner.Draw) float64 { return r.Proxy(circuit.Of(d), role) }
	}
	return func(d *corner.Draw) float64 { // unrounded: rounding hides inputs of little effect
		c := r.Check(circuit.Of(d), role)
		return r.distance(c.Value, c.Limit)
	}
}

// at searches the worst draws of one operating point: of each set, and of each alternative.
func (b *Bench) at(r *Rule, role string, p *Point) []result {
	if reason := r.Inapplicable(b.Stage, p.Operating, role); reason != "" {
		return []result{{point: p, margin: math.NaN(), outcome: finding.NotApplicable, reason: reason}}
	}
	if b.Stopped() {
		return []result{{point: p, margin: math.NaN(), outcome: finding.Open}}
	}
	var out []result
	searches := r.Searches(role)
	for i, f := range searches {
		nothing := i == len(searches)-1 && len(out) == 0 // of no alternative that exists: the check itself at every set
		if nothing && len(r.Alternatives) > 0 {
			if ws := corner.SearchSets(b.spaces(p, r, role), f); math.IsInf(ws[0].Value, 1) {
				f = r.function(role)
			}
		}
		for _, w := range corner.SearchSets(b.spaces(p, r, role), f) {
			if !nothing && math.IsInf(w.Value, 1) { // an alternative that does not exist here
				continue
			}
			var alternative *Rule
			if w.Space.Frugal && len(r.EventOf) > 0 && !nothing {
				alternative = r.about(i)
			}
			res := b.found(r, alternative, role, p, w)
			res.search = f
			out = append(out, res)
		}
	}
	return out
}

// closer looks closer at a result near its guard: it polishes it, and searches its set with directions of its own as well.
func (b *Bench) closer(r *Rule, role string, res *result) {
	if res.search == nil || !b.near(r, res) {
		return
	}
	if res.worst.Space.Frugal {
		if b.within(r, res) {
			b.refine(r, role, res)
		}
		return
	}
	w, f := res.worst, res.search
	b.refine(r, role, res)
	if !w.Carried {
		return
	}
	if own := b.found(r, nil, role, res.point, w.Space.Search(f)); own.worst.Value != w.Value {
		b.refine(r, role, &own)
		if worse(&own, res) {
			*res = own
		}
	}
}

// found is the result of a search.
func (b *Bench) found(r, alternative *Rule, role string, p *Point, w corner.Worst) result {
	res := result{point: p, worst: w, rule: alternative}
	if alternative != nil {
		r = alternative
	}
	b.decide(r, role, &res)
	if len(r.Alternatives) > 0 && w.Value == w.Value {
		res.thin = !(w.Value > nearShare*(w.Typical-w.Value)) // of its own: what the smallest of all hides
		res.worst.Value, _ = corner.Evaluate(w.Draw, r.function(role))
		res.worst.Typical, _ = corner.Evaluate(w.Space.Typical(), r.function(role))
	}
	return res
}

// nearShare is the part of what all inputs together take off the typical margin that moving them once more is trusted to take off at most.
const nearShare = 0.5

// near tells whether polishing may turn an outcome. Every set of every operating point that is so near its guard is polished, whether it
// binds or not.
func (b *Bench) near(r *Rule, res *result) bool {
	slack := r.guardSlack(res.check)
	if r.Proxy != nil {
		slack = res.worst.Value
	}
	return res.thin || !(slack > nearShare*(res.worst.Typical-res.worst.Value))
}

// frugalShare is nearShare where evaluations are dear.
const frugalShare = 0.15

// within tells whether a result lies just within its limit or its guard.
func (b *Bench) within(r *Rule, res *result) bool {
	room := frugalShare * (res.worst.Typical - res.worst.Value)
	slack := r.guardSlack(res.check)
	return res.margin >= 0 && res.margin < room || slack >= 0 && slack < room
}

// decide turns the worst draw into an outcome.
func (b *Bench) decide(r *Rule, role string, res *result) {
	w := &res.worst
	if w.Value != w.Value {
		res.outcome, res.margin = finding.Open, math.NaN()
		return
	}
	_, t := corner.Evaluate(w.Draw, func(d *corner.Draw) float64 {
		res.check = r.Check(circuit.Of(d), role)
		return 0
	})
	res.notes = nil
	w.Trace.Add(t)
	if res.margin, res.outcome = r.Judge(res.check, t.Complete()); res.outcome == finding.Open {
		return
	}
	if w.Partial && res.outcome != finding.Fail { // elsewhere it may be worse; a failure is one wherever it stands
		res.outcome, res.margin = finding.Open, math.NaN()
		return
	}
	if res.outcome != finding.Pass {
		return
	}
	b.stretch(r, role, res)
	for _, a := range w.Space.Assumptions(w.Trace) {
		if a.Direction == stage.Optimistic {
			res.outcome = finding.Marginal
			res.notes = append(res.notes, fmt.Sprintf("satisfied only under an optimistic assumption: %s: %s", stage.Relative(a.Field), a.Reason))
		}
	}
}

// Judge gives the margin of a check, of value and limit at six digits, and its outcome by the numbers alone; OPEN where they cannot be had, or
// where complete tells that something was missing.
func (r *Rule) Judge(c Check, complete bool) (margin float64, o finding.Outcome) {
	margin = r.margin(c)
	switch {
	case margin != margin || !complete:
		return margin, finding.Open
	case margin < 0:
		o = finding.Fail
	case r.guardSlack(c) < 0:
		o = finding.Marginal
	default:
		o = finding.Pass
	}
	if c.Floor > o && c.Floor != finding.Open {
		o = c.Floor
	}
	return margin, o
}

// stretch makes a pass MARGINAL where it holds only within the spread that the policy puts for ends nobody gave.
func (b *Bench) stretch(r *Rule, role string, res *result) {
	w := &res.worst
	changes, fields := w.Space.Stretch(w.Draw, w.Trace)
	if len(changes) == 0 {
		return
	}
	breaks := func(changes ...corner.Change) (yes bool) {
		w.Space.Try(w.Draw, func(d *corner.Draw) {
			var c Check
			corner.Evaluate(d, func(d *corner.Draw) float64 {
				c = r.Check(circuit.Of(d), role)
				return 0
			})
			yes = !(r.margin(c) >= 0 && r.guardSlack(c) >= 0) || w.Space.Frugal && c.Floor >= finding.Marginal && c.Floor != finding.Open
		}, changes...)
		return yes
	}
	if !breaks(changes...) {
		return
	}
	var alone, all []string // those that break the guard each alone are named, all together where none does
	for i, f := range fields {
		all = append(all, stage.Relative(f))
		if breaks(changes[i]) {
			alone = append(alone, stage.Relative(f))
		}
	}
	if len(alone) > 0 {
		all = alone
	}
	res.outcome = finding.Marginal
	res.notes = append(res.notes, "satisfied only within the policy's spread of "+strings.Join(all, ", ")+", of which no such end is given")
}

// refine polishes the worst draw, so that the swings are known and the corner is checked.
func (b *Bench) refine(r *Rule, role string, res *result) {
	if res.refined || !res.numbered() {
		return
	}
	res.refined = true
	if res.rule != nil {
		r = res.rule
	}
	if s := res.worst.Space; s.Dear && res.outcome == finding.Pass && !b.near(r, res) { // it passes whatever polishing finds
		res.worst.Swings = res.worst.Effects()
		return
	}
	before := *res
	res.worst.Space.Polish(&res.worst, r.function(role))
	b.decide(r, role, res)
	if res.outcome < before.outcome { // a guard that moves with the draw is broken elsewhere than where the margin is smallest
		swings := res.worst.Swings
		*res = before
		res.worst.Swings = swings
	}
}

// significant rounds to six significant digits, as results are before they are compared.
func significant(v float64) float64 {
	if v == 0 || v != v || math.IsInf(v, 0) {
		return v
	}
	scale := math.Pow10(5 - int(math.Floor(math.Log10(math.Abs(v)))))
	if math.IsInf(scale, 0) || scale == 0 {
		return v
	}
	return math.Round(v*scale) / scale
}
