package transient

import "math"

// CurvePoint is one point of a capacitance curve.
type CurvePoint struct {
	Voltage     float64 // drain voltage, not negative [V]
	Capacitance float64 // small-signal capacitance there, positive [F]
}

// Curve is a capacitance over the drain voltage. Between two points log C is linear in log(1 + v/1 V), which makes it a power
// law C0·((1 + v)/(1 + v0))^p; outside the points, and below 0 V, it stays level. Without points every value is NaN.
type Curve struct {
	Points []CurvePoint // in order of rising voltage
	Scale  float64      // factor on every capacitance; 0 counts as 1 [1]
}

func (c *Curve) scale() float64 {
	if c.Scale == 0 {
		return 1
	}
	return c.Scale
}

// At returns the capacitance at the drain voltage v [V], [F].
func (c Curve) At(v float64) float64 {
	n := len(c.Points)
	if n == 0 || v != v {
		return math.NaN()
	}
	left := c.Points[0]
	for _, right := range c.Points[1:] {
		if v <= left.Voltage {
			break
		}
		if v < right.Voltage {
			p := exponent(left, right, log1p(right.Voltage)-log1p(left.Voltage))
			return c.scale() * left.Capacitance * math.Pow((1+v)/(1+left.Voltage), p)
		}
		left = right
	}
	return c.scale() * left.Capacitance
}

// Charge returns the exact integral of the curve from 0 to v [V], negative below 0 V [C].
func (c Curve) Charge(v float64) float64 {
	var q [1]float64
	c.charges([]float64{v}, []float64{log1p(v)}, q[:])
	return q[0]
}

// exponent is p of the power law between two points whose ln(1 + v) differ by span [1].
func exponent(left, right CurvePoint, span float64) float64 {
	if left.Capacitance == right.Capacitance {
		return 0
	}
	return math.Log(right.Capacitance/left.Capacitance) / span
}

// charges puts the charge [C] at each voltage of v [V], which rise and whose ln(1 + v) are l [1], into q.
//
//	∫ C0·((1 + u)/(1 + v0))^p du from v0 to v = C0·(1 + v0)·(e^(n·x) - 1)/n,   n = p + 1, x = ln((1 + v)/(1 + v0))
func (c *Curve) charges(v, l, q []float64) {
	scale := c.scale()
	if len(c.Points) == 0 {
		scale = math.NaN()
		for k := range q {
			q[k] = scale
		}
		return
	}
	left, k := c.Points[0], 0
	for ; k < len(v) && !(v[k] > left.Voltage); k++ {
		q[k] = scale * left.Capacitance * v[k]
	}
	base, logLeft := left.Capacitance*left.Voltage, log1p(left.Voltage)
	for i := 1; i < len(c.Points) && k < len(v); i++ {
		right := c.Points[i]
		if right.Voltage > left.Voltage {
			logRight := log1p(right.Voltage)
			n := 1 + exponent(left, right, logRight-logLeft)
			m := left.Capacitance * (1 + left.Voltage)
			for ; k < len(v) && !(v[k] > right.Voltage); k++ {
				q[k] = scale * (base + m*growth(n, l[k]-logLeft))
			}
			base += m * growth(n, logRight-logLeft)
			logLeft = logRight
		}
		left = right
	}
	for ; k < len(v); k++ {
		q[k] = scale * (base + left.Capacitance*(v[k]-left.Voltage))
	}
}

// log1p is math.Log1p, by the faster math.Log where that loses nothing.
func log1p(v float64) float64 {
	if v > 0.5 {
		return math.Log(1 + v)
	}
	return math.Log1p(v)
}

// growth is (e^(n·x) - 1)/n, x at n = 0.
func growth(n, x float64) float64 {
	y := n * x
	switch {
	case math.Abs(y) < 1e-8:
		return x * (1 + y/2)
	case math.Abs(y) < 0.05:
		return math.Expm1(y) / n
	default:
		return (math.Exp(y) - 1) / n
	}
}

// grid is the range from 0 to the bus in equal steps.
type grid struct {
	v [Steps]float64 // upper end of each step [V]
	l [Steps]float64 // ln(1 + v) [1]
}

func (g *grid) divide(bus float64) {
	for k := range Steps {
		g.v[k] = bus * float64(k+1) / Steps
		g.l[k] = log1p(g.v[k])
	}
}

// steps returns the charge that the curve takes in each step of the grid [C].
func (c *Curve) steps(g *grid) (q [Steps]float64) {
	c.charges(g.v[:], g.l[:], q[:])
	for k := Steps - 1; k > 0; k-- {
		q[k] -= q[k-1]
	}
	return q
}
