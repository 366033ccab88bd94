package numeric

import (
	"math"
	"testing"
)

// twisted has the known solution y = (e^sin-like...) see below.
// y1 = 1/(2+sin t) ..., made autonomous by the clock-free pair (sin t, cos t).
type twisted struct{}

// states: s = sin t, c = cos t, p with p' = p²·c - p·(p - 1/(2-s))·3 ; solution p = 1/(2 - s): p' = c/(2-s)² = p²c.
func (twisted) Rates(y, dy []float64) bool {
	s, c, p := y[0], y[1], y[2]
	r := s*s + c*c - 1
	dy[0] = c - 2*r*s
	dy[1] = -s - 2*r*c
	dy[2] = p*p*c - 3*p*(p*(2-s)-1)
	return true
}

func (twisted) Jacobian(y, j []float64) bool {
	s, c, p := y[0], y[1], y[2]
	r := s*s + c*c - 1
	copy(j, []float64{
		-2*r - 4*s*s, 1 - 4*s*c, 0,
		-1 - 4*s*c, -2*r - 4*c*c, 0,
		3 * p * p, p * p, 2*p*c - 6*p*(2-s) + 3,
	})
	return true
}

func exact(t float64, i int) float64 {
	return [3]float64{math.Sin(t), math.Cos(t), 1 / (2 - math.Sin(t))}[i]
}

func TestOrder(t *testing.T) {
	s := NewStiff(3)
	prev := [3]float64{}
	for _, n := range []int{4, 8, 16, 32, 64, 128} {
		h := 2.0 / float64(n)
		if err := s.Start(twisted{}, []float64{0, 1, 0.5}, h, 0, []float64{1e9, 1e9, 1e9}); err != nil {
			t.Fatal(err)
		}
		var e [3]float64
		for k := range n {
			s.next, s.errOld = h, 0
			if err := s.Step(2 * float64(k+1) / float64(n)); err != nil {
				t.Fatal(err)
			}
			for i := range 3 {
				e[0] = math.Max(e[0], math.Abs(s.Y1[i]-exact(s.To, i)))
				e[1] = math.Max(e[1], math.Abs(s.u[(stages-1)*3+i]))
				p := s.Dense(i)
				for th := 0.1; th < 1; th += 0.1 {
					e[2] = math.Max(e[2], math.Abs(p.At(th)-exact(s.From+th*(s.To-s.From), i)))
				}
			}
		}
		t.Logf("n %d: %.2g %.2g %.2g orders %.2f %.2f %.2f", n, e[0], e[1], e[2], math.Log2(prev[0]/e[0]), math.Log2(prev[1]/e[1]), math.Log2(prev[2]/e[2]))
		prev = e
	}
}
