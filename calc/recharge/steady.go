package recharge

import "math"

// Steady is the periodic steady state. When Collapses, or when there is no steady state within reach (not Converged), the
// voltages and charges are NaN: there is nothing to quote.
type Steady struct {
	Low          float64 // lowest V_BS of the period, normally at the end of the on-time [V]
	High         float64 // highest V_BS of the period [V]
	AfterEdge    float64 // V_BS just after the rising edge [V]
	BeforeEdge   float64 // V_BS just before the rising edge [V]
	HighInterval int     // index into Period.Off of the interval that ends at High; -1: the on-time with the charge returned

	// Deficit is the largest E - v_D over the intervals that may conduct, less Low: what is missing to the level at which
	// only the junction would drop. v_D is the junction's drop, without resistance, at the mean recharge current
	// (recharge over TimeConducting) or at the load where that is more [V].
	Deficit        float64
	Recovery       float64 // Q_rr that left at the rising edge [C]
	Charge         float64 // drawn per period: edges, less Return, and loads; equal to ∫i dt through the element [C]
	TimeConducting float64 // length of the intervals that each bring at least 1 % of Charge [s]

	Collapses        bool    // Map(0) <= 0: no positive steady state
	PeriodsToLockout int     // from Period.Start to below Period.Lockout; 0: not asked, -1: not within 20000 periods
	Iterations       int     // evaluations of the map
	Offset           float64 // of BeforeEdge from where the iteration starts by itself [V]
	Converged        bool    // false: OPEN, never a number
}

const (
	nearby             = 0.1 // offset that is taken over, as a share of the guess; another period may lie farther away
	mostIterations     = 120
	mostCountedPeriods = 20_000
)

// SteadyState finds the fixed point of Map on [0, E_max], bracketed. From the second evaluation on, the inverse cubic through the last
// two values of Map(v) - v and their analytic derivatives gives the next v; before that, and where that leaves the bracket,
// Newton's method, on ln(charge in/charge drawn) when these differ by more than a factor of 2, as that is the straighter function
// where the diode's exponential rules; else bisection. It ends with a step of Newton's method of 1e-8 V at most, which leaves an error of its
// square, and moves the voltages of that pass along their tangents; or at the last digit of V_BS.
func (p Period) SteadyState() Steady { return p.SteadyStateNear(0) }

// SteadyStateNear is SteadyState for a period whose steady state is taken to lie as far from where the iteration starts [V] as Steady.Offset
// says of a similar one. NaN, or more than nearby: not known.
func (p *Period) SteadyStateNear(offset float64) Steady {
	w := p.Element.law()
	var tr trace
	emax := p.strongestDrive()
	// no interval lifts v above E_max; the slack is for the rounding of a root there
	top := (math.Max(emax, 0)+math.Max(p.Return, 0)/p.Capacitance)*(1+1e-6) + 1e-6
	if top != top {
		return p.nothing(0, false)
	}
	low, high := 0.0, top
	zeroRises := false // Map(0) > 0 is known
	guess := p.guess(&w, emax)
	start := guess
	if math.Abs(offset) <= nearby*guess {
		start += offset
	}
	v := math.Min(math.Max(start, low), high)
	short := p.shortStep()
	var before node
	for n := 1; n <= mostIterations; n++ {
		next, slope := p.pass(&w, v, &tr)
		here := node{v: v, rise: next - v, slope: slope - 1}
		if here.rise != here.rise {
			return p.nothing(n, false)
		}
		if v == 0 && here.rise <= 0 {
			return p.nothing(n, true)
		}
		step := -here.rise / here.slope
		if ratio := tr.carried / tr.drawn; tr.drawn > 0 && (ratio > 2 || ratio > 0 && ratio < 0.5) {
			step = math.Log(ratio) * tr.carried / (-here.slope * p.Capacitance)
		}
		if v > 0 && p.atRoot(here, step, short, tr.drawn, high-low) {
			if !(math.Abs(step) <= short) { // at the last digit already
				step = 0
			}
			return p.steady(&w, v, step, guess, &tr, n)
		}
		if here.rise > 0 {
			low, zeroRises = v, true
		} else {
			high = v
		}
		to := math.NaN()
		if n > 1 {
			to = inverseCubic(before, here)
		}
		if !(to > low && to < high) {
			to = v + step
		}
		slow := n > 12 && n%2 == 0 // then every second step halves the bracket
		if !(to > low && to < high) || slow && zeroRises {
			to = low + (high-low)/2
			if !zeroRises && v > 0 {
				to = 0 // does it collapse?
			} else if to == low || to == high { // the bracket is one digit wide
				if high == top && here.rise > 0 {
					return p.nothing(n, false)
				}
				return p.steady(&w, v, 0, guess, &tr, n)
			}
		}
		before, v = here, to
	}
	return p.nothing(mostIterations, false)
}

// shortStep is the longest step that is taken along the tangents [V]: shorter where an interval conducts beside a conductance, as then the tangent of
// the charge drawn is not known.
func (p *Period) shortStep() float64 {
	leaky := p.On.Conducts && p.On.Conductance > 0
	for k := range p.Off {
		leaky = leaky || p.Off[k].Conductance > 0
	}
	if leaky {
		return 1e-10
	}
	return 1e-8
}

