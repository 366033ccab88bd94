package property

import (
	"encoding/json"
	"fmt"
	"maps"
	"math"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc"
	"floatrail/calc/catalog"
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

// place is one rule, role and operating point: what is judged once.
type place struct{ rule, role, point string }

func (p place) String() string { return fmt.Sprintf("%s %s at %q", p.rule, p.role, p.point) }

// verdict is what a rule found at a place.
type verdict struct {
	outcome       finding.Outcome
	value, limit  float64
	margin        float64 // absolute
	relative      float64
	binding       bool // this place decided the finding
	missing, text string
}

// judged is a bench with the verdicts of rules on it.
type judged struct {
	bench *rule.Bench
	at    map[place]verdict
}

// judge runs rules on a bound request.
func judge(t testing.TB, r *calc.Request, rules []*rule.Rule) *judged {
	policy := r.Policy
	r.Stage.Complete(&policy)
	out := &judged{bench: rule.NewBench(r.Stage, &policy), at: map[place]verdict{}}
	for _, rl := range rules {
		out.run(t, rl)
	}
	return out
}

// run runs one rule; a panic fails the test.
func (j *judged) run(t testing.TB, rl *rule.Rule) {
	findings, broken := j.bench.Run(rl)
	if broken > 0 {
		t.Errorf("%s panics", rl.ID)
	}
	for _, f := range findings {
		point := f.OperatingPoint
		if point == "" { // a stagewide rule that does not apply names no point
			point = j.bench.Points[0].Name()
		}
		j.at[place{f.Rule, f.Role, point}] = verdict{f.Outcome, f.Value.Value, f.Limit.Value, f.Margin.Absolute.Value, f.Margin.Relative, true,
			fmt.Sprint(f.Missing), f.Message}
		for _, p := range f.Points {
			j.at[place{f.Rule, f.Role, p.OperatingPoint}] = verdict{outcome: p.Outcome, value: p.Value.Value, limit: p.Limit.Value,
				margin: p.Margin.Absolute.Value, relative: p.Margin.Relative}
		}
	}
}

// places lists the places in a fixed order.
func (j *judged) places() []place {
	return slices.SortedFunc(maps.Keys(j.at), func(a, b place) int {
		return slices.Compare([]string{a.rule, a.role, a.point}, []string{b.rule, b.role, b.point})
	})
}

// variant is a changed request with the name of the change.
type variant struct {
	name string
	tree any
}

// eachBench binds variants side by side and calls f with the bench of each; requests that are refused have none. It returns how many have.
// f may be called from several goroutines at once.
func eachBench(t *testing.T, variants []variant, f func(v *variant, j *judged)) (answered int) {
	t.Helper()
	var count atomic.Int64
	next := make(chan *variant)
	var wait sync.WaitGroup
	for range runtime.GOMAXPROCS(0) {
		wait.Go(func() {
			for v := range next {
				r, err := request(v.tree)
				if err != nil {
					t.Errorf("%s: %v", v.name, err)
				}
				if r != nil {
					count.Add(1)
					f(v, judge(t, r, nil))
				}
			}
		})
	}
	for i := range variants {
		next <- &variants[i]
	}
	close(next)
	wait.Wait()
	return int(count.Load())
}

// request binds a tree; nil without an error where it is refused.
func request(tree any) (*calc.Request, error) {
	raw, err := json.Marshal(tree)
	if err != nil {
		return nil, err
	}
	req := &pb.ReviewStageRequest{}
	if err := protojson.Unmarshal(raw, req); err != nil {
		return nil, err
	}
	r, _, faults := binder().ReviewStage(req)
	if len(faults) > 0 {
		return nil, nil
	}
	return &r, nil
}

// readers tells, for each input by its path, which rules read it anywhere in their searches.
func readers(j *judged) map[string]map[string]bool {
	out := map[string]map[string]bool{}
	for _, rl := range catalog.All() {
		eachSearch(j.bench, rl, func(_ *rule.Point, s *corner.Space, role string) {
			w := s.Search(rl.Worst(role))
			_, t := corner.Evaluate(w.Draw, func(d *corner.Draw) float64 { return rl.Check(circuit.Of(d), role).Value })
			w.Trace.Add(t)
			for _, q := range s.Inputs(w.Trace) {
				if out[q.Field] == nil {
					out[q.Field] = map[string]bool{}
				}
				out[q.Field][rl.ID] = true
			}
		})
	}
	return out
}

// eachSearch calls f for every space in which a rule is searched.
func eachSearch(b *rule.Bench, rl *rule.Rule, f func(p *rule.Point, s *corner.Space, role string)) {
	for _, role := range rolesOf(rl) {
		for i := range b.Points {
			p := &b.Points[i]
			if rl.Inapplicable(b.Stage, p.Operating, role) != "" {
				continue
			}
			for _, s := range p.Spaces {
				f(p, s, role)
			}
		}
	}
}

// rolesOf are the roles in which a rule judges; one without a name where it has none.
func rolesOf(rl *rule.Rule) []string {
	if len(rl.Roles) == 0 {
		return []string{""}
	}
	return rl.Roles
}

// noise is how far two numbers of six significant digits may differ by rounding alone.
func noise(values ...float64) float64 {
	most := 0.0
	for _, v := range values {
		if v == v && !math.IsInf(v, 0) {
			most = math.Max(most, math.Abs(v))
		}
	}
	return 1e-6 * most
}
