package numeric

import "math"

// LogLambert solves e^l + l = y for l [1]. It is ln W(e^y), Lambert's W in logarithmic form, and so the current of a diode
// in series with a resistor without the overflow of the exponential. Valid for every y; relative accuracy of e^l and
// absolute accuracy of l are those of a double.
func LogLambert(y float64) float64 {
	l, _ := LogLambertPair(y)
	return l
}

// LogLambertPair returns the l of e^l + l = y and w = e^l, which is W(e^y) [1].
//
// Start: one step of Halley's method from l = ln y (y > 1) or from l = y, which is within 0.015 of the root. Then two steps
// of the fourth-order iteration of Fritsch, Shafer and Crowley (Communications of the ACM 16(2), 1973, algorithm 443),
// w <- w·(1 + e), whose correction e needs only the residual z = y - l - w. The first reaches 1e-9, the second the last digit.
func LogLambertPair(y float64) (l, w float64) {
	switch {
	case y != y || math.IsInf(y, 1):
		return y, y
	case y < lambertFloor:
		return y, math.Exp(y)
	}
	l = lambertStart(y)
	w = math.Exp(l)
	e := lambertCorrection(y-l-w, w)
	l += e * (1 - e*(1./2-e*(1./3-e*(1./4-e*(1./5-e*(1./6-e*(1./7-e/8))))))) // ln(1 + e), |e| < 0.02
	w += w * e
	e = lambertCorrection(y-l-w, w)
	return l + e, w + w*e
}

// LambertNear returns LogLambertPair's w to 3e-9, by the first of its two steps alone, for a number y.
func LambertNear(y float64) float64 {
	if y < lambertFloor {
		return math.Exp(y)
	}
	l := lambertStart(y)
	w := math.Exp(l)
	return w + w*lambertCorrection(y-l-w, w)
}

// lambertFloor is the y below which e^l is below the last digit of l.
const lambertFloor = -37

// lambertStart is LogLambertPair's start.
func lambertStart(y float64) float64 {
	if y > 1 {
		g := math.Log(y)
		return g - 2*g*(y+1)/(2*(y+1)*(y+1)-g*y)
	}
	g := math.Exp(y)
	return y - 2*g*(1+g)/(2*(1+g)*(1+g)-g*g)
}

func lambertCorrection(z, w float64) float64 {
	q := 2 * (1 + w) * (1 + w + 2*z/3)
	return z / (1 + w) * (q - z) / (q - 2*z)
}
