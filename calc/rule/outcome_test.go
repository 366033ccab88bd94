package rule_test

import (
	"math"
	"strings"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var nan, inf = math.NaN(), math.Inf(1)

// always applies.
func always(*stage.Stage, *stage.OperatingPoint, string) string { return "" }

// made is a rule of a test.
func made(sense rule.Sense, check func(*circuit.Circuit, string) rule.Check) *rule.Rule {
	return &rule.Rule{ID: "test/rule", Title: "T", Equation: "e", Quantity: "Value", Against: "limit", Dimension: quantity.Voltage, Sense: sense,
		Fail: stage.Critical, Marginal: stage.Minor, Open: stage.Major, Inapplicable: always, Check: check}
}

// between is a value with a spread and a plausible range.
func between(field string, low, typical, high float64) stage.Quantity {
	q := stage.Between(field, low, typical, high)
	q.Declare = &stage.Declaration{Dimension: quantity.Voltage, Low: 0, High: 1000}
	return q
}

// bench is a completed stage with one operating point for each name.
func bench(change func(*stage.Stage), points ...string) *rule.Bench {
	policy := stage.DefaultPolicy()
	s := &stage.Stage{ID: "s"}
	for _, name := range points {
		s.OperatingPoints.Items = append(s.OperatingPoints.Items, stage.OperatingPoint{Name: name, FixedDuty: &stage.FixedDuty{},
			JunctionTemperature: stage.Exact("j", 25), AmbientTemperature: stage.Exact("a", 25)})
	}
	if change != nil {
		change(s)
	}
	s.Complete(&policy)
	return rule.NewBench(s, &policy)
}

// run gives the one finding of a rule.
func run(t *testing.T, b *rule.Bench, r *rule.Rule) finding.Finding {
	t.Helper()
	out, broken := b.Run(r)
	if len(out) != 1 || broken != 0 {
		t.Fatalf("%d findings, %d broken", len(out), broken)
	}
	return out[0]
}

// TestOutcome covers limit and guard, on both sides, at their edges, at infinity and where there is no number.
func TestOutcome(t *testing.T) {
	for _, c := range []struct {
		name                string
		sense               rule.Sense
		value, limit, guard float64
		want                finding.Outcome
	}{
		{"within the guard", rule.AtMost, 8, 10, 9, finding.Pass},
		{"at the guard", rule.AtMost, 9, 10, 9, finding.Pass},
		{"above the guard", rule.AtMost, 9.0001, 10, 9, finding.Marginal},
		{"at the limit", rule.AtMost, 10, 10, 9, finding.Marginal},
		{"above the limit", rule.AtMost, 10.0001, 10, 9, finding.Fail},
		{"above it by less than six digits show", rule.AtMost, 10.00001, 10, 9, finding.Marginal},
		{"above the guard by less than six digits show", rule.AtMost, 9.000004, 10, 9, finding.Pass},
		{"far above the guard", rule.AtLeast, 12, 10, 11, finding.Pass},
		{"at the lower guard", rule.AtLeast, 11, 10, 11, finding.Pass},
		{"below the guard", rule.AtLeast, 10.9999, 10, 11, finding.Marginal},
		{"at the lower limit", rule.AtLeast, 10, 10, 11, finding.Marginal},
		{"below the limit", rule.AtLeast, 9.9999, 10, 11, finding.Fail},
		{"below it by less than six digits show", rule.AtLeast, 9.999996, 10, 11, finding.Marginal},
		{"negative numbers", rule.AtLeast, -5.1, -5, -4.5, finding.Fail},
		{"a limit of zero", rule.AtLeast, 0, 0, 0, finding.Pass},
		{"no value", rule.AtMost, nan, 10, 9, finding.Open},
		{"no limit", rule.AtMost, 8, nan, 9, finding.Open},
		{"no guard", rule.AtMost, 8, 10, nan, finding.Pass},
		{"an infinite value above", rule.AtMost, inf, 10, 9, finding.Fail},
		{"an infinite value where it must be large", rule.AtLeast, inf, 10, 11, finding.Pass},
		{"a value without bottom", rule.AtLeast, -inf, 10, 11, finding.Fail},
		{"a limit that nothing reaches", rule.AtLeast, 8, inf, inf, finding.Fail},
		{"a limit that everything keeps", rule.AtMost, 8, inf, inf, finding.Pass},
		{"both infinite", rule.AtMost, inf, inf, inf, finding.Pass},
	} {
		t.Run(c.name, func(t *testing.T) {
			r := made(c.sense, func(*circuit.Circuit, string) rule.Check {
				return rule.Check{Value: c.value, Limit: c.limit, Guard: c.guard}
			})
			f := run(t, bench(nil, "p"), r)
			if f.Outcome != c.want {
				t.Errorf("%s, want %s: %s", f.Outcome, c.want, f.Message)
			}
			want := map[finding.Outcome]stage.Severity{finding.Fail: stage.Critical, finding.Marginal: stage.Minor, finding.Open: stage.Major}[c.want]
			if f.Severity != want {
				t.Errorf("severity %s, want %s", f.Severity, want)
			}
			if math.IsInf(f.Value.Value, 0) || math.IsInf(f.Limit.Value, 0) || math.IsInf(f.Margin.Absolute.Value, 0) {
				t.Error("an infinity is printed")
			}
		})
	}
}

// TestFloor covers the mildest outcome that a draw allows.
func TestFloor(t *testing.T) {
	for _, c := range []struct {
		name  string
		value float64 // against limit 10, guard 9
		floor finding.Outcome
		want  finding.Outcome
	}{
		{"no floor", 8, finding.NoOutcome, finding.Pass},
		{"a marginal floor", 8, finding.Marginal, finding.Marginal},
		{"a failing floor", 8, finding.Fail, finding.Fail},
		{"a floor below the numbers", 12, finding.Marginal, finding.Fail},
		{"an open floor is none", 8, finding.Open, finding.Pass},
	} {
		t.Run(c.name, func(t *testing.T) {
			r := made(rule.AtMost, func(*circuit.Circuit, string) rule.Check {
				return rule.Check{Value: c.value, Limit: 10, Guard: 9, Floor: c.floor}
			})
			if f := run(t, bench(nil, "p"), r); f.Outcome != c.want {
				t.Errorf("%s, want %s: %s", f.Outcome, c.want, f.Message)
			}
		})
	}
}

// TestTally covers a rule that judges what the rules before it assumed and left open.
func TestTally(t *testing.T) {
	counting := made(rule.AtMost, nil)
	counting.Check = nil
	counting.Tally = func(assumed []stage.Assumption, open int) (rule.Check, []string) {
		if open > 0 {
			return rule.Check{Value: math.NaN()}, []string{"too much is open"}
		}
		return rule.Check{Value: float64(len(assumed)), Limit: math.Inf(1)}, nil
	}
	for _, c := range []struct {
		name  string
		check func(k *circuit.Circuit, _ string) rule.Check
		want  finding.Outcome
	}{
		{"nothing assumed", func(*circuit.Circuit, string) rule.Check { return rule.Check{Value: 1, Limit: 10, Guard: 9} }, finding.Pass},
		{"something assumed", func(k *circuit.Circuit, _ string) rule.Check {
			k.Assume(stage.Assumption{Field: "stage.x", Assumed: "1", Direction: stage.Optimistic, Reason: "nobody said so"})
			return rule.Check{Value: 1, Limit: 10, Guard: 9}
		}, finding.Marginal},
		{"something open", func(k *circuit.Circuit, _ string) rule.Check { return rule.Check{Value: k.Want("stage.x")} }, finding.Open},
	} {
		t.Run(c.name, func(t *testing.T) {
			findings, _ := bench(nil, "p").Run(made(rule.AtMost, c.check), counting)
			if f := findings[len(findings)-1]; f.Outcome != c.want {
				t.Errorf("%s, want %s: %s", f.Outcome, c.want, f.Message)
			}
		})
	}
}

// TestOptimisticAssumption caps a pass that rests on one; a conservative one does not, and an unread one does not.
func TestOptimisticAssumption(t *testing.T) {
	for _, c := range []struct {
		name      string
		direction stage.Direction
		read      bool
		value     float64 // against limit 10, guard 9
		want      finding.Outcome
	}{
		{"optimistic", stage.Optimistic, true, 8, finding.Marginal},
		{"optimistic, unread", stage.Optimistic, false, 8, finding.Pass},
		{"conservative", stage.Conservative, true, 8, finding.Pass},
		{"optimistic beyond the limit", stage.Optimistic, true, 12, finding.Fail},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := bench(func(s *stage.Stage) {
				s.Driver.OffsetLeakage = stage.Absent("stage.driver.offsetLeakage", &stage.Declaration{Absence: stage.Assumed, AssumedMin: 0, AssumedTyp: 0,
					AssumedMax: 0, Direction: c.direction, Reason: "nobody said so"})
			}, "p")
			r := made(rule.AtMost, func(k *circuit.Circuit, _ string) rule.Check {
				v := c.value
				if c.read {
					v += k.Need(&k.Stage.Driver.OffsetLeakage)
				}
				return rule.Check{Value: v, Limit: 10, Guard: 9}
			})
			f := run(t, b, r)
			if f.Outcome != c.want {
				t.Errorf("%s, want %s", f.Outcome, c.want)
			}
			if listed := len(b.Assumptions()) == 1; listed != c.read {
				t.Errorf("assumptions %v", b.Assumptions())
			}
		})
	}
}

