package property

import (
	"math/rand/v2"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"floatrail/calc"
)

// TestSameRequestSameReport reviews the same request again and again, the operating points side by side as the machine has it.
func TestSameRequestSameReport(t *testing.T) {
	for _, s := range allModes(t) {
		t.Run(s.name, func(t *testing.T) {
			t.Parallel()
			times := 50 / every
			if s.name == "buck48 strained" || s.name == "drive400 modulated" {
				times = 5
			}
			first := review(t, s.tree, calc.WithDutyLimits)
			for range times {
				if d := cmp.Diff(first, review(t, s.tree, calc.WithDutyLimits), cmpopts.EquateNaNs()); d != "" {
					t.Fatal(d)
				}
			}
		})
	}
}

// parted is a stage whose components stand among the parts of the request, in a given order.
func parted(t testing.TB, tree any, order []int) any {
	t.Helper()
	components := []struct{ id, kind, at string }{
		{"driver-1", "driver", "stage.driver"}, {"switch-1", "switch", "stage.highSide"}, {"switch-2", "switch", "stage.lowSide"},
		{"diode-1", "diode", "stage.bootstrap.diode"}, {"capacitor-1", "capacitor", "stage.bootstrap.capacitor"},
		{"resistor-1", "resistor", "stage.bootstrap.resistor"},
	}
	parts := make([]any, len(components))
	var edits []edit
	for i, k := range order {
		c := components[k]
		parts[i] = map[string]any{"id": c.id, c.kind: copyOf(lookup(tree, at(c.at)))}
		edits = append(edits, edit{at(c.at), map[string]any{"use": c.id}})
	}
	return with(tree, append(edits, edit{path{"parts"}, parts})...)
}

// TestOrderOfPartsChangesNothing takes the components of a stage from parts in different orders.
func TestOrderOfPartsChangesNothing(t *testing.T) {
	for _, s := range allModes(t) {
		t.Run(s.name, func(t *testing.T) {
			want := judge(t, bind(t, s.tree), searched())
			for _, order := range [][]int{{0, 1, 2, 3, 4, 5}, {5, 3, 1, 4, 2, 0}} {
				sameNumbers(t, want, judge(t, bind(t, parted(t, s.tree, order)), searched()))
			}
		})
	}
}

// TestOrderOfOperatingPointsChangesNothing shuffles the operating points.
func TestOrderOfOperatingPointsChangesNothing(t *testing.T) {
	g := rand.New(rand.NewPCG(3, 5))
	for _, s := range allModes(t) {
		t.Run(s.name, func(t *testing.T) {
			want := judge(t, bind(t, s.tree), searched())
			points := lookup(s.tree, at("stage.operatingPoints")).([]any)
			times := 5
			if isModulated(s.tree) {
				times = 1
			}
			for range times {
				shuffled := copyOf(points).([]any)
				g.Shuffle(len(shuffled), func(i, k int) { shuffled[i], shuffled[k] = shuffled[k], shuffled[i] })
				sameNumbers(t, want, judge(t, bind(t, with(s.tree, edit{at("stage.operatingPoints"), shuffled})), searched()))
			}
		})
	}
}

// sameNumbers demands the same outcome and numbers of every finding, and the same outcome at every operating point.
func sameNumbers(t *testing.T, want, got *judged) {
	t.Helper()
	if len(want.at) != len(got.at) || len(want.binding) != len(got.binding) {
		t.Fatalf("%d places and %d findings, want %d and %d", len(got.at), len(got.binding), len(want.at), len(want.binding))
	}
	same := func(a, b float64) bool { return a == b || a != a && b != b }
	for f, a := range want.binding {
		if b := got.binding[f]; a.outcome != b.outcome || !same(a.value, b.value) || !same(a.limit, b.limit) || !same(a.margin, b.margin) {
			t.Errorf("%s: %v, want %v", f, b, a)
		}
	}
	for p, a := range want.at {
		if b := got.at[p]; a.outcome != b.outcome {
			t.Errorf("%s: %s, want %s", p, b.outcome, a.outcome)
		}
	}
}
