package study

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
	"strings"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// small is a stage of a few inputs: V_DD between 1 and 3, a lockout without its upper end, a resistance on an optimistic assumption, a leakage that
// doubles every 10 K, and operating points between 20 and 60 °C.
func small(points ...string) *stage.Stage {
	declared := func(symbol string) *stage.Declaration {
		return &stage.Declaration{Symbol: symbol, Dimension: quantity.Voltage, Low: 0, High: 1000}
	}
	s := &stage.Stage{ID: "s"}
	between := func(q *stage.Quantity, field, symbol string, low, typ, high float64) {
		*q = stage.Between("stage."+field, low, typ, high)
		q.Declare = declared(symbol)
	}
	between(&s.GateSupply.Voltage, "gateSupply.voltage", "V_DD", 1, 2, 3)
	between(&s.Driver.UVLOFalling, "driver.uvloFalling", "V_UV-", 1, 2, math.NaN())
	between(&s.Bootstrap.Resistor.Resistance, "bootstrap.resistor.resistance", "R_B", 1, 2, 3)
	s.Bootstrap.Resistor.Resistance.Assumption = &stage.Assumption{Field: "stage.bootstrap.resistor.resistance", Direction: stage.Optimistic}
	between(&s.Driver.OffsetLeakage, "driver.offsetLeakage", "I_LK", 1, 1, 1)
	s.Driver.OffsetLeakage.Declare.Law = stage.Leakage
	s.Driver.LevelShiftCharge = stage.Absent("stage.driver.levelShiftCharge", declared("Q_LS"))
	s.HighSide.OutputCapacitance.Field, s.LowSide.OutputCapacitance.Field = "stage.highSide.outputCapacitance", "stage.lowSide.outputCapacitance"
	for i, name := range points {
		op := stage.OperatingPoint{Name: name, FixedDuty: &stage.FixedDuty{}}
		field := fmt.Sprintf("operatingPoints[%d]", i)
		op.Field = "stage." + field
		between(&op.JunctionTemperature, field+".junctionTemperature", "T_J", 30, 60, 90)
		between(&op.AmbientTemperature, field+".ambientTemperature", "T_A", 20, 40, 60)
		between(&op.BusVoltage, field+".busVoltage", "V_BUS", 1, 2, 3)
		s.OperatingPoints.Items = append(s.OperatingPoints.Items, op)
	}
	return s
}

// made is a rule against a limit of 2 with a guard of 1.5.
func made(id string, value func(c *circuit.Circuit) float64) *rule.Rule {
	return &rule.Rule{ID: id, Quantity: "Value", Against: "limit", Dimension: quantity.Voltage, Sense: rule.AtMost,
		Inapplicable: func(*stage.Stage, *stage.OperatingPoint, string) string { return "" },
		Check: func(c *circuit.Circuit, _ string) rule.Check {
			return rule.Check{Value: value(c), Limit: 2, Guard: 1.5}
		}}
}

func studyOf(t *testing.T, s *stage.Stage, draws int, rules ...*rule.Rule) Report {
	t.Helper()
	out, err := study(context.Background(), Request{Stage: s, Policy: stage.DefaultPolicy(), Draws: draws, Seed: 5}, rules, func(Progress) error { return nil })
	if err != nil {
		t.Fatal(err)
	}
	return out
}