// TestMissingIsNamed opens a rule whose input is unknown, names it, and finds the value of it at which the rule turns.
func TestMissingIsNamed(t *testing.T) {
	unknown := func(s *stage.Stage) {
		s.Driver.UVLOFalling = between("stage.driver.uvloFalling", 6, 7, 8)
		s.Driver.OffsetLeakage = stage.Absent("stage.driver.offsetLeakage", &stage.Declaration{Dimension: quantity.Voltage, Low: 0, High: 100})
	}
	r := made(rule.AtMost, func(c *circuit.Circuit, _ string) rule.Check {
		return rule.Check{Value: c.Need(&c.Stage.Driver.UVLOFalling) + c.Need(&c.Stage.Driver.OffsetLeakage), Limit: 20, Guard: 18}
	})
	f := run(t, bench(unknown, "p"), r)
	if f.Outcome != finding.Open || len(f.Missing) != 1 || f.Missing[0] != "stage.driver.offsetLeakage" || !strings.Contains(f.Message, "driver.offsetLeakage") {
		t.Fatalf("%s: %v: %s", f.Outcome, f.Missing, f.Message)
	}
	if len(f.BreakEven) != 1 || math.Abs(f.BreakEven[0].Measure.Value-12) > 1e-4 {
		t.Errorf("break-even %v, want 12 V: 20 V less the largest 8 V", f.BreakEven)
	}
}

