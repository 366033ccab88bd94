package modulation

import "math"

// run is consecutive periods whose layouts follow one smooth law.
type run struct {
	from, to int                        // of the periods from <= k < to
	at       func(x float64, y *layout) // layout of a period; between whole numbers its smooth continuation
	constant bool                       // all its layouts are alike
	bends    bool                       // the law bends after it
	marks    []int                      // periods at which duty or current may be extreme
}

// Plan is the periods of one fundamental, revolution or burst cycle, which repeat.
type Plan struct {
	leg     *Leg
	runs    []run
	periods int
	time    float64 // of all periods [s]
}

// Sinusoidal is sinusoidal modulation of one leg.
type Sinusoidal struct {
	Index        float64 // amplitude of the reference over half the DC-link voltage [1]
	Fundamental  float64 // [Hz]
	Displacement float64 // lag of the current [rad]
	Current      float64 // its amplitude, out of the node [A]
	ZeroSequence ZeroSequence
}

// SixStep is six-step commutation.
type SixStep struct {
	Electrical float64 // frequency [Hz]
	Duty       float64 // of the switch that chops [1]
	Current    float64 // out of the node in the sector of the high side, into it in that of the low side [A]
	High, Low  bool    // which side chops
}

// Burst is bursts of pulses of constant duty.
type Burst struct {
	Duty     float64 // [1]
	Current  float64 // out of the node [A]
	Active   float64 // length of a burst [s]
	Idle     float64 // pause between bursts [s]
	IdleNode float64 // node voltage in the pause [V]
}

// count is the number of carrier periods in a time, rounded up, so that a hold is not taken too short.
func (l *Leg) count(time float64) int {
	return max(1, int(math.Ceil(time/l.Period*(1-1e-12)-1e-9)))
}

// Sinusoidal plans one fundamental. Duty and current are sampled at the start of each of its N = f_sw/f_1 periods.
func (l *Leg) Sinusoidal(m Sinusoidal) *Plan {
	n := l.count(1 / m.Fundamental)
	sinLag, cosLag := math.Sincos(m.Displacement)
	step := 2 * math.Pi / float64(n)
	at := func(x float64, y *layout) {
		sin, cos := math.Sincos(x * step)
		l.carrier(m.ZeroSequence.Duty(m.Index, sin, cos), m.Current*(sin*cosLag-cos*sinLag), y)
	}
	p := &Plan{leg: l, periods: n, time: float64(n) * l.Period}
	// Within these pieces duty and current are monotonic, so that equal forms at both ends are equal throughout.
	ends := make([]piece, 0, 16)
	for k := 1; k <= 12; k++ {
		ends = append(ends, piece{(k*n + 11) / 12, m.ZeroSequence.kink(k)})
	}
	for _, quarter := range []float64{1, 3} {
		x := math.Mod(m.Displacement/(math.Pi/2)+quarter, 4)
		if x < 0 {
			x += 4
		}
		ends = append(ends, piece{int(math.Ceil(x / 4 * float64(n))), false})
	}
	sortPieces(ends)
	from := 0
	for _, e := range ends {
		if e.to > from {
			p.divide(from, e.to, at)
			from = e.to
		}
		if e.kink && len(p.runs) > 0 {
			p.runs[len(p.runs)-1].bends = true
		}
	}
	p.join()
	return p
}

// piece ends before a period; its law may bend there.
type piece struct {
	to   int
	kink bool
}

func sortPieces(e []piece) {
	for i := 1; i < len(e); i++ {
		for k := i; k > 0 && e[k].to < e[k-1].to; k-- {
			e[k], e[k-1] = e[k-1], e[k]
		}
	}
}

// divide adds the periods from <= k < to as runs of equal form.
func (p *Plan) divide(from, to int, at func(float64, *layout)) {
	var y layout
	form := func(k int) uint8 {
		at(float64(k), &y)
		return y.code
	}
	last := form(to - 1)
	for from < to {
		code := form(from)
		end := to
		if code != last { // the first period of another form
			lo, hi := from, to-1
			for hi-lo > 1 {
				if mid := lo + (hi-lo)/2; form(mid) == code {
					lo = mid
				} else {
					hi = mid
				}
			}
			end = hi
		}
		p.runs = append(p.runs, run{from: from, to: end, at: at, marks: []int{from, end - 1}})
		from = end
	}
}

