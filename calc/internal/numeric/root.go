package numeric

import "math"

// Root finds x between a and b with f(x) = 0 where f(a) and f(b) differ in sign, to the absolute tolerance tol in x.
// A tolerance below the spacing of doubles at the bracket is raised to it. ok is false when the ends do not bracket a
// root, or when f, an end or tol is NaN or an end infinite.
//
// Method: ITP of Oliveira and Takahashi, "An enhancement of the bisection method average performance preserving minmax
// optimality", ACM Transactions on Mathematical Software 47(1), 2020, with k1 = 0.2/(b - a), k2 = 2, n0 = 1: superlinear on
// smooth functions and never more than one evaluation above bisection.
func Root(f func(float64) float64, a, b, tol float64) (x float64, ok bool) {
	const k2, n0 = 2.0, 1
	if a > b {
		a, b = b, a
	}
	if tol != tol || math.IsInf(b-a, 0) || b-a != b-a {
		return math.NaN(), false
	}
	ya, yb := f(a), f(b)
	switch {
	case ya == 0:
		return a, true
	case yb == 0:
		return b, true
	case ya != ya || yb != yb || (ya > 0) == (yb > 0):
		return math.NaN(), false
	}
	rising := yb > 0
	tol = math.Max(tol, 0x1p-51*math.Max(math.Abs(a), math.Abs(b)))
	tol = math.Max(tol, 0x1p-1000)
	most := int(math.Ceil(math.Log2((b-a)/(2*tol)))) + n0
	k1 := 0.2 / (b - a)
	for j := 0; b-a > 2*tol && j <= most; j++ {
		half := a + (b-a)/2
		radius := tol*math.Ldexp(1, most-j) - (b-a)/2
		if math.IsInf(ya, 0) || math.IsInf(yb, 0) {
			x = half
		} else {
			x = projected(half, (yb*a-ya*b)/(yb-ya), k1*math.Pow(b-a, k2), radius)
		}
		if !(x > a && x < b) {
			x = half
		}
		y := f(x)
		switch {
		case y == 0:
			return x, true
		case y != y:
			return math.NaN(), false
		case (y > 0) == rising:
			b, yb = x, y
		default:
			a, ya = x, y
		}
	}
	return a + (b-a)/2, true
}

// projected moves the regula falsi point by delta towards the middle of the bracket and then, if it is farther from the
// middle than radius, onto that distance.
func projected(half, falsi, delta, radius float64) float64 {
	sigma := 1.0
	if half < falsi {
		sigma = -1
	}
	x := half
	if delta <= math.Abs(half-falsi) {
		x = falsi + sigma*delta
	}
	if math.Abs(x-half) > radius {
		x = half - sigma*math.Max(radius, 0)
	}
	return x
}
