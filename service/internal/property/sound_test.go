package property

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

const soundStages = "../../../testdata/sound/"

// mostMarginal is how many MARGINAL findings a well-designed stage may have before they are noise.
const mostMarginal = 3

// soundStage is a well-designed stage with what a senior reviewer would want to be shown all the same.
type soundStage struct {
	name    string
	shown   map[remark]string // why a reviewer wants to see it
	sinking bool              // the load drives current into the node at some operating point
	onBench bool              // slopes were measured
}

// remark is a rule and the role it judged.
type remark struct{ rule, role string }

var soundDesigns = []soundStage{
	{name: "buck12", onBench: true, shown: map[remark]string{
		{"gate/miller-low", "lowSide"}: "a 5 V rail with a threshold of 0.87 V when hot: the node's rise through C_rss leaves the low side little, " +
			"and how small C_iss may be no data sheet says",
	}},
	{name: "servo48", sinking: true, shown: map[remark]string{
		{"gate/miller-low", "lowSide"}: "nothing is measured yet; by the estimate the induced voltage takes 96 % of the smallest threshold at the trip current, " +
			"and the resistor that would lower it deepens the undershoot",
		{"gate/miller-high", "highSide"}: "the same while braking, where the estimate takes 89 %",
		{"node/rail-below-com", "driver"}: "at the trip current V_B comes to -0.19 V of the -0.3 V that the driver permits, should the lockout end the on-time; " +
			"a slope measured on the board decides it",
	}},
	{name: "pump48", onBench: true, shown: map[remark]string{}},
	{name: "llc400", onBench: true, shown: map[remark]string{}},
	{name: "sic800", sinking: true, onBench: true, shown: map[remark]string{
		{"gate/overvoltage", "highSide"}: "4.5 V of reverse conduction with the gate at -4 V pump V_BS in the dead times to 23.1 V of the gate's 25 V; V_DD has " +
			"little room upward, and downward a lockout that protects a switch specified at 15 V bounds it",
	}},
}

// unjudged are the rules that none of the stages gives occasion to.
var unjudged = []string{
	"charge/charge-condition", // the slope of the gate charge is known everywhere
}

// TestNoFalseAlarmOnSoundDesigns reviews well-designed stages for 12 V, 48 V, 400 V and 800 V, one of them modulated in every way, whose data have the spreads of data sheets: none
// fails, nothing is open, and the little that is MARGINAL is what the table gives a reason for.
func TestNoFalseAlarmOnSoundDesigns(t *testing.T) {
	applied := map[string]bool{}
	for _, s := range soundDesigns {
		t.Run(s.name, func(t *testing.T) {
			tree := soundDocument(t, s.name)
			r := review(t, tree, 0)
			if r.Verdict != finding.Passed {
				t.Errorf("verdict %v, want PASS", r.Verdict)
			}
			seen := map[remark]bool{}
			for i := range r.Findings {
				f := &r.Findings[i]
				if f.Outcome != finding.NotApplicable {
					applied[f.Rule] = true
				}
				switch f.Outcome {
				case finding.Fail, finding.Open:
					t.Errorf("%s %s: %v at %q: %s", f.Rule, f.Role, f.Outcome, f.OperatingPoint, f.Message)
				case finding.Marginal:
					k := remark{f.Rule, f.Role}
					seen[k] = true
					if _, ok := s.shown[k]; !ok {
						t.Errorf("MARGINAL that no reason is given for: %q %q at %q: %s", f.Rule, f.Role, f.OperatingPoint, f.Message)
					}
				}
			}
			for k, why := range s.shown {
				if !seen[k] {
					t.Errorf("%q %q is no longer MARGINAL, though a reviewer wants to see it: %s", k.rule, k.role, why)
				}
			}
			if len(seen) > mostMarginal {
				t.Errorf("%d MARGINAL, at most %d", len(seen), mostMarginal)
			}
			for i := range r.Assumptions {
				if a := &r.Assumptions[i]; a.Direction == stage.Optimistic {
					t.Errorf("optimistic assumption about %s", a.Field)
				}
			}
			checkSoundData(t, s, tree)
		})
	}
	for _, rl := range catalog.All() {
		if absent := slices.Contains(unjudged, rl.ID) || rl.OnlySimulated; absent == applied[rl.ID] {
			t.Errorf("%s: judged on a sound stage %t, want %t", rl.ID, applied[rl.ID], !absent)
		}
	}
}

// checkSoundData holds a stage to what the table says it is: an overload point, currents of both signs and measured slopes where they are claimed.
func checkSoundData(t *testing.T, s soundStage, tree any) {
	t.Helper()
	overload, sinks, sources := false, false, false
	for _, p := range lookup(tree, at("stage.operatingPoints")).([]any) {
		p := p.(map[string]any)
		overload = overload || p["overload"] == true
		typ := p["loadCurrent"].(map[string]any)["typ"].(string)
		sinks = sinks || strings.HasPrefix(typ, "-")
		sources = sources || !strings.HasPrefix(typ, "-")
	}
	if !overload || !sources || sinks != s.sinking {
		t.Errorf("overload %t, sources %t, sinks %t, want true, true, %t", overload, sources, sinks, s.sinking)
	}
	if _, ok := lookup(tree, at("stage.layout")).(map[string]any)["measured"]; ok != s.onBench {
		t.Errorf("measured slopes given %t, want %t", ok, s.onBench)
	}
}

// TestEverySoundDesignIsReviewed keeps the table and the folder of sound stages together.
func TestEverySoundDesignIsReviewed(t *testing.T) {
	files, err := filepath.Glob(soundStages + "*.json")
	if err != nil {
		t.Fatal(err)
	}
	var have, want []string
	for _, f := range files {
		have = append(have, strings.TrimSuffix(filepath.Base(f), ".json"))
	}
	for _, s := range soundDesigns {
		want = append(want, s.name)
	}
	slices.Sort(want)
	if !slices.Equal(have, want) {
		t.Errorf("folder holds %v, table %v", have, want)
	}
}

// soundDocument reads a sound stage as a JSON tree.
func soundDocument(t testing.TB, name string) any {
	t.Helper()
	raw, err := os.ReadFile(soundStages + name + ".json")
	if err != nil {
		t.Fatal(err)
	}
	return decode(t, raw)
}
