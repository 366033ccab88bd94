package numeric

import (
	"math"
	"testing"
)

// quasi is a sequence of numbers in (-1, 1) without a pattern: the fractional parts of multiples of the golden section, squared
// multiples so that neighbours do not correlate.
type quasi struct{ k float64 }

func (q *quasi) next() float64 {
	q.k++
	_, f := math.Modf(q.k * q.k * 0.61803398874989484820)
	return 2*f - 1
}

func TestFactorSolves(t *testing.T) {
	var q quasi
	for n := 1; n <= 13; n++ {
		a, x, scale, pivot := make([]float64, n*n), make([]float64, n), make([]float64, n), make([]int, n)
		for i := range a {
			if a[i] = q.next(); n > 3 && q.next() > 0.3 {
				a[i] = 0 // zeros are skipped
			}
		}
		for i := range n {
			a[i*n+(i+1)%n] += 3 // large beside the diagonal: pivots are needed
			x[i], scale[i] = q.next(), 1
		}
		b := make([]float64, n)
		for i := range n {
			for k := range n {
				b[i] += a[i*n+k] * x[k]
			}
		}
		if !factor(a, n, pivot, scale) {
			t.Fatalf("n = %d: singular", n)
		}
		substitute(a, n, pivot, b)
		for i := range n {
			if math.Abs(b[i]-x[i]) > 1e-13 {
				t.Errorf("n = %d: x[%d] = %v, want %v", n, i, b[i], x[i])
			}
		}
	}
}

func TestFactorRefuses(t *testing.T) {
	for name, w := range map[string][]float64{
		"zero":      {0, 0, 0, 0},
		"rank 1":    {1, 2, 2, 4},
		"NaN":       {math.NaN(), 1, math.NaN(), 1},
		"underflow": {5e-324, 0, 0, 1},
	} {
		if factor(w, 2, make([]int, 2), []float64{1, 1}) {
			t.Errorf("%s: factored", name)
		}
	}
}

// The pivot is the larger one in units, not in figures.
func TestFactorPivots(t *testing.T) {
	pivot := make([]int, 2)
	if factor([]float64{1, 2, 4, 1}, 2, pivot, []float64{1, 1}); pivot[0] != 1 {
		t.Error("equal units: the smaller pivot was taken")
	}
	if factor([]float64{1, 2, 4, 1}, 2, pivot, []float64{1, 0.125}); pivot[0] != 0 {
		t.Error("unit of row 1 eight times as large: its element was still taken")
	}
}

// dense12 has a full Jacobian of 12 states and rates that cost next to nothing.
type dense12 struct{ j [144]float64 }

func newDense12() *dense12 {
	var q quasi
	d := &dense12{}
	for i := range d.j {
		d.j[i] = q.next()
	}
	for i := range 12 {
		d.j[13*i] -= 8
	}
	return d
}

func (d *dense12) Rates(y, dy []float64) bool {
	for i := range dy {
		dy[i] = -8 * y[i]
	}
	return true
}

func (d *dense12) Jacobian(_, j []float64) bool {
	copy(j, d.j[:])
	return true
}

// BenchmarkStep12 is the work of one step beside rates and Jacobian: matrix, factors, six substitutions, sums, control.
func BenchmarkStep12(b *testing.B) {
	s, p := NewStiff(12), newDense12()
	y, a := make([]float64, 12), make([]float64, 12)
	for i := range y {
		y[i], a[i] = 1, 1e9
	}
	start := func() {
		if err := s.Start(p, y, 1e-3, 0, a); err != nil {
			b.Fatal(err)
		}
	}
	start()
	for b.Loop() {
		if s.Accepted == 1000 || s.Step(s.To+1e-3) != nil { // before the states fade to subnormal numbers
			start()
		}
	}
}

func BenchmarkFactor12(b *testing.B) {
	p := newDense12()
	w, scale, pivot := make([]float64, 144), make([]float64, 12), make([]int, 12)
	for i := range scale {
		scale[i] = 1
	}
	for b.Loop() {
		copy(w, p.j[:])
		if !factor(w, 12, pivot, scale) {
			b.Fatal("singular")
		}
	}
}

func BenchmarkSubstitute12(b *testing.B) {
	p := newDense12()
	scale, pivot, x := make([]float64, 12), make([]int, 12), make([]float64, 12)
	for i := range scale {
		scale[i] = 1
	}
	if !factor(p.j[:], 12, pivot, scale) {
		b.Fatal("singular")
	}
	for b.Loop() {
		for i := range x {
			x[i] = 1
		}
		substitute(p.j[:], 12, pivot, x)
	}
}
