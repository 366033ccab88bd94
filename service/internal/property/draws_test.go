package property

import (
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// change draws some inputs of a space anew from a seeded generator.
func change(g *rand.Rand, s *corner.Space, from *corner.Draw, share float64, pick func(stage.Triple) float64) *corner.Draw {
	var changes []corner.Change
	for _, q := range s.Stage.Inputs()[1:] {
		if r := s.Range(q); r.Min < r.Max && g.Float64() < share {
			changes = append(changes, corner.Change{ID: q.ID, Value: pick(r)})
		}
	}
	return s.With(from, changes...)
}

// anywhere picks evenly between the ends; atEnds picks an end four times of five.
func anywhere(g *rand.Rand) func(stage.Triple) float64 {
	return func(r stage.Triple) float64 { return r.Min + g.Float64()*(r.Max-r.Min) }
}

func atEnds(g *rand.Rand) func(stage.Triple) float64 {
	within := anywhere(g)
	return func(r stage.Triple) float64 {
		switch g.IntN(5) {
		case 0, 1:
			return r.Min
		case 2, 3:
			return r.Max
		}
		return within(r)
	}
}

// sixDigits is the unit of the sixth digit of a number: what rounding may move it by, at most.
func sixDigits(v float64) float64 {
	if v == 0 || v != v || math.IsInf(v, 0) {
		return 0
	}
	return math.Pow(10, math.Floor(math.Log10(math.Abs(v)))-5)
}

// trial is one rule at one place, tried at many draws.
type trial struct {
	t    *testing.T
	rule *rule.Rule
	at   place
	is   verdict
}

// try evaluates the rule at a draw inside the ranges: no draw may have an outcome worse than the reported one, nor, where that is demanded,
// a margin smaller than the reported one.
func (x *trial) try(d *corner.Draw, margins bool) {
	m, tr := corner.Evaluate(d, x.rule.Worst(x.at.role))
	if !tr.Complete() || m != m {
		x.t.Errorf("%s is evaluated, but not at a draw inside the ranges", x.at)
		return
	}
	noise := sixDigits(x.is.value) + sixDigits(x.is.limit)
	if x.rule.Proxy != nil { // has other units than the margin; its sign counts
		noise = 1e-6
	}
	if m < -noise && x.is.outcome != finding.Fail {
		x.t.Errorf("%s is %s, but a draw is beyond the limit by %g", x.at, x.is.outcome, -m)
	}
	if x.is.outcome == finding.Pass && !x.rule.Holds(circuit.Of(d), x.at.role) {
		x.t.Errorf("%s passes, but a draw does not hold its guard: %s", x.at, x.is.text)
	}
	// Of several worst draws the one whose margin is the smallest share of its limit is reported.
	if margins && x.rule.Proxy == nil && m < x.is.margin-noise { // a margin that is not a number is infinite: nothing is smaller
		limit := math.Abs(x.rule.Check(circuit.Of(d), x.at.role).Limit)
		if share := x.is.order(); !(limit > 0) || m/limit < share-noise/limit {
			x.t.Errorf("%s: reported margin %g, %g of the limit, but a draw has %g, %g of its", x.at, x.is.margin, share, m, m/limit)
		}
	}
}

// TestNoDrawIsWorseThanReported draws parts and conditions inside their ranges. 2000 draws of every input anywhere in its range must not be
// worse than the reported worst, as many draws with most inputs at their ends must not be worse at the operating point that binds, and
// neither must draws around the worst one. At the other operating points, where only the outcome is demanded, and on the strained stage,
// no draw may have a worse outcome.
func TestNoDrawIsWorseThanReported(t *testing.T) {
	const draws, around = 2000 / every, 24 / every
	for _, s := range subjects(t) {
		t.Run(s.name, func(t *testing.T) {
			t.Parallel()
			demo := s.name != "buck48 strained"
			j := judge(t, bind(t, s.tree), searched())
			g := rand.New(rand.NewPCG(7, 11))
			spaces := 0
			for i := range j.bench.Points {
				spaces += len(j.bench.Points[i].Spaces)
			}
			tried := 0
			for i := range j.bench.Points {
				pt := &j.bench.Points[i]
				var trials []trial
				for _, rl := range searched() {
					for _, role := range rolesOf(rl) {
						p := place{rl.ID, role, pt.Name()}
						if is := j.at[p]; is.outcome != finding.NotApplicable && (is.outcome != finding.Open || is.margin == is.margin) {
							trials = append(trials, trial{t, rl, p, is})
						}
					}
				}
				for _, sp := range pt.Spaces {
					for range draws / spaces {
						even := change(g, sp, sp.Typical(), 1, anywhere(g))
						ends := change(g, sp, sp.Typical(), 1, atEnds(g))
						for k := range trials {
							trials[k].try(even, demo)
							trials[k].try(ends, demo && trials[k].is.binding)
							tried += 2
						}
					}
					for k := range trials {
						x := &trials[k]
						f := x.rule.Worst(x.at.role)
						w := sp.Search(f)
						if w.Value != w.Value {
							t.Errorf("%s is evaluated, but not in the %s set", x.at, sp.Set.Name)
							continue
						}
						sp.Polish(&w, f)
						x.try(w.Draw, demo && x.is.binding)
						for range around {
							x.try(change(g, sp, w.Draw, 0.08, atEnds(g)), demo && x.is.binding)
							tried++
						}
					}
				}
			}
			if tried < 40*draws {
				t.Errorf("only %d trials", tried)
			}
		})
	}
}
