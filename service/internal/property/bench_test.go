package property

import (
	"context"
	"testing"
	"time"

	"floatrail/calc"
	"floatrail/calc/study"
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

// BenchmarkStudy is 1000 draws of three operating points, with the worst case beside them. It reports what 10,000 draws take at that pace, and the
// time to the first progress.
func BenchmarkStudy(b *testing.B) {
	const draws = 1000
	tree := document(b, "buck48")
	b.ReportAllocs()
	first := time.Duration(0)
	for range b.N {
		b.StopTimer()
		r := bind(b, tree)
		begin, told := time.Now(), false
		b.StartTimer()
		if _, err := study.Run(context.Background(), study.Request{Stage: r.Stage, Policy: r.Policy, Draws: draws}, func(study.Progress) error {
			if !told {
				first, told = first+time.Since(begin), true
			}
			return nil
		}); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(10_000/draws*b.Elapsed().Seconds()/float64(b.N), "s/10kdraws")
	b.ReportMetric(first.Seconds()*1e3/float64(b.N), "ms/first")
}
