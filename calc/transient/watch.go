package transient

import (
	"math"

	"floatrail/calc/internal/numeric"
)

// watch takes the results of an event out of the dense output, span by span.
type watch struct {
	bridge  *Bridge
	circuit *circuit
	course  *Course

	pieces           [ranged]piece
	voltage          piece // of an inductance
	node, pin, rail  []below
	slew             passage
	channel          passage
	channelSince     float64 // its value at the end of the last span [A]
	ring             ringing
	ringing          Signal
	everyTurn        bool // tests: no ripple is too small
	commanded        *device
	commandedGate    Signal
	gateCharge       float64 // out of C_B into the high side's gate [C]
	y, dy            [most]float64
	slewLow, slewTop float64 // [V]
}

// set puts the signals that have a range over the span into the pieces, without the node, which the run has put there.
func (w *watch) set(at *span) {
	c := w.circuit
	rail := c.rail.of(&at.state)
	floating := at.state[stateGain]
	floating[0] += c.floating
	w.pieces[Pin].set(&at.state[statePin])
	w.pieces[Rail].set(&rail)
	w.pieces[Floating].set(&floating)
	w.pieces[HighDrain].set(&at.state[stateVd1])
	w.pieces[LowDrain].set(&at.state[stateVd2])
	w.pieces[HighGate].set(&at.state[stateVg1])
	w.pieces[LowGate].set(&at.state[stateVg2])
}

func (w *watch) begin(b *Bridge, c *circuit, course *Course, y []float64, levels []float64) {
	w.bridge, w.circuit, w.course = b, c, course
	s := (*[shared]float64)(y)
	start := [ranged]float64{
		Node: c.network.node.at(s), Pin: s[statePin], Rail: c.network.rail.at(s), Floating: c.floating, HighDrain: s[stateVd1], LowDrain: s[stateVd2],
		HighGate: s[stateVg1], LowGate: s[stateVg2],
	}
	for k, v := range start {
		course.Ranges[k] = Range{Min: v, Max: v}
	}
	w.node, w.pin, w.rail = w.node[:0], w.pin[:0], w.rail[:0]
	for _, level := range levels {
		var node, pin, rail below
		node.begin(level, start[Node])
		pin.begin(level, start[Pin])
		pin.list = true
		rail.begin(level, start[Rail])
		w.node, w.pin, w.rail = append(w.node, node), append(w.pin, pin), append(w.rail, rail)
	}
	w.commanded, w.commandedGate = &c.low, LowGate
	if b.Event.high() {
		w.commanded, w.commandedGate = &c.high, HighGate
	}
	w.ringing = LowDrain
	if b.Event.falls() {
		w.ringing = HighDrain
	}
	load := math.Abs(b.Load)
	w.slewLow, w.slewTop = lowLevel*b.Bus, highLevel*b.Bus
	w.slew = newPassage(w.slewLow, w.slewTop, b.Event.falls())
	w.channel = newPassage(lowLevel*load, highLevel*load, b.Event.off())
	w.channelSince, _, _ = w.commanded.channel(y[w.commanded.gate], y[w.commanded.drain])
	w.ring = ringing{least: leastRing * b.Bus, ripple: leastTurn * b.Bus}
	if w.everyTurn {
		w.ring.ripple = 0
	}
	w.gateCharge = 0
	course.Lift = b.High.OffBias
}

// update takes in one span.
func (w *watch) update(at *span) {
	course := w.course
	w.set(at)
	for k := range w.pieces {
		course.Ranges[k].update(at, &w.pieces[k])
	}
	for k := range w.node {
		w.node[k].update(at, &w.pieces[Node])
		w.pin[k].update(at, &w.pieces[Pin])
		w.rail[k].update(at, &w.pieces[Rail])
	}
	w.slew.update(at, &w.pieces[Node])
	w.ring.update(at, &w.pieces[w.ringing])
	w.slopes(at)
	w.slews(at)
	w.threshold(at)
	w.lift()
	w.channels(at)
	if w.circuit.driven {
		p := w.circuit.ig1.of(&at.state)
		for k, v := range p {
			w.gateCharge += v / float64(k+1) * at.length
		}
	}
}

// slopes takes the steepest current of both inductances.
func (w *watch) slopes(at *span) {
	u1, u2 := w.circuit.u1.of(&at.state), w.circuit.u2.of(&at.state)
	w.slope(&u1, w.circuit.perL1, &w.course.HighSlope)
	w.slope(&u2, w.circuit.perL2, &w.course.LowSlope)
}

func (w *watch) slope(p *numeric.Polynomial, perL float64, best *float64) {
	s := &w.voltage
	s.set(p)
	if math.Max(-s.least, s.most)*perL > *best {
		s.divide()
		*best = math.Max(*best, math.Max(-s.value[s.low], s.value[s.high])*perL)
	}
}

// slews takes the steepest voltages while the node is between the levels. The rates are those of the equations at the states of the dense
// output; where even the derivative of the dense output is far below what has been found, nothing is evaluated.
func (w *watch) slews(at *span) {
	s := &w.pieces[Node]
	if s.most <= w.slewLow || s.least >= w.slewTop {
		return
	}
	s.divide()
	for k := 1; k < s.n; k++ {
		a, b := s.theta[k-1], s.theta[k]
		va, vb := s.value[k-1], s.value[k]
		if math.Max(va, vb) <= w.slewLow || math.Min(va, vb) >= w.slewTop {
			continue
		}
		for _, level := range [2]float64{w.slewLow, w.slewTop} {
			if theta, way := s.cross(k, level); way != 0 {
				if (va > level) == (level == w.slewTop) { // it comes in from beyond
					a = theta
				} else {
					b = theta
				}
			}
		}
		if b > a {
			w.steepest(at, a, b)
		}
	}
}

