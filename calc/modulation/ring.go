package modulation

import (
	"math"
	"slices"
	"sync"
)

// Extreme is where a voltage is lowest or highest over all periods of a plan.
type Extreme struct {
	Value  float64 // [V]
	Period float64 // number of the period, from 0; a whole number
	Before float64 // V_BS before the edge of the period [V]
}

// Steady is the periodic solution. Where it collapses, or none was found, the voltages are NaN.
type Steady struct {
	Low      Extreme // lowest V_BS
	OnLow    Extreme // lowest while the high side is on and its channel carries forward current; its period is -1 where it never does
	High     Extreme // highest V_BS
	Droop    float64 // largest fall of V_BS from before an edge to before the next recharge [V]
	Held     float64 // V_BS before the edge that begins the time without recharge in which V_BS is lowest [V]
	OnHeld   float64 // the same for OnLow [V]
	Charge   float64 // through the element in all periods [C]
	Window   float64 // in which the element can conduct, of all periods, whether it collapses or not [s]
	OnTime   float64 // of the high side in all periods [s]
	Gates    float64 // turn-ons of the high side in all periods [1]
	Recovery float64 // largest recovery charge of D_B at a rising edge [C]
	Start    float64 // V_BS before the edge of the first period [V]

	Collapses bool // no positive V_BS throughout
	Converged bool // false: none was found
	Passes    int  // evaluations of the law of one period

	plan *Plan
	kept kept
}

// scratch is memory for the steps of two turns.
var scratch = sync.Pool{New: func() any { return new([2][]step) }}

// mostTurns is the number of turns over all periods until a solution is found.
const mostTurns = 60

// Steady finds the periodic solution from an estimate of V_BS before the first edge [V]; NaN where there is none.
func (p *Plan) Steady(start float64) Steady { return p.steady(start, defaultTolerance, false, nil) }

// SteadyLike is Steady from the solution of a similar plan, whose steps are taken over where both have the same runs.
func (p *Plan) SteadyLike(s *Steady) Steady {
	var known []step
	if s.plan != nil && s.plan.periods == p.periods && slices.EqualFunc(s.plan.runs, p.runs, func(a, b run) bool { return a.from == b.from && a.to == b.to }) {
		known = s.kept.all()
	}
	return p.steady(s.Start, defaultTolerance, false, known)
}

// steady is Steady with a tolerance of the steps [V]; or, exact, with every period by itself. It begins with the steps of another plan, if any.
func (p *Plan) steady(start, tolerance float64, exact bool, known []step) Steady {
	w := walker{plan: p, flow: p.leg.Element.Flow(), tolerance: tolerance, exact: exact}
	pair := scratch.Get().(*[2][]step) // of this turn and the one before
	defer scratch.Put(pair)
	low, high := 0.0, p.ceiling()
	nan := math.NaN()
	out := Steady{Low: Extreme{nan, -1, nan}, OnLow: Extreme{nan, -1, nan}, High: Extreme{nan, -1, nan}, Droop: nan, Held: nan, OnHeld: nan, Charge: nan, Start: nan, plan: p}
	if !(high > 0) {
		return out
	}
	v := start
	if !(v > low && v < high) {
		v = high / 2
	}
	for turns := 0; ; turns++ {
		if turns == mostTurns {
			out.Passes = w.passes
			return out
		}
		w.steps = pair[turns%2][:0]
		var end, slope float64
		met := false
		if known != nil {
			end, slope, met = w.again(v, known, turns == 0)
		}
		if known == nil || end != end {
			w.steps = w.steps[:0]
			end, slope = w.turn(v)
		}
		pair[turns%2] = w.steps
		if met { // from there on it is the turn before, which ended here
			break
		}
		rise := end - v
		if rise != rise {
			out.Passes = w.passes
			return out
		}
		if rise > 0 {
			low = v
		} else {
			high = v
		}
		if v == 0 && rise <= 0 {
			out.Collapses, out.Converged, out.Passes, out.kept = true, true, w.passes, keep(w.steps)
			w.times(&out)
			return out
		}
		step := rise / (1 - slope)
		if math.Abs(step) <= 0.1*closeEnough {
			break
		}
		to := v + step
		if !(to > low && to < high) {
			to = low + (high-low)/2
			if low == 0 && v > 0 {
				to = 0
			}
		}
		if slope < 1e-9 { // whatever the start, it ends here
			to = math.Max(0, end)
		}
		if to == v {
			break
		}
		known, v = w.steps, to
	}
	out.Start, out.Converged = v, true
	w.describe(&out)
	out.kept = keep(w.steps)
	out.Passes = w.passes
	return out
}

// ceiling is a V_BS that no period lifts [V].
func (p *Plan) ceiling() float64 {
	most := math.Inf(-1)
	var y layout
	for i := range p.runs {
		r := &p.runs[i]
		for _, k := range []int{r.from, r.to - 1, r.from + (r.to-r.from)/2} {
			r.at(float64(k), &y)
			for j := range y.n {
				if iv := &y.off[j]; iv.Conducts {
					most = math.Max(most, iv.Drive)
				}
			}
		}
	}
	l := p.leg
	if math.IsInf(most, -1) {
		most = l.Supply
	}
	return math.Max(most, 0)*1.1 + 1 + l.Junction/l.Capacitance
}
