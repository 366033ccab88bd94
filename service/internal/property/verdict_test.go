package property

import (
	"encoding/json"
	"fmt"
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
	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

// place is one rule, role and operating point: what is judged once.
type place struct{ rule, role, point string }

func (p place) String() string { return fmt.Sprintf("%s %s at %q", p.rule, p.role, p.point) }

// verdict is what a rule found at a place.
type verdict struct {
	outcome      finding.Outcome
	value, limit float64
	margin       float64 // absolute; NaN where infinite
	binding      bool    // this place decided the finding
	interior     bool    // an input of the binding corner stands inside its range
	text         string
}

// order is the number by which findings are ordered: the margin as a share of the limit.
func (v verdict) order() float64 {
	switch {
	case v.limit != v.limit || v.margin == 0:
		return v.margin
	case v.limit == 0:
		return math.Inf(1) * v.margin
	}
	return v.margin / math.Abs(v.limit)
}

// judged is a bench with the verdicts of rules on it.
type judged struct {
	bench   *rule.Bench
	at      map[place]verdict
	binding map[key]verdict
}

// judge runs rules on a bound request.
func judge(t testing.TB, r *calc.Request, rules []*rule.Rule) *judged {
	policy := r.Policy
	r.Stage.Complete(&policy)
	out := &judged{bench: rule.NewBench(r.Stage, &policy), at: map[place]verdict{}, binding: map[key]verdict{}}
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
		for k := range j.bench.Points { // a stagewide rule that does not apply names no point: it is the one not listed
			name := j.bench.Points[k].Name()
			if point == "" && !slices.ContainsFunc(f.Points, func(p finding.PointResult) bool { return p.OperatingPoint == name }) {
				point = name
			}
		}
		v := verdict{outcome: f.Outcome, value: f.Value.Value, limit: f.Limit.Value, margin: f.Margin.Absolute.Value, binding: true, text: f.Message}
		for _, c := range f.Corner.Settings {
			v.interior = v.interior || c.Bound == finding.Interior
		}
		j.at[place{f.Rule, f.Role, point}], j.binding[key{f.Rule, f.Role, f.Mode}] = v, v
		for _, p := range f.Points {
			j.at[place{f.Rule, f.Role, p.OperatingPoint}] = verdict{outcome: p.Outcome, value: p.Value.Value, limit: p.Limit.Value,
				margin: p.Margin.Absolute.Value}
		}
	}
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
	for i := 0; i < len(variants); i += every {
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

// searched are the rules that search for a worst draw; the others judge what these found.
func searched() []*rule.Rule {
	return slices.DeleteFunc(catalog.All(), func(r *rule.Rule) bool { return r.Tally != nil || r.OnlySimulated })
}

// rolesOf are the roles in which a rule judges; one without a name where it has none.
func rolesOf(rl *rule.Rule) []string {
	if len(rl.Roles) == 0 {
		return []string{""}
	}
	return rl.Roles
}