// steepest looks for the steepest slope from a to b at five places, and between the best of them and its neighbours by a parabola.
func (w *watch) steepest(at *span, a, b float64) {
	const places = 5
	course := w.course
	perLength := 1 / at.length
	n, p := w.pieces[Node].p.Derivative(), w.pieces[Pin].p.Derivative()
	near := false
	for k := range places {
		theta := a + (b-a)*float64(k)/(places-1)
		near = near || math.Abs(n.At(theta))*perLength > 0.8*course.NodeSlew || math.Abs(p.At(theta))*perLength > 0.8*course.PinSlew
	}
	if !near {
		return
	}
	var node, pin [places]float64
	for k := range places {
		node[k], pin[k] = w.exact(at, a+(b-a)*float64(k)/(places-1))
	}
	course.NodeSlew = math.Max(course.NodeSlew, summit(node[:]))
	course.PinSlew = math.Max(course.PinSlew, summit(pin[:]))
}

// exact returns |dv/dt| of node and pin [V/s].
func (w *watch) exact(at *span, theta float64) (node, pin float64) {
	at.states(theta, w.y[:])
	w.circuit.Rates(w.y[:at.n], w.dy[:at.n])
	for i, c := range w.circuit.node.c {
		node += c * w.dy[i]
	}
	return math.Abs(node), math.Abs(w.dy[statePin])
}

// summit is the largest of the values, which lie at equal distances, or the vertex of the parabola through it and its neighbours.
func summit(v []float64) float64 {
	best := 0
	for k := range v {
		if v[k] > v[best] {
			best = k
		}
	}
	if best == 0 || best == len(v)-1 {
		return v[best]
	}
	l, m, r := v[best-1], v[best], v[best+1]
	if bend := l - 2*m + r; bend < 0 {
		return m - (r-l)*(r-l)/(8*bend)
	}
	return m
}

// threshold takes when the commanded gate passes the threshold.
func (w *watch) threshold(at *span) {
	s, level := &w.pieces[w.commandedGate], w.commanded.threshold
	off := w.bridge.Event.off()
	if !s.spans(level) || !off && w.course.ChannelTime != 0 {
		return
	}
	for k := 1; k < s.n; k++ {
		if theta, way := s.cross(k, level); way < 0 && off || way > 0 && !off {
			w.course.ChannelTime = at.at(theta)
			if !off {
				return
			}
		}
	}
}

// lift takes how high the return of the gate current through R_VS holds the gate of a high side that turns off, once the node has gone over: the drive
// V_off + v_pin - v_node where the gate lies above it and falls, and the gate where that rises toward it.
func (w *watch) lift() {
	const places = 4 // of a span
	if w.bridge.Event != TurnOff || !w.slew.done {
		return
	}
	drive, gate := w.pieces[Pin].p.Plus(w.pieces[Node].p.Scaled(-1)), w.pieces[HighGate].p
	drive[0] += w.bridge.High.OffBias
	for k := range places + 1 {
		theta := float64(k) / places
		w.course.Lift = math.Max(w.course.Lift, math.Min(drive.At(theta), gate.At(theta)))
	}
}

// channels takes the passages of the commanded switch's channel current, which is no polynomial: between four places of a span it counts as
// monotone.
func (w *watch) channels(at *span) {
	if w.channel.done {
		return
	}
	const places = 4
	d := w.commanded
	current := func(theta float64) float64 {
		i, _, _ := d.channel(at.state[d.gate].At(theta), at.state[d.drain].At(theta))
		return i
	}
	a, left := 0.0, w.channelSince
	for k := 1; k <= places; k++ {
		b := float64(k) / places
		right := current(b)
		for pass := range 2 { // both levels within one part: in the order of the current
			second := (pass == 1) == ((right > left) == (w.channel.second > w.channel.first))
			level := w.channel.first
			if second {
				level = w.channel.second
			}
			if (left > level) == (right > level) {
				continue
			}
			way := 1
			if right < left {
				way = -1
			}
			theta, ok := numeric.Root(func(x float64) float64 { return current(x) - level }, a, b, 1e-9)
			if !ok {
				theta = b
			}
			w.channel.see(second, way, at.at(theta))
		}
		a, left = b, right
	}
	w.channelSince = left
}

// end closes what is open at the end of the window.
func (w *watch) end(y []float64) {
	course, b := w.course, w.bridge
	finish := func(all []below) []Dips {
		out := make([]Dips, len(all))
		for k := range all {
			if all[k].inside {
				all[k].close(course.End)
				all[k].Lasting = true
			}
			out[k] = all[k].Dips
		}
		return out
	}
	if len(w.node) > 0 {
		course.BelowNode, course.BelowPin, course.BelowRail = finish(w.node), finish(w.pin), finish(w.rail)
	}
	course.Slew, course.ChannelSlope = w.slew.slope(), w.channel.slope()
	course.RingFrequency, course.RingDamping = w.ring.result()
	course.Gain = y[stateGain]
	course.ElementCharge = b.BootstrapCapacitance*course.Gain + w.gateCharge
	course.Last = Still{
		HighCurrent: y[stateI1], LowCurrent: y[stateI2], HighGate: y[stateVg1], LowGate: y[stateVg2], HighDrain: y[stateVd1], LowDrain: y[stateVd2],
		Pin: y[statePin], Floating: w.circuit.floating + y[stateGain],
	}
	of := func(state int) float64 {
		if state < 0 {
			return 0
		}
		return y[state]
	}
	course.Last.HighCharge, course.Last.LowCharge = of(w.circuit.high.charge), of(w.circuit.low.charge)
	course.Last.HighForward, course.Last.LowForward = of(w.circuit.high.inductance), of(w.circuit.low.inductance)
}
