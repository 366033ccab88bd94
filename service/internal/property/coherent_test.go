package property

import (
	"strings"
	"testing"

	"floatrail/calc"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// spread is a stage whose operating points reach from -40 to 125 °C.
func spread(t testing.TB, tree any) any {
	t.Helper()
	points := lookup(tree, at("stage.operatingPoints")).([]any)
	var edits []edit
	for i := range points {
		for _, name := range []string{"junctionTemperature", "ambientTemperature"} {
			edits = append(edits, edit{path{"stage", "operatingPoints", i, name}, map[string]any{"min": "-40 degC", "typ": "25 degC", "max": "125 degC"}})
		}
	}
	return with(tree, edits...)
}

// setTemperatures are those of the named sets of a stage that reaches from -40 to 125 °C.
var setTemperatures = map[string]float64{"cold": -40, "room": 25, "hot": 125}

// fits tells whether a number lies in a range, but for the rounding to six digits.
func fits(v float64, r stage.Triple) bool {
	return v >= r.Min-sixDigits(r.Min) && v <= r.Max+sixDigits(r.Max)
}

// TestCornersAreOfOneTemperature demands that all inputs of a corner are ones that the parts have at the corner's temperature, the drop and
// the leakage of the diode first of all: a cold drop is never combined with a hot leakage.
func TestCornersAreOfOneTemperature(t *testing.T) {
	for _, s := range subjects(t) {
		t.Run(s.name, func(t *testing.T) {
			r := bind(t, spread(t, s.tree))
			policy := r.Policy
			bound := r.Stage.Clone()
			bound.Complete(&policy)
			byField := map[string]*stage.Quantity{}
			for _, q := range bound.Inputs()[1:] {
				byField[q.Field] = q
			}
			drop, leakage := byField["stage.bootstrap.diode.forwardPoints[0].voltage"], byField["stage.bootstrap.diode.reverseLeakage"]
			if !(drop.Range(-40).Min > drop.Range(125).Max) || !(leakage.Range(-40).Max < leakage.Range(125).Min) {
				t.Fatal("drop and leakage do not tell cold from hot")
			}
			report := review(t, spread(t, s.tree), calc.WithDutyLimits)
			seen, diode := map[string]int{}, 0
			check := func(what, set, field string, v float64) {
				q := byField[field]
				if q == nil || !q.Known() || strings.HasSuffix(field, "Temperature") { // a temperature of an operating point is itself the range
					return
				}
				temperature, ok := setTemperatures[set]
				if !ok {
					t.Fatalf("%s: no set %q", what, set)
				}
				seen[set]++
				if strings.Contains(field, "bootstrap.diode") {
					diode++
				}
				if r := q.Range(temperature); !fits(v, r) {
					t.Errorf("%s: %s = %g in the %s set, whose range is %g to %g", what, field, v, set, r.Min, r.Max)
				}
			}
			corner := func(what string, c *finding.Corner) {
				for _, x := range c.Settings {
					check(what, c.Name, x.Field, x.Value.Value)
				}
			}
			for i := range report.Findings {
				f := &report.Findings[i]
				corner(f.Rule, &f.Corner)
				for _, in := range f.Inputs {
					check(f.Rule, f.Corner.Name, in.Field, in.Measure.Value)
				}
			}
			for _, p := range report.DutyLimits.Points {
				for _, l := range p.Limits {
					corner(p.OperatingPoint+" "+l.Name, &l.Corner)
				}
			}
			if seen["cold"] < 50 || seen["hot"] < 50 || diode < 50 {
				t.Errorf("only %v inputs seen, %d of the diode", seen, diode)
			}
		})
	}
}
