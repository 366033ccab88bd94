package rule_test

import (
	"strings"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// TestGroups makes one finding for each role and kind of mode, one for all operating points where the mode does not matter, and lists the
// operating points that do not bind.
func TestGroups(t *testing.T) {
	b := bench(func(s *stage.Stage) {
		s.OperatingPoints.Items[1].FixedDuty, s.OperatingPoints.Items[1].HeldOn = nil, &stage.HeldOn{}
		for i := range s.OperatingPoints.Items {
			s.OperatingPoints.Items[i].BusVoltage = between("bus", float64(i), float64(i), float64(i))
		}
	}, "a", "b", "c")
	r := made(rule.AtMost, func(c *circuit.Circuit, _ string) rule.Check {
		return rule.Check{Value: c.Need(&c.Point.BusVoltage), Limit: 10, Guard: 9}
	})
	r.Roles = []string{"driver", "highSide"}
	type want struct{ role, mode, point, rest string }
	compare := func(wanted []want) {
		t.Helper()
		got, _ := b.Run(r)
		if len(got) != len(wanted) {
			t.Fatalf("%d findings, want %d", len(got), len(wanted))
		}
		seen := map[string]bool{}
		for i, w := range wanted {
			var rest []string
			for _, p := range got[i].Points {
				rest = append(rest, p.OperatingPoint)
			}
			if got[i].Role != w.role || got[i].Mode != w.mode || got[i].OperatingPoint != w.point || strings.Join(rest, " ") != w.rest {
				t.Errorf("%s %s %s %v, want %v", got[i].Role, got[i].Mode, got[i].OperatingPoint, rest, w)
			}
			if seen[got[i].Identity] {
				t.Error("two findings have one identity")
			}
			seen[got[i].Identity] = true
		}
	}
	compare([]want{{"driver", "fixedDuty", "c", "a"}, {"driver", "heldOn", "b", ""}, {"highSide", "fixedDuty", "c", "a"}, {"highSide", "heldOn", "b", ""}})
	r.Stagewide = true
	compare([]want{{"driver", "", "c", "a b"}, {"highSide", "", "c", "a b"}})
}

// TestWorstOfPoints takes the worse outcome before the smaller margin, and where all is equal the first name, whatever the order.
func TestWorstOfPoints(t *testing.T) {
	check := func(c *circuit.Circuit, _ string) rule.Check {
		return map[string]rule.Check{
			"passes by little": {Value: 9.999, Limit: 10, Guard: 10},
			"marginal by far":  {Value: 5, Limit: 10, Guard: 4},
			"nothing a":        {Value: -inf, Limit: 10, Guard: 9, Floor: finding.Fail},
			"nothing b":        {Value: -inf, Limit: 10, Guard: 9, Floor: finding.Fail},
			"a share":          {Value: 9, Limit: 10, Guard: 5},
			"a larger number":  {Value: 80, Limit: 100, Guard: 50},
		}[c.Point.Name]
	}
	for _, c := range []struct {
		want   string
		points []string
	}{
		{"marginal by far", []string{"passes by little", "marginal by far"}},
		{"a share", []string{"a larger number", "a share"}},
		{"nothing a", []string{"nothing a", "nothing b"}},
		{"nothing a", []string{"nothing b", "nothing a"}},
	} {
		if f := run(t, bench(nil, c.points...), made(rule.AtMost, check)); f.OperatingPoint != c.want {
			t.Errorf("of %q binds %q, want %q", c.points, f.OperatingPoint, c.want)
		}
	}
}

// TestNotApplicable says why, and only where no operating point is judged.
func TestNotApplicable(t *testing.T) {
	r := made(rule.AtMost, func(*circuit.Circuit, string) rule.Check { return rule.Check{Value: 8, Limit: 10, Guard: 9} })
	r.Inapplicable = func(_ *stage.Stage, op *stage.OperatingPoint, _ string) string {
		if op.Name == "idle" {
			return "nothing switches"
		}
		return ""
	}
	if f := run(t, bench(nil, "idle", "busy"), r); f.Outcome != finding.Pass || f.OperatingPoint != "busy" {
		t.Errorf("%s at %q", f.Outcome, f.OperatingPoint)
	}
	f := run(t, bench(nil, "idle"), r)
	if f.Outcome != finding.NotApplicable || f.Severity != stage.NoSeverity || !strings.Contains(f.Message, "nothing switches") {
		t.Errorf("%s %s: %s", f.Outcome, f.Severity, f.Message)
	}
}

// TestAlternatives finds the worst draw of a margin that is the smaller of two: at the typical draw the first hides what the second reads.
func TestAlternatives(t *testing.T) {
	b := bench(func(s *stage.Stage) {
		s.Driver.UVLOFalling = between("stage.a", 1, 2, 3)
		s.Driver.UVLORising = between("stage.b", 1, 5, 9)
		s.Driver.EdgeTime = between("stage.c", 1, 5, 9)
	}, "p")
	first := func(c *circuit.Circuit, _ string) float64 { return 20 - c.Need(&c.Stage.Driver.UVLOFalling) }
	second := func(c *circuit.Circuit, _ string) float64 {
		return 100 - c.Need(&c.Stage.Driver.UVLORising)*c.Need(&c.Stage.Driver.EdgeTime)*1.5
	}
	check := func(c *circuit.Circuit, role string) rule.Check {
		return rule.Check{Value: min(first(c, role), second(c, role)), Limit: 1, Guard: 1}
	}
	r := made(rule.AtLeast, check)
	r.Alternatives = []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, role string) float64 { return first(c, role) - 1 },
		func(c *circuit.Circuit, role string) float64 { return second(c, role) - 1 },
	}
	f := run(t, b, r)
	if f.Outcome != finding.Fail || f.Value.Value != 100-9*9*1.5 {
		t.Errorf("%s, value %g, want FAIL at %g", f.Outcome, f.Value.Value, 100-9*9*1.5)
	}
}

