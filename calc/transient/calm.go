package transient

import "math"

// calm decides when an event is over: after the current has left the branch that carried it, the switch that takes over conducts, and the node has
// stayed for one period of the loop's ringing within 2 % of V_BUS to either side.
type calm struct {
	hold  float64 // one period [s]
	since float64 // until then something was not calm [s]

	band, low, high float64 // of the node: width allowed, and what it has covered since [V]
	arrived         bool    // turn-off: the switch that takes over has had the voltage arrival or less
	arrival         float64 // [V]
	conditions      [2]condition
}

// condition is a signal that must lie between two values.
type condition struct {
	form       form
	least, top float64
	piece      piece
}

// takesOver is the condition on the switch that takes over.
const takesOver = 1

const (
	calmRing    = 0.02 // of V_BUS, to either side; and that of |I| that may be left in the branch [1]
	calmVoltage = 0.02 // of V_BUS, along the switch that takes over, beyond what it drops while on [1]
)

func (c *calm) begin(b *Bridge, n *circuit, node float64) {
	load := math.Abs(b.Load)
	capacitance := math.Max(b.High.Output.At(b.Bus), b.Low.Output.At(b.Bus)) + b.PinCapacitance
	inductance := b.L1 + b.L2 + math.Max(b.High.Forward.Inductance, b.Low.Forward.Inductance)
	period := math.Sqrt(inductance * capacitance) // over 2π
	ringing := calmRing * b.Bus * period / inductance
	*c = calm{hold: 2 * math.Pi * period, band: 2 * calmRing * b.Bus, low: node, high: node, arrived: !b.Event.off()}
	left := calmRing*load + ringing
	out, into, cell := n.j1, stateVd2, &b.Low
	if b.Event == TurnOn || b.Event == SinkingTurnOff {
		out, into, cell = n.j2, stateVd1, &b.High
	}
	voltage := calmVoltage * b.Bus
	if !b.Event.off() {
		voltage += 2 * cell.OnResistance * load
	} else if b.Event == TurnOff && !b.Element.Switch {
		c.arrival = math.Max(0, b.Supply-b.Floating) // there the bootstrap element may carry all of a small load
	}
	c.conditions[0] = condition{form: out, least: -left, top: left}
	c.conditions[takesOver] = condition{form: unit(into), least: math.Inf(-1), top: voltage}
}

func (c *condition) outside(v float64) bool { return v < c.least || v > c.top }

// edge is where the signal passes the bound between points k-1 and k, one of which lies beyond it.
func (c *condition) edge(k int) float64 {
	bound := c.top
	if c.piece.value[k-1] < c.least || c.piece.value[k] < c.least {
		bound = c.least
	}
	if theta, way := c.piece.cross(k, bound); way != 0 {
		return theta
	}
	return c.piece.theta[k]
}

// unrest returns the first and the last place of the span at which the signal is outside; none: 2, -1.
func (c *condition) unrest() (first, last float64) {
	first, last = 2, -1
	s := &c.piece
	switch {
	case s.least >= c.least && s.most <= c.top:
		return first, last
	case s.most < c.least, s.least > c.top:
		return 0, 1
	}
	s.divide()
	for k := range s.n {
		out, before := c.outside(s.value[k]), k > 0 && c.outside(s.value[k-1])
		switch {
		case out && k > 0 && !before:
			first, last = math.Min(first, c.edge(k)), s.theta[k]
		case out:
			first, last = math.Min(first, s.theta[k]), s.theta[k]
		case before:
			last = c.edge(k)
		}
	}
	return first, last
}

// arriving returns the last place at which a switch that is still to begin conducting is not at rest: where its voltage has first come down.
func (c *calm) arriving(s *piece) (last float64) {
	if s.least > c.arrival {
		return 1
	}
	s.divide()
	for k := range s.n {
		if s.value[k] > c.arrival {
			continue
		}
		c.arrived = true
		if k == 0 {
			return 0
		}
		if theta, way := s.cross(k, c.arrival); way != 0 {
			return theta
		}
		return s.theta[k]
	}
	return 1
}

// ring is the same of the node: it is at rest from when its range first fits into the band for good. The range starts anew where it would
// grow beyond the band.
func (c *calm) ring(s *piece) (first, last float64) {
	first, last = 2, -1
	s.divide()
	for k := 1; k < s.n; k++ {
		v := s.value[k]
		bound := math.NaN()
		if up := v - c.low - c.band; up > 0 {
			if first > 1 {
				first, _ = s.cross(k, c.low+c.band)
			}
			bound = c.low + c.band + c.band*math.Floor(up/c.band)
		} else if down := c.high - v - c.band; down > 0 {
			if first > 1 {
				first, _ = s.cross(k, c.high-c.band)
			}
			bound = c.high - c.band - c.band*math.Floor(down/c.band)
		}
		if bound == bound {
			theta, way := s.cross(k, bound)
			if way == 0 {
				theta = s.theta[k]
			}
			last, c.low, c.high = theta, bound, bound
		}
		c.low, c.high = math.Min(c.low, v), math.Max(c.high, v)
	}
	return first, last
}

// over returns where in the span the event is over; false: not in it. node is the node's voltage over the span.
func (c *calm) over(at *span, node *piece) (theta float64, ok bool) {
	first, last := c.ring(node)
	for k := range c.conditions {
		q := &c.conditions[k]
		p := q.form.of(&at.state)
		q.piece.set(&p)
		f, l := q.unrest()
		if k == takesOver && !c.arrived {
			f, l = 0, c.arriving(&q.piece)
		}
		first, last = math.Min(first, f), math.Max(last, l)
	}
	if theta = (c.since + c.hold - at.from) / at.length; theta <= math.Min(first, 1) {
		return math.Max(theta, 0), true
	}
	if last >= 0 {
		c.since = at.at(last)
		if theta = last + c.hold/at.length; theta <= 1 {
			return theta, true
		}
	}
	return 0, false
}
