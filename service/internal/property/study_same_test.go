package property

import (
	"context"
	"errors"
	"reflect"
	"runtime"
	"slices"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/study"
)

// TestStudyIsTheSameOnAnyNumberOfProcessors studies the same request with one, two and four processors and again.
func TestStudyIsTheSameOnAnyNumberOfProcessors(t *testing.T) {
	before := runtime.GOMAXPROCS(0)
	defer runtime.GOMAXPROCS(before)
	for _, s := range []variant{{name: "buck48 strained", tree: strained(t)}, {name: "drive400", tree: document(t, "drive400")}} {
		var want study.Report
		for i, n := range []int{1, 2, 4, 4} {
			runtime.GOMAXPROCS(n)
			got := studied1(t, s.tree, 60, 9, study.Normal)
			if i == 0 {
				want = got
				continue
			}
			sameStudy(t, s.name, &want, &got)
			if !reflect.DeepEqual(want.Assumptions, got.Assumptions) {
				t.Errorf("%s: assumptions %v, want %v", s.name, got.Assumptions, want.Assumptions)
			}
		}
	}
}

// sameStudy demands the same numbers at every draw, and the same summary, of the places in one study; another one may have more.
func sameStudy(t *testing.T, name string, want, got *study.Report) {
	t.Helper()
	at := func(r *study.Report) map[place]*study.Result {
		out := map[place]*study.Result{}
		for i := range r.Results {
			c := &r.Results[i]
			out[place{c.Rule, c.Role, c.Point}] = c
		}
		return out
	}
	all := at(got)
	same := func(a, b float64) bool { return a == b || a != a && b != b }
	for p, w := range at(want) {
		g := all[p]
		if g == nil {
			t.Errorf("%s: %s is gone", name, p)
			continue
		}
		for i := range want.Draws {
			if a, b := w.At(i), g.At(i); a.Outcome != b.Outcome || !same(a.Value, b.Value) || !same(a.Margin, b.Margin) {
				t.Errorf("%s: %s, draw %d: %+v, want %+v", name, p, i, b, a)
				break
			}
		}
		if a, b := w.LeastMargin.Absolute.Value, g.LeastMargin.Absolute.Value; !same(a, b) || w.LeastDraw != g.LeastDraw || w.Yield.Count != g.Yield.Count {
			t.Errorf("%s: %s: least margin %g, want %g", name, p, b, a)
		}
		if len(w.Ranking) != len(g.Ranking) || !reflect.DeepEqual(w.Missing, g.Missing) || !reflect.DeepEqual(w.Reasons, g.Reasons) {
			t.Errorf("%s: %s: ranking %v, %v, %v, want %v, %v, %v", name, p, g.Ranking, g.Missing, g.Reasons, w.Ranking, w.Missing, w.Reasons)
		}
		for i := range min(len(w.Ranking), len(g.Ranking)) {
			if w.Ranking[i].Rho != g.Ranking[i].Rho {
				t.Errorf("%s: %s: ranking %v, want %v", name, p, g.Ranking, w.Ranking)
				break
			}
		}
	}
}

// TestDrawsDoNotDependOnWhatStandsBeside shuffles the operating points, adds one, takes the parts from a list, and gives an input a range that no
// other one reads: the numbers of everything else stay what they are.
func TestDrawsDoNotDependOnWhatStandsBeside(t *testing.T) {
	const draws, seed = 40, 3
	tree := document(t, "buck48")
	want := studied1(t, tree, draws, seed, study.Uniform)
	points := lookup(tree, at("stage.operatingPoints")).([]any)
	turned := []any{points[2], points[0], points[1]}
	another := copyOf(points[1]).(map[string]any)
	another["name"] = "another"
	for name, other := range map[string]any{
		"points turned":   with(tree, edit{at("stage.operatingPoints"), turned}),
		"a further point": with(tree, edit{at("stage.operatingPoints"), append([]any{another}, points...)}),
		"parts":           parted(t, tree, []int{5, 3, 1, 4, 2, 0}),
	} {
		got := studied1(t, other, draws, seed, study.Uniform)
		sameStudy(t, name, &want, &got)
	}
	wider := studied1(t, with(tree, to("stage.startup.timeAvailable", `{"min": "5 ms", "typ": "6 ms", "max": "7 ms"}`)), draws, seed, study.Uniform)
	moved := 0
	for i := range want.Results {
		a, b := &want.Results[i], &wider.Results[i]
		if a.Rule == "duty/pre-charge" || a.Rule == "charge/oversize" {
			if a.At(0).Margin != b.At(0).Margin {
				moved++
			}
			continue
		}
		for k := range draws {
			if a.At(k).Value != b.At(k).Value {
				t.Errorf("%s at %q: draw %d moves from %g to %g with the time available", a.Rule, a.Point, k, a.At(k).Value, b.At(k).Value)
				break
			}
		}
	}
	if moved == 0 {
		t.Error("the time available moves nothing")
	}
	if other := studied1(t, tree, draws, seed+1, study.Uniform); other.Results[0].At(0) == want.Results[0].At(0) {
		t.Error("another seed gives the same draw")
	}
}

