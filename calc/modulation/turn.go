package modulation

import (
	"math"

	"floatrail/calc/recharge"
)

const (
	defaultTolerance = 3e-4 // of a step's polynomial [V]
	mostNewton       = 12
	alike            = 2000 // periods of a fundamental from which on the intervals before an edge are taken to be those of its own period
	fewest           = 10   // periods of a step that is worth a polynomial
	closeEnough      = 1e-6 // V_BS at which a turn has met the one before [V]
)

// walker carries V_BS through the periods of a plan.
type walker struct {
	plan      *Plan
	flow      recharge.Flow
	tolerance float64
	exact     bool // every period by itself
	other     bool // the steps that are taken over are those of another plan
	steps     []step
	passes    int // evaluations of the law of one period

	before, now layout // of the period under way and the one before
}

// pass carries V_BS through the period at x of a run, the one before it being of the same run.
func (w *walker) pass(r *run, x, v float64) (p recharge.Passage, out seen) {
	r.at(x, &w.now)
	if w.plan.leg.RecoverySpec > 0 && !r.constant && w.plan.periods < alike {
		r.at(x-1, &w.before)
		return w.through(&w.before, v)
	}
	return w.through(&w.now, v)
}

func (w *walker) through(before *layout, v float64) (p recharge.Passage, out seen) {
	w.passes++
	period := w.plan.leg.period(before, &w.now)
	p = w.flow.Pass(&period, v)
	out = seen{low: p.Low, high: p.High, onLow: math.Inf(1), recharged: p.Recharged, recovery: p.Recovery, on: w.now.on, onEnd: p.OnEnd, across: math.Inf(-1)}
	for k := range w.now.n {
		if w.now.off[k].Conducts {
			out.window += w.now.off[k].Duration
			out.across = math.Max(out.across, w.now.off[k].Drive-p.OnEnd)
		}
	}
	if w.now.on > 0 && !before.full() {
		out.gates = 1
	}
	if w.now.on > 0 && w.now.peak > 0 {
		out.onLow = math.Min(p.After, p.OnEnd)
	}
	return p, out
}

// previous is the layout of the last period before a run.
func (w *walker) previous(r int, y *layout) {
	runs := w.plan.runs
	q := &runs[(r+len(runs)-1)%len(runs)]
	q.at(float64(q.to-1), y)
}

// turn carries V_BS from v [V] before the first period through all of them, in steps that it chooses.
func (w *walker) turn(v float64) (end, slope float64) {
	slope = 1
	for r := range w.plan.runs {
		var ds float64
		v, ds = w.walk(r, v)
		slope *= ds
	}
	return v, slope
}

// again carries V_BS through the steps of a turn before, until it meets it; through those of another plan it does not end before the last.
func (w *walker) again(v float64, known []step, other bool) (end, slope float64, met bool) {
	slope = 1
	w.other = other
	defer func() { w.other = false }()
	for i := 0; i < len(known); i++ {
		s := &known[i]
		shift := v - s.v[0]
		if math.Abs(shift) <= closeEnough && !other {
			w.steps = append(w.steps, known[i:]...)
			return v, slope, true
		}
		var ds float64
		switch run := &w.plan.runs[s.run]; {
		case s.several():
			start := *s
			for j := range start.v {
				start.v[j] += shift
			}
			next, by, _, ok := w.collocate(start, true)
			if !ok { // the rest of the run in steps of its own
				v, ds = w.rest(s.run, s.from, v)
				slope *= ds
				for i+1 < len(known) && known[i+1].run == s.run {
					i++
				}
				continue
			}
			v, ds = next, by
		case s.from == run.from:
			v, ds = w.enter(s.run, v)
		default:
			v, ds = w.single(s.run, s.from, v)
		}
		slope *= ds
	}
	return v, slope, false
}

// enter carries V_BS through the first period of a run, after the last one of another run; or through the whole run where it is one period.
func (w *walker) enter(r int, v float64) (next, slope float64) {
	run := &w.plan.runs[r]
	w.previous(r, &w.before)
	s := step{run: r, from: run.from, to: run.from + 1, v: [4]float64{v}}
	if !w.exact && run.merged(&w.now) {
		s.to, s.merged = run.to, true
	} else {
		run.at(float64(run.from), &w.now)
	}
	p, saw := w.through(&w.before, v)
	s.seen[0] = saw
	w.steps = append(w.steps, s)
	return p.Next, p.NextSlope
}

// single carries V_BS through one period of a run.
func (w *walker) single(r, k int, v float64) (next, slope float64) {
	p, saw := w.pass(&w.plan.runs[r], float64(k), v)
	w.steps = append(w.steps, step{run: r, from: k, to: k + 1, v: [4]float64{v}, seen: [4]seen{saw}})
	return p.Next, p.NextSlope
}

// walk carries V_BS through a run.
func (w *walker) walk(r int, v float64) (end, slope float64) {
	v, slope = w.enter(r, v)
	end, ds := w.rest(r, w.steps[len(w.steps)-1].to, v)
	return end, slope * ds
}

// rest carries V_BS through the periods of a run from one on.
func (w *walker) rest(r, k int, v float64) (end, slope float64) {
	run := &w.plan.runs[r]
	slope = 1
	size := 1.0 // of the next step [periods]
	for k < run.to {
		m := min(int(size), run.to-k)
		var ds float64
		if w.exact || m < fewest {
			v, ds = w.single(r, k, v)
			k++
			slope *= ds
			size = math.Min(size*1.5+0.5, fewest)
			continue
		}
		next, ds, grow, ok := w.collocate(step{run: r, from: k, to: k + m, v: [4]float64{v}}, false)
		if !ok {
			size = math.Min(math.Max(1, float64(m)*grow), float64(m)/2)
			continue
		}
		k += m
		v, slope = next, slope*ds
		size = float64(m) * grow
	}
	return v, slope
}

