package modulation

import (
	"math"
	"testing"
)

// BenchmarkFundamental is one sinusoidal point of 16,000 periods, from no knowledge of its solution, by collocation and period by period.
func BenchmarkFundamental(b *testing.B) {
	for _, c := range references(b) {
		switch c.Name {
		case "motoring", "min-max", "clamp 60", "peak detector", "recovery, motoring", "larger resistor":
		default:
			continue
		}
		c.Periods = 16_000
		p := c.plan()
		exact := p.steady(math.NaN(), defaultTolerance, true, nil)
		b.Run(c.Name, func(b *testing.B) {
			var s Steady
			for b.Loop() {
				s = c.plan().Steady(math.NaN())
			}
			b.ReportMetric(float64(s.Passes), "periods")
			b.ReportMetric(1e6*(s.Low.Value-exact.Low.Value), "µV-low")
			b.ReportMetric(1e6*(s.High.Value-exact.High.Value), "µV-high")
		})
		b.Run(c.Name+", every period", func(b *testing.B) {
			for b.Loop() {
				p.steady(math.NaN(), defaultTolerance, true, nil)
			}
		})
	}
}
