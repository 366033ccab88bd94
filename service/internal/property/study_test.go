package property

import (
	"context"
	"fmt"
	"math"
	"os"
	"slices"
	"strconv"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/study"
)

// drawsVariable raises the number of draws that are held against the extreme values.
const drawsVariable = "FLOATRAIL_STUDY_DRAWS"

// studyDraws is that number.
func studyDraws(t testing.TB) int {
	t.Helper()
	text := os.Getenv(drawsVariable)
	if text == "" {
		return studied
	}
	n, err := strconv.Atoi(text)
	if err != nil || n < 1 {
		t.Fatalf("%s is %q, expected a number of draws", drawsVariable, text)
	}
	return n
}

// modulatedDraws is the largest number of draws of a stage with modulated operating points, and modulatedShare how many times fewer there are of it.
const modulatedDraws, modulatedShare = 500, 5

// drawsOf is the number of draws of a stage, of those that are asked for.
func drawsOf(tree any, asked int) int {
	if isModulated(tree) {
		return max(1, min(asked/modulatedShare, modulatedDraws))
	}
	return asked
}

// studySubjects are the stages that are drawn: the demo stages, the strained one, one whose high side is held on, the sound ones, and the modulated one.
func studySubjects(t testing.TB) []variant {
	out := append(subjects(t), variant{name: "buck48 held on", tree: with(document(t, "buck48"), heldOn...)})
	for _, s := range soundDesigns {
		out = append(out, variant{name: s.name, tree: soundDocument(t, s.name)})
	}
	return append(out, spindle(t))
}

// studied1 studies a tree.
func studied1(t testing.TB, tree any, draws int, seed uint32, d study.Distribution) study.Report {
	t.Helper()
	r := bind(t, tree)
	out, err := study.Run(context.Background(), study.Request{Stage: r.Stage, Policy: r.Policy, Draws: draws, Seed: seed, Distribution: d},
		func(study.Progress) error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	if out.Internal > 0 {
		t.Errorf("%d rules panicked", out.Internal)
	}
	return out
}

// beyond are the places at which draws are known to lie beyond the worst case, with the reason: the search of the worst case does not follow the edge at
// which the low-side pulse of the strained stage vanishes. The outcomes of all draws are bounded there as everywhere.
var beyond = map[string]map[remark]string{
	"buck48 strained": {
		{"gate/overvoltage", "driver"}:               "where the low-side pulse vanishes, V_BS is highest for some duties within the range, and collapses for others",
		{"gate/overvoltage", "highSide"}:             "the same V_BS",
		{"capacitor/voltage", "bootstrap.capacitor"}: "the same V_BS",
	},
}

// decisive is the number of draws that are enough to see what is known to lie beyond the worst case.
const decisive = 10_000

// TestExtremesBoundDraws holds the two engines against each other: no draw has a smaller margin than the worst case at the same place, none fails
// where the worst case does not, and none is better by being undecided. Draws stand between the corners, at temperatures between the sets.
func TestExtremesBoundDraws(t *testing.T) {
	asked := studyDraws(t)
	for i, s := range studySubjects(t) {
		t.Run(s.name, func(t *testing.T) {
			draws := drawsOf(s.tree, asked)
			out := studied1(t, s.tree, draws, uint32(i), study.Uniform)
			judged, seen := 0, map[remark]bool{}
			for k := range out.Results {
				c := &out.Results[k]
				e := c.Extreme
				if e == nil {
					t.Errorf("%s %s at %q: no extreme value", c.Rule, c.Role, c.Point)
					continue
				}
				if e.Outcome == finding.Open {
					continue
				}
				judged++
				if c.Open > 0 {
					t.Errorf("%s %s at %q is %s in the worst case but open in %d of %d draws: %v %v", c.Rule, c.Role, c.Point, e.Outcome, c.Open, draws,
						c.Missing, c.Reasons)
				}
				if c.Failed > 0 && e.Outcome != finding.Fail {
					t.Errorf("%s %s at %q is %s in the worst case but fails in %d of %d draws", c.Rule, c.Role, c.Point, e.Outcome, c.Failed, draws)
				}
				if c.Marginal > 0 && e.Outcome == finding.Pass {
					t.Errorf("%s %s at %q passes in the worst case but is MARGINAL in %d of %d draws", c.Rule, c.Role, c.Point, c.Marginal, draws)
				}
				at := remark{c.Rule, c.Role}
				text := bounded(c, e, draws)
				if beyond[s.name][at] != "" {
					seen[at] = seen[at] || text != ""
				} else if text != "" {
					t.Error(text)
				}
			}
			for at := range beyond[s.name] {
				if !seen[at] && draws >= decisive {
					t.Errorf("%s %s: no draw lies beyond the worst case any more, though %s", at.rule, at.role, beyond[s.name][at])
				}
			}
			within := 0
			for i := range draws {
				if !slices.ContainsFunc(out.Results, func(c study.Result) bool { return c.At(i).Outcome > finding.Marginal }) {
					within++
				}
			}
			if o := &out.Overall; o.Yield.Count != within || o.Yield.Count+o.Failed+o.Open != draws {
				t.Errorf("overall %+v, but in %d draws every rule is within its limit", o, within)
			}
			if want := len(catalog.All()) / 2; judged < want {
				t.Errorf("only %d places are judged, expected at least %d", judged, want)
			}
		})
	}
}

// bounded tells which draws have a smaller margin and, where the limit moves with the draw, a smaller share of it than the worst case, which is the
// one of the smallest share; nothing where none has. Value and limit are rounded to six digits on both sides.
func bounded(c *study.Result, e *study.Extreme, draws int) string {
	noise := sixDigits(e.Value.Value) + sixDigits(e.Limit.Value)
	least, beyond := -1, 0
	for i := range draws {
		d := c.At(i)
		if !(d.Margin < e.Margin.Absolute.Value-noise) || d.Share >= e.Margin.Relative-noise/math.Abs(e.Limit.Value) {
			continue
		}
		if beyond++; least < 0 || d.Margin < c.At(least).Margin {
			least = i
		}
	}
	if least < 0 {
		return ""
	}
	d := c.At(least)
	return fmt.Sprintf("%s %s at %q: %d of %d draws are beyond the worst case, value %g, margin %g, %g of the limit; the farthest is draw %d: value %g, margin %g, "+
		"%g of the limit", c.Rule, c.Role, c.Point, beyond, draws, e.Value.Value, e.Margin.Absolute.Value, e.Margin.Relative, least, d.Value, d.Margin, d.Share)
}
