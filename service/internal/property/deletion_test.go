package property

import (
	"slices"
	"strings"
	"sync/atomic"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

// A question is no value: names, the kind of mode and whole operating points say what is asked. Taking one out asks less.
func question(p path) bool {
	switch p.last() {
	case "stage":
		return len(p) == 1
	case "id":
		return len(p) == 2
	case "name", "fixedDuty", "heldOn", "sinusoidal", "sixStep", "burst":
		return true
	}
	return len(p) == 3 && p[1] == "operatingPoints"
}

// label tells whether a member is text that no number depends on.
func label(p path) bool {
	return slices.Contains([]string{"source", "refdes", "part", "title", "caseSize"}, p.last())
}

// replaced tells whether what is deleted is not missing afterwards but comes from elsewhere, on either side of it: the inside of a curve is
// interpolated between its neighbours, and without a measured slope the gate's data estimate it.
func replaced(tree any, p path) bool {
	if n := len(p); n >= 2 && p[n-2] == "biasCurve" {
		k, _ := p[n-1].(int)
		return k > 0 && k+1 < len(lookup(tree, p[:n-1]).([]any))
	}
	return slices.Contains(p, any("measured"))
}

// alone is a tree without the operating points that a path does not lead into: they are judged each for itself.
func alone(tree any, p path) any {
	if len(p) < 4 || p[1] != "operatingPoints" {
		return tree
	}
	return with(tree, edit{p[:2], []any{lookup(tree, p[:3])}})
}

// TestDeletionNeverPasses takes every member and every list element out of the stages, one at a time, the ends of ranges, entries at
// temperatures and points of curves among them. What was not a PASS at an operating point must not become one, and what failed must not
// become NOT_APPLICABLE; a request that is refused has no findings. Labels go together; what other data of the stage replace is left in.
func TestDeletionNeverPasses(t *testing.T) {
	for _, s := range allModes(t) {
		t.Run(s.name, func(t *testing.T) {
			base := judge(t, bind(t, s.tree), searched())
			var watched []*rule.Rule // those that do not pass everywhere
			for _, rl := range searched() {
				for p, v := range base.at {
					if p.rule == rl.ID && v.outcome > finding.Pass && !slices.Contains(watched, rl) {
						watched = append(watched, rl)
					}
				}
			}
			bare := copyOf(s.tree)
			var variants []variant
			visit(s.tree, nil, func(p path, _ any) {
				switch {
				case label(p):
					bare = without(bare, p)
				case !question(p) && !replaced(s.tree, p):
					variants = append(variants, variant{p.String(), alone(without(s.tree, p), p)})
				}
			})
			if s.name == "drive400 modulated" { // the demo stage has the same parts: what the modes make of them, and some of the rest
				k := 0
				variants = slices.DeleteFunc(variants, func(v variant) bool {
					k++
					return k%5 != 0 && !strings.Contains(v.name, "operatingPoints") && !strings.Contains(v.name, "channelPoints")
				})
			}
			variants = append(variants, variant{"labels", bare})
			var opened atomic.Int64
			answered := eachBench(t, variants, func(v *variant, j *judged) {
				for _, rl := range watched {
					suspect, open := mayPass(j.bench, rl, base)
					opened.Add(int64(open))
					if suspect {
						j.run(t, rl)
					}
				}
				for p, is := range j.at {
					switch was := base.at[p]; {
					case is.outcome == finding.Pass && was.outcome > finding.Pass:
						t.Errorf("without %s: %s was %s, is PASS: %s", v.name, p, was.outcome, is.text)
					case is.outcome == finding.NotApplicable && was.outcome == finding.Fail:
						t.Errorf("without %s: %s was FAIL, is NOT_APPLICABLE: %s", v.name, p, is.text)
					}
				}
			})
			t.Logf("%d deletions, %d answered, %d rules watched, %d verdicts became open", len(variants), answered, len(watched), opened.Load())
			if answered < len(variants)/every/2 || int(opened.Load()) < 30*len(watched)/every {
				t.Error("the deletions do nothing")
			}
		})
	}
}

// mayPass tells whether a rule might pass, or not apply, anywhere where it did not before. The search without polishing never finds worse
// than the rule itself does, so that what does not hold there cannot pass. It counts the places that became open.
func mayPass(b *rule.Bench, rl *rule.Rule, base *judged) (suspect bool, opened int) {
	for _, role := range rolesOf(rl) {
		for i := range b.Points {
			p := &b.Points[i]
			was := base.at[place{rl.ID, role, p.Name()}].outcome
			if rl.Inapplicable(b.Stage, p.Operating, role) != "" {
				suspect = suspect || was == finding.Fail
				continue
			}
			holds, open := true, false
			for _, w := range corner.SearchSets(p.Spaces, rl.Worst(role)) {
				if w.Value != w.Value {
					holds, open = false, true
				} else if !rl.Holds(circuit.Of(w.Draw), role) {
					holds = false
				}
			}
			suspect = suspect || holds && was > finding.Pass
			if open && was > finding.Pass {
				opened++
			}
		}
	}
	return suspect, opened
}
