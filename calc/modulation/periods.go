package modulation

import (
	"cmp"
	"math"
	"slices"

	"floatrail/calc/recharge"
)

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
func (l *Leg) Fixed(d, current float64, b *Buffer) Layout {
	l.carrier(d, current, &b.y)
	return l.described(&b.y, &b.y)
}

// Buffer is where the intervals of a Layout stand.
type Buffer struct{ y layout }

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
	steps := s.kept.all()
	for i := range steps {
		step := &steps[i]
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

// Strongest calls f with the sampled periods in the order of what drives the element at the end of the on-time [V], strongest first, each with V_BS
// there [V], until f wants no more.
func (s *Steady) Strongest(f func(at Layout, onEnd, across float64) (more bool)) {
	type sample struct{ step, k int }
	var all []sample
	steps := s.kept.all()
	for i := range steps {
		for _, k := range steps[i].order() {
			all = append(all, sample{i, k})
		}
	}
	of := func(a sample) *seen { return &steps[a.step].seen[a.k] }
	slices.SortStableFunc(all, func(a, b sample) int { return cmp.Compare(of(b).across, of(a).across) })
	for _, a := range all {
		if math.IsInf(of(a).across, -1) {
			return
		}
		if !f(s.plan.At(steps[a.step].position(a.k)), of(a).onEnd, of(a).across) {
			return
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
