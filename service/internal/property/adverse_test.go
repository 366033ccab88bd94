package property

import (
	"fmt"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/rule"
)

// scaled is an edit that multiplies the numbers of a range, or that of its typical value with a tolerance, by a factor.
func scaled(t testing.TB, tree any, dotted string, factor float64) []edit {
	t.Helper()
	q := lookup(tree, at(dotted)).(map[string]any)
	var out []edit
	for _, k := range []string{"min", "typ", "max"} {
		text, ok := q[k].(string)
		if !ok {
			continue
		}
		suffix := ""
		if m := tolerance.FindStringSubmatch(text); m != nil {
			text, suffix = m[1], " ±"+m[2]+" %"
		}
		if text == "2R2" {
			text = "2.2 ohm"
		}
		to, ok := moved(text, factor-1, 0)
		if !ok {
			t.Fatalf("%s of %s is no number", text, dotted)
		}
		out = append(out, edit{at(dotted + "." + k), to + suffix})
	}
	return out
}

// TestAdverseInputsLowerTheLowestVoltage worsens one input step by step: the margin of the lowest V_BS over its lockout falls with every step.
func TestAdverseInputsLowerTheLowestVoltage(t *testing.T) {
	lowest, ok := catalog.Find("charge/lowest-voltage")
	if !ok {
		t.Fatal("no such rule")
	}
	for _, name := range []string{"buck48", "gan650"} {
		tree := document(t, name)
		for _, in := range []struct {
			field string
			steps []float64
		}{
			{"stage.highSide.gateCharge", []float64{1, 1.05, 1.2, 1.6}},
			{"stage.driver.levelShiftCharge", []float64{1, 1.3, 2, 5}},
			{"stage.driver.floatingQuiescentCurrent", []float64{1, 1.5, 3, 10}},
			{"stage.bootstrap.capacitor.capacitance", []float64{1, 0.9, 0.7, 0.5}},
			{"stage.bootstrap.resistor.resistance", []float64{1, 1.2, 2, 5}},
			{"stage.gateSupply.voltage", []float64{1, 0.99, 0.97, 0.93}},
		} {
			t.Run(fmt.Sprintf("%s %s", name, in.field), func(t *testing.T) {
				last := map[place]verdict{}
				for _, factor := range in.steps {
					j := judge(t, bind(t, with(tree, scaled(t, tree, in.field, factor)...)), []*rule.Rule{lowest})
					for p, is := range j.at {
						was, ok := last[p]
						last[p] = is
						if !ok || was.margin != was.margin { // collapsed before
							continue
						}
						if is.margin >= was.margin || is.outcome < was.outcome {
							t.Errorf("%s at %g times: margin %g, was %g", p.point, factor, is.margin, was.margin)
						}
					}
				}
				if len(last) < 2 {
					t.Error("nothing was compared")
				}
			})
		}
	}
}
