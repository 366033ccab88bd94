package property

import (
	"testing"

	"floatrail/calc/finding"
)

// essential members cannot be left out without changing what is asked: names, and the kind of mode.
func essential(p path) bool {
	switch p.last() {
	case "stage":
		return len(p) == 1
	case "id":
		return len(p) == 2
	case "name", "fixedDuty", "heldOn", "sinusoidal", "sixStep", "burst":
		return true
	}
	return false
}

// TestDeletionNeverPasses takes every member and every list element out of the demo stages, one at a time. What was not a PASS must not
// become one, and what failed must not become NOT_APPLICABLE; a request that is refused has no findings.
func TestDeletionNeverPasses(t *testing.T) {
	for _, name := range demos {
		t.Run(name, func(t *testing.T) {
			tree := document(t, name)
			base := review(t, tree, 0)
			before := byKey(&base)
			var variants []variant
			visit(tree, nil, func(p path, _ any) {
				if !essential(p) {
					variants = append(variants, variant{p.String(), without(tree, p)})
				}
			})
			answered := 0
			for _, v := range reviewAll(t, variants) {
				if v.report == nil {
					continue
				}
				answered++
				for i := range v.report.Findings {
					f := &v.report.Findings[i]
					was := before[keyOf(f)]
					if was == nil {
						continue
					}
					switch {
					case f.Outcome == finding.Pass && was.Outcome != finding.Pass && was.Outcome != finding.NotApplicable:
						t.Errorf("without %s: %s was %s, is PASS: %s", v.name, keyOf(f), was.Outcome, f.Message)
					case f.Outcome == finding.NotApplicable && was.Outcome == finding.Fail:
						t.Errorf("without %s: %s was FAIL, is NOT_APPLICABLE: %s", v.name, keyOf(f), f.Message)
					}
				}
			}
			if answered < len(variants)/2 {
				t.Errorf("only %d of %d requests were answered", answered, len(variants))
			}
			t.Logf("%d requests, %d answered", len(variants), answered)
		})
	}
}
