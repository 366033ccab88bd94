package rule

import (
	"fmt"
	"math"
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// Bench holds a stage with the spaces of its worst-case sets; rules and results are run on it.
type Bench struct {
	Stage  *stage.Stage
	Policy *stage.Policy
	Points []Point
	// Interrupted, where set, tells that the caller no longer waits.
	Interrupted func() bool

	assumed []stage.Assumption
}

// Point is one operating point with its spaces. The stage without any operating point has one Point without Operating.
type Point struct {
	Operating *stage.OperatingPoint
	Spaces    []*corner.Space
}

// Name of the operating point.
func (p *Point) Name() string {
	if p.Operating == nil {
		return ""
	}
	return p.Operating.Name
}

// Mode is the kind of mode.
func (p *Point) Mode() string {
	if p.Operating == nil {
		return ""
	}
	return p.Operating.Mode()
}

// NewBench forms the spaces of a complete stage.
func NewBench(s *stage.Stage, p *stage.Policy) *Bench {
	b := &Bench{Stage: s, Policy: p}
	for i := range s.OperatingPoints.Items {
		op := &s.OperatingPoints.Items[i]
		pt := Point{Operating: op}
		for _, set := range corner.Sets(op) {
			pt.Spaces = append(pt.Spaces, corner.NewSpace(s, p, op, set))
		}
		b.Points = append(b.Points, pt)
	}
	if len(b.Points) == 0 {
		set := corner.Set{Name: "room", Junction: stage.ReferenceTemperature, Ambient: stage.ReferenceTemperature}
		b.Points = []Point{{Spaces: []*corner.Space{corner.NewSpace(s, p, nil, set)}}}
	}
	return b
}

// Stopped tells whether the caller no longer waits; what is returned from then on is not used.
func (b *Bench) Stopped() bool { return b.Interrupted != nil && b.Interrupted() }

// Run gives the findings of one rule: one for each role and kind of mode.
func (b *Bench) Run(r *Rule) []finding.Finding {
	roles := r.Roles
	if len(roles) == 0 {
		roles = []string{""}
	}
	var out []finding.Finding
	for _, role := range roles {
		for _, group := range b.groups(r) {
			out = append(out, b.judge(r, role, group.mode, group.points))
		}
	}
	return out
}

type group struct {
	mode   string
	points []*Point
}

// groups sorts the operating points by kind of mode, in the order of their first appearance.
func (b *Bench) groups(r *Rule) []group {
	var out []group
	for i := range b.Points {
		p := &b.Points[i]
		mode := p.Mode()
		if r.Stagewide {
			mode = ""
		}
		k := slices.IndexFunc(out, func(g group) bool { return g.mode == mode })
		if k < 0 {
			out = append(out, group{mode: mode})
			k = len(out) - 1
		}
		out[k].points = append(out[k].points, p)
	}
	return out
}

// result is what a rule found at one operating point.
type result struct {
	point   *Point
	outcome finding.Outcome
	worst   corner.Worst
	check   Check
	notes   []string
	margin  float64
	reason  string // why not applicable
	typical float64
}

func (b *Bench) judge(r *Rule, role, mode string, points []*Point) finding.Finding {
	var all []result
	for _, p := range points {
		all = append(all, b.at(r, role, p))
	}
	for i := range all {
		if w := &all[i].worst; w.Trace != nil {
			b.note(w.Space, w.Trace)
		}
	}
	best := 0
	for i := 1; i < len(all); i++ {
		if worse(&all[i], &all[best]) {
			best = i
		}
	}
	if w := &all[best]; w.outcome != finding.NotApplicable && w.outcome != finding.Open {
		b.refine(r, role, w)
		for i := range all { // refining may have turned the order
			if i != best && worse(&all[i], w) && all[i].outcome != finding.Open {
				b.refine(r, role, &all[i])
				if worse(&all[i], &all[best]) {
					best = i
				}
			}
		}
	}
	return b.report(r, role, mode, all, best)
}

// worse orders results: by outcome, then by the margin's share of the limit.
func worse(a, b *result) bool {
	if a.outcome != b.outcome {
		return a.outcome > b.outcome
	}
	return relative(a.margin, a.check.Limit) < relative(b.margin, b.check.Limit)
}

func relative(margin, limit float64) float64 {
	if limit == 0 || math.IsInf(limit, 0) || limit != limit {
		return margin
	}
	return margin / math.Abs(limit)
}

// margin of a check: distance to the limit, negative beyond it.
func (r *Rule) margin(c Check) float64 {
	v, l := significant(c.Value), significant(c.Limit)
	if r.Sense == AtMost {
		return minus(l, v)
	}
	return minus(v, l)
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
	return func(d *corner.Draw) float64 { return r.margin(r.Check(circuit.Of(d), role)) }
}

// at searches the worst over the sets of one operating point.
func (b *Bench) at(r *Rule, role string, p *Point) result {
	res := result{point: p, margin: math.NaN()}
	if reason := r.Inapplicable(b.Stage, p.Operating, role); reason != "" {
		res.outcome, res.reason = finding.NotApplicable, reason
		return res
	}
	f := r.function(role)
	first := true
	if b.Stopped() {
		res.outcome = finding.Open
		return res
	}
	for _, w := range corner.SearchSets(p.Spaces, f) {
		next := result{point: p, worst: w, typical: w.Typical}
		b.decide(r, role, &next)
		if first || worse(&next, &res) {
			res, first = next, false
		}
	}
	return res
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
	c := &res.check
	res.notes = nil
	w.Trace.Add(t)
	res.margin = r.margin(*c)
	switch {
	case res.margin != res.margin || !t.Complete():
		res.outcome = finding.Open
		return
	case res.margin < 0:
		res.outcome = finding.Fail
	case r.guardSlack(*c) < 0:
		res.outcome = finding.Marginal
	default:
		res.outcome = finding.Pass
	}
	if c.Floor > res.outcome && c.Floor != finding.Open {
		res.outcome = c.Floor
	}
	if res.outcome != finding.Pass {
		return
	}
	if c.Pending != "" {
		res.outcome = finding.Open
		return
	}
	for _, a := range w.Space.Assumptions(w.Trace) {
		if a.Direction == stage.Optimistic {
			res.outcome = finding.Marginal
			res.notes = append(res.notes, fmt.Sprintf("satisfied only under an optimistic assumption: %s: %s", stage.Relative(a.Field), a.Reason))
		}
	}
}

// refine polishes the worst draw, so that the swings are known and the corner is checked.
func (b *Bench) refine(r *Rule, role string, res *result) {
	f := r.function(role)
	res.worst.Space.Polish(&res.worst, f)
	b.decide(r, role, res)
}

// significant rounds to six significant digits, as results are before they are compared.
func significant(v float64) float64 {
	if v == 0 || v != v || math.IsInf(v, 0) {
		return v
	}
	scale := math.Pow(10, 5-math.Floor(math.Log10(math.Abs(v))))
	if math.IsInf(scale, 0) || scale == 0 {
		return v
	}
	return math.Round(v*scale) / scale
}
