package modulation

// TracePoint is V_BS at a time from the beginning of the first period.
type TracePoint struct {
	Time    float64 // [s]
	Period  float64 // number of the period, from 0
	Voltage float64 // [V]
}

// longPoints is the number of points of an interval of periods that come as one.
const longPoints = 24

// Trace gives V_BS over all periods: of each sampled one before its edge and at its lowest, of many without edges that come as one at points between.
// At most a number of points, of which the lowest and the highest are always among them; fewer than 100 count as 100.
func (s *Steady) Trace(most int) []TracePoint {
	if s.plan == nil {
		return nil
	}
	var all []TracePoint
	lowest, highest := -1, -1
	add := func(t, period, v float64) {
		all = append(all, TracePoint{t, period, v})
		n := len(all) - 1
		if lowest < 0 || v < all[lowest].Voltage {
			lowest = n
		}
		if highest < 0 || v > all[highest].Voltage {
			highest = n
		}
	}
	start := func(x float64) float64 { return x * s.plan.leg.Period }
	steps := s.kept.all()
	flow := s.plan.leg.Element.Flow()
	for i := range steps {
		q := &steps[i]
		if q.merged {
			y, before := new(layout), new(layout)
			s.plan.runs[q.run].merged(y)
			(&walker{plan: s.plan}).previous(q.run, before)
			period := s.plan.leg.period(before, y)
			from, per := start(float64(q.from)), y.time/float64(q.to-q.from)
			period.Trace(q.v[0], longPoints, func(t, v float64) { add(from+t, float64(q.from)+t/per, v) })
			continue
		}
		for _, k := range q.order() {
			x := q.position(k)
			at := s.plan.At(x)
			add(start(x), x, q.v[k])
			add(start(x)+at.OnTime, x, flow.Pass(&at.Period, q.v[k]).Low)
		}
		if !q.several() {
			continue
		}
		for _, e := range []Extreme{s.Low, s.High} {
			if e.Period >= float64(q.from) && e.Period < float64(q.to) {
				at := s.plan.At(e.Period)
				add(start(e.Period)+at.OnTime, e.Period, e.Value)
			}
		}
	}
	return thinned(sorted(all), max(most, 100))
}

// order is the positions of a step in their order in time.
func (s *step) order() []int {
	if !s.several() {
		return []int{0}
	}
	return []int{0, 1, 2, 3}
}

func sorted(p []TracePoint) []TracePoint {
	for i := 1; i < len(p); i++ { // nearly in order already
		for k := i; k > 0 && p[k].Time < p[k-1].Time; k-- {
			p[k], p[k-1] = p[k-1], p[k]
		}
	}
	return p
}

// thinned keeps at most a number of points, pairs of neighbours at even distances, and the extremes.
func thinned(p []TracePoint, most int) []TracePoint {
	if len(p) <= most {
		return p
	}
	lowest, highest := 0, 0
	for i := range p {
		if p[i].Voltage < p[lowest].Voltage {
			lowest = i
		}
		if p[i].Voltage > p[highest].Voltage {
			highest = i
		}
	}
	stride := (len(p)/2)/((most-4)/2) + 1
	out := make([]TracePoint, 0, most)
	for i := range p {
		if i/2%stride == 0 || i == lowest || i == highest || i == len(p)-1 {
			out = append(out, p[i])
		}
	}
	return out
}
