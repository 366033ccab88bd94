package modulation

import (
	"math"

	"floatrail/calc/recharge"
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
	Converged bool
	Passes    int // evaluations of the law of one period

	plan  *Plan
	steps []step
}

const mostTurns = 60

// Steady finds the periodic solution from an estimate of V_BS before the first edge [V]; NaN where there is none.
func (p *Plan) Steady(start float64) Steady { return p.steady(start, defaultTolerance, false) }

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
	for range mostTurns {
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
			out.Collapses, out.Converged, out.Passes, out.steps = true, true, w.passes, w.steps
			out.times()
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
				out.Recovery = math.Max(out.Recovery, s.seen[k].recovery)
			}
		}
	}
	out.Collapses = out.Low.Value <= 0
	out.times()
	w.held(out)
}

// times sums what does not depend on any voltage.
func (s *Steady) times() {
	for i := range s.steps {
		step := &s.steps[i]
		for k, weight := range step.weights() {
			if weight != 0 {
				s.Window += weight * step.seen[k].window
				s.OnTime += weight * step.seen[k].on
				s.Gates += weight * step.seen[k].gates
			}
		}
	}
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
		if nearest, at := s.lowest(of); nearest <= least+candidates {
			w.within(s, at, of, take)
		}
	}
	best.Value *= sign
	return best, best.Period >= 0
}

