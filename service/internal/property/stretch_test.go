package property

import (
	"strings"
	"testing"

	"floatrail/calc/finding"
)

// An end beyond the policy's spread cannot be guessed once it is deleted; the pass that comes of it is at best MARGINAL and says on what it
// rests, as long as the end lay within twice the spread. The lockout's largest threshold here is 32 % above typ, where the policy takes 15 %.
func TestPassWithinThePolicysSpreadIsMarginal(t *testing.T) {
	for _, z := range []struct {
		name, max string
		deleted   bool
		want      finding.Outcome
	}{
		{"as given", `"8.7 V"`, false, finding.Fail},
		{"deleted", `"8.7 V"`, true, finding.Marginal},
		{"given within the policy's spread", `"7.6 V"`, false, finding.Pass},
	} {
		tree := with(document(t, "buck48"), to("stage.driver.uvloFalling.max", z.max), to("stage.driver.uvloRising.max", `"9 V"`))
		if z.deleted {
			tree = without(tree, at("stage.driver.uvloFalling.max"))
		}
		r := review(t, tree, 0)
		f := pick(t, &r, "charge/lowest-voltage", "")
		if f.Outcome != z.want {
			t.Errorf("%s: %s, want %s: %s", z.name, f.Outcome, z.want, f.Message)
		}
		if named := strings.Contains(f.Message, "policy's spread of driver.uvloFalling"); named != z.deleted {
			t.Errorf("%s: names the spread %v: %s", z.name, named, f.Message)
		}
	}
}
