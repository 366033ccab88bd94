package transient

import "testing"

// BenchmarkEvent simulates events that ring, each for 400 ns.
func BenchmarkEvent(b *testing.B) {
	for _, c := range referenceCases(b) {
		for _, name := range []string{
			"mosfet48, turn_off, fast", "mosfet48, turn_off, fast, q 25.0", "gan100, sinking_turn_on, fast", "superjunction400, turn_on, fast",
			"igbt400, turn_off, fast", "mosfet48, turn_on, fast",
		} {
			if c.Name != name {
				continue
			}
			b.Run(name, func(b *testing.B) {
				var s Simulator
				bridge, steps := c.bridge(), 0
				for b.Loop() {
					co, err := s.Run(bridge, Window{Limit: 400e-9, Whole: true, Levels: c.levels()})
					if err != nil {
						b.Fatal(err)
					}
					steps = co.Steps + co.Rejected
				}
				b.ReportMetric(float64(steps), "steps")
			})
		}
	}
}

// BenchmarkRates and BenchmarkJacobian are one evaluation with two charges and two forward recoveries.
func BenchmarkRates(b *testing.B) {
	s, y := benchCircuit(b)
	dy := make([]float64, len(y))
	for b.Loop() {
		s.circuit.Rates(y, dy)
	}
}

func BenchmarkJacobian(b *testing.B) {
	s, y := benchCircuit(b)
	j := make([]float64, len(y)*len(y))
	for b.Loop() {
		s.circuit.Jacobian(y, j)
	}
}

func benchCircuit(b *testing.B) (*Simulator, []float64) {
	for _, c := range referenceCases(b) {
		if c.Name != "mosfet48, turn_off, fast, R_VS 4.7, forward recovery, common source" {
			continue
		}
		var s Simulator
		if _, err := s.Run(c.bridge(), Window{Limit: 20e-9, Whole: true}); err != nil {
			b.Fatal(err)
		}
		return &s, s.watch.y[:s.circuit.n]
	}
	b.Fatal("no such case")
	return nil, nil
}

// BenchmarkWindow simulates every reference case up to its own end, the mean of them.
func BenchmarkWindow(b *testing.B) {
	var s Simulator
	var all []*Bridge
	for _, c := range referenceCases(b) {
		all = append(all, c.bridge())
	}
	levels := []float64{-1, -5, -10}
	runs := 0
	for b.Loop() {
		if _, err := s.Run(all[runs%len(all)], Window{Limit: 1e-6, Levels: levels}); err != nil {
			b.Fatal(err)
		}
		runs++
	}
}
