package property

import (
	"slices"
	"testing"

	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

// A question is no value: names, the kind of mode and whole operating points say what is asked. Taking one out asks less.
func question(p path) bool {
	switch p.last() {
	case "stage", "id", "operatingPoints":
		return len(p) <= 2 && p.last() != "operatingPoints"
	case "name", "fixedDuty", "heldOn", "sinusoidal", "sixStep", "burst":
		return true
	}
	return len(p) == 3 && p[1] == "operatingPoints"
}

// label tells whether a member is text that no number depends on.
func label(p path) bool {
	return slices.Contains([]string{"source", "refdes", "part", "title", "caseSize"}, p.last())
}

// TestDeletionNeverPasses takes every member and every list element out of the demo stages, one at a time, the ends of ranges, entries at
// temperatures and points of curves among them. What was not a PASS at an operating point must not become one, and what failed must not
// become NOT_APPLICABLE; a request that is refused has no findings. Labels go together.
func TestDeletionNeverPasses(t *testing.T) {
	for _, name := range demos {
		t.Run(name, func(t *testing.T) {
			tree := document(t, name)
			base := judge(t, bind(t, tree), nil)
			watched := map[string]bool{}
			for p, v := range base.at {
				if v.outcome != finding.Pass && v.outcome != finding.NotApplicable {
					watched[p.rule] = true
				}
			}
			if len(watched) < 5 {
				t.Fatalf("only %d rules do not pass: the demo stage shows nothing", len(watched))
			}
			only := func(r *rule.Rule) bool { return watched[r.ID] }
			bare := copyOf(tree)
			var variants []variant
			visit(tree, nil, func(p path, _ any) {
				switch {
				case label(p):
					bare = without(bare, p)
				case !question(p):
					variants = append(variants, variant{p.String(), without(tree, p), only})
				}
			})
			variants = append(variants, variant{"labels", bare, only})
			found := 0
			answered := judgeAll(t, variants, func(v *variant, j *judged) {
				if j == nil {
					return
				}
				for _, p := range j.places() {
					is, was := j.at[p], base.at[p]
					switch {
					case is.outcome == finding.Pass && was.outcome > finding.Pass:
						t.Errorf("without %s: %s was %s, is PASS: %s", v.name, p, was.outcome, is.text)
					case is.outcome == finding.NotApplicable && was.outcome == finding.Fail:
						t.Errorf("without %s: %s was FAIL, is NOT_APPLICABLE: %s", v.name, p, is.text)
					case is.outcome == finding.Open && was.outcome != finding.Open:
						found++
					}
				}
			})
			if answered < len(variants)/2 || found < len(variants)/2 {
				t.Errorf("%d of %d requests were answered, %d verdicts became open: the deletions do nothing", answered, len(variants), found)
			}
			t.Logf("%d deletions, %d answered, %d verdicts became open", len(variants), answered, found)
		})
	}
}
