package circuit

import (
	"errors"
	"math"
	"sync/atomic"

	"floatrail/calc/corner"
	"floatrail/calc/quantity"
	"floatrail/calc/recharge"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// Simulation makes the circuits of a space, with which it is kept, simulate switching events. Not for two goroutines at once.
type Simulation struct {
	simulator   transient.Simulator
	Interrupted func() bool // tells that the caller no longer waits; may be nil
	Counts      *Counts     // may be nil
}

// Counts is what simulations took so far. For any number of goroutines.
type Counts struct {
	Runs, Steps, Failures atomic.Int64 // Failures did not converge
}

func (n *Counts) add(course *transient.Course, err error) {
	if n == nil {
		return
	}
	n.Runs.Add(1)
	if course != nil {
		n.Steps.Add(int64(course.Steps))
	}
	if errors.Is(err, transient.ErrUnsolved) {
		n.Failures.Add(1)
	}
}

// StateOfCharge is the V_BS with which an event begins.
type StateOfCharge uint8

// States of charge.
const (
	Running   StateOfCharge = iota // of the steady state: at the end of the on-time for TurnOff, else before the rising edge
	AtLockout                      // V_UV-, as lockout itself turns the high side off
	charges
)

// charges is the number of states of charge that make a difference to an event: where the high side turns off, V_BS is its drive until then.
func (e Event) charges() StateOfCharge {
	if e == TurnOff {
		return charges
	}
	return Running + 1
}

// Levels of V_S below COM whose times are taken from every simulation, beside those of the driver's table [V]. They divide what an undershoot adds to
// V_BS.
var dipLevels = [...]float64{-1, -1.5, -2, -3, -4, -6, -8, -12, -16, -24, -32}

// simulation is that of the circuit's space, nil where it has none.
func (c *Circuit) simulation() *Simulation {
	s, _ := c.Space.Model.(*Simulation)
	return s
}

// Simulates tells whether an event is simulated: where the space does that, unless slopes measured on the board stand for data that the simulation lacks.
func (c *Circuit) Simulates(e Event) bool {
	if c.simulation() == nil || c.estimating {
		return false
	}
	return !c.measured(e) || len(lacking(c.Stage)) == 0
}

// Acts tells whether an event happens at this draw and is simulated.
func (c *Circuit) Acts(e Event) bool { return !c.absent(e) && c.Simulates(e) }

// measured tells whether the slopes of an event are measured ones.
func (c *Circuit) measured(e Event) bool {
	m := &c.Stage.Layout.Measured
	if e.off() {
		return m.TurnOffCurrentSlope.Given()
	}
	return m.TurnOnCurrentSlope.Given() || m.TurnOnVoltageSlope.Given()
}

// lacking are the paths of what a simulation needs and the stage does not give; none where it has all.
func lacking(s *stage.Stage) (out []string) {
	need := func(given bool, field string) {
		if !given {
			out = append(out, field)
		}
	}
	for _, w := range []*stage.Switch{&s.HighSide, &s.LowSide} {
		need(len(w.OutputCapacitance.Items) > 0, w.OutputCapacitance.Field)
		need(len(w.Reverse.ForwardPoints.Items) > 0, w.Reverse.ForwardPoints.Field)
		if w.Kind != stage.GaNHEMT {
			need(w.Reverse.RecoveryCharge.Given(), w.Reverse.RecoveryCharge.Field)
		}
		if w.Kind == stage.DiodeOnly {
			continue
		}
		for _, q := range []*stage.Quantity{&w.InputCapacitance, &w.ThresholdVoltage, &w.Transconductance, &w.InternalGateResistance} {
			need(q.Given(), q.Field)
		}
		need(len(w.ReverseTransferCapacitance.Items) > 0 || w.GateDrainCharge.Given(), w.ReverseTransferCapacitance.Field)
		need(w.OnResistance.Given() || len(w.ChannelPoints.Items) > 0, w.OnResistance.Field)
	}
	l := &s.Layout
	need(l.LoopInductance.Given() || l.LowSideInductance.Given(), l.LowSideInductance.Field)
	need(l.LoopInductance.Given() || l.BusLoopInductance.Given(), l.BusLoopInductance.Field)
	return out
}

// Unsimulated notes what keeps an event from being simulated.
func (c *Circuit) Unsimulated() float64 {
	for _, field := range lacking(c.Stage) {
		c.Want(field)
	}
	return nan
}

// Estimated evaluates a number by closed forms, also where the space simulates.
func (c *Circuit) Estimated(f func(*Circuit) float64) float64 {
	defer func(was bool) { c.estimating = was }(c.estimating)
	c.estimating = true
	return f(c)
}

// NoEvent is none of the events.
const NoEvent = eventCount

// Focused runs f as if one event alone could occur.
func (c *Circuit) Focused(e Event, f func()) {
	defer func(was *Event) { c.focus = was }(c.focus)
	c.focus = &e
	f()
}

// Occurs tells whether an event can occur at the operating point, and counts.
func (c *Circuit) Occurs(e Event) bool {
	return (c.focus == nil || *c.focus == e) && Occurs(c.Stage, c.Point, e)
}

// Course is what an event does in a simulation, from a state of charge; nil where that cannot be had, of which the circuit keeps the reason.
func (c *Circuit) Course(e Event, q StateOfCharge) *transient.Course {
	slot := slotCourse + int(q)*int(eventCount) + int(e)
	return *corner.Memo(c.Draw, slot, true, &c.kept().course[q][e], func() *transient.Course { return c.simulate(e, q) })
}

// Survey simulates an event from normal operation, where the space does that; it gives no number worth having.
func (c *Circuit) Survey(e Event) float64 {
	if c.Acts(e) {
		c.Course(e, Running)
	}
	return 0
}

func (c *Circuit) simulate(e Event, q StateOfCharge) *transient.Course {
	if c.Point == nil {
		c.NoPoint()
		return nil
	}
	b, ok := c.bridge(e, q)
	if !ok {
		return nil
	}
	return c.run(&b, transient.Window{Limit: longestWindow, Levels: c.levels()})
}

// run simulates a bridge.
func (c *Circuit) run(b *transient.Bridge, w transient.Window) *transient.Course {
	s := c.simulation()
	w.Interrupted = s.Interrupted
	course, err := s.simulator.Run(b, w)
	s.Counts.add(course, err)
	if err != nil {
		c.Open(phrases[Event(b.Event)] + ": " + err.Error())
		return nil
	}
	switch e := Event(b.Event); {
	case e.off() && !course.Settled && course.ChannelTime == 0:
		c.Open(phrases[e] + ": the gate has not turned off within " + quantity.Format(w.Limit, quantity.Time))
		return nil
	case !e.off() && course.Slew == 0:
		c.Open(phrases[e] + ": the switch has not taken the node over within " + quantity.Format(w.Limit, quantity.Time))
		return nil
	}
	return course
}

// phrases tell in words what happens in an event.
var phrases = [eventCount]string{"high side off", "high side on", "low side off", "low side on"}

// Phrase tells in words what happens in an event.
func (e Event) Phrase() string { return phrases[e] }

// levels are those of the driver's table, each with its guard, and dipLevels.
func (c *Circuit) levels() []float64 {
	out := make([]float64, 0, 32)
	for i := range c.Stage.Driver.NodeUndershoot.Items {
		level := c.Need(&c.Stage.Driver.NodeUndershoot.Items[i].Voltage)
		out = append(out, level, level*(1-c.Policy.GuardRatio))
	}
	return append(out, dipLevels[:]...)
}

// longestWindow is where the watch of an event ends at the latest [s]: by then any gate has switched, and a current that has not brought the node over
// does it no harm. An event is watched until it has settled, also beyond the dead time and the pulse: what happens in one that is too short is no
// smaller for that, and duty/dead-time and duty/shortest-pulse judge those.
const longestWindow = 20e-6

// bridge puts together what the simulation takes. False: something is missing or cannot be, of which the circuit keeps the reason.
func (c *Circuit) bridge(e Event, q StateOfCharge) (b transient.Bridge, ok bool) {
	l := &c.Stage.Layout
	i := c.Current(e)
	if e == SinkingTurnOff || e == SinkingTurnOn {
		i = -i
	}
	high, low := &c.Stage.HighSide, &c.Stage.LowSide
	rvs := c.series(&l.NodeResistor)
	b = transient.Bridge{
		Event: transient.Event(e), Bus: c.bus(), Load: i, Supply: c.Supply(), Floating: c.floatingAt(e, q),
		HighCommonSource: c.sharedSource(high), LowCommonSource: c.sharedSource(low),
		NodeResistor: rvs, BootstrapCapacitance: c.Usual((*Circuit).Capacitance),
	}
	if bias := c.OffBias(high); bias.Split {
		b.Split = bias.Voltage
	}
	b.L1, b.L2 = c.parted(e)
	ring := c.Ring(e)
	b.RingingResistance = ring.Quality * math.Sqrt((b.L1+b.L2)/ring.C)
	loop := c.optional(&l.LoopResistance, 0, "0 Ω", "the resistance of the loop damps its ringing; none is given")
	b.R1, b.R2 = loop/2, loop/2+c.shunt()
	b.PinCapacitance = c.optional(&l.DriverPinCapacitance, leastPinCapacitance, "10 pF", "the capacitance of the driver's pin is not given; a larger one slows the pin")
	b.Element = c.Element()
	b.Element.Resistance -= rvs
	if l.NodeClamp.Presence() == stage.Fitted {
		b.Clamped, b.Clamp = true, c.junction(&l.NodeClamp)
	}
	b.High, b.Low = c.cell(high, e), c.cell(low, e)
	if low.Kind != stage.DiodeOnly {
		b.LowDrive = c.driveVoltage(low)
	}
	sum := b.Bus + b.Load + b.Supply + b.Floating + b.L1 + b.L2 + b.R1 + b.R2 + b.RingingResistance + rvs + b.PinCapacitance + b.BootstrapCapacitance +
		b.Element.Resistance + b.HighCommonSource + b.LowCommonSource + b.LowDrive + number(&b.High) + number(&b.Low)
	return b, sum == sum
}

// number is not a number where one of a cell's is none.
func number(w *transient.Cell) float64 {
	return w.GateSource + w.Transconductance + w.Threshold + w.OnResistance + w.GateResistance + w.OffBias + w.Offset + w.Reverse.Slope +
		w.Reverse.LogSaturation + w.Reverse.Resistance + w.Recovery.Tau + w.Forward.Inductance + w.Output.Scale + w.Transfer.Scale
}

// leastPinCapacitance is that of a driver's V_S pin where none is given [F] [common-practice].
const leastPinCapacitance = 10e-12

// optional reads an input that may be absent, and notes what is assumed to be on the safe side where it is.
func (c *Circuit) optional(q *stage.Quantity, otherwise float64, assumed, reason string) float64 {
	if v, ok := c.Has(q); ok {
		return v
	}
	c.Assume(stage.Assumption{Field: q.Field, Assumed: assumed, Direction: stage.Conservative, Reason: reason})
	return otherwise
}

// sharedSource is the inductance that gate loop and load loop of a position share [H]; not given it counts as none, which makes edges steep.
func (c *Circuit) sharedSource(s *stage.Switch) float64 {
	if s.Kind == stage.DiodeOnly {
		return 0
	}
	return c.knownCommonSource(s)
}

// leastPart is the share of the loop that lies on the other side of the node where only the sum of both parts is known.
const leastPart = 0.02

// parted divides the commutation loop at the node [H]. Where only its sum is known, all but a small part lies where it does most: between COM and the
// node as that falls, else between bus and node.
func (c *Circuit) parted(e Event) (l1, l2 float64) {
	l := &c.Stage.Layout
	lowGiven, busGiven := l.LowSideInductance.Given(), l.BusLoopInductance.Given()
	switch {
	case lowGiven && busGiven, !l.LoopInductance.Given():
		return c.Need(&l.BusLoopInductance), c.Need(&l.LowSideInductance)
	case lowGiven:
		l2 = c.Need(&l.LowSideInductance)
		return max(c.Need(&l.LoopInductance)-l2, leastPart*l2, c.sharedSource(&c.Stage.HighSide)), l2
	case busGiven:
		l1 = c.Need(&l.BusLoopInductance)
		return l1, max(c.Need(&l.LoopInductance)-l1, leastPart*l1, c.sharedSource(&c.Stage.LowSide))
	}
	whole := c.LowInductance() // which notes the assumption
	if e.Falls() {
		l1 = math.Max(leastPart*whole, c.sharedSource(&c.Stage.HighSide))
		return l1, math.Max(whole-l1, leastPart*whole)
	}
	l2 = math.Max(leastPart*whole, c.sharedSource(&c.Stage.LowSide))
	return math.Max(whole-l2, leastPart*whole), l2
}

// floatingAt is V_BS as an event begins [V].
func (c *Circuit) floatingAt(e Event, q StateOfCharge) float64 {
	if q == AtLockout {
		return c.Need(&c.Stage.Driver.UVLOFalling)
	}
	supply := c.Supply()
	return math.Max(0, c.Usual(func(t *Circuit) float64 { return t.floatingBefore(e) - t.Supply() })+supply)
}

// floatingBefore is V_BS as an event begins in normal operation [V]; where the supply collapses, what lockout leaves.
func (c *Circuit) floatingBefore(e Event) float64 {
	if c.Point.HeldOn != nil {
		return c.Low()
	}
	switch st := c.Steady(); {
	case st.Collapses:
		return c.Need(&c.Stage.Driver.UVLOFalling)
	case e == TurnOff:
		return st.Low
	default:
		return st.BeforeEdge
	}
}

// Usual is a number at the typical draw of the stage as it was given: what matters little to an event is not worth another simulation for each end
// of all that it depends on. Where it cannot be had there, its inputs are those that are missing.
func (c *Circuit) Usual(f func(*Circuit) float64) float64 {
	if typ := c.typical(); typ != c {
		if v := f(typ); v == v {
			return v
		}
	}
	return f(c)
}

// cell is a position in an event.
func (c *Circuit) cell(s *stage.Switch, e Event) transient.Cell {
	n := s.Count()
	w := transient.Cell{Output: c.output(s), Recovery: c.recovery(s), Diode: s.Kind == stage.DiodeOnly}
	w.Reverse = c.reverse(s)
	if f := c.forward(s); f.Inductance != 0 {
		w.Forward = transient.ForwardRecovery{Inductance: f.Inductance / n, Resistance: f.Resistance / n}
	}
	if w.Diode {
		w.Transfer.Scale = 1
		return w
	}
	on := s == c.active(e) && !e.off()
	w.Transfer = c.transfer(s)
	w.GateSource = n*c.Need(&s.InputCapacitance) - w.Transfer.At(c.Need(&s.InputCapacitanceVoltage))
	w.Threshold, w.Transconductance = c.Threshold(s), n*c.Need(&s.Transconductance)
	w.OffBias = c.Need(&s.OffBias)
	w.GateResistance = c.loopResistors(s, on) + c.driverResistance(on, s == c.active(e))
	if s.Kind == stage.IGBT {
		w.Unidirectional = true
		i := math.Max(c.Current(e), leastCarried*n)
		w.OnResistance = c.channelDrop(s, i) / i
	} else {
		w.OnResistance = c.Need(&s.OnResistance) / n
	}
	if s.Kind == stage.GaNHEMT {
		w.FollowsGate = true
		taken, ok := c.Has(&s.Reverse.GateVoltage)
		if !ok {
			taken = 0
			if w.OffBias != 0 {
				c.Want(s.Reverse.GateVoltage.Field)
			}
		}
		w.Offset = taken - w.OffBias
	}
	return w
}

// leastCarried is the least current at which the on-state of an IGBT is taken for a resistance [A].
const leastCarried = 0.1

// reverse is the static law of a position's reverse path, all parallel devices together.
func (c *Circuit) reverse(s *stage.Switch) recharge.Junction {
	bad := recharge.Junction{Slope: nan, LogSaturation: nan, Resistance: nan}
	points, n := s.Reverse.ForwardPoints.Items, s.Count()
	if len(points) == 0 {
		c.Want(s.Reverse.ForwardPoints.Field)
		return bad
	}
	var buf [8]recharge.DiodePoint
	fit := buf[:0]
	for i := range points {
		p := &points[i]
		v := c.Need(&p.Voltage)
		if s.Kind == stage.GaNHEMT && len(p.Voltage.At) == 0 { // no junction: its drop does not follow the diode's law over temperature
			v += 2e-3 * (c.Set.Junction - stage.ReferenceTemperature)
			if c.Set.Junction != stage.ReferenceTemperature {
				c.Assume(stage.Assumption{Field: s.Reverse.ForwardPoints.Field, Assumed: "the drop at 25 °C", Direction: stage.Optimistic,
					Reason: "the reverse drop of a HEMT moves with temperature and is given at one only"})
			}
		}
		fit = append(fit, recharge.DiodePoint{Current: n * c.Need(&p.Current), Voltage: v})
	}
	if len(points) == 1 {
		c.Assume(stage.Assumption{Field: s.Reverse.ForwardPoints.Field, Assumed: "emission coefficient 1.5, no series resistance", Direction: stage.Optimistic,
			Reason: "one forward point alone does not tell how the drop grows with current"})
	}
	for _, p := range fit {
		if p.Voltage != p.Voltage || p.Current != p.Current {
			return bad
		}
	}
	j, err := recharge.FitJunction(fit, nan, c.Set.Junction)
	if err != nil {
		c.Open(stage.Relative(s.Reverse.ForwardPoints.Field) + ": " + err.Error())
		return bad
	}
	return j
}
