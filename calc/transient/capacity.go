package transient

import "math"

// leastShare is the least share of C_oss that is left for C_ds where the curves of C_oss and C_rss, of different tests or read from
// plots, leave less or nothing [1]. C_ds stays positive, as (24) needs it.
const leastShare = 0.01

// capacity is a Curve made ready: its points in ln(1 + v) and ln C.
type capacity struct {
	x, y, p []float64 // ln(1 + v), ln(C/1 F) and the slope of the piece that ends there [1]
	v       []float64 // v of the points [V]
}

func (c *capacity) prepare(curve *Curve) {
	c.x, c.y, c.p, c.v = c.x[:0], c.y[:0], c.p[:0], c.v[:0]
	for _, q := range curve.Points {
		v := math.Max(q.Voltage, 0)
		x, y, p := log1p(v), math.Log(q.Capacitance*curve.scale()), 0.0
		if n := len(c.x); n > 0 {
			if !(x > c.x[n-1]) { // the later of two at the same voltage holds from there on
				c.y[n-1] = y
				continue
			}
			p = (y - c.y[n-1]) / (x - c.x[n-1])
		}
		c.x, c.y, c.p, c.v = append(c.x, x), append(c.y, y), append(c.p, p), append(c.v, v)
	}
}

// place is where a capacity was evaluated last. Nearby on the same piece the power of (1) is
//
//	C = C_a·(1 + δ)^p,   δ = (v - v_a)/(1 + v_a)
//
// by its series to δ^6, for |δ| <= nearby to 1e-9 for the steepest curves: without exponential and logarithm.
type place struct {
	from, to float64 // the piece [V]
	over     float64 // 1/(1 + v_a) [1/V]
	at       float64 // v_a [V]
	value, p float64 // C_a [F], exponent [1]
	series   [6]float64
}

const nearby = 1. / 32

// at returns the capacitance [F] at v and its slope [F/V].
func (c *capacity) at(v float64, a *place) (value, slope float64) {
	delta := (v - a.at) * a.over
	if !(v > a.from && v <= a.to && delta <= nearby && delta >= -nearby) {
		c.move(v, a)
		delta = 0
	}
	if a.p == 0 {
		return a.value, 0
	}
	s := &a.series
	value = a.value * (1 + delta*(s[0]+delta*(s[1]+delta*(s[2]+delta*(s[3]+delta*(s[4]+delta*s[5]))))))
	return value, value * a.p * a.over / (1 + delta)
}

// move puts the place to v.
func (c *capacity) move(v float64, a *place) {
	n := len(c.x) - 1
	switch {
	case !(v > c.v[0]):
		*a = place{from: math.Inf(-1), to: c.v[0], value: math.Exp(c.y[0])}
		return
	case v > c.v[n]:
		*a = place{from: c.v[n], to: math.Inf(1), value: math.Exp(c.y[n])}
		return
	}
	k := n
	for v <= c.v[k-1] {
		k--
	}
	p := c.p[k]
	*a = place{from: c.v[k-1], to: c.v[k], at: v, over: 1 / (1 + v), p: p, value: math.Exp(c.y[k-1] + p*(log1p(v)-c.x[k-1]))}
	binomial := 1.0
	for i := range a.series {
		binomial *= (p - float64(i)) / float64(i+1)
		a.series[i] = binomial
	}
}
