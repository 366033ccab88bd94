package property

import (
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// drawn makes a draw of a space from a seeded generator: every input at one of its ends or anywhere between them.
func drawn(g *rand.Rand, s *corner.Space, around *corner.Draw, share float64) *corner.Draw {
	var changes []corner.Change
	for _, q := range s.Stage.Inputs()[1:] {
		r := s.Range(q)
		if !(r.Min < r.Max) || g.Float64() >= share {
			continue
		}
		v := r.Min + g.Float64()*(r.Max-r.Min)
		switch g.IntN(5) {
		case 0, 1:
			v = r.Min
		case 2, 3:
			v = r.Max
		}
		changes = append(changes, corner.Change{ID: q.ID, Value: v})
	}
	return s.With(around, changes...)
}

// usual is a draw of every input anywhere in its range.
func usual(g *rand.Rand, s *corner.Space) *corner.Draw {
	var changes []corner.Change
	for _, q := range s.Stage.Inputs()[1:] {
		if r := s.Range(q); r.Min < r.Max {
			changes = append(changes, corner.Change{ID: q.ID, Value: r.Min + g.Float64()*(r.Max-r.Min)})
		}
	}
	return s.With(s.Typical(), changes...)
}

var _ = stage.Exact

// TestNoDrawIsWorseThanReported draws stages inside their ranges: anywhere, mostly at ends, and near the reported worst. No draw may be
// worse than the reported worst of its operating point by more than the rounding to six digits.
func TestNoDrawIsWorseThanReported(t *testing.T) {
	const everywhere, near = 2000, 24
	for _, s := range subjects(t) {
		t.Run(s.name, func(t *testing.T) {
			j := judge(t, bind(t, s.tree), catalog.All())
			g := rand.New(rand.NewPCG(7, 11))
			spaces := 0
			for i := range j.bench.Points {
				spaces += len(j.bench.Points[i].Spaces)
			}
			excess := map[place]float64{}
			tried := 0
			try := func(rl *rule.Rule, p place, d *corner.Draw) {
				is := j.at[p]
				if is.outcome == finding.Open && is.margin != is.margin || is.outcome == finding.NotApplicable {
					return
				}
				tried++
				m, tr := corner.Evaluate(d, rl.Worst(p.role))
				if !tr.Complete() || m != m {
					t.Errorf("%s is evaluated but not at a draw inside the ranges", p)
					return
				}
				if c := circuit.Of(d); is.outcome == finding.Pass && !rl.Holds(c, p.role) {
					t.Errorf("%s passes, but a draw does not hold its guard: %s", p, is.text)
				}
				if rl.Proxy != nil {
					return
				}
				if m < -1e-6*(math.Abs(is.value)+math.Abs(is.limit)) && is.outcome != finding.Fail {
					t.Errorf("%s is %s, but a draw is beyond the limit by %g", p, is.outcome, -m)
				}
				worst := is.margin
				if worst != worst { // infinite: nothing is worse
					return
				}
				scale := math.Abs(is.value) + math.Abs(is.limit)
				if e := (worst - m) / scale; e > 1e-6 && e > excess[p] {
					excess[p] = e
				}
			}
			for i := range j.bench.Points {
				pt := &j.bench.Points[i]
				for _, sp := range pt.Spaces {
					for n := range everywhere / spaces {
						d := usual(g, sp)
						if n%2 == 1 {
							d = drawn(g, sp, sp.Typical(), 1)
						}
						for _, rl := range catalog.All() {
							for _, role := range rolesOf(rl) {
								try(rl, place{rl.ID, role, pt.Name()}, d)
							}
						}
					}
				}
			}
			a := tried
			for _, rl := range catalog.All() {
				eachSearch(j.bench, rl, func(pt *rule.Point, sp *corner.Space, role string) {
					f := rl.Worst(role)
					w := sp.Search(f)
					if w.Value != w.Value {
						return
					}
					sp.Polish(&w, f)
					for range near {
						try(rl, place{rl.ID, role, pt.Name()}, drawn(g, sp, w.Draw, 0.08))
					}
				})
			}
			t.Log(a, tried)
			for _, p := range j.places() {
				if e := excess[p]; e > 0 {
					t.Errorf("%s binding %v: a draw is worse by %.3g of the value", p, j.at[p].binding, e)
				}
			}
		})
	}
}