// atRoot tells whether the iteration may end at a node: the charge of the period nearly balances and the next step [V] is short, or the rise is
// at the last digit of v, in a bracket of a width [V]. With slope 1 nothing is drawn and nothing carried, and any such v stays.
func (p *Period) atRoot(here node, step, short, drawn, width float64) bool {
	if math.Abs(p.Capacitance*here.rise) <= 1e-6*drawn && math.Abs(step) <= short {
		return true
	}
	return math.Abs(here.rise) <= 4e-15*math.Max(here.v, 1e-3) && (math.Abs(step) <= 1e-9 || width <= 1e-9 || here.slope > -1e-13)
}

// node is Map(v) - v and its derivative at v.
type node struct {
	v, rise float64 // [V]
	slope   float64 // [1]
}

// inverseCubic returns the value at rise = 0 of the cubic v(rise) that has the values and derivatives of both nodes [V].
func inverseCubic(a, b node) float64 {
	d := a.rise - b.rise
	chord := (a.v - b.v) / d
	second := (chord - 1/b.slope) / d
	third := ((1/a.slope-chord)/d - second) / d
	return b.v - b.rise*(1/b.slope-b.rise*(second-a.rise*third))
}

// strongestDrive returns the largest E of the intervals that may conduct [V], -Inf without any.
func (p *Period) strongestDrive() float64 {
	most := math.Inf(-1)
	if p.On.Conducts && !(p.On.Duration <= 0) {
		most = p.On.Drive
	}
	for k := range p.Off {
		if iv := &p.Off[k]; iv.Conducts && !(iv.Duration <= 0) && !(iv.Drive <= most) {
			most = iv.Drive
		}
	}
	return most
}

// guess returns a start for the iteration [V]: the best V_BS that one interval alone would leave if it had to bring the whole charge Q. The
// exponential of R·C then ends with the current i = (Q/(R·C))/(e^(t/(R·C)) - 1), R with the junction's n·V_T/(Q/t); the
// junction's own tail with C·n·V_T/t; the larger of the two counts.
func (p *Period) guess(w *law, emax float64) float64 {
	q := p.Charge + p.ChargePerVolt*emax + (p.On.Load+p.On.Conductance*emax)*math.Max(p.On.Duration, 0) - p.Return
	for k := range p.Off {
		q += p.Off[k].Load * math.Max(p.Off[k].Duration, 0)
	}
	if !(q > 0) {
		return emax
	}
	best := math.Inf(-1)
	for k := range p.Off {
		iv := &p.Off[k]
		if !iv.Conducts || iv.Duration <= 0 {
			continue
		}
		r := w.r + w.slope*iv.Duration/q
		x := iv.Duration / (r * p.Capacitance)
		end := math.Max(q/iv.Duration/expm1Ratio(x), p.Capacitance*w.slope/iv.Duration)
		v := iv.Drive - w.r*end
		if !w.linear {
			v -= w.slope * math.Max(0, math.Log(end)-w.logIS)
		}
		best = math.Max(best, v)
	}
	return best
}

// steady describes the fixed point a step [V] from v [V], whose pass left tr.
func (p *Period) steady(w *law, v, step, guess float64, tr *trace, n int) Steady {
	v += step
	s := Steady{
		Low: math.Min(tr.low+step*tr.lowSlope, v), High: tr.high + step*tr.highSlope, HighInterval: tr.highest,
		AfterEdge: tr.after + step*tr.afterSlope, BeforeEdge: v,
		Recovery: tr.recovery + step*tr.recoverySlope, Charge: tr.drawn + step*tr.drawnSlope, TimeConducting: tr.conducting, Iterations: n, Converged: true,
		Offset: v - guess,
	}
	ideal := p.strongestDrive()
	if !w.linear {
		reference := 0.0
		if tr.conducting > 0 {
			reference = tr.recharged / tr.conducting
		}
		for k := range p.Off {
			reference = math.Max(reference, p.Off[k].Load)
		}
		ideal -= Junction{Slope: w.slope, LogSaturation: w.logIS}.junctionVoltage(reference)
	}
	s.Deficit = ideal - s.Low
	if p.Lockout > 0 && s.Low < p.Lockout {
		s.PeriodsToLockout = p.PeriodsUntil(p.Start, p.Lockout, mostCountedPeriods)
	}
	return s
}

// nothing is the answer without a steady state: a collapse, or none found.
func (p *Period) nothing(n int, collapses bool) Steady {
	nan := math.NaN()
	s := Steady{
		Low: nan, High: nan, AfterEdge: nan, BeforeEdge: nan, Deficit: nan, Recovery: nan, Charge: nan, TimeConducting: nan,
		Offset: nan, HighInterval: -1, Collapses: collapses, Converged: collapses, Iterations: n,
	}
	if collapses && p.Lockout > 0 {
		s.PeriodsToLockout = p.PeriodsUntil(p.Start, p.Lockout, mostCountedPeriods)
	}
	return s
}
