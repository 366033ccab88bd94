package numeric

import "math"

// Polynomial is p(θ) = Σ p[k]·θ^k, a cubic: a state over a step of the integrator, and any linear combination of states.
type Polynomial [4]float64

// Point is a place of a polynomial and its value there.
type Point struct {
	Theta float64 // place within the step [1]
	Value float64 // in the polynomial's unit
}

// At is p(theta).
func (p Polynomial) At(theta float64) float64 {
	return p[0] + theta*(p[1]+theta*(p[2]+theta*p[3]))
}

// Derivative is dp/dθ; divided by the length of the step it is a rate.
func (p Polynomial) Derivative() Polynomial {
	return Polynomial{p[1], 2 * p[2], 3 * p[3]}
}

// Plus is the sum p + q.
func (p Polynomial) Plus(q Polynomial) Polynomial {
	return Polynomial{p[0] + q[0], p[1] + q[1], p[2] + q[2], p[3] + q[3]}
}

// Scaled is the product factor·p.
func (p Polynomial) Scaled(factor float64) Polynomial {
	return Polynomial{factor * p[0], factor * p[1], factor * p[2], factor * p[3]}
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
// from above for one below 0, from either side for 0. A level that p only touches is reached, as far as rounding lets it be
// seen; one at which p begins is not until p has left it. False: nowhere.
func (p Polynomial) Crossing(level, a, b float64, direction int) (theta float64, ok bool) {
	at, n := p.Stationary()
	left := p.At(a) - level
	for k := range n + 1 {
		end := b
		if k < n {
			if at[k] <= a {
				continue
			}
			end = math.Min(at[k], b)
		}
		right := p.At(end) - level
		if left < 0 && right >= 0 && direction >= 0 || left > 0 && right <= 0 && direction <= 0 {
			return p.between(level, a, end, left, right), true
		}
		a, left = end, right
	}
	return math.NaN(), false
}

// Stationary is the places strictly within (0, 1) at which p turns, in rising order. The formula of the quadratic subtracts no
// nearly equal numbers outside the discriminant and holds for a leading coefficient of 0; for coefficients up to 1e150.
func (p Polynomial) Stationary() (theta [2]float64, n int) {
	c0, c1, c2 := p[1], 2*p[2], 3*p[3]
	// Bernstein's coefficients of the derivative over [0, 1]: without a change of sign among them it has no root there
	middle, end := c0+c1/2, c0+c1+c2
	if c0 >= 0 && middle >= 0 && end >= 0 || c0 <= 0 && middle <= 0 && end <= 0 {
		return theta, 0
	}
	d := c1*c1 - 4*c0*c2
	if !(d > 0) {
		return theta, 0
	}
	q := -0.5 * (c1 + math.Copysign(math.Sqrt(d), c1))
	x, y := c0/q, q/c2 // |x| < |y|
	if x > 0 && x < 1 {
		theta[0], n = x, 1
	}
	if y > 0 && y < 1 {
		theta[n] = y
		n++
	}
	return theta, n
}

// between is the place at which p, monotone between a and b, is at the level; left and right are p - level at a and b, of
// opposite signs or right 0. Newton's method, bisection where it leaves the bracket or does not halve its step.
func (p Polynomial) between(level, a, b, left, right float64) float64 {
	if right == 0 {
		return b
	}
	x, before := a+(b-a)*(left/(left-right)), b-a
	for range 120 {
		y := p.At(x) - level
		if y == 0 {
			return x
		}
		if (y < 0) == (left < 0) {
			a = x
		} else {
			b = x
		}
		next := x - y/(p[1]+x*(2*p[2]+x*3*p[3]))
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
