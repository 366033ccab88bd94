package rule

import (
	"runtime"
	"slices"
	"sync"
	"sync/atomic"

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
		if r.Tally != nil {
			continue
		}
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
	for _, r := range rules {
		if r.Tally != nil {
			findings = append(findings, b.tally(r, findings))
		}
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
