package numeric

import (
	"math"
	"testing"
)

// robertson is the chemical problem of Robertson, 1966; Hairer and Wanner, "Solving ODEs II", eq. IV.1.4.
type robertson struct{}

func (robertson) Rates(y, dy []float64) bool {
	r1, r2, r3 := 0.04*y[0], 1e4*y[1]*y[2], 3e7*y[1]*y[1]
	dy[0], dy[1], dy[2] = r2-r1, r1-r2-r3, r3
	return true
}

func (robertson) Jacobian(y, j []float64) bool {
	copy(j, []float64{-0.04, 1e4 * y[2], 1e4 * y[1], 0.04, -1e4*y[2] - 6e7*y[1], -1e4 * y[1], 0, 6e7 * y[1], 0})
	return true
}

func run(t testing.TB, s *Stiff, end float64) {
	t.Helper()
	for s.To < end {
		if err := s.Step(end); err != nil {
			t.Fatalf("at %v: %v", s.To, err)
		}
	}
}

func TestRobertson(t *testing.T) {
	s := NewStiff(3)
	for _, tol := range []float64{1e-4, 1e-6, 1e-8, 1e-10} {
		if err := s.Start(robertson{}, []float64{1, 0, 0}, 0, tol, []float64{tol, tol * 1e-4, tol}); err != nil {
			t.Fatal(err)
		}
		run(t, s, 40)
		worst := 0.0
		for i, want := range []float64{0.7158270687194, 9.185534764557e-06, 0.2841637457458} {
			worst = math.Max(worst, math.Abs(s.Y1[i]/want-1))
		}
		t.Logf("tol %g: error %.2g, %d steps, %d rejected, %d evaluations", tol, worst, s.Accepted, s.Rejected, s.Evaluations)
	}
}
