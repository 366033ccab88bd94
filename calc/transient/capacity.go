package transient

import "math"

// leastShare is the least share of C_oss that is left for C_ds where the curves of C_oss and C_rss, of different tests or read from
// plots, leave less or nothing [1]. C_ds stays positive, as (24) needs it.
const leastShare = 0.01

// capacity is a Curve made ready: its points in ln(1 + v) and ln C.
type capacity struct {
	x, y, p []float64 // ln(1 + v), ln(C/1 F) and the slope of the piece that ends there [1]
}

func (c *capacity) prepare(curve *Curve) {
	c.x, c.y, c.p = c.x[:0], c.y[:0], c.p[:0]
	for _, q := range curve.Points {
		x, y, p := log1p(math.Max(q.Voltage, 0)), math.Log(q.Capacitance*curve.scale()), 0.0
		if n := len(c.x); n > 0 {
			if !(x > c.x[n-1]) { // the later of two at the same voltage holds from there on
				c.y[n-1] = y
				continue
			}
			p = (y - c.y[n-1]) / (x - c.x[n-1])
		}
		c.x, c.y, c.p = append(c.x, x), append(c.y, y), append(c.p, p)
	}
}

// at returns the capacitance [F] at u = ln(1 + v), and p = dln C/du there.
func (c *capacity) at(u float64) (value, p float64) {
	n := len(c.x) - 1
	y := c.y[n]
	if u < c.x[n] {
		y = c.y[0]
		for k := n; k > 0; k-- {
			if u > c.x[k-1] {
				p = c.p[k]
				y = c.y[k-1] + p*(u-c.x[k-1])
				break
			}
		}
	}
	return math.Exp(y), p
}

// abscissa returns ln(1 + v), 0 below 0 V, and 1/(1 + v), its slope [1/V].
func abscissa(v float64) (u, slope float64) {
	if !(v > 0) {
		return 0, 0
	}
	return log1p(v), 1 / (1 + v)
}
