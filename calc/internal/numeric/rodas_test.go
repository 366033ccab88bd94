package numeric

import (
	"math"
	"math/cmplx"
	"testing"
)

// classical is the method in the variables k_i of Hairer and Wanner, eq. IV.7.4: Γ from c, α = a·Γ, β = α + Γ.
type classical struct {
	alpha, beta      [stages][stages]float64
	weight, embedded [stages]float64
	dense            func(theta float64) [stages]float64
}

func newClassical() *classical {
	var inverse, g [stages][stages]float64 // I/γ - c, lower triangular, and its inverse
	for i := range stages {
		for k := range i {
			inverse[i][k] = -table.c[i][k]
		}
		inverse[i][i] = 1 / gamma
	}
	for k := range stages {
		for i := k; i < stages; i++ {
			sum := 0.0
			if i == k {
				sum = 1
			}
			for m := k; m < i; m++ {
				sum -= inverse[i][m] * g[m][k]
			}
			g[i][k] = sum * gamma
		}
	}
	row := func(a [stages]float64) (r [stages]float64) {
		for k := range stages {
			for m := range stages {
				r[k] += a[m] * g[m][k]
			}
		}
		return r
	}
	c := &classical{}
	for i := range stages {
		c.alpha[i] = row(table.a[i])
		for k := range stages {
			c.beta[i][k] = c.alpha[i][k] + g[i][k]
		}
	}
	whole := table.a[stages-1]
	c.embedded = row(whole) // eq. (2) without u_6
	whole[stages-1] = 1
	c.weight = row(whole)
	c.dense = func(theta float64) [stages]float64 {
		var b [stages]float64
		for k := range stages {
			b[k] = theta * (whole[k] + (1-theta)*(table.d[0][k]+theta*table.d[1][k]))
		}
		return row(b)
	}
	return c
}

// residuals is Φ(tree) - θ^order/γ(tree) for the trees of orders 1 to 4, Hairer and Wanner, eq. IV.7.15.
func (c *classical) residuals(b [stages]float64, theta float64) [5]float64 {
	apply := func(m *[stages][stages]float64, v [stages]float64) (r [stages]float64) {
		for i := range stages {
			for k := range stages {
				r[i] += m[i][k] * v[k]
			}
		}
		return r
	}
	times := func(v, w [stages]float64) [stages]float64 {
		for i := range v {
			v[i] *= w[i]
		}
		return v
	}
	one := [stages]float64{1, 1, 1, 1, 1, 1}
	a, be := apply(&c.alpha, one), apply(&c.beta, one)
	var worst [5]float64
	for _, tree := range []struct {
		order int
		phi   [stages]float64
		want  float64
	}{
		{1, one, 1},
		{2, be, 1. / 2},
		{3, times(a, a), 1. / 3},
		{3, apply(&c.beta, be), 1. / 6},
		{4, times(a, times(a, a)), 1. / 4},
		{4, times(a, apply(&c.alpha, be)), 1. / 8},
		{4, apply(&c.beta, times(a, a)), 1. / 12},
		{4, apply(&c.beta, apply(&c.beta, be)), 1. / 24},
	} {
		sum := 0.0
		for i, w := range b {
			sum += w * tree.phi[i]
		}
		worst[tree.order] = math.Max(worst[tree.order], math.Abs(sum-tree.want*math.Pow(theta, float64(tree.order))))
	}
	return worst
}

func TestOrderConditions(t *testing.T) {
	const rounding = 2e-14 // 16 digits printed, coefficients up to 40
	c := newClassical()
	check := func(name string, r [5]float64, order int) {
		for q := 1; q <= order; q++ {
			if r[q] > rounding {
				t.Errorf("%s: order %d violated by %g", name, q, r[q])
			}
		}
		if order < 4 && r[order+1] < 1e-4 {
			t.Errorf("%s: residual %g of order %d is no error estimate", name, r[order+1], order+1)
		}
	}
	check("solution", c.residuals(c.weight, 1), 4)
	check("embedded", c.residuals(c.embedded, 1), 3)
	for _, theta := range []float64{0.1, 0.3, 0.5, 0.7, 0.9} {
		check("dense", c.residuals(c.dense(theta), theta), 3)
	}
}

// stability is R(z) = 1 + z·b·(I - z·β)⁻¹·1 by forward substitution, of the weights b.
func (c *classical) stability(b [stages]float64, z complex128) complex128 {
	var k [stages]complex128
	r := complex(1, 0)
	for i := range stages {
		sum := complex(1, 0)
		for m := range i {
			sum += z * complex(c.beta[i][m], 0) * k[m]
		}
		k[i] = sum / (1 - z*gamma)
		r += z * complex(b[i], 0) * k[i]
	}
	return r
}