// collocate carries V_BS through the several periods of a step s, from s.v[0] on: the cubic p through it keeps p(x+1) = F(p(x); x) at three nodes,
// the last of which is the last period. grow is by how much the next step may be longer. A step that is sure has its values near the solution
// already, and its length is hardly doubted.
func (w *walker) collocate(s step, sure bool) (next, slope, grow float64, ok bool) {
	run := &w.plan.runs[s.run]
	v, last := s.v[0], s.span()
	h := 1 / last
	first, saw := w.pass(run, float64(s.from), v)
	s.seen[0] = saw
	if !sure {
		w.guess(&s, first)
	}
	var moved [3][4]float64 // p(x+1) - p(x) at the nodes, by the values
	for j := range moved {
		for i := range cubic {
			moved[j][i] = advanced(&cubic[i], nodes[j], h)
		}
	}
	var by [3]float64 // derivatives by v
	for n := 0; ; n++ {
		if n == mostNewton {
			return 0, 0, 0.25, false
		}
		var a [3][3]float64
		var b, c [3]float64
		var passed recharge.Passage
		for j := range nodes {
			var saw seen
			passed, saw = w.pass(run, s.position(j+1), s.v[j+1])
			s.seen[j+1] = saw
			b[j] = passed.Next - s.v[j+1]
			for i := range s.v {
				b[j] -= moved[j][i] * s.v[i]
			}
			for i := range nodes {
				a[j][i] = moved[j][i+1]
			}
			a[j][j] += 1 - passed.NextSlope
			c[j] = -moved[j][0]
		}
		var dv [3]float64
		dv, by = solve3(&a, b, c)
		largest := 0.0
		for j := range dv {
			s.v[j+1] += dv[j]
			s.seen[j+1].move(dv[j])
			largest = math.Max(largest, math.Abs(dv[j]))
		}
		if largest != largest {
			return 0, 0, 0.25, false
		}
		if largest <= w.tolerance {
			next, slope = passed.Next+passed.NextSlope*dv[2], passed.NextSlope*by[2]
			break
		}
	}
	// Neither the first period nor the ones looked at between are nodes: what the cubic misses there tells how good it is.
	e := w.missed(&s, 0, first)
	if sure && !w.other {
		if e <= enough {
			w.steps = append(w.steps, s)
		}
		return next, slope, 1, e <= enough
	}
	look := func(at float64) {
		if x := float64(s.from) + at*last; e <= 1 || sure && e <= enough {
			there, _ := w.pass(run, x, s.before(x))
			e = math.Max(e, w.missed(&s, at, there))
		}
	}
	look(between)
	for k := 1; k < len(run.marks); k++ { // where duty and current turn, V_BS may do what no node sees: one of the pair that ends and begins a piece
		if m := run.marks[k]; m > s.from && m < s.to-1 && m > run.marks[k-1]+1 {
			look(float64(m-s.from) * h)
		}
	}
	if sure {
		if e <= enough {
			w.steps = append(w.steps, s)
		}
		return next, slope, 1, e <= enough
	}
	grow = math.Min(4, 0.9*math.Pow(math.Max(e, 1e-9), -0.25))
	if !(e <= 1) {
		return 0, 0, math.Max(grow, 0.1), false
	}
	w.steps = append(w.steps, s)
	return next, slope, grow, true
}

// enough is the error of a step taken over, in tolerances, up to which it stands.
const enough = 2

// between lies between the last two nodes.
const between = 0.83

// missed is by how much the cubic of a step misses the passage of a period at s, over the time for which it is remembered, in tolerances.
func (w *walker) missed(s *step, at float64, there recharge.Passage) float64 {
	h := 1 / s.span()
	off, v := there.Next, 0.0
	for i := range s.v {
		v += s.v[i] * value(&cubic[i], at)
		off -= s.v[i] * advanced(&cubic[i], at, h)
	}
	lasts := math.Min(s.span()+1, 1/math.Max(1-there.NextSlope, 1e-300))
	return math.Abs(off-v) * lasts / w.tolerance
}

// move shifts what was seen with V_BS, by a little [V].
func (s *seen) move(dv float64) {
	s.low += dv
	s.high += dv
	s.onLow += dv
}

// guess starts the values of a step: along the polynomial of the step before where that is of the same run, else as the first period goes on.
func (w *walker) guess(s *step, first recharge.Passage) {
	rise, rate := first.Next-s.v[0], 1-first.NextSlope
	var along *step
	if n := len(w.steps); n > 0 {
		if b := &w.steps[n-1]; b.run == s.run && b.several() && s.to-s.from < 8*(b.to-b.from) {
			along = b
		}
	}
	for j := range nodes {
		x := nodes[j] * s.span()
		if along != nil {
			s.v[j+1] = s.v[0] + along.before(float64(s.from)+x) - along.before(float64(s.from))
			continue
		}
		way := x
		if rate > 1e-12 {
			way = -math.Expm1(x*math.Log1p(-math.Min(rate, 0.999999))) / rate
		}
		s.v[j+1] = s.v[0] + rise*way
	}
}