// TestSeverities covers a rule's own severity for a stage and the policy's override, which prevails, and for FAIL only.
func TestSeverities(t *testing.T) {
	value := 12.0
	r := made(rule.AtMost, func(*circuit.Circuit, string) rule.Check { return rule.Check{Value: value, Limit: 10, Guard: 9} })
	b := bench(nil, "p")
	r.FailSeverity = func(*stage.Stage, string) stage.Severity { return stage.Major }
	if f := run(t, b, r); f.Severity != stage.Major {
		t.Errorf("%s, want the stage's MAJOR", f.Severity)
	}
	b.Policy.Severities = []stage.SeverityOverride{{Rule: "other/rule", Severity: stage.Note}, {Rule: "test/rule", Severity: stage.Minor}}
	if f := run(t, b, r); f.Severity != stage.Minor {
		t.Errorf("%s, want the policy's MINOR", f.Severity)
	}
	value = 9.5
	if f := run(t, bench(nil, "p"), r); f.Severity != stage.Minor || f.Outcome != finding.Marginal {
		t.Errorf("%s %s", f.Outcome, f.Severity)
	}
}

// TestBroken leaves a rule that panics open, counts it, and leaves the others intact.
func TestBroken(t *testing.T) {
	for _, at := range []string{"check", "alternative", "explain"} {
		bad := made(rule.AtMost, func(*circuit.Circuit, string) rule.Check {
			if at == "check" {
				panic("test: broken")
			}
			return rule.Check{Value: 12, Limit: 10, Guard: 9}
		})
		if at == "alternative" {
			bad.Alternatives = []func(*circuit.Circuit, string) float64{func(*circuit.Circuit, string) float64 { panic("test: broken") }}
		}
		if at == "explain" {
			bad.Explain = func(*circuit.Circuit, string, rule.Check) []string { panic("test: broken") }
		}
		bad.ID = "test/bad"
		good := made(rule.AtMost, func(*circuit.Circuit, string) rule.Check { return rule.Check{Value: 8, Limit: 10, Guard: 9} })
		out, broken := bench(nil, "p", "q").Run(good, bad, good)
		if broken != 1 || len(out) != 3 {
			t.Fatalf("%s: %d findings, %d broken", at, len(out), broken)
		}
		if f := out[1]; f.Outcome != finding.Open || f.Rule != "test/bad" || f.Severity != stage.Major || !strings.Contains(f.Message, "internal") || f.Identity == "" {
			t.Errorf("%s: %+v", at, f)
		}
		if strings.Contains(out[1].Message, "test: broken") {
			t.Error("the panic's text is in the message")
		}
		if out[0].Outcome != finding.Pass || out[2].Outcome != finding.Pass {
			t.Errorf("%s: the others are %s and %s", at, out[0].Outcome, out[2].Outcome)
		}
	}
}
