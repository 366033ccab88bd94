package rule

import (
	"fmt"
	"math"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"

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
	// EveryPoint asks for the worst draws of all operating points as exactly as for those that bind.
	EveryPoint bool

	mu      sync.Mutex
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

// Run gives the findings of rules, in their order: one for each role and kind of mode. Operating points are worked on side by side, each
// with its spaces by one goroutine, so that the answer does not depend on how they are scheduled. A panic leaves the rule open and the others
// intact; broken counts such rules.
func (b *Bench) Run(rules ...*Rule) (findings []finding.Finding, broken int) {
	var jobs []*job
	for _, r := range rules {
		roles := r.Roles
		if len(roles) == 0 {
			roles = []string{""}
		}
		for _, role := range roles {
			for _, g := range b.groups(r) {
				jobs = append(jobs, &job{rule: r, role: role, group: g, results: make([]result, len(g.points))})
			}
		}
	}
	b.eachPoint(jobs, func(j *job, k int) {
		j.results[k] = b.at(j.rule, j.role, &b.Points[j.group.points[k]])
		if b.EveryPoint {
			b.refine(j.rule, j.role, &j.results[k])
		}
	})
	for _, j := range jobs {
		for i := range j.results {
			if w := &j.results[i].worst; w.Trace != nil {
				b.note(w.Space, w.Trace)
			}
		}
	}
	binding := func(f func(*job)) { b.eachSpace(jobs, f) }
	binding(func(j *job) { b.refine(j.rule, j.role, &j.results[j.best]) })
	for _, j := range jobs {
		b.guarded(j, func() { b.settle(j) })
	}
	binding(func(j *job) { j.finding = b.report(j.rule, j.role, j.group.mode, j.results, j.best) })
	for _, j := range jobs {
		if j.panicked {
			if broken == 0 || findings[len(findings)-1].Rule != j.rule.ID {
				findings = append(findings, b.Broken(j.rule))
				broken++
			}
			continue
		}
		findings = append(findings, j.finding)
	}
	return findings, broken
}

// job is one finding under way.
type job struct {
	rule     *Rule
	role     string
	group    group
	results  []result // of the points of the group
	best     int      // index of the worst result
	finding  finding.Finding
	panicked bool
}

// worst finds the worst result and keeps its index.
func (j *job) worst() *result {
	j.best = 0
	for i := range j.results {
		if worse(&j.results[i], &j.results[j.best]) {
			j.best = i
		}
	}
	return &j.results[j.best]
}

// settle refines what is worse than the refined worst result; refining may have turned the order.
func (b *Bench) settle(j *job) {
	for range j.results {
		w := j.worst()
		if w.refined || !w.numbered() {
			return
		}
		b.refine(j.rule, j.role, w)
	}
}

// eachPoint calls f for every job and point of its group, side by side for different points.
func (b *Bench) eachPoint(jobs []*job, f func(j *job, k int)) {
	b.SideBySide(func(i int) {
		for _, j := range jobs {
			if b.Stopped() {
				return
			}
			if k := slices.Index(j.group.points, i); k >= 0 {
				b.guarded(j, func() { f(j, k) })
			}
		}
	})
}

// eachSpace calls f for every job, side by side for jobs whose worst results lie in different spaces. Which result is the worst is found
// before any of them is worked on.
func (b *Bench) eachSpace(jobs []*job, f func(*job)) {
	var spaces []*corner.Space
	groups := map[*corner.Space][]*job{}
	for _, j := range jobs {
		s := j.worst().worst.Space // nil where nothing was searched
		if groups[s] == nil {
			spaces = append(spaces, s)
		}
		groups[s] = append(groups[s], j)
	}
	sideBySide(len(spaces), func(i int) {
		for _, j := range groups[spaces[i]] {
			if b.Stopped() {
				return
			}
			b.guarded(j, func() { f(j) })
		}
	})
}

// guarded runs f; a panic is kept in the job.
func (b *Bench) guarded(j *job, f func()) {
	defer func() {
		if recover() != nil {
			b.mu.Lock()
			j.panicked = true
			b.mu.Unlock()
		}
	}()
	f()
}

// SideBySide calls f with the index of every operating point, as many at once as there are processors.
func (b *Bench) SideBySide(f func(point int)) { sideBySide(len(b.Points), f) }

// sideBySide calls f with the numbers below n.
func sideBySide(n int, f func(i int)) {
	var wg sync.WaitGroup
	var next atomic.Int64
	for range min(runtime.GOMAXPROCS(0), n) {
		wg.Go(func() {
			for i := int(next.Add(1)) - 1; i < n; i = int(next.Add(1)) - 1 {
				f(i)
			}
		})
	}
	wg.Wait()
}

// group is the operating points of one kind of mode, by their index.
type group struct {
	mode   string
	points []int
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
		out[k].points = append(out[k].points, i)
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
	refined bool
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

// at searches the worst over the sets of one operating point.
func (b *Bench) at(r *Rule, role string, p *Point) result {
	res := result{point: p, margin: math.NaN()}
	if reason := r.Inapplicable(b.Stage, p.Operating, role); reason != "" {
		res.outcome, res.reason = finding.NotApplicable, reason
		return res
	}
	first := true
	if b.Stopped() {
		res.outcome = finding.Open
		return res
	}
	for _, f := range r.Searches(role) {
		for _, w := range corner.SearchSets(p.Spaces, f) {
			next := b.found(r, role, p, w)
			if b.near(r, &next) { // with directions of its own as well, and polished
				b.refine(r, role, &next)
				if own := b.found(r, role, p, w.Space.Search(f)); own.worst.Value != w.Value {
					b.refine(r, role, &own)
					if worse(&own, &next) {
						next = own
					}
				}
			}
			if first || worse(&next, &res) {
				res, first = next, false
			}
		}
	}
	return res
}

// found is the result of a search.
func (b *Bench) found(r *Rule, role string, p *Point, w corner.Worst) result {
	res := result{point: p, worst: w}
	b.decide(r, role, &res)
	if len(r.Alternatives) > 0 && w.Value == w.Value {
		res.worst.Value, _ = corner.Evaluate(w.Draw, r.function(role))
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
	return !(slack > nearShare*(res.worst.Typical-res.worst.Value))
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
	if w.Partial && res.outcome != finding.Fail { // elsewhere it may be worse; a failure is one wherever it stands
		res.outcome, res.margin = finding.Open, math.NaN()
		return
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
	if res.refined || !res.numbered() {
		return
	}
	res.refined = true
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