// TestPartsAreTheSameAtEveryPoint makes three operating points alike but for their names, at one temperature and without a spread of their own: what
// is drawn of the parts is then all that varies, and every draw has the same values at all of them.
func TestPartsAreTheSameAtEveryPoint(t *testing.T) {
	tree := document(t, "buck48")
	points := lookup(tree, at("stage.operatingPoints")).([]any)
	point := func(name string, exact bool) any {
		p := copyOf(points[0]).(map[string]any)
		p["name"] = name
		if exact {
			for _, k := range []string{"busVoltage", "loadCurrent", "rippleCurrent", "switchingFrequency", "deadTime", "junctionTemperature", "ambientTemperature"} {
				p[k] = map[string]any{"typ": p[k].(map[string]any)["typ"]}
			}
			duty := p["fixedDuty"].(map[string]any)["duty"].(map[string]any)
			p["fixedDuty"] = map[string]any{"duty": map[string]any{"typ": duty["typ"]}}
		}
		return p
	}
	apart := func(exact bool) (different, varied int) {
		r := studied1(t, with(tree, edit{at("stage.operatingPoints"), []any{point("a", exact), point("b", exact)}}), 20, 1, study.Uniform)
		for i := 0; i < len(r.Results); i += 2 {
			a, b := &r.Results[i], &r.Results[i+1]
			if a.Rule != b.Rule || a.Role != b.Role {
				t.Fatalf("%s %s beside %s %s", a.Rule, a.Role, b.Rule, b.Role)
			}
			for k := range r.Draws {
				x, y, first := a.At(k).Value, b.At(k).Value, a.At(0).Value
				if x != y && (x == x || y == y) {
					different++
				}
				if x != first && x == x {
					varied++
				}
			}
		}
		return different, varied
	}
	if different, varied := apart(true); different > 0 || varied < 500 {
		t.Errorf("%d values differ between points that are alike, %d vary", different, varied)
	}
	if different, _ := apart(false); different < 500 {
		t.Errorf("only %d values differ between points that are drawn each", different)
	}
}

// TestWhatIsMissingIsOpen: without its data a rule is open in every draw, is never within its limit, and names what is missing; nor is all together.
func TestWhatIsMissingIsOpen(t *testing.T) {
	r := studied1(t, with(document(t, "buck48"), to("stage.driver.levelShiftCharge", ``)), 20, 1, study.Uniform)
	seen := 0
	for i := range r.Results {
		c := &r.Results[i]
		if c.Rule != "charge/droop" {
			continue
		}
		seen++
		if c.Open != 20 || c.Yield.Count != 0 || len(c.Percentiles) > 0 || !slices.Contains(c.Missing, "stage.driver.levelShiftCharge") ||
			c.Extreme.Outcome != finding.Open {
			t.Errorf("%d open, %d within, missing %v, %d percentiles", c.Open, c.Yield.Count, c.Missing, len(c.Percentiles))
		}
	}
	if seen == 0 || r.Overall.Yield.Count != 0 || r.Overall.Open != 20 {
		t.Errorf("%d places, overall %+v", seen, r.Overall)
	}
	// An end that nobody gave and beyond which the rule gets worse: no draw tells what is there.
	open := studied1(t, with(document(t, "buck48"), to("stage.operatingPoints.0.busVoltage", `{"min": "40 V", "typ": "48 V"}`)), 20, 1, study.Uniform)
	for i := range open.Results {
		if c := &open.Results[i]; c.Rule == "diode/reverse-voltage" && c.Point == r.Results[0].Point &&
			(c.Open != 20 || !slices.Contains(c.Missing, "stage.operatingPoints[0].busVoltage.max")) {
			t.Errorf("without the largest bus voltage %d draws are open for %v, the worst case is %s", c.Open, c.Missing, c.Extreme.Outcome)
		}
	}
}

