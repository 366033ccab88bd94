package numeric

import "math"

// Polynomial is p(θ) = Σ p[k]·θ^k, of degree 4 at most. A state over a step, and any linear combination of states.
type Polynomial [5]float64

// At is p(theta).
func (p Polynomial) At(theta float64) float64 {
	return p[0] + theta*(p[1]+theta*(p[2]+theta*(p[3]+theta*p[4])))
}

// Derivative is dp/dθ; by the length of the step it is a rate.
func (p Polynomial) Derivative() Polynomial {
	return Polynomial{p[1], 2 * p[2], 3 * p[3], 4 * p[4]}
}

// Plus is the sum p + q.
func (p Polynomial) Plus(q Polynomial) Polynomial {
	for k := range p {
		p[k] += q[k]
	}
	return p
}

// Scaled is the product factor·p.
func (p Polynomial) Scaled(factor float64) Polynomial {
	for k := range p {
		p[k] *= factor
	}
	return p
}

// Point is a place of a polynomial and its value there.
type Point struct {
	Theta float64 // place within the step [1]
	Value float64 // in the polynomial's unit
}

// Extremes is the lowest and the highest point over [0, 1], ends included; of equal ones the first.
func (p Polynomial) Extremes() (low, high Point) {
	at, n := p.Stationary()
	low = Point{0, p[0]}
	high = low
	for k := range n + 1 {
		theta := 1.0
		if k < n {
			theta = at[k]
		}
		switch v := p.At(theta); {
		case v < low.Value:
			low = Point{theta, v}
		case v > high.Value:
			high = Point{theta, v}
		}
	}
	return low, high
}

// Crossing is the first theta in (a, b], 0 <= a < b <= 1, at which p reaches the level: from below for a direction above 0,
// from above for one below 0, from either side for 0. A level that p only touches is reached; one at which p begins is not
// until p has left it. False: nowhere.
func (p Polynomial) Crossing(level, a, b float64, direction int) (theta float64, ok bool) {
	at, n := p.Stationary()
	left := p.At(a) - level
	for k := range n + 1 {
		end := b
		if k < n {
			end = at[k]
			if end <= a {
				continue
			}
			end = math.Min(end, b)
		}
		right := p.At(end) - level
		if left < 0 && right >= 0 && direction >= 0 || left > 0 && right <= 0 && direction <= 0 {
			q := p
			q[0] -= level
			return root(q, a, end, left, right), true
		}
		if end == b {
			break
		}
		a, left = end, right
	}
	return math.NaN(), false
}

// Stationary is the places strictly within (0, 1) at which the derivative changes its sign, in rising order.
func (p Polynomial) Stationary() (theta [3]float64, n int) {
	d := p.Derivative()
	// Bernstein's coefficients of the derivative over [0, 1]: without a change of sign it has no root there
	b0, b1, b2, b3 := d[0], d[0]+d[1]/3, d[0]+2*d[1]/3+d[2]/3, d[0]+d[1]+d[2]+d[3]
	if b0 >= 0 && b1 >= 0 && b2 >= 0 && b3 >= 0 || b0 <= 0 && b1 <= 0 && b2 <= 0 && b3 <= 0 {
		return theta, 0
	}
	bend, m := quadratic(d[1], 2*d[2], 3*d[3])
	a, left := 0.0, b0
	for k := range m + 1 {
		end := 1.0
		if k < m {
			if end = bend[k]; !(end > a && end < 1) {
				continue
			}
		}
		right := d.At(end)
		if left < 0 && right > 0 || left > 0 && right < 0 {
			if x := root(d, a, end, left, right); x > 0 && x < 1 {
				theta[n] = x
				n++
			}
		}
		if right != 0 { // where it only touches 0 the sign before it counts
			left = right
		}
		a = end
	}
	return theta, n
}

// quadratic is the real roots of c0 + c1·x + c2·x² in rising order; two equal ones stand twice. Forms: without the difference
// of nearly equal numbers outside the discriminant.
func quadratic(c0, c1, c2 float64) (x [2]float64, n int) {
	d := c1*c1 - 4*c0*c2
	if !(d >= 0) {
		return x, 0
	}
	q := -0.5 * (c1 + math.Copysign(math.Sqrt(d), c1))
	if q != 0 {
		x[n] = c0 / q
		n++
	}
	if c2 != 0 {
		x[n] = q / c2
		n++
	}
	if n == 2 && x[0] > x[1] {
		x[0], x[1] = x[1], x[0]
	}
	return x, n
}

// root is the root of p, monotone between a and b with values of opposite signs (or 0 at b) there: Newton's method, bisection
// where it leaves the bracket or does not halve its step.
func root(p Polynomial, a, b, left, right float64) float64 {
	if right == 0 {
		return b
	}
	d := p.Derivative()
	x, before := a+(b-a)*(left/(left-right)), b-a
	for range 120 {
		y := p.At(x)
		if y == 0 {
			return x
		}
		if (y < 0) == (left < 0) {
			a = x
		} else {
			b = x
		}
		next := x - y/d.At(x)
		if !(next > a && next < b) || math.Abs(next-x) > before/2 {
			next = a + (b-a)/2
		}
		before = math.Abs(next - x)
		if before <= 0x1p-53*math.Abs(next) || next == a || next == b {
			return next
		}
		x = next
	}
	return x
}
