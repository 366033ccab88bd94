package transient

import "floatrail/calc/internal/numeric"

const (
	mostPoints = 2000 // of a waveform
	parts      = 4    // points of a step
)

// points is the points of one waveform before they are thinned out.
type points struct {
	t, v []float64
}

func (p *points) add(t, v float64) {
	if n := len(p.t); n > 0 && !(t > p.t[n-1]) {
		return
	}
	p.t, p.v = append(p.t, t), append(p.v, v)
}

// polynomial returns a signal over a span; false: it is none.
func (c *circuit) polynomial(signal Signal, at *span) (p numeric.Polynomial, ok bool) {
	switch signal {
	case Node:
		return c.node.of(&at.state), true
	case Pin:
		return at.state[statePin], true
	case Rail:
		return c.rail.of(&at.state), true
	case Floating:
		p = at.state[stateGain]
		p[0] += c.floating
		return p, true
	case HighDrain:
		return at.state[stateVd1], true
	case LowDrain:
		return at.state[stateVd2], true
	case HighGate:
		return at.state[stateVg1], true
	case LowGate:
		return at.state[stateVg2], true
	case HighCurrent:
		return c.j1.of(&at.state), true
	case LowCurrent:
		return c.j2.of(&at.state), true
	case HighGateCurrent:
		return c.ig1.of(&at.state), true
	case LowGateCurrent:
		return c.ig2.of(&at.state), true
	}
	return p, false
}

// waveform returns a signal over the stored spans: both ends of each, points between them, and its turns. Beyond mostPoints, of each group of
// neighbours the lowest and the highest, so that every peak is kept.
func (s *Simulator) waveform(signal Signal) Waveform {
	p := &s.points
	p.t, p.v = p.t[:0], p.v[:0]
	var turns piece
	for k := range s.spans {
		at := &s.spans[k]
		if q, ok := s.circuit.polynomial(signal, at); ok {
			turns.set(&q)
			turns.divide()
			i := 1
			if k == 0 {
				p.add(at.from, q[0])
			}
			for m := 1; m <= parts; m++ {
				theta := float64(m) / parts
				for ; i < turns.n-1 && turns.theta[i] <= theta; i++ {
					p.add(at.at(turns.theta[i]), turns.value[i])
				}
				p.add(at.at(theta), q.At(theta))
			}
			continue
		}
		for m := 0; m <= parts; m++ {
			theta := float64(m) / parts
			element, _ := s.circuit.elementCurrent(s.circuit.supply - s.circuit.floating - at.state[stateGain].At(theta) - at.state[statePin].At(theta))
			p.add(at.at(theta), element)
		}
	}
	out := Waveform{Signal: signal}
	n := len(p.t)
	if n <= mostPoints {
		out.Time, out.Value = append(out.Time, p.t...), append(out.Value, p.v...)
		return out
	}
	const groups = mostPoints/2 - 1
	out.Time, out.Value = make([]float64, 0, mostPoints), make([]float64, 0, mostPoints)
	take := func(i int) {
		if m := len(out.Time); m == 0 || p.t[i] > out.Time[m-1] {
			out.Time, out.Value = append(out.Time, p.t[i]), append(out.Value, p.v[i])
		}
	}
	take(0)
	for g := range groups {
		low, high := g*n/groups, g*n/groups
		for i := low; i < (g+1)*n/groups; i++ {
			if p.v[i] < p.v[low] {
				low = i
			}
			if p.v[i] > p.v[high] {
				high = i
			}
		}
		take(min(low, high))
		take(max(low, high))
	}
	take(n - 1)
	return out
}
