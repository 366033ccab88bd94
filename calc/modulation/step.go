package modulation

import "math"

// Collocation nodes of a step, as shares of the way from its first to its last period: Radau IIA with three stages.
var nodes = [3]float64{(4 - math.Sqrt(6)) / 10, (4 + math.Sqrt(6)) / 10, 1}

// cubic are the coefficients of the Lagrange polynomials on 0 and the nodes, lowest power first.
var cubic = lagrange([4]float64{0, nodes[0], nodes[1], nodes[2]})

func lagrange(x [4]float64) (out [4][4]float64) {
	for j := range x {
		c := [4]float64{1}
		degree, scale := 0, 1.0
		for k := range x {
			if k == j {
				continue
			}
			for d := degree; d >= 0; d-- { // times (x - x_k)
				c[d+1] += c[d]
				c[d] *= -x[k]
			}
			degree++
			scale *= x[j] - x[k]
		}
		for d := range c {
			out[j][d] = c[d] / scale
		}
	}
	return out
}

// value of a polynomial at s.
func value(c *[4]float64, s float64) float64 { return c[0] + s*(c[1]+s*(c[2]+s*c[3])) }

// advanced is value(c, s+h) - value(c, s), without cancellation.
func advanced(c *[4]float64, s, h float64) float64 {
	return h * (c[1] + c[2]*(2*s+h) + c[3]*(3*s*s+h*(3*s+h)))
}

// step is some consecutive periods of a run: a single one, or several between whose V_BS before the edge lies a cubic.
type step struct {
	run      int
	from, to int        // periods
	v        [4]float64 // V_BS before the edge, at the first period and, of several, at the nodes [V]
	seen     [4]seen    // of those periods
	merged   bool       // all periods of the run as one
}

// seen is what is kept of a period.
type seen struct {
	low, high, onLow float64 // extremes of V_BS, and lowest with the high side on and a sourcing current; +Inf where there is none [V]
	recharged        float64 // [C]
	recovery         float64 // [C]
	window, on       float64 // in which the element can conduct, of the high side [s]
	gates            float64 // turn-ons of the high side [1]
	onEnd, across    float64 // V_BS at the end of the on-time, and the most that drives the element then [V]
}

// several tells whether the step is one of several periods.
func (s *step) several() bool { return s.to-s.from > 1 && !s.merged }

// span is the distance of the first and the last period.
func (s *step) span() float64 { return float64(s.to - 1 - s.from) }

// position of a node.
func (s *step) position(k int) float64 {
	if k == 0 {
		return float64(s.from)
	}
	return float64(s.from) + nodes[k-1]*s.span()
}

// weights sum a cubic through the positions over all periods.
func (s *step) weights() (w [4]float64) {
	if !s.several() {
		return [4]float64{1}
	}
	n, last := float64(s.to-s.from), s.span()
	sums := [4]float64{n, n / 2, n * (2*n - 1) / (6 * last), n * n / (4 * last)} // of the powers of k/last
	for j := range w {
		for d, c := range cubic[j] {
			w[j] += c * sums[d]
		}
	}
	return w
}

// before is V_BS before the edge of a period of the step [V].
func (s *step) before(x float64) float64 {
	if !s.several() {
		return s.v[0]
	}
	at, v := (x-float64(s.from))/s.span(), 0.0
	for j := range s.v {
		v += s.v[j] * value(&cubic[j], at)
	}
	return v
}

// solve3 solves a·x = b for two right-hand sides, a being diagonally strong; Cramer's rule.
func solve3(a *[3][3]float64, b, c [3]float64) (x, y [3]float64) {
	cross := func(u, v [3]float64) [3]float64 {
		return [3]float64{u[1]*v[2] - u[2]*v[1], u[2]*v[0] - u[0]*v[2], u[0]*v[1] - u[1]*v[0]}
	}
	r0, r1, r2 := cross(a[1], a[2]), cross(a[2], a[0]), cross(a[0], a[1])
	det := a[0][0]*r0[0] + a[0][1]*r0[1] + a[0][2]*r0[2]
	for k := range x {
		x[k] = (r0[k]*b[0] + r1[k]*b[1] + r2[k]*b[2]) / det
		y[k] = (r0[k]*c[0] + r1[k]*c[1] + r2[k]*c[2]) / det
	}
	return x, y
}