func TestLStable(t *testing.T) {
	c := newClassical()
	for name, b := range map[string][stages]float64{"solution": c.weight, "embedded": c.embedded} {
		for e := -3.0; e <= 6; e += 0.001 {
			y := math.Pow(10, e)
			if r := cmplx.Abs(c.stability(b, complex(0, y))); r > 1+1e-11 {
				t.Fatalf("%s: |R(%gi)| - 1 = %g", name, y, r-1)
			}
		}
		for _, z := range []complex128{-1e8, -1e10, 1e9i, -1e9 + 1e9i} {
			if r := cmplx.Abs(c.stability(b, z)); r > 20/cmplx.Abs(z) {
				t.Errorf("%s: |R(%v)| = %g does not vanish", name, z, r)
			}
		}
	}
}

// spiral is y' = λ·y in real form.
type spiral struct{ re, im float64 }

func (s spiral) Rates(y, dy []float64) bool {
	dy[0], dy[1] = s.re*y[0]-s.im*y[1], s.im*y[0]+s.re*y[1]
	return true
}

func (s spiral) Jacobian(_, j []float64) bool {
	copy(j, []float64{s.re, -s.im, s.im, s.re})
	return true
}

// A step of the integrator multiplies by R(h·λ), and its error estimate is the difference to the embedded R.
func TestStepIsStabilityFunction(t *testing.T) {
	c := newClassical()
	s := NewStiff(2)
	for _, z := range []complex128{0.3i, 2i, 40i, -1, -30, -1e4, -1e9, -2 + 5i, 0.5 + 0.1i, -1e6 + 1e6i} {
		const h = 0.125
		l := z / h
		if err := s.Start(spiral{real(l), imag(l)}, []float64{0.6, 0.8}, h, 0, []float64{1e9, 1e9}); err != nil {
			t.Fatal(err)
		}
		if err := s.Step(1); err != nil || s.To != h {
			t.Fatalf("z = %v: step to %v, %v", z, s.To, err)
		}
		want := c.stability(c.weight, z) * (0.6 + 0.8i)
		tolerance := 1e-13 * math.Max(1, cmplx.Abs(want))
		if d := cmplx.Abs(complex(s.Y1[0], s.Y1[1]) - want); d > tolerance {
			t.Errorf("z = %v: off R(z) by %g", z, d)
		}
		estimate := complex(s.u[2*stages-2], s.u[2*stages-1])
		if d := cmplx.Abs(estimate - (want - c.stability(c.embedded, z)*(0.6+0.8i))); d > tolerance {
			t.Errorf("z = %v: error estimate off by %g", z, d)
		}
	}
}

// clocked has the solution sin t, cos t, 1/(2 - sin t), which attracts; its Jacobians at different times do not commute.
type clocked struct{}

func (clocked) Rates(y, dy []float64) bool {
	s, c, p := y[0], y[1], y[2]
	r := s*s + c*c - 1
	dy[0], dy[1], dy[2] = c-2*r*s, -s-2*r*c, p*p*c-3*p*(p*(2-s)-1)
	return true
}

func (clocked) Jacobian(y, j []float64) bool {
	s, c, p := y[0], y[1], y[2]
	r := s*s + c*c - 1
	copy(j, []float64{
		-2*r - 4*s*s, 1 - 4*s*c, 0,
		-1 - 4*s*c, -2*r - 4*c*c, 0,
		3 * p * p, p * p, 2*p*c - 6*p*(2-s) + 3,
	})
	return true
}

// Observed orders at constant steps: 4 of the solution; 4 of the estimate of one step, which is the local error of order 3;
// 4 of the dense output within steps, order 3 locally.
func TestObservedOrder(t *testing.T) {
	s := NewStiff(3)
	run := func(n int) (solution, estimate, dense float64) {
		if err := s.Start(clocked{}, []float64{0, 1, 0.5}, 0, 0, []float64{1e9, 1e9, 1e9}); err != nil {
			t.Fatal(err)
		}
		exact := func(time float64) [3]float64 {
			return [3]float64{math.Sin(time), math.Cos(time), 1 / (2 - math.Sin(time))}
		}
		for k := range n {
			s.next, s.errOld = 1, 0
			if err := s.Step(2 * float64(k+1) / float64(n)); err != nil {
				t.Fatal(err)
			}
			for i := range 3 {
				estimate = math.Max(estimate, math.Abs(s.u[(stages-1)*3+i]))
				p := s.Dense(i)
				for theta := 0.125; theta < 1; theta += 0.125 {
					dense = math.Max(dense, math.Abs(p.At(theta)-exact(s.From + theta*(s.To-s.From))[i]))
				}
			}
		}
		for i, y := range exact(2) {
			solution = math.Max(solution, math.Abs(s.Y1[i]-y))
		}
		return solution, estimate, dense
	}
	y0, e0, d0 := run(256)
	y1, e1, d1 := run(512)
	for name, c := range map[string][3]float64{"solution": {y0, y1, 4}, "estimate": {e0, e1, 4}, "dense": {d0, d1, 4}} {
		if order := math.Log2(c[0] / c[1]); math.Abs(order-c[2]) > 0.1 {
			t.Errorf("%s: order %.3f, want %g (errors %.3g, %.3g)", name, order, c[2], c[0], c[1])
		}
	}
}