// TestOutcomesOfDraws: V_DD is even between 1 and 3, so that a quarter of the draws is within the guard of 1.5, another one within the limit of 2 and a
// half beyond; what cannot be evaluated, panics or lies beyond an unknown end is open and within nothing.
func TestOutcomesOfDraws(t *testing.T) {
	const draws = 2000
	supply := func(c *circuit.Circuit) float64 { return c.Need(&c.Stage.GateSupply.Voltage) }
	r := studyOf(t, small("a"), draws,
		made("t/plain", supply),
		made("t/missing", func(c *circuit.Circuit) float64 { return supply(c) + c.Need(&c.Stage.Driver.LevelShiftCharge) }),
		made("t/reason", func(c *circuit.Circuit) float64 {
			if v := supply(c); v < 2 {
				return v
			}
			return c.Open("too high a supply")
		}),
		made("t/panic", func(c *circuit.Circuit) float64 {
			if supply(c) > 2.5 {
				panic("above")
			}
			return 0
		}),
		made("t/beyond", func(c *circuit.Circuit) float64 { return c.Need(&c.Stage.Driver.UVLOFalling) / 10 }),
		made("t/away", func(c *circuit.Circuit) float64 { return -c.Need(&c.Stage.Driver.UVLOFalling) }),
		made("t/optimistic", func(c *circuit.Circuit) float64 { return c.Need(&c.Stage.Bootstrap.Resistor.Resistance) / 10 }),
	)
	four := 4 * math.Sqrt(0.25*draws) // standard deviations of a count, at most
	for i, want := range []struct {
		id                             string
		passed, marginal, failed, open float64
		missing, reason                string
	}{
		{"t/plain", draws / 4, draws / 4, draws / 2, 0, "", ""},
		{"t/missing", 0, 0, 0, draws, "stage.driver.levelShiftCharge", ""},
		{"t/reason", draws / 4, draws / 4, 0, draws / 2, "", "too high a supply"},
		{"t/panic", draws * 3 / 4, 0, 0, draws / 4, "", "internal"},
		{"t/beyond", 0, 0, 0, draws, "stage.driver.uvloFalling.max", "gets worse beyond an end of a spread that is not given"},
		{"t/away", draws, 0, 0, 0, "", ""},
		{"t/optimistic", 0, draws, 0, 0, "", ""},
	} {
		c := &r.Results[i]
		off := func(got int, want float64) bool { return math.Abs(float64(got)-want) > four }
		if c.Rule != want.id || off(c.Guarded.Count, want.passed) || off(c.Marginal, want.marginal) || off(c.Failed, want.failed) || off(c.Open, want.open) ||
			c.Guarded.Count+c.Marginal+c.Failed+c.Open != draws || c.Yield.Count != c.Guarded.Count+c.Marginal {
			t.Errorf("%s: %d passed, %d marginal, %d failed, %d open, want about %+v", c.Rule, c.Guarded.Count, c.Marginal, c.Failed, c.Open, want)
		}
		if strings.Join(c.Missing, " ") != want.missing || strings.Join(c.Reasons, "; ") != want.reason {
			t.Errorf("%s: open for %q, %q, want %q, %q", c.Rule, c.Missing, c.Reasons, want.missing, want.reason)
		}
	}
	if r.Internal != 1 || r.Overall.Yield.Count != 0 || r.Overall.Failed+r.Overall.Open != draws || r.Overall.Failed != r.Results[0].Failed {
		t.Errorf("%d rules panicked, overall %+v", r.Internal, r.Overall)
	}
	plain := &r.Results[0]
	for i, want := range []float64{1.02, 1.1, 2, 2.9, 2.98} {
		p := plain.Percentiles[i]
		if !(p.Low.Value <= want && want <= p.High.Value) && math.Abs(p.Value.Value-want) > 0.05 {
			t.Errorf("percentile %g: %g between %g and %g, want %g", p.Percent, p.Value.Value, p.Low.Value, p.High.Value, want)
		}
	}
	if !(plain.Smallest.Value >= 1 && plain.Largest.Value <= 3) || plain.LeastMargin.Absolute.Value != rule.Significant(2-plain.Largest.Value) {
		t.Errorf("from %g to %g, least margin %g", plain.Smallest.Value, plain.Largest.Value, plain.LeastMargin.Absolute.Value)
	}
	if len(plain.Ranking) != 1 || plain.Ranking[0].Field != "stage.gateSupply.voltage" || plain.Ranking[0].Rho > -0.99999 || plain.Ranking[0].Symbol != "V_DD" {
		t.Errorf("ranking %v", plain.Ranking)
	}
	if e := plain.Extreme; e == nil || e.Outcome != finding.Fail || e.Value.Value != 3 {
		t.Errorf("extreme %+v", e)
	}
}

