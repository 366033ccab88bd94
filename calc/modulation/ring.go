package modulation

import "math"

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
	Window   float64 // in which the element can conduct, of all periods [s]
	OnTime   float64 // of the high side in all periods [s]
	Gates    float64 // turn-ons of the high side in all periods [1]
	Recovery float64 // largest recovery charge of D_B at a rising edge [C]
	Start    float64 // V_BS before the edge of the first period [V]

	Collapses bool // no positive V_BS throughout
	Converged bool // false: none was found
	Passes    int  // evaluations of the law of one period

	plan  *Plan
	steps []step
}

// mostTurns is the number of turns over all periods until a solution is found.
const mostTurns = 60

// Steady finds the periodic solution from an estimate of V_BS before the first edge [V]; NaN where there is none.
func (p *Plan) Steady(start float64) Steady { return p.steady(start, defaultTolerance, false) }

// steady is Steady with a tolerance of the steps [V]; or, exact, with every period by itself.
func (p *Plan) steady(start, tolerance float64, exact bool) Steady {
	w := walker{plan: p, flow: p.leg.Element.Flow(), tolerance: tolerance, exact: exact, steps: make([]step, 0, 128)}
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
	var known []step
	for turns := 0; ; turns++ {
		if turns == mostTurns {
			out.Passes = w.passes
			return out
		}
		w.steps = make([]step, 0, max(128, len(known)+8))
		var end, slope float64
		met := false
		if known != nil {
			end, slope, met = w.again(v, known)
		}
		if known == nil || end != end {
			w.steps = w.steps[:0]
			end, slope = w.turn(v)
		}
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
			out.Collapses, out.Converged, out.Passes = true, true, w.passes
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
	out.steps = w.steps
	w.describe(&out)
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

// describe finds the extremes and means of the solution.
func (w *walker) describe(out *Steady) {
	out.Low, _ = w.extreme(out.steps, func(s *seen) float64 { return s.low }, 1)
	out.OnLow, _ = w.extreme(out.steps, func(s *seen) float64 { return s.onLow }, 1)
	out.High, _ = w.extreme(out.steps, func(s *seen) float64 { return -s.high }, -1)
	out.Charge = 0
	for i := range out.steps {
		s := &out.steps[i]
		for k, weight := range s.weights() {
			if weight != 0 {
				out.Charge += weight * s.seen[k].recharged
				out.Window += weight * s.seen[k].window
				out.OnTime += weight * s.seen[k].on
				out.Gates += weight * s.seen[k].gates
				out.Recovery = math.Max(out.Recovery, s.seen[k].recovery)
			}
		}
	}
	out.Collapses = out.Low.Value <= 0
	w.held(out)
}

// candidates are so close to the best of the sampled periods that a period between them may be better [V].
const candidates = 1e-3

// extreme finds the period in which what of is smallest; sign turns it to what is reported.
func (w *walker) extreme(steps []step, of func(*seen) float64, sign float64) (best Extreme, found bool) {
	least := math.Inf(1)
	for i := range steps {
		for k := range steps[i].seen {
			if k > 0 && !steps[i].several() {
				break
			}
			least = math.Min(least, of(&steps[i].seen[k]))
		}
	}
	best = Extreme{Value: math.Inf(1), Period: -1, Before: math.NaN()}
	take := func(v, x, before float64) bool {
		if v < best.Value {
			best = Extreme{v, x, before}
			return true
		}
		return false
	}
	for i := range steps {
		s := &steps[i]
		if !s.several() {
			at := s.from
			if s.merged && sign > 0 { // V_BS falls throughout
				at = s.to - 1
			}
			take(of(&s.seen[0]), float64(at), s.v[0])
			continue
		}
		nearest, at := math.Inf(1), 0
		for k := range s.seen {
			if v := of(&s.seen[k]); v < nearest {
				nearest, at = v, k
			}
		}
		if !(nearest <= least+candidates) {
			continue
		}
		w.within(s, s.position(at), of, take)
	}
	best.Value *= sign
	return best, best.Period >= 0
}

// within looks for the best whole period of a step, downhill from a position along ever shorter strides.
func (w *walker) within(s *step, from float64, of func(*seen) float64, take func(v, x, before float64) bool) {
	run := &w.plan.runs[s.run]
	look := func(k int) float64 {
		x := float64(k)
		before := s.before(x)
		_, saw := w.pass(run, x, before)
		v := of(&saw)
		take(v, x, before)
		return v
	}
	k := min(max(int(math.Round(from)), s.from), s.to-1)
	here := look(k)
	for stride := max(1, (s.to-s.from)/4); stride > 0; {
		moved := false
		for _, to := range []int{k - stride, k + stride} {
			if to < s.from || to >= s.to {
				continue
			}
			if v := look(to); v < here {
				k, here, moved = to, v, true
				break
			}
		}
		if !moved {
			stride /= 2
		}
	}
}

// held finds the largest fall between two recharges, and where the one begins in which V_BS is lowest.
func (w *walker) held(out *Steady) {
	began := math.NaN() // V_BS as the present time without recharge began
	var y layout
	refreshes := func(s *step) bool {
		w.plan.runs[s.run].at(float64(s.from), &y)
		return y.conducts()
	}
	fall := func(from float64, s *step, k int) {
		if d := from - s.seen[k].low; d > out.Droop || out.Droop != out.Droop {
			out.Droop = d
		}
	}
	n := len(out.steps)
	found := [2]bool{}
	for i := range 2 * n { // the second round knows what the end of the first leaves
		s := &out.steps[i%n]
		again := refreshes(s)
		from := s.v[0]
		if began == began {
			from = began
		}
		if i >= n || again {
			fall(from, s, 0)
			for k := 1; k < len(s.seen) && s.several(); k++ {
				if again {
					fall(s.v[k], s, k)
				} else {
					fall(from, s, k)
				}
			}
		}
		for j, of := range []struct {
			low  *Extreme
			held *float64
		}{{&out.Low, &out.Held}, {&out.OnLow, &out.OnHeld}} {
			if !(of.low.Period >= float64(s.from) && of.low.Period < float64(s.to)) || found[j] && i < n {
				continue
			}
			*of.held, found[j] = from, true
			if again && s.several() && of.low.Period > float64(s.from) {
				*of.held = of.low.Before
			}
		}
		if began = math.NaN(); !again {
			began = from
		}
	}
}
