package modulation

import "math"

// describe finds the extremes and means of the solution.
func (w *walker) describe(out *Steady) {
	out.Low = w.extreme(w.steps, func(s *seen) float64 { return s.low }, 1)
	out.OnLow = w.extreme(w.steps, func(s *seen) float64 { return s.onLow }, 1)
	out.High = w.extreme(w.steps, func(s *seen) float64 { return -s.high }, -1)
	out.Charge = 0
	for i := range w.steps {
		s := &w.steps[i]
		for k, weight := range s.weights() {
			if weight != 0 {
				out.Charge += weight * s.seen[k].recharged
				out.Recovery = math.Max(out.Recovery, s.seen[k].recovery)
			}
		}
	}
	out.Collapses = out.Low.Value <= 0
	w.times(out)
	w.held(out)
}

// times sums what does not depend on any voltage.
func (w *walker) times(out *Steady) {
	for i := range w.steps {
		s := &w.steps[i]
		for k, weight := range s.weights() {
			if weight != 0 {
				out.Window += weight * s.seen[k].window
				out.OnTime += weight * s.seen[k].on
				out.Gates += weight * s.seen[k].gates
			}
		}
	}
}

// candidates are so close to the best of the sampled periods that a period between them may be better [V].
const candidates = 1e-3

// extreme finds the period in which what of is smallest; sign turns it to what is reported.
func (w *walker) extreme(steps []step, of func(*seen) float64, sign float64) (best Extreme) {
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
	return best
}

// lowest is about where what of tells is smallest in a step of several periods.
func (s *step) lowest(of func(*seen) float64) (v, at float64) {
	var values [4]float64
	for k := range values {
		values[k] = of(&s.seen[k])
	}
	return s.least(values)
}

// least is about where a number of the periods of a step is smallest that is known at the positions, by the cubic through them.
func (s *step) least(values [4]float64) (v, at float64) {
	const looks = 24
	v = math.Inf(1)
	for k := range values {
		if values[k] < v {
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
	n := len(w.steps)
	found := [2]bool{}
	for i := range 2 * n { // the second round knows what the end of the first leaves
		s := &w.steps[i%n]
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
	var rises [4]float64
	for k := range rises {
		rises[k] = s.seen[k].low - s.v[k]
	}
	v, _ := s.least(rises)
	return -v
}
