package property

import (
	"math"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/derive"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// TestDerivedLimitsTurn evaluates the floating supply just inside and just outside of every derived limit, at the worst draw of every
// operating point and temperature set: it holds on one side and not on the other.
func TestDerivedLimitsTurn(t *testing.T) {
	const inside = 1e-6 // of the limit
	for _, s := range subjects(t) {
		t.Run(s.name, func(t *testing.T) {
			j := judge(t, bind(t, s.tree), nil)
			found := map[string]int{}
			for i := range j.bench.Points {
				p := &j.bench.Points[i]
				for _, w := range corner.SearchSets(p.Spaces, func(d *corner.Draw) float64 { return derive.Hold(circuit.Of(d)) }) {
					c := circuit.Of(w.Draw)
					for _, name := range derive.Names(stage.ModeFixedDuty) {
						r := derive.Limit(c, name)
						switch {
						case r.Found:
							found[name]++
							outward := 1.0
							if name == finding.LowestSwitchingFrequency {
								outward = -1
							}
							size := r.Input
							if name == finding.LargestDuty || name == finding.LongestOnTime || name == finding.ShortestLowSidePulse {
								size = 1 - r.Input // a duty is as near to its end as the rest of the period is short
							}
							if !derive.Holds(c, name, r.Input) {
								t.Errorf("%s %s: %s: %g does not hold", p.Name(), w.Space.Set.Name, name, r.Input)
							}
							if out := r.Input + outward*10*inside*math.Max(size, 0.1*r.Input); derive.Holds(c, name, out) {
								t.Errorf("%s %s: %s: %g still holds beyond %g", p.Name(), w.Space.Set.Name, name, out, r.Input)
							}
						case r.Whole:
							if !derive.Holds(c, name, r.Input) {
								t.Errorf("%s %s: %s: the whole range holds, but not %g", p.Name(), w.Space.Set.Name, name, r.Input)
							}
						case r.Value == r.Value:
							t.Errorf("%s %s: %s: %g is neither found nor the end", p.Name(), w.Space.Set.Name, name, r.Value)
						}
						op, f := c.Point, c.Value(&c.Point.SwitchingFrequency)
						dead := c.Value(&op.DeadTime)
						want := map[string]float64{ // what the limits on time make of the duty
							finding.LongestOnTime: math.Max(0, r.Input/f-dead), finding.ShortestLowSidePulse: math.Max(0, (1-r.Input)/f-dead),
						}
						if v, ok := want[name]; ok && r.Input < 1 && math.Abs(r.Value-v) > 1e-12*v {
							t.Errorf("%s: %g, want %g", name, r.Value, v)
						}
					}
				}
			}
			for _, name := range []string{finding.LargestResistance, finding.HighestSwitchingFreq} {
				if s.name == "buck48" && found[name] == 0 {
					t.Errorf("%s is found nowhere", name)
				}
			}
			if len(found) < 4 && s.name != "buck48 strained" { // that one holds nowhere
				t.Errorf("only %v found", found)
			}
		})
	}
}

// TestTightestLimit takes the smaller of two limits from above, the larger of two from below, and none before any.
func TestTightestLimit(t *testing.T) {
	at := func(v float64) derive.Result { return derive.Result{Value: v} }
	for _, c := range []struct {
		name string
		a, b float64
		want bool
	}{
		{finding.LargestDuty, 0.8, 0.9, true}, {finding.LargestDuty, 0.9, 0.8, false}, {finding.LargestDuty, 0.9, 0.9, false},
		{finding.ShortestLowSidePulse, 2e-7, 1e-7, true}, {finding.LowestSwitchingFrequency, 1e3, 2e3, false},
		{finding.LowestSwitchingFrequency, 2e3, 1e3, true}, {finding.LargestResistance, math.NaN(), 5, true},
		{finding.LargestResistance, 5, math.NaN(), false}, {finding.LargestResistance, math.NaN(), math.NaN(), false},
		{finding.LongestOnTime, 1e-3, math.Inf(1), true},
	} {
		if got := derive.Tightest(c.name, at(c.a), at(c.b)); got != c.want {
			t.Errorf("%s: is %g tighter than %g? %v", c.name, c.a, c.b, got)
		}
	}
}

// TestSharedSpacesChangeNothing evaluates every rule at draws of spaces that all rules share, in which models keep results, and at the same
// numbers in spaces made for one evaluation each.
func TestSharedSpacesChangeNothing(t *testing.T) {
	for _, s := range subjects(t) {
		t.Run(s.name, func(t *testing.T) {
			shared := judge(t, bind(t, s.tree), searched())
			for i := range shared.bench.Points {
				p := &shared.bench.Points[i]
				for _, sp := range p.Spaces {
					for _, rl := range searched() {
						for _, role := range rolesOf(rl) {
							if rl.Inapplicable(shared.bench.Stage, p.Operating, role) != "" {
								continue
							}
							f := rl.Worst(role)
							w := sp.Search(f)
							if w.Value != w.Value {
								continue
							}
							fresh := corner.NewSpace(sp.Stage, sp.Policy, sp.Point, sp.Set)
							var same []corner.Change
							for _, q := range sp.Stage.Inputs()[1:] {
								if v := w.Draw.Value(q); q.Along == 0 && v == v {
									same = append(same, corner.Change{ID: q.ID, Value: v})
								}
							}
							if v, _ := corner.Evaluate(fresh.With(fresh.Typical(), same...), f); v != w.Value {
								t.Errorf("%s %s at %q, %s: %v in a fresh space, was %v", rl.ID, role, p.Name(), sp.Set.Name, v, w.Value)
							}
						}
					}
				}
			}
		})
	}
}