// TestExplanation gives corner, inputs, ranking by swing and break-even of a finding.
func TestExplanation(t *testing.T) {
	b := bench(func(s *stage.Stage) {
		s.Driver.UVLOFalling = between("stage.a", 1, 2, 4)
		s.Driver.UVLORising = between("stage.b", 10, 20, 30)
		s.Driver.EdgeTime = between("stage.exact", 3, 3, 3)
	}, "p")
	r := made(rule.AtMost, func(c *circuit.Circuit, _ string) rule.Check {
		return rule.Check{Value: c.Need(&c.Stage.Driver.UVLOFalling) + c.Need(&c.Stage.Driver.UVLORising) + c.Need(&c.Stage.Driver.EdgeTime), Limit: 40, Guard: 36}
	})
	f := run(t, b, r)
	if f.Value.Value != 37 || f.Typical.Value != 25 || f.Margin.Absolute.Value != 3 || f.Margin.Relative != 0.075 || f.Outcome != finding.Marginal {
		t.Errorf("value %g, typical %g, margin %g and %g", f.Value.Value, f.Typical.Value, f.Margin.Absolute.Value, f.Margin.Relative)
	}
	settings := map[string]finding.Bound{}
	for _, s := range f.Corner.Settings {
		settings[s.Field] = s.Bound
	}
	if len(settings) != 2 || settings["stage.a"] != finding.AtMax || settings["stage.b"] != finding.AtMax || f.Corner.Name != "room" {
		t.Errorf("corner %s %v", f.Corner.Name, settings)
	}
	if len(f.Inputs) != 3 {
		t.Errorf("%d inputs", len(f.Inputs))
	}
	if len(f.Ranking) != 2 || f.Ranking[0].Field != "stage.b" || f.Ranking[0].Swing.Value != 20 || f.Ranking[1].Swing.Value != 3 {
		t.Errorf("ranking %v", f.Ranking)
	}
	for _, e := range f.BreakEven {
		want := map[string]float64{"stage.a": 7, "stage.b": 33}[e.Field]
		if d := e.Measure.Value - want; d > 0.01 || d < -0.01 {
			t.Errorf("break-even of %s at %g, want %g", e.Field, e.Measure.Value, want)
		}
	}
	if len(f.BreakEven) < 2 {
		t.Errorf("break-evens %v", f.BreakEven)
	}
}