// TestProgressIsRegular: the first progress comes after a few draws, the others at regular numbers, the last one at the end; an error ends the study.
func TestProgressIsRegular(t *testing.T) {
	for draws, want := range map[int][]int{
		1: {1}, 16: {16}, 100: {16, 32, 48, 64, 80, 96, 100},
		400: {16, 20, 40, 60, 80, 100, 120, 140, 160, 180, 200, 220, 240, 260, 280, 300, 320, 340, 360, 380, 400},
	} {
		var got []int
		r := bind(t, document(t, "buck48"))
		request := study.Request{Stage: r.Stage, Policy: r.Policy, Draws: draws, Families: []string{"capacitor"}}
		out, err := study.Run(context.Background(), request, func(p study.Progress) error {
			if p.Draws != draws || p.Within > p.Done {
				t.Errorf("progress %+v", p)
			}
			got = append(got, p.Done)
			return nil
		})
		if err != nil || !slices.Equal(got, want) {
			t.Errorf("%d draws: progress at %v, want %v; %v", draws, got, want, err)
		}
		for i := range out.Results {
			if rule.FamilyOf(out.Results[i].Rule) != "capacitor" {
				t.Errorf("%s was not asked for", out.Results[i].Rule)
			}
		}
	}
	gone := errors.New("gone")
	r := bind(t, document(t, "buck48"))
	if _, err := study.Run(context.Background(), study.Request{Stage: r.Stage, Policy: r.Policy, Draws: 1000},
		func(study.Progress) error { return gone }); !errors.Is(err, gone) {
		t.Errorf("progress that fails: %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	r = bind(t, document(t, "buck48"))
	if _, err := study.Run(ctx, study.Request{Stage: r.Stage, Policy: r.Policy, Draws: 1000}, func(study.Progress) error {
		cancel()
		return nil
	}); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: %v", err)
	}
}

// TestEveryModeIsStudied puts an operating point of each mode into a study: it ends, with nothing but outcomes, and holds against the worst case.
func TestEveryModeIsStudied(t *testing.T) {
	const draws = 4
	for name, mode := range map[string]string{
		"fixedDuty":  `{"duty": {"typ": "0.3"}}`,
		"sinusoidal": `{"modulationIndex": {"typ": "0.8"}, "fundamentalFrequency": {"typ": "50 Hz"}, "displacementAngle": {"typ": "30 deg"}, "zeroSequence": "MIN_MAX"}`,
		"sixStep":    `{"electricalFrequency": {"typ": "200 Hz"}, "chopping": "HIGH_SIDE", "duty": {"typ": "0.5"}}`,
		"burst":      `{"duty": {"typ": "0.3"}, "activeTime": {"typ": "1 ms"}, "idleTime": {"typ": "2 ms"}, "idleNodeVoltage": {"typ": "1 V"}}`,
		"heldOn":     `{"duration": {"typ": "1 ms"}, "initialVoltage": {"min": "9 V", "typ": "9.2 V", "max": "9.4 V"}}`,
	} {
		tree := with(document(t, "buck48"), to("stage.operatingPoints.0.fixedDuty", ``), to("stage.operatingPoints.0."+name, mode))
		r := studied1(t, tree, draws, 2, study.Normal)
		for i := range r.Results {
			c := &r.Results[i]
			if c.Guarded.Count+c.Marginal+c.Failed+c.Open != draws || c.Extreme == nil {
				t.Errorf("%s: %s %s at %q: %d of %d draws have an outcome, worst case %v", name, c.Rule, c.Role, c.Point,
					c.Guarded.Count+c.Marginal+c.Failed+c.Open, draws, c.Extreme)
				continue
			}
			if text := bounded(c, c.Extreme, draws); text != "" {
				t.Errorf("%s: %s", name, text)
			}
		}
	}
}

// TestInputsAreToldApart: no two inputs of a stage have the same path and symbol, by which they are drawn and ranked.
func TestInputsAreToldApart(t *testing.T) {
	for _, s := range studySubjects(t) {
		r := bind(t, s.tree)
		policy := r.Policy
		r.Stage.Complete(&policy)
		seen := map[string]bool{}
		for _, q := range r.Stage.Inputs()[1:] {
			name := q.Field + " " + q.Declare.Symbol
			if corner.Varies(q) && seen[name] {
				t.Errorf("%s: two inputs are %s", s.name, name)
			}
			seen[name] = seen[name] || corner.Varies(q)
		}
		if len(seen) < 50 {
			t.Errorf("%s: %d inputs", s.name, len(seen))
		}
	}
}
