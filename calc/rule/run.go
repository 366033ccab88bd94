package rule

import (
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

	simulated bool
	counts    circuit.Counts
	mu        sync.Mutex
	assumed   []stage.Assumption
}

// Point is one operating point with its spaces. What asks about switching events has spaces of its own, so that both can be worked on side by
// side, and what simulates them again others. The stage without any operating point has one Point without Operating.
type Point struct {
	Operating *stage.OperatingPoint
	Spaces    []*corner.Space
	Events    []*corner.Space // of the same sets
	Simulated []*corner.Space // of the same sets; none where nothing is simulated
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
			space := corner.NewSpace(s, p, op, set)
			space.Dear = op.Sinusoidal != nil || op.SixStep != nil || op.Burst != nil // many periods behind each number
			pt.Spaces, pt.Events = append(pt.Spaces, space), append(pt.Events, corner.NewSpace(s, p, op, set))
		}
		b.Points = append(b.Points, pt)
	}
	if len(b.Points) == 0 {
		set := corner.Set{Name: "room", Junction: stage.ReferenceTemperature, Ambient: stage.ReferenceTemperature}
		one := func() []*corner.Space { return []*corner.Space{corner.NewSpace(s, p, nil, set)} }
		b.Points = []Point{{Spaces: one(), Events: one()}}
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
		if r.Tally != nil || r.OnlySimulated && !b.simulated {
			continue
		}
		roles := r.Roles
		if len(roles) == 0 {
			roles = []string{""}
		}
		for _, role := range roles {
			for _, g := range b.groups(r) {
				jobs = append(jobs, &job{rule: r, role: role, group: g, found: make([][]result, len(g.points)), results: make([]result, len(g.points))})
			}
		}
	}
	b.survey()
	b.eachPoint(jobs, func(j *job, k int) { j.found[k] = b.at(j.rule, j.role, &b.Points[j.group.points[k]]) })
	b.eachFound(jobs, func(j *job, res *result) { b.closer(j.rule, j.role, res) })
	for _, j := range jobs {
		j.reduce()
	}
	if b.EveryPoint {
		b.eachFound(jobs, func(j *job, res *result) { b.refine(j.rule, j.role, res) })
		for _, j := range jobs {
			j.reduce()
		}
	}
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
	b.adopt(jobs)
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
	found    [][]result // of each point, by set and alternative
	results  []result   // the worst of each point
	best     int        // index of the worst result
	finding  finding.Finding
	twin     *corner.Space // in which the worst result is worked on where its space is frugal
	home     *corner.Space
	panicked bool
}

// reduce takes the worst of what was found at each point.
func (j *job) reduce() {
	for k, found := range j.found {
		for i := range found {
			if i == 0 || worse(&found[i], &j.results[k]) {
				j.results[k] = found[i]
			}
		}
		j.found[k] = j.found[k][:0]
		if len(found) > 0 {
			j.found[k] = append(j.found[k], j.results[k])
		}
	}
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

// eachPoint calls f for every job and point of its group, side by side for different points, and for rules about events and others.
func (b *Bench) eachPoint(jobs []*job, f func(j *job, k int)) {
	SideBySide(lanes*len(b.Points), func(i int) { // what simulates takes most and comes first
		for _, j := range jobs {
			if b.Stopped() {
				return
			}
			if k := slices.Index(j.group.points, i%len(b.Points)); k >= 0 && b.lane(j.rule, j.role) == lanes-1-i/len(b.Points) {
				b.guarded(j, func() { f(j, k) })
			}
		}
	})
}

// eachSpace calls f for every job, side by side for jobs whose worst results lie in different spaces. Which result is the worst is found
// before any of them is worked on.
func (b *Bench) eachSpace(jobs []*job, f func(*job)) {
	var w work
	for _, j := range jobs {
		res := j.worst()
		if s := res.worst.Space; s != nil && s.Frugal && s != j.twin && res.worst.Draw != nil { // its simulations take long enough to be shared out
			b.adopt([]*job{j})
			j.twin, j.home = s.Twin(b.simulation()), s
			res.worst = res.worst.On(j.twin)
		}
		w.add(res.worst.Space, j, func() { f(j) })
	}
	b.do(&w)
}

// eachFound calls f for everything found, side by side where it lies in different spaces.
func (b *Bench) eachFound(jobs []*job, f func(j *job, res *result)) {
	var w work
	for _, j := range jobs {
		for k := range j.found {
			for i := range j.found[k] {
				res := &j.found[k][i]
				w.add(res.worst.Space, j, func() { f(j, res) })
			}
		}
	}
	b.do(&w)
}

// work is what is to be done in each space, in the order in which it was added.
type work struct {
	spaces []*corner.Space // nil for what was not searched
	tasks  map[*corner.Space][]task
}

type task struct {
	job *job
	do  func()
}

func (w *work) add(s *corner.Space, j *job, do func()) {
	if w.tasks == nil {
		w.tasks = map[*corner.Space][]task{}
	}
	if w.tasks[s] == nil {
		w.spaces = append(w.spaces, s)
	}
	w.tasks[s] = append(w.tasks[s], task{j, do})
}

// do carries out work, side by side for different spaces.
func (b *Bench) do(w *work) {
	SideBySide(len(w.spaces), func(i int) {
		for _, t := range w.tasks[w.spaces[i]] {
			if b.Stopped() {
				return
			}
			b.guarded(t.job, t.do)
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

// SideBySide calls f with the numbers below n, as many at once as there are processors.
func SideBySide(n int, f func(i int)) {
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