// lowest is about where what of tells is smallest in a step of several periods, by the cubic through the positions.
func (s *step) lowest(of func(*seen) float64) (v, at float64) {
	const looks = 24
	v = math.Inf(1)
	var values [4]float64
	for k := range values {
		if values[k] = of(&s.seen[k]); values[k] < v {
			v, at = values[k], s.position(k)
		}
	}
	for k := range looks {
		x, between := (float64(k)+0.5)/looks, 0.0
		for j := range values {
			between += values[j] * value(&cubic[j], x)
		}
		if between < v {
			v, at = between, float64(s.from)+x*s.span()
		}
	}
	return v, at
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
	fall := func(from, to float64) {
		if d := from - to; d > out.Droop || out.Droop != out.Droop {
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
			fall(from, w.firstLow(s, again))
			switch {
			case !s.several():
			case again:
				out.Droop = math.Max(out.Droop, s.largestFall())
			default:
				for k := 1; k < len(s.seen); k++ {
					fall(from, s.seen[k].low)
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

// firstLow is the lowest V_BS in the first period of a step. Of a long time in which the element could conduct it is that of one carrier period: what
// V_BS loses there while it stands above the drive is no fall without recharge, as it is none where every period stands by itself [V].
func (w *walker) firstLow(s *step, refreshes bool) float64 {
	if !s.merged || !refreshes || s.to-s.from == 1 {
		return s.seen[0].low
	}
	w.previous(s.run, &w.before)
	w.plan.runs[s.run].at(float64(s.from), &w.now)
	_, saw := w.through(&w.before, s.v[0])
	return saw.low
}

// largestFall is the largest fall within one period of a step of several, each of which recharges, by the cubic through the positions [V].
func (s *step) largestFall() float64 {
	falls := *s
	for k := range falls.seen {
		falls.seen[k].low -= s.v[k]
	}
	v, _ := falls.lowest(func(saw *seen) float64 { return saw.low })
	return -v
}

// Layout describes one carrier period.
type Layout struct {
	recharge.Period
	Kinds        []Kind
	Time         float64 // length [s]
	OnTime       float64 // the high side is on [s]
	LowTime      float64 // the low side is on [s]
	Window       float64 // in which the element can conduct [s]
	Peak         float64 // current at the end of the on-time [A]
	Commanded    float64 // pulse that the high side is commanded for [s]
	Gated        bool    // the high side turns on
	HighVanishes bool    // its pulse is shorter than the driver passes
	LowVanishes  bool    // the low side's is
}

// described is a layout after another one.
func (l *Leg) described(before, y *layout) Layout {
	out := Layout{Period: l.period(before, y), Kinds: y.kinds[:y.n], Time: y.time, OnTime: y.on, Peak: y.peak, Commanded: y.commanded,
		Gated: y.on > 0 && !before.full(), HighVanishes: y.code&formStay != 0, LowVanishes: y.code&formGap != 0 && !l.DiodeLow}
	for k := range y.n {
		if y.off[k].Conducts {
			out.Window += y.off[k].Duration
		}
		if y.kinds[k] == LowSide {
			out.LowTime += y.off[k].Duration
		}
	}
	return out
}

// Fixed is the period of a constant duty and current out of the node [1], [A], which repeats.
func (l *Leg) Fixed(d, current float64) Layout {
	y := new(layout)
	l.carrier(d, current, y)
	return l.described(y, y)
}

// At is a period of the plan, that of a sample or an extreme.
func (p *Plan) At(x float64) Layout {
	i := 0
	for i+1 < len(p.runs) && x >= float64(p.runs[i].to) {
		i++
	}
	r := &p.runs[i]
	y, before := new(layout), new(layout)
	if x < float64(r.from+1) {
		q := &p.runs[(i+len(p.runs)-1)%len(p.runs)]
		q.at(float64(q.to-1), before)
	} else {
		r.at(x-1, before)
	}
	r.at(x, y)
	return p.leg.described(before, y)
}

// Each calls f with periods that stand for all of them: each with V_BS before its edge [V], and the number of periods that it stands for. Periods of a
// run without edges come as a single long one.
func (s *Steady) Each(f func(at Layout, before, weight float64)) {
	if s.plan == nil {
		return
	}
	for i := range s.steps {
		step := &s.steps[i]
		if step.merged {
			y, before := new(layout), new(layout)
			run := &s.plan.runs[step.run]
			run.merged(y)
			(&walker{plan: s.plan}).previous(step.run, before)
			f(s.plan.leg.described(before, y), step.v[0], 1)
			continue
		}
		weights := step.weights()
		for k, w := range weights {
			if w != 0 {
				f(s.plan.At(step.position(k)), step.v[k], w)
			}
		}
	}
}

// Angle is the angle at which a period begins, of a full turn [rad].
func (p *Plan) Angle(period float64) float64 { return 2 * math.Pi * period / float64(p.periods) }

// Periods is the number of carrier periods, and Time the length of them all [s].
func (p *Plan) Periods() int { return p.periods }

// Time is the length of all periods [s].
func (p *Plan) Time() float64 { return p.time }

// Carrier is the length of one carrier period [s].
func (p *Plan) Carrier() float64 { return p.leg.Period }

// Alone is the period at x if it repeated.
func (p *Plan) Alone(x float64) Layout {
	i := 0
	for i+1 < len(p.runs) && x >= float64(p.runs[i].to) {
		i++
	}
	y := new(layout)
	p.runs[i].at(x, y)
	return p.leg.described(y, y)
}

// PeriodsUntil counts the periods from V_BS = start [V], before the edge of the first one, up to and including the first in which V_BS falls below
// level [V]; -1 when that does not happen within most periods.
func (p *Plan) PeriodsUntil(start, level float64, most int) int {
	w := walker{plan: p, flow: p.leg.Element.Flow(), exact: true}
	for n := 0; n < most; {
		for r := range p.runs {
			run := &p.runs[r]
			for k := run.from; k < run.to && n < most; k++ {
				if n++; k == run.from {
					start, _ = w.enter(r, start)
				} else {
					start, _ = w.single(r, k, start)
				}
				if w.steps[len(w.steps)-1].seen[0].low < level {
					return n
				}
				w.steps = w.steps[:0]
			}
		}
	}
	return -1
}

// WithCapacitance is the plan with another C_B [F].
func (p *Plan) WithCapacitance(c float64) *Plan {
	l := *p.leg
	l.Capacitance = c
	o := *p
	o.leg = &l
	return &o
}