// TestValidate finds what is wrong with a catalogue.
func TestValidate(t *testing.T) {
	good := func() *rule.Rule {
		r := made(rule.AtMost, func(*circuit.Circuit, string) rule.Check { return rule.Check{} })
		r.Since, r.Limit, r.Guard, r.Applies, r.Needs, r.Sources = "2026.12", "l", "g", "always", []string{"driver"}, []string{"common-practice"}
		return r
	}
	if errs := rule.Validate([]*rule.Rule{good()}); len(errs) != 0 {
		t.Errorf("a good rule: %v", errs)
	}
	for what, spoil := range map[string]func(*rule.Rule){
		"lower case":    func(r *rule.Rule) { r.ID = "Test/rule" },
		"family/name":   func(r *rule.Rule) { r.ID = "rule" },
		"title":         func(r *rule.Rule) { r.Title = "" },
		"equation":      func(r *rule.Rule) { r.Equation = "" },
		"needed fields": func(r *rule.Rule) { r.Needs = nil },
		"no source":     func(r *rule.Rule) { r.Sources = nil },
		"bibliography":  func(r *rule.Rule) { r.Sources = []string{"no-such-key"} },
		"severity":      func(r *rule.Rule) { r.Marginal = stage.NoSeverity },
		"below MAJOR":   func(r *rule.Rule) { r.Open = stage.Minor },
		"sense":         func(r *rule.Rule) { r.Sense = 0 },
	} {
		r := good()
		spoil(r)
		errs := rule.Validate([]*rule.Rule{r})
		if len(errs) != 1 || !strings.Contains(errs[0].Error(), what) {
			t.Errorf("%s: %v", what, errs)
		}
	}
	if errs := rule.Validate([]*rule.Rule{good(), good()}); len(errs) != 1 || !strings.Contains(errs[0].Error(), "twice") {
		t.Errorf("twice: %v", errs)
	}
}

// TestRange gives both ends of a number over the sets and its typical value at room temperature; nothing where an input is missing.
func TestRange(t *testing.T) {
	b := bench(func(s *stage.Stage) {
		s.OperatingPoints.Items[0].AmbientTemperature = stage.Between("a", -40, 25, 125)
		s.Driver.UVLOFalling = stage.Between("stage.a", 1, 2, 4)
		s.Driver.UVLOFalling.At = []stage.AtTemperature{{Temperature: 125, Triple: stage.Triple{Min: 5, Typ: 6, Max: 8}}}
		s.Driver.UVLORising = stage.Absent("stage.b", &stage.Declaration{})
	}, "p")
	r := b.Range(&b.Points[0], func(c *circuit.Circuit) float64 { return 10 * c.Need(&c.Stage.Driver.UVLOFalling) }, quantity.Voltage)
	if r.Span.Min != 10 || r.Span.Typ != 20 || r.Span.Max != 80 {
		t.Errorf("span %v", r.Span)
	}
	if r.Low.Space.Set.Name == "hot" || r.High.Space.Set.Name != "hot" {
		t.Errorf("ends in %s and %s", r.Low.Space.Set.Name, r.High.Space.Set.Name)
	}
	r = b.Range(&b.Points[0], func(c *circuit.Circuit) float64 { return c.Need(&c.Stage.Driver.UVLORising) }, quantity.Voltage)
	if r.Low.Space != nil || r.Span.Min == r.Span.Min || len(r.Missing) != 1 || r.Missing[0] != "stage.b" {
		t.Errorf("%v, missing %v", r.Span, r.Missing)
	}
}
