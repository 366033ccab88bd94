package property

import (
	"context"
	"testing"

	"floatrail/calc"
)

// BenchmarkReviewStage is a review of three operating points with their floating voltages and switching events; the request is bound outside the timer.
func BenchmarkReviewStage(b *testing.B) { benchmark(b, calc.WithDutyLimits|calc.WithTransient) }

// BenchmarkSizing is a review with the parts that fit.
func BenchmarkSizing(b *testing.B) { benchmark(b, calc.WithSizing) }

func benchmark(b *testing.B, parts int) {
	tree := document(b, "buck48")
	b.ReportAllocs()
	for range b.N {
		b.StopTimer()
		r := bind(b, tree)
		b.StartTimer()
		if _, err := calc.Review(context.Background(), *r, parts); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkRules is the rules alone.
func BenchmarkRules(b *testing.B) { benchmark(b, 0) }

// BenchmarkSimulatedReview is a review of three operating points whose switching events are simulated.
func BenchmarkSimulatedReview(b *testing.B) {
	tree := document(b, "buck48")
	b.ReportAllocs()
	for range b.N {
		b.StopTimer()
		r := bind(b, tree)
		r.Options.Simulate = true
		b.StartTimer()
		if _, err := calc.Review(context.Background(), *r, calc.WithDutyLimits|calc.WithTransient); err != nil {
			b.Fatal(err)
		}
	}
}
