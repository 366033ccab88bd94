package study

import (
	"context"
	"math"
	"slices"
	"sync"
	"sync/atomic"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var missing = float32(math.NaN())

// Blocks of draws.
const (
	firstBlock  = 16 // draws until the first progress, at most: some milliseconds
	firstVisits = 48 // draws times operating points until then, at most
	mostUnit    = 8  // draws that one processor takes at once, at most
	units       = 16 // in which a block is shared out, at least
	blocks      = 20 // of the rest
)

// run is a study under way.
type run struct {
	stage        *stage.Stage
	policy       *stage.Policy
	seed         uint32
	distribution Distribution
	points       []*stage.OperatingPoint
	variates     []variate
	columns      []column
	byPoint      [][]int           // columns of each point
	worst        []finding.Outcome // of each draw
	orders       []order           // of each percentile of all draws
	stopped      func() bool
}

// Run draws and evaluates. It tells progress after fixed numbers of draws, the first time after a few; an error of progress ends the study, and so
// does the end of the context. Neither the number of processors nor the order of work enters the report.
func Run(ctx context.Context, r Request, progress func(Progress) error) (Report, error) {
	rules := slices.DeleteFunc(catalog.All(), func(rl *rule.Rule) bool {
		return rl.Tally != nil || rl.OnlySimulated || len(r.Families) > 0 && !slices.Contains(r.Families, rl.Family())
	})
	return study(ctx, r, rules, progress)
}

// study is Run for some rules.
func study(ctx context.Context, r Request, rules []*rule.Rule, progress func(Progress) error) (Report, error) {
	policy := r.Policy
	r.Stage.Complete(&policy)
	s := &run{stage: r.Stage, policy: &policy, seed: r.Seed, distribution: r.Distribution, variates: variates(r.Stage),
		worst: make([]finding.Outcome, r.Draws), stopped: func() bool { return ctx.Err() != nil }}
	for _, p := range Percents() {
		s.orders = append(s.orders, orderOf(r.Draws, p/100))
	}
	for i := range r.Stage.OperatingPoints.Items {
		s.points = append(s.points, &r.Stage.OperatingPoints.Items[i])
	}
	if len(s.points) == 0 {
		s.points = append(s.points, nil)
	}
	s.columns = columns(r.Stage, rules, s.points, r.Draws)
	s.byPoint = make([][]int, len(s.points))
	for k := range s.columns {
		s.byPoint[s.columns[k].point] = append(s.byPoint[s.columns[k].point], k)
	}
	out := Report{StageID: r.Stage.ID, Draws: r.Draws, Seed: r.Seed, Distribution: r.Distribution}
	workers, err := s.draw(ctx, progress)
	if err != nil {
		return out, err
	}
	bench := rule.NewBench(r.Stage, &policy)
	bench.EveryPoint, bench.Interrupted = true, s.stopped
	findings, _ := bench.Run(rules...)
	for _, w := range workers {
		for _, a := range w.made {
			bench.Adopt(a)
		}
	}
	if err := ctx.Err(); err != nil {
		return out, err
	}
	out.Assumptions = bench.Assumptions()
	out.Results = s.results(workers, findings)
	out.Overall = s.overall()
	out.Internal = broken(s.columns, workers)
	return out, ctx.Err()
}

// draw evaluates all draws in blocks.
func (s *run) draw(ctx context.Context, progress func(Progress) error) ([]*worker, error) {
	pool := newPool(s)
	draws := len(s.worst)
	first := max(2, min(firstBlock, firstVisits/len(s.points)))
	step := max(firstBlock, (draws+blocks-1)/blocks)
	p := Progress{Draws: draws}
	for from, to := 0, min(first, draws); from < draws; from, to = to, min(draws, (to/step+1)*step) {
		var halted atomic.Bool
		unit := max(1, min(mostUnit, (to-from)/units))
		sideBySide((to-from+unit-1)/unit, func(i int) {
			w := pool.take()
			defer pool.give(w)
			for k := from + i*unit; k < min(from+(i+1)*unit, to); k++ {
				var ok bool
				if s.worst[k], ok = w.evaluate(k); !ok {
					halted.Store(true)
					return
				}
			}
		})
		if halted.Load() || ctx.Err() != nil {
			return nil, context.Cause(ctx)
		}
		for _, o := range s.worst[from:to] {
			if o <= finding.Marginal {
				p.Within++
			}
		}
		p.Done = to
		if err := progress(p); err != nil {
			return nil, err
		}
	}
	return pool.all, nil
}

// sideBySide is rule.SideBySide, but a panic, which is a mistake of ours, comes out where it was called: whoever called us may recover from it there.
func sideBySide(n int, f func(i int)) {
	var mu sync.Mutex
	var broken any
	rule.SideBySide(n, func(i int) {
		defer func() {
			if p := recover(); p != nil {
				mu.Lock()
				defer mu.Unlock()
				broken = p
			}
		}()
		f(i)
	})
	if broken != nil {
		panic(broken)
	}
}

// pool holds the workers that nobody uses, of which there are never more than processors.
type pool struct {
	run  *run
	mu   sync.Mutex
	free []*worker
	all  []*worker
}

func newPool(s *run) *pool { return &pool{run: s} }

func (p *pool) take() *worker {
	p.mu.Lock()
	defer p.mu.Unlock()
	if n := len(p.free); n > 0 {
		w := p.free[n-1]
		p.free = p.free[:n-1]
		return w
	}
	w := p.run.newWorker()
	p.all = append(p.all, w)
	return w
}

func (p *pool) give(w *worker) {
	p.mu.Lock()
	defer p.mu.Unlock()
	p.free = append(p.free, w)
}

// overall counts the draws by their worst outcome.
func (s *run) overall() Overall {
	var out Overall
	ok := 0
	for _, o := range s.worst {
		switch {
		case o == finding.Fail:
			out.Failed++
		case o == finding.Open:
			out.Open++
		default:
			ok++
		}
	}
	if len(s.columns) == 0 { // nothing was judged
		out.Yield = NewShare(0, 0)
		return out
	}
	out.Yield = NewShare(ok, len(s.worst))
	return out
}

// broken counts the rules of which an evaluation panicked.
func broken(columns []column, workers []*worker) int {
	var ids []string
	for k := range columns {
		for _, w := range workers {
			if id := columns[k].rule.ID; w.panicked[k] && !slices.Contains(ids, id) {
				ids = append(ids, id)
			}
		}
	}
	return len(ids)
}

// site is the place of a result.
type site struct{ rule, role, point string }

// extremes are the results of a worst-case review by place.
func extremes(findings []finding.Finding) map[site]*Extreme {
	out := map[site]*Extreme{}
	for i := range findings {
		f := &findings[i]
		out[site{f.Rule, f.Role, f.OperatingPoint}] = &Extreme{OperatingPoint: f.OperatingPoint, Outcome: f.Outcome, Value: f.Value, Limit: f.Limit,
			Margin: f.Margin}
		for k := range f.Points {
			out[site{f.Rule, f.Role, f.Points[k].OperatingPoint}] = &f.Points[k]
		}
	}
	return out
}

// name is that of an operating point, empty without one.
func name(op *stage.OperatingPoint) string {
	if op == nil {
		return ""
	}
	return op.Name
}
