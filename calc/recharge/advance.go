package recharge

import "math"

// Interval is a part of the period with constant node voltage.
type Interval struct {
	Duration    float64 // length; 0 or less: absent [s]
	Drive       float64 // E = V_DD - V_node [V]
	Conducts    bool    // false: the element is disconnected (switch not driven) and there is only the load
	Load        float64 // constant load current, not negative [A]
	Conductance float64 // load across V_BS, R_GS while the high side is on, not negative [S]
}

// Advance returns V_BS [V] at the end of the interval iv from v0 [V] at its start, with the capacitor c [F], and dv1/dv0 [1]. Exact
// solution of C·dv/dt = i(E - v) - I - G·v: eq. (3) to (8) of the package comment. A negative load or conductance gives NaN.
func (e Element) Advance(v0 float64, iv Interval, c float64) (v1, dv1dv0 float64) {
	w := e.law()
	v1, dv1dv0, _ = w.advance(v0, &iv, c)
	return v1, dv1dv0
}

// advance is Advance that also returns the charge through the element, ∫i dt [C].
func (w *law) advance(v0 float64, iv *Interval, c float64) (v1, slope, charge float64) {
	t, load, g := iv.Duration, iv.Load, iv.Conductance
	switch {
	case t <= 0:
		return v0, 1, 0
	case v0 != v0 || t != t || !(load >= 0) || !(g >= 0) || !(c > 0):
		nan := math.NaN()
		return nan, nan, nan
	case !iv.Conducts:
		return Hold(v0, load, g, c, t), math.Exp(-g * t / c), 0
	case w.linear:
		return w.advanceSwitch(v0, iv, c)
	}
	k := load + w.is
	if k < 1e-300 {
		k = 0 // its reciprocal must stay finite
	}
	// s is largest where v is lowest, and v never falls faster than with i = -I_S
	blocked, faded := v0-k*t/c, 1.0
	if g > 0 {
		blocked, faded = Hold(v0, k, g, c, t), math.Exp(-g*t/c)
	}
	if w.logIS+(iv.Drive-math.Min(v0, blocked)+w.is*w.r)/w.slope < logFloor(k)-37 {
		return blocked, faded, -w.is * t
	}
	if g > 0 {
		return w.advanceLeaky(v0, iv, c)
	}
	logS0, s0 := w.saturated(iv.Drive - v0)
	if s0 < 1e-280 && k == 0 { // no current at all
		return v0, 1, 0
	}
	var logS1, s1 float64
	if w.r == 0 {
		// 1/s1 = e^-T/s0 + (1 - e^-T)/K, as a sum of logarithms
		x := k * t / (c * w.slope)
		grown := -x - logS0
		fed := math.Log(t/(c*w.slope)) + math.Log(expm1Ratio(-x))
		top := math.Max(grown, fed)
		logS1 = -(top + math.Log(math.Exp(grown-top)+math.Exp(fed-top)))
		s1 = math.Exp(logS1)
		slope = math.Min(math.Exp(logS1-logS0-x), 1)
	} else {
		var a float64
		a, logS1 = w.decay(s0, logS0, k, t/c)
		var lost float64 // 1 - e^-a
		if a < 0.5 {
			lost = -math.Expm1(-a)
			slope = 1 - lost
		} else {
			slope = math.Exp(-a)
			lost = 1 - slope
		}
		s1 = s0*slope + k*lost // eq. (4)
		if logS1 != logS1 {
			logS1 = math.Log(s1)
		}
	}
	v1 = w.voltage(iv.Drive, logS1, s1)
	return v1, slope, c*(v1-v0) + load*t
}

// decay returns A >= 0 of eq. (3) for the time tc = t/C [s/F], by the two forms under eq. (5), and ln s1 [1] where (3) gives it without a
// logarithm, else NaN: its second term is (n·V_T/K)·(A + ln s1 - ln s0). Where A or K·tc/(n·V_T) is large the difference has no digits left.
func (w *law) decay(s0, logS0, k, tc float64) (a, logS1 float64) {
	if s0 >= k {
		rise := softRise{a: w.r, b: w.slope / k, p: k / s0, k: k, logS0: logS0, bp: w.slope / s0}
		last := &w.before[w.interval]
		a = rise.solve(tc, *last)
		if w.interval > 0 {
			*last = a
		}
		if x := tc * k / w.slope; a < 2 && x < 2 {
			return a, logS0 - a + x - w.r*a*k/w.slope
		}
		return a, math.NaN()
	}
	rise := softRise{a: w.slope / k, b: w.r, p: s0 / k, k: k, inverse: true, logS0: logS0, bp: w.r * s0 / k}
	u := rise.solve(tc, 0)
	a = rise.soft(u)
	if u > bend && rise.a < rise.b*math.Min(a, 1) {
		return (tc - rise.a*u) / rise.b, math.NaN() // the same from (3), but for the cancellation of u and ln p
	}
	return a, math.NaN()
}

// softRise is the function h(x) = a·x + b·log1p(p·expm1(x)) with a, b > 0 and 0 <= p <= 1: increasing and convex.
type softRise struct {
	a, b float64
	p    float64 // K/s0 or s0/K, may underflow
	bp   float64 // b·p; with p = 0 and b infinite the limit, and h(x) = a·x + bp·expm1(x)

	k, logS0 float64 // K and ln s0, for ln p where p·e^x must be taken as e^(x + ln p)
	inverse  bool    // p is s0/K
}

