package property

import (
	"context"
	"math"
	"testing"

	"floatrail/calc"
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
)

// slowFundamental is drive400 with one sinusoidal operating point of 16,000 periods in its fundamental.
func slowFundamental(t testing.TB) any {
	tree := document(t, "drive400").(map[string]any)
	s := tree["stage"].(map[string]any)
	s["operatingPoints"] = s["operatingPoints"].([]any)[:1]
	return with(tree, to("stage.operatingPoints.0.fixedDuty", ``), to("stage.operatingPoints.0.switchingFrequency", `{"typ": "16 kHz"}`),
		to("stage.operatingPoints.0.sinusoidal",
			`{"modulationIndex": {"typ": "0.9"}, "fundamentalFrequency": {"typ": "1 Hz"}, "displacementAngle": {"typ": "30 deg"}, "zeroSequence": "MIN_MAX"}`))
}

// BenchmarkModulatedPoint is the periodic solution of one sinusoidal point of 16,000 periods at one draw.
func BenchmarkModulatedPoint(b *testing.B) {
	r := bind(b, slowFundamental(b))
	r.Stage.Complete(&r.Policy)
	bench := rule.NewBench(r.Stage, &r.Policy)
	plan := circuit.Of(bench.Points[0].Spaces[0].Typical()).Cycle().Plan
	if plan.Periods() != 16_000 {
		b.Fatal(plan.Periods())
	}
	for b.Loop() {
		if y := plan.Steady(math.NaN()); !y.Converged {
			b.Fatal("no solution")
		}
	}
}

// BenchmarkModulatedCorners is the lowest and the highest V_BS, and the lowest with forward current, of that point at the worst corners of all
// temperature sets.
func BenchmarkModulatedCorners(b *testing.B) {
	tree := slowFundamental(b)
	for range b.N {
		b.StopTimer()
		r := bind(b, tree)
		r.Stage.Complete(&r.Policy)
		bench := rule.NewBench(r.Stage, &r.Policy)
		b.StartTimer()
		for _, n := range []struct {
			f    rule.Number
			high bool
		}{{(*circuit.Circuit).Low, false}, {(*circuit.Circuit).LowForward, false}, {(*circuit.Circuit).High, true}} {
			if s := bench.Adverse(&bench.Points[0], n.f, quantity.Voltage, n.high).Span; s.Min != s.Min {
				b.Fatal("not evaluated")
			}
		}
	}
}

// BenchmarkModulatedRules is every rule on that point.
func BenchmarkModulatedRules(b *testing.B) { benchmarkModulated(b, 0) }

// BenchmarkModulatedReview is every rule, the floating voltages, the derived limits and the switching events of that point.
func BenchmarkModulatedReview(b *testing.B) {
	benchmarkModulated(b, calc.WithDutyLimits|calc.WithTransient)
}

func benchmarkModulated(b *testing.B, parts int) {
	tree := slowFundamental(b)
	for range b.N {
		b.StopTimer()
		r := bind(b, tree)
		b.StartTimer()
		if _, err := calc.Review(context.Background(), *r, parts); err != nil {
			b.Fatal(err)
		}
	}
}