// join makes one run of neighbours of one form that do not meet at a kink.
func (p *Plan) join() {
	out := p.runs[:0]
	var y layout
	code := func(k int, r *run) uint8 {
		r.at(float64(k), &y)
		return y.code
	}
	for _, r := range p.runs {
		r.constant = code(r.from, &r)&formFull != 0
		if n := len(out); n > 0 && code(out[n-1].from, &r) == code(r.from, &r) && (!out[n-1].bends || r.constant) {
			q := &out[n-1]
			q.to, q.bends, q.marks = r.to, r.bends, append(q.marks, r.marks...)
		} else {
			out = append(out, r)
		}
	}
	p.runs = out
}

// SixStep plans one revolution: the high side works for a third of it, then the node is open for a sixth, the low side works for a third, and the
// node is open again. A chopped switch is on for the duty at the start of each period, and its opposite stays off; in a sector that is not chopped
// the switch stays on. What a current does that dies away after a sector is left out.
func (l *Leg) SixStep(m SixStep) *Plan {
	n := l.count(1 / m.Electrical)
	p := &Plan{leg: l, periods: n, time: float64(n) * l.Period}
	high, low := l.highSector(m), l.lowSector(m)
	open := layout{time: l.Period}
	open.add(Waiting, l.Period, 0, false, l.Load)
	bound := func(k int) int { return (k*n + 11) / 12 } // of n·k/12, upward
	for _, s := range []struct {
		to int
		y  layout
	}{{bound(1), open}, {bound(5), high}, {bound(7), open}, {bound(11), low}, {n, open}} {
		p.append(s.to, s.y)
	}
	return p
}

// append adds equal periods up to another one.
func (p *Plan) append(to int, y layout) {
	from := 0
	if k := len(p.runs); k > 0 {
		from = p.runs[k-1].to
	}
	if to > from {
		p.runs = append(p.runs, run{from: from, to: to, at: func(_ float64, out *layout) { *out = y }, constant: true, marks: []int{from, to - 1}})
	}
}

// highSector is a period in which the high side works.
func (l *Leg) highSector(m SixStep) (y layout) {
	d := 1.0
	if m.High {
		d = m.Duty
	}
	peak := m.Current + l.Ripple/2
	y = layout{time: l.Period, peak: peak}
	if d >= 1 {
		y.code, y.on, y.commanded = formFull, l.Period, l.Period
		return y
	}
	y.commanded = d * l.Period
	if y.on = y.commanded; y.on < l.Shortest {
		y.on = 0
	}
	l.gap(l.Period-y.on, peak, m.Current, &y)
	return y
}

// lowSector is a period in which the low side works, with the current the other way.
func (l *Leg) lowSector(m SixStep) (y layout) {
	d := 1.0
	if m.Low {
		d = m.Duty
	}
	current := -m.Current
	y = layout{time: l.Period, peak: current}
	on := d * l.Period
	switch {
	case l.DiodeLow:
		on = 0
	case on < l.Shortest:
		on = 0
	}
	y.add(LowSide, on, l.Supply-l.Nodes.LowOn(current), true, l.Load)
	switch rest := l.Period - on; {
	case rest <= 0:
	case current > 0:
		y.add(Freewheel, rest, l.Supply-l.Nodes.Freewheeling(current), !l.Element.Switch, l.Load)
	case on > 0:
		y.rest = rest
	default:
		y.add(Waiting, rest, 0, false, l.Load)
	}
	return y
}

// Burst plans one burst and the pause after it, in which both switches are off and the node stands at a voltage of its own.
func (l *Leg) Burst(m Burst) *Plan {
	n := l.count(m.Active)
	p := &Plan{leg: l, periods: n + 1, time: float64(n)*l.Period + m.Idle}
	var y layout
	l.carrier(m.Duty, m.Current, &y)
	p.append(n, y)
	idle := layout{time: m.Idle}
	drive := l.Supply - m.IdleNode
	idle.add(Idle, m.Idle, drive, !l.Element.Switch && drive > 0, l.Load)
	p.append(n+1, idle)
	return p
}

// edgeless tells whether a period of a run that follows one of the same run has neither edges nor recharge, so that many are one.
func (y *layout) edgeless() bool {
	if y.full() {
		return true
	}
	if y.on > 0 || y.rest > 0 || y.n != 1 {
		return false
	}
	return true
}

// merged is a run of constant layout without edges as one long period.
func (r *run) merged(y *layout) bool {
	r.at(float64(r.from), y)
	if !r.constant || !y.edgeless() {
		return false
	}
	n := float64(r.to - r.from)
	y.time *= n
	y.on *= n
	for k := range y.n {
		y.off[k].Duration *= n
	}
	return true
}