// TestTemperatureOfDraws: ambient and junction stand at the same quantile, and a value with a law follows: a leakage of 1 at 25 °C that doubles every
// 10 K ranges from 2^-0.5 to 2^3.5 between 20 and 60 °C, and what ranks is the temperature.
func TestTemperatureOfDraws(t *testing.T) {
	var far float64
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1)) // the rule notes what it sees
	r := studyOf(t, small("a", "b"), 400,
		made("t/leakage", func(c *circuit.Circuit) float64 {
			if c.Set.Name == "draw" { // not in the worst case beside it
				far = math.Max(far, math.Abs((c.Set.Ambient-20)/40-(c.Set.Junction-30)/60))
			}
			return c.Need(&c.Stage.Driver.OffsetLeakage)
		}))
	if far > 1e-12 {
		t.Errorf("ambient and junction stand %g apart", far)
	}
	for i := range r.Results {
		c := &r.Results[i]
		low, high := math.Exp2(-0.5), math.Exp2(3.5)
		if c.Smallest.Value < low || c.Smallest.Value > 1.05*low || c.Largest.Value > high || c.Largest.Value < high/1.05 {
			t.Errorf("leakage from %g to %g, want about %g to %g", c.Smallest.Value, c.Largest.Value, low, high)
		}
		if len(c.Ranking) != 1 || c.Ranking[0].Symbol != "T_A" || c.Ranking[0].Rho > -0.9999 {
			t.Errorf("ranking %v", c.Ranking)
		}
	}
	if a, b := r.Results[0].At(0).Value, r.Results[1].At(0).Value; a == b {
		t.Error("two operating points have one temperature")
	}
}

// TestNothingToJudge: without rules there is no yield, and without operating points rules are judged once, at 25 °C.
func TestNothingToJudge(t *testing.T) {
	if r := studyOf(t, small("a"), 10); r.Overall.Yield.Of != 0 || r.Overall.Yield.Value == r.Overall.Yield.Value || len(r.Results) > 0 {
		t.Errorf("without rules: %+v", r.Overall)
	}
	r := studyOf(t, small(), 10, made("t/room", func(c *circuit.Circuit) float64 { return c.Need(&c.Stage.Driver.OffsetLeakage) }))
	if len(r.Results) != 1 || r.Results[0].Yield.Count != 10 || r.Results[0].Smallest.Value != 1 || r.Results[0].Point != "" {
		t.Errorf("without operating points: %+v", r.Results)
	}
}

// TestPanicsComeOut: a panic beside a rule reaches the caller's goroutine.
func TestPanicsComeOut(t *testing.T) {
	defer func() {
		if p := recover(); p != "broken" {
			t.Errorf("recovered %v", p)
		}
	}()
	sideBySide(10, func(i int) {
		if i == 7 {
			panic("broken")
		}
	})
	t.Error("it went on")
}

// TestStreamsOfAStage: every input that varies has a stream of its own, named by its path and by the name of its operating point.
func TestStreamsOfAStage(t *testing.T) {
	names := func(points ...string) map[string]stream {
		s := small(points...)
		p := stage.DefaultPolicy()
		s.Complete(&p)
		out := map[string]stream{}
		var seen []stream
		for _, v := range variates(s) {
			if slices.Contains(seen, v.stream) {
				t.Errorf("%s has the stream of another input", v.input.Field)
			}
			seen = append(seen, v.stream)
			name := v.input.Field
			if v.point >= 0 {
				name = s.OperatingPoints.Items[v.point].Name + name[strings.LastIndex(name, "."):]
			}
			out[name] = v.stream
		}
		return out
	}
	one, two := names("a", "b"), names("x", "b", "a")
	if len(one) < 7 || len(two) != len(one)+2 {
		t.Errorf("%d and %d inputs vary", len(one), len(two))
	}
	for name, s := range one {
		if two[name] != s {
			t.Errorf("%s has another stream in another order", name)
		}
	}
}

// TestMost bounds the draws by the operating points.
func TestMost(t *testing.T) {
	for points, want := range map[int]int{0: 100_000, 1: 100_000, 3: 100_000, 4: 75_000, 64: 4687} {
		if got := Most(points); got != want {
			t.Errorf("%d points: %d draws, want %d", points, got, want)
		}
	}
}