// logP returns ln p, which does not underflow.
func (h *softRise) logP() float64 {
	if h.inverse {
		return h.logS0 - math.Log(h.k)
	}
	return math.Log(h.k) - h.logS0
}

// bend is the x from which p·expm1(x) is taken as e^(x + ln p) - p.
const bend = 30

// soft returns log1p(p·expm1(x)).
func (h *softRise) soft(x float64) float64 {
	if x <= bend {
		return math.Log1p(h.p * math.Expm1(x))
	}
	l := x + h.logP()
	if l < 37 {
		return math.Log1p(math.Exp(l) - h.p)
	}
	return l
}

// at returns b·log1p(p·expm1(x)) and its first three derivatives.
func (h *softRise) at(x float64) (f, d1, d2, d3 float64) {
	if x > bend && h.k > 0 {
		l := x + h.logP()
		if l > 37 {
			return h.b * l, h.b, 0, 0
		}
		e := math.Exp(l)
		w := e - h.p
		d1 = h.b * e / (1 + w)
		d2 = d1 * (1 - h.p) / (1 + w)
		return h.b * math.Log1p(w), d1, d2, d2 * (1 - h.p - e) / (1 + w)
	}
	var m float64
	if x > 0.5 {
		m = math.Exp(x) - 1
	} else {
		m = math.Expm1(x)
	}
	w := h.p * m
	n := 1 / (1 + w)
	d1 = h.bp * (m + 1) * n
	d2 = d1 * (1 - h.p) * n
	d3 = d2 * (1 - h.p - h.p*(m+1)) * n
	if w < 1e-3 { // b may be infinite
		return h.bp * m * (1 - w*(1./2-w*(1./3-w*(1./4-w/5)))), d1, d2, d3
	}
	return h.b * math.Log1p(w), d1, d2, d3
}

// alone returns the x at which b·log1p(p·expm1(x)) reaches y on its own: log1p(expm1(y/b)/p).
func (h *softRise) alone(y float64) float64 {
	q := y / h.b
	if q > 37 {
		return q - h.logP()
	}
	if x := y / h.bp * expm1Ratio(q); x < 1e300 {
		return math.Log1p(x)
	}
	return math.Log(math.Expm1(q)) - h.logP()
}

// solve returns the root of h(x) = y >= 0. It lies below the roots of both terms alone, and h there is at most 2·y. Householder's method
// of fourth order from near, or where that is 0 from their parallel sum, kept inside the bracket by Newton's or bisection; 2 or 3 steps as a
// rule, 100 at most.
func (h softRise) solve(y, near float64) float64 {
	low, high, x := 0.0, math.Inf(1), near
	if !(near > 0) {
		high, x = h.bracket(y)
	}
	for range 100 {
		f, d, d2, d3 := h.at(x)
		f, d = f+h.a*x-y, d+h.a
		if f > 0 {
			high = x
		} else {
			low = x
		}
		r := f / d
		bent := r * d2 / d
		step := r * (1 - bent/2) / (1 - bent + r*r/6*d3/d)
		// h bends within 1 of its knee at x = -ln p; beyond it x may be so large that its last digit is all that is left
		if !(math.Abs(step) > math.Max(1e-4*math.Min(x, 1), 1e-15*x)) {
			return x - step
		}
		next := x - step
		if !(next > low && next < high) {
			next = x - f/d
		}
		if !(next > low && next < high) {
			if math.IsInf(high, 1) {
				high, _ = h.bracket(y)
			}
			next = low + (high-low)/2
		}
		x = next
	}
	return x
}

// bracket returns an upper limit of the root of h(x) = y, and the parallel sum of the roots of both terms alone.
func (h *softRise) bracket(y float64) (high, x float64) {
	x1, x2 := y/h.a, h.alone(y)
	high = math.Min(x1, x2)
	return high, high / (1 + high/math.Max(x1, x2))
}

// logFloor returns a value at most ln 2 below ln x [1], -Inf for 0.
func logFloor(x float64) float64 {
	if x == 0 {
		return math.Inf(-1)
	}
	return float64(math.Ilogb(x)) * math.Ln2
}

// expm1Ratio returns (e^x - 1)/x, 1 at 0.
func expm1Ratio(x float64) float64 {
	if math.Abs(x) < 1e-3 {
		return 1 + x/2*(1+x/3*(1+x/4*(1+x/5)))
	}
	return math.Expm1(x) / x
}

// advanceSwitch is the law of the resistance alone: v tends to (E - I·R)/(1 + G·R) with the time constant R·C/(1 + G·R).
func (w *law) advanceSwitch(v0 float64, iv *Interval, c float64) (v1, slope, charge float64) {
	n := 1 + iv.Conductance*w.r
	rest := (iv.Drive - iv.Load*w.r) / n
	x := iv.Duration * n / (w.r * c)
	slope = math.Exp(-x)
	v1 = rest + (v0-rest)*slope
	if x < 1 {
		v1 = v0 - (rest-v0)*math.Expm1(-x)
	}
	area := rest*iv.Duration - (rest-v0)*iv.Duration*expm1Ratio(-x) // ∫v dt [V s]
	return v1, slope, c*(v1-v0) + iv.Load*iv.Duration + iv.Conductance*area
}
