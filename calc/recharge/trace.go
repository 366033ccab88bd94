package recharge

// Trace calls f with V_BS [V] over a period from V_BS = v just before its rising edge, at times from that edge on [s]: before and after the edge, and
// at a number of points of every interval.
func (p *Period) Trace(v float64, points int, f func(t, v float64)) {
	w := p.Element.law()
	f(0, v)
	var tr trace
	p.pass(&w, v, &tr)
	v = tr.after
	f(0, v)
	t := 0.0
	follow := func(iv Interval) {
		if !(iv.Duration > 0) {
			return
		}
		part := iv
		for k := 1; k <= points; k++ {
			part.Duration = iv.Duration * float64(k) / float64(points)
			at, _, _ := w.advance(v, &part, p.Capacitance)
			f(t+part.Duration, at)
		}
		v, _, _ = w.advance(v, &iv, p.Capacitance)
		t += iv.Duration
	}
	w.interval = 0
	follow(p.On)
	if p.Return != 0 {
		v += p.Return / p.Capacitance
		f(t, v)
	}
	for k := range p.Off {
		follow(p.Off[k])
	}
}
