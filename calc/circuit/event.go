package circuit

import (
	"math"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// Event is one of the four commutations of a half-bridge.
type Event uint8

// Events. The node falls in the first and the last, rises in the others.
const (
	TurnOff        Event = iota // the high side turns off a sourcing current, which moves into the low-side diode
	TurnOn                      // the high side turns on into the low-side diode, which recovers
	SinkingTurnOff              // the low side turns off a sinking current, which moves into the high-side diode
	SinkingTurnOn               // the low side turns on into the high-side diode, which recovers
	eventCount
)

// Events lists them.
func Events() []Event { return []Event{TurnOff, TurnOn, SinkingTurnOff, SinkingTurnOn} }

// String gives the contract's name of the event.
func (e Event) String() string {
	return [...]string{"TURN_OFF", "TURN_ON", "SINKING_TURN_OFF", "SINKING_TURN_ON"}[e]
}

// off tells whether the event is the turning off of a switch.
func (e Event) off() bool { return e == TurnOff || e == SinkingTurnOff }

// Falls tells whether the node falls.
func (e Event) Falls() bool { return e == TurnOff || e == SinkingTurnOn }

// active and passive are the switch that acts, and the one whose diode takes over or recovers.
func (c *Circuit) active(e Event) *stage.Switch {
	if e == TurnOff || e == TurnOn {
		return &c.Stage.HighSide
	}
	return &c.Stage.LowSide
}

func (c *Circuit) passive(e Event) *stage.Switch {
	if e == TurnOff || e == TurnOn {
		return &c.Stage.LowSide
	}
	return &c.Stage.HighSide
}

// Current is the current that an event commutates, as a magnitude [A]; 0 where the event does not occur at this draw. The peak of the ripple
// decides where the high side turns off, its valley where it turns on.
func (c *Circuit) Current(e Event) float64 {
	if c.Point == nil {
		return c.NoPoint()
	}
	sourcing, l := e == TurnOff || e == TurnOn, &c.Point.LoadCurrent
	if alternates(c.Point) { // both signs occur, at the crest of either
		switch {
		case l.OpenAbove:
			return c.Want(l.Field + ".max")
		case e.off():
			return max(c.peakCurrent(), 0)
		}
		return max(c.valleyCurrent(), 0)
	}
	switch { // how large it becomes is not known
	case sourcing && l.OpenAbove:
		return c.Want(l.Field + ".max")
	case !sourcing && l.OpenBelow:
		return c.Want(l.Field + ".min")
	}
	var i float64
	switch e {
	case TurnOff:
		i = c.peakCurrent()
	case TurnOn:
		i = c.valleyCurrent()
	case SinkingTurnOff:
		i = -c.valleyCurrent()
	default:
		i = -c.peakCurrent()
	}
	return max(i, 0) // NaN stays NaN
}

// carries is how many times the charge of the node a current must carry within the dead time before it is taken to bring the node over: the
// current falls meanwhile, and windings and traces add to the capacitances of the switches [1].
const carries = 2

// absent tells whether an event does not happen at this draw. A switch that turns on moves the node although it takes over no current, unless a
// current the other way has brought the node over within the dead time; a diode lets none flow the other way.
func (c *Circuit) absent(e Event) bool {
	if c.Current(e) != 0 { // NaN is not absent
		return false
	}
	if e.off() {
		return true
	}
	if c.Stage.LowSide.Kind == stage.DiodeOnly || c.Point.FixedDuty == nil {
		return false
	}
	back := -c.valleyCurrent()
	if e == SinkingTurnOn {
		back = c.peakCurrent()
	}
	bus := c.bus()
	return back*c.Need(&c.Point.DeadTime) >= carries*(c.outputCharge(&c.Stage.HighSide, bus)+c.outputCharge(&c.Stage.LowSide, bus))
}

// Occurs tells whether an event can occur at an operating point. What is not known may occur.
func Occurs(s *stage.Stage, op *stage.OperatingPoint, e Event) bool {
	if op == nil {
		return true
	}
	if d := op.FixedDuty; d != nil && d.Duty.Known() && (d.Duty.Max <= 0 || d.Duty.Min >= 1) {
		return false // no edge
	}
	if s.LowSide.Kind == stage.DiodeOnly && (e == SinkingTurnOff || e == SinkingTurnOn) {
		return false
	}
	i, r := op.LoadCurrent.Triple, op.RippleCurrent.Triple
	if !op.LoadCurrent.Known() || alternates(op) {
		return true
	}
	if op.LoadCurrent.OpenBelow {
		i.Min = math.Inf(-1)
	}
	if op.LoadCurrent.OpenAbove {
		i.Max = math.Inf(1)
	}
	ripple := 0.0
	switch {
	case op.RippleCurrent.Assumption != nil || op.RippleCurrent.OpenAbove: // not given: any event may occur
		ripple = math.Inf(1)
	case r.IsComplete():
		ripple = r.Max / 2
	}
	switch e {
	case TurnOff:
		return i.Max+ripple > 0
	case TurnOn:
		return i.Max >= 0
	case SinkingTurnOff:
		return i.Min-ripple < 0
	}
	return i.Min <= 0
}

// Swing is how the node moves from rail to rail in an event: as measured, or by the gate drive of the switch that acts.
func (c *Circuit) Swing(e Event) *transient.Swing {
	return corner.Memo(c.Draw, slotSwing+int(e), true, &c.kept().swing[e], func() transient.Swing { return c.swing(e) })
}

func (c *Circuit) swing(e Event) transient.Swing {
	m := &c.Stage.Layout.Measured
	slope := &m.TurnOnVoltageSlope
	if e.off() {
		slope = &m.TurnOffVoltageSlope
	}
	bus := c.bus()
	if bus == 0 {
		c.Open("the bus may stand at 0 V, where there is no edge to model")
		return transient.UniformSwing(nan, nan)
	}
	if v, ok := c.Has(slope); ok {
		return transient.UniformSwing(bus, v)
	}
	s, i := c.active(e), c.Current(e)
	w := c.channel(s)
	w.Transfer, w.Output = c.transfer(s), c.output(s)
	passive := c.output(c.passive(e))
	g := c.drive(s, !e.off(), true)
	if e.off() {
		return transient.TurnOffSwing(bus, i, &w, passive, g)
	}
	c.carried(e, &w, g)
	return transient.TurnOnSwing(bus, i, &w, passive, g)
}

// CurrentSlope is the steepest slope of the loop current in an event [A/s]: as measured, or by the gate drive of the switch that acts, at turn-off
// with what the loop's ringing adds.
func (c *Circuit) CurrentSlope(e Event) float64 {
	return *corner.Memo(c.Draw, slotSlope+int(e), true, &c.kept().slope[e], func() float64 { return c.currentSlope(e) })
}

func (c *Circuit) currentSlope(e Event) float64 {
	m := &c.Stage.Layout.Measured
	measured := &m.TurnOnCurrentSlope
	if e.off() {
		measured = &m.TurnOffCurrentSlope
	}
	if v, ok := c.Has(measured); ok {
		return v
	}
	slope := c.channelSlope(e)
	s := c.active(e)
	switch {
	case !e.off():
		return slope
	case len(s.OutputCapacitance.Items) == 0:
		c.Assume(stage.Assumption{Field: s.OutputCapacitance.Field, Assumed: "the channel's slope", Direction: stage.Conservative,
			Reason: "no output capacitance is given; with it the loop may follow more slowly than the channel"})
		return slope
	}
	return transient.TurnOffSlope(slope, c.Current(e), c.LoopInductance(), c.output(s).At(c.bus()))
}

// channelSlope is the slope that the gate drive gives the channel's current in an event [A/s].
func (c *Circuit) channelSlope(e Event) float64 {
	s, i := c.active(e), c.Current(e)
	w := c.channel(s)
	w.InputCapacitance, w.CommonSource = s.Count()*c.Need(&s.InputCapacitance), c.knownCommonSource(s)
	g := c.drive(s, !e.off(), true)
	if e.off() {
		return transient.CurrentFall(i, &w, g)
	}
	c.carried(e, &w, g)
	return transient.CurrentRise(i, &w, g)
}

// carried opens the circuit where the gate drive of the switch that acts does not reach the plateau of the current.
func (c *Circuit) carried(e Event, w *transient.Switch, g transient.Gate) {
	if g.On <= w.Plateau(c.Current(e)) {
		c.Open("at its gate drive the switch that turns " + [...]string{"off", "on", "off", "on"}[e] + " cannot carry the current")
	}
}

// knownCommonSource is commonSource where it slows an edge: not given it counts as none.
func (c *Circuit) knownCommonSource(s *stage.Switch) float64 {
	q := &c.Stage.Layout.LowSideCommonSource
	if s == &c.Stage.HighSide {
		q = &c.Stage.Layout.HighSideCommonSource
	}
	if v, ok := c.Has(q); ok {
		return v
	}
	c.Assume(stage.Assumption{Field: q.Field, Assumed: "0 H for the steepest current", Direction: stage.Conservative,
		Reason: "a common source inductance slows the current; none is given"})
	return 0
}

// Ring is the oscillation of the commutation loop with the output capacitance of the switch that blocks after an event.
func (c *Circuit) Ring(e Event) transient.Ring {
	s := c.active(e)
	if !e.off() {
		s = c.passive(e)
	}
	return transient.Ring{L: c.LoopInductance(), C: c.output(s).At(c.bus()), Quality: c.Need(&c.Stage.Layout.RingingQuality)}
}

// Width is the time for which an event drives the node beyond its rail [s]: at turn-off the fall of the current, and otherwise half a ringing
// period.
func (c *Circuit) Width(e Event) float64 {
	i := c.Current(e)
	if c.absent(e) {
		return i
	}
	if c.Simulates(e) {
		if k := c.Course(e, Running); k != nil {
			return width(k)
		}
		return nan
	}
	if !e.off() {
		return 0.5 / c.Ring(e).Frequency()
	}
	if v, ok := c.Has(&c.Stage.Layout.Measured.TurnOffCurrentSlope); ok {
		return i / v
	}
	s := c.active(e)
	w := c.channel(s)
	w.InputCapacitance, w.Transfer = s.Count()*c.Need(&s.InputCapacitance), c.transfer(s)
	return transient.FallWidth(c.channelSlope(e), i, c.LoopInductance(), c.output(s).At(c.bus()), c.bus(), &w)
}

// recovering is the diode that an event's turn-on takes the current from.
func (c *Circuit) recovering(e Event) transient.Recovering {
	s := c.passive(e)
	out := transient.Recovering{Inductance: c.LoopInductance(), Output: c.output(s), Rise: c.CurrentSlope(e)}
	if r := c.recovery(s); r.Tau != 0 {
		n := s.Count()
		out.Peak, out.TauRR = n*r.Peak(c.Current(e)/n, out.Rise/n), r.TauRR
	}
	return out
}

// Recovered is what the diode that recovers in a turn-on drives across its switch beyond V_BUS [V].
func (c *Circuit) Recovered(e Event) float64 {
	if c.absent(e) {
		return 0
	}
	r := c.recovering(e)
	return r.Overshoot(*c.Swing(e))
}

// commutated is the voltage that a turn-off adds along a part of the loop: forward drop, forward recovery and the inductance of that part [V].
func (c *Circuit) commutated(e Event, inductance float64) float64 {
	i := c.Current(e)
	if i == 0 {
		return 0
	}
	s, slope := c.passive(e), c.CurrentSlope(e)
	v := c.ReverseDrop(s, i) + c.forwardRecovery(s, i, slope) + inductance*slope
	if e == TurnOff {
		v += i * c.shunt()
	}
	return v
}

// Dip is how far an event takes the node below COM [V], 0 or negative.
func (c *Circuit) Dip(e Event) float64 {
	switch i := c.Current(e); {
	case !e.Falls(), c.absent(e):
		return i * 0
	case c.Simulates(e):
		return c.least(e, transient.Node)
	case e == TurnOff:
		return -c.commutated(e, c.LowInductance())
	}
	r := c.recovering(e)
	return -r.Dip(*c.Swing(e), c.LowInductance()/c.LoopInductance())
}

// PinDip is Dip at the driver's V_S pin [V].
func (c *Circuit) PinDip(e Event) float64 {
	if e.Falls() && c.Acts(e) {
		return c.least(e, transient.Pin)
	}
	dip := c.Dip(e)
	pin := c.clampedPin(dip)
	if l := &c.Stage.Layout; pin > dip {
		c.Assume(stage.Assumption{Field: l.NodeClamp.Field, Assumed: "its static drop at once", Direction: stage.Optimistic,
			Reason: "the forward recovery of the clamp is not known; it lets a fast undershoot through"})
	}
	return pin
}

// NodePeak is the highest node voltage in an event [V].
func (c *Circuit) NodePeak(e Event) float64 {
	bus := c.bus()
	switch i := c.Current(e); {
	case e.Falls(), c.absent(e):
		return bus + i*0
	case c.Simulates(e):
		return math.Max(bus, c.most(e, transient.Node))
	case e == SinkingTurnOff:
		return bus + c.commutated(e, c.BusInductance())
	}
	return bus + c.Recovered(e)*c.BusInductance()/c.LoopInductance()
}

// SwitchPeak is the highest drain-source voltage of a position in an event [V]: that of the switch that turns off, or of the one whose diode
// recovers.
func (c *Circuit) SwitchPeak(e Event, s *stage.Switch) float64 {
	bus := c.bus()
	switch i := c.Current(e); {
	case c.absent(e):
		return bus + i
	case c.Simulates(e) && s == &c.Stage.HighSide:
		return c.most(e, transient.HighDrain)
	case c.Simulates(e):
		return c.most(e, transient.LowDrain)
	case e.off() && s == c.active(e):
		return bus + c.commutated(e, c.LoopInductance())
	case !e.off() && s == c.passive(e):
		return bus + c.Recovered(e)
	}
	return bus
}

// Induced is the largest gate voltage that an event induces in the position that is off and whose voltage rises [V].
func (c *Circuit) Induced(e Event) float64 {
	off := c.Need(&c.passive(e).OffBias)
	if e.off() || c.absent(e) {
		return off + c.Current(e)*0
	}
	s := c.passive(e)
	if c.Simulates(e) {
		return c.most(e, c.gateSignal(s)) + 0*c.commonSource(s)
	}
	w, rg, swing := c.gateOf(s), c.gateResistance(s, false, false), c.Swing(e)
	v := transient.Lift(&w, rg, *swing)
	r := c.recovering(e)
	if !c.slewMeasured(e) {
		v = math.Max(v, transient.Lift(&w, rg, r.Swing(*swing)))
	}
	if r.Peak != 0 {
		v += transient.SourceLift(c.commonSource(s), r.Peak, r.TauRR, rg*w.InputCapacitance)
	}
	return off + v
}

// slewMeasured tells whether the node's slope in an event is a measured one.
func (c *Circuit) slewMeasured(e Event) bool {
	q := &c.Stage.Layout.Measured.TurnOnVoltageSlope
	if e.off() {
		q = &c.Stage.Layout.Measured.TurnOffVoltageSlope
	}
	_, ok := c.Has(q)
	return ok
}

// liftDoubt is by how much the estimate of an induced gate voltage may be too small where the slope of the node is not measured: over the
// simulated stages of testdata/reference/event.json it is at most by this factor.
const liftDoubt = 1.75

// Doubtful tells whether an induced gate voltage that is estimated, not measured, may exceed a limit although the estimate does not.
func (c *Circuit) Doubtful(e Event, induced, limit float64) bool {
	off := c.Need(&c.passive(e).OffBias)
	return !c.absent(e) && !c.Simulates(e) && !c.slewMeasured(e) && off+liftDoubt*(induced-off) > limit
}

// gateOf is a position's gate as an edge of the other switch sees it.
func (c *Circuit) gateOf(s *stage.Switch) transient.Switch {
	return transient.Switch{
		InputCapacitance: s.Count() * c.Need(&s.InputCapacitance), InputCapacitanceVoltage: c.Need(&s.InputCapacitanceVoltage),
		Transfer: c.transfer(s),
	}
}

// Pulled is the lowest gate voltage that an event induces in the position that is off and whose voltage falls [V]: that which the current
// moves into.
func (c *Circuit) Pulled(e Event) float64 {
	off := c.Need(&c.passive(e).OffBias)
	if c.absent(e) {
		return off
	}
	s := c.passive(e)
	if c.Simulates(e) {
		if k := c.Course(e, Running); k != nil {
			return k.Ranges[c.gateSignal(s)].Min + 0*c.commonSource(s)
		}
		return nan
	}
	if !e.off() { // the current leaves the diode, and its slope acts on the source that gate and load share
		return off - c.commonSource(s)*c.CurrentSlope(e)
	}
	w := c.gateOf(s)
	return off - transient.Pull(&w, c.gateResistance(s, false, false), *c.Swing(e))
}

// UnpoweredInduced is the gate voltage induced in a high side whose driver is without supply, as the low side first pulls down a node that
// stands at a voltage [V].
func (c *Circuit) UnpoweredInduced() float64 {
	s := &c.Stage.HighSide
	from := c.Need(&c.Stage.Startup.Prebias)
	if from == 0 {
		return 0
	}
	hold := 1 / c.Need(&c.Stage.Driver.PassivePullDown)
	r := c.resistorsOf(s, false) + 1/hold
	switch p := &s.GatePullDown; p.Presence() { // it sits at the gate itself, beside what leads to the driver
	case stage.Fitted:
		r = 1 / (1/r + s.Count()/c.Need(&p.Resistance))
	case stage.PresenceUnknown:
		r += c.Want(p.Field)
	}
	low := &c.Stage.LowSide
	w := c.channel(low)
	w.Transfer, w.Output = c.transfer(low), c.output(low)
	swing := transient.TurnOnSwing(from, 0, &w, c.output(s), c.drive(low, true, true))
	g := c.gateOf(s)
	return transient.Lift(&g, r, swing)
}

// TurnOffTime is the time from a command to the end of the channel current of a position [s]. Where its diode takes the current over the node
// stays where it is, and the channel ends as the gate reaches the threshold.
func (c *Circuit) TurnOffTime(e Event) float64 {
	s, i := c.active(e), c.Current(e)
	w := c.channel(s)
	w.InputCapacitance, w.Transfer = s.Count()*c.Need(&s.InputCapacitance), c.transfer(s)
	w.InputCapacitanceVoltage = c.Need(&s.InputCapacitanceVoltage)
	bus, fall := 0.0, 0.0
	if i != 0 {
		bus, fall = c.bus(), c.Need(&s.CurrentFallTime)
	}
	g := c.drive(s, false, false)
	c.carried(e, &w, g)
	return transient.TurnOffTime(i, &w, g, bus, fall)
}

// GateDamping is the smaller damping of a position's gate loop over both directions [1].
func (c *Circuit) GateDamping(s *stage.Switch) float64 {
	n := s.Count()
	l, ciss := c.Need(&s.GateLoopInductance)/n, n*c.Need(&s.InputCapacitance)
	return math.Min(transient.GateDamping(c.gateResistance(s, true, true), l, ciss), transient.GateDamping(c.gateResistance(s, false, true), l, ciss))
}

// GateCurrent is the peak current that the gate loop of a position lets through in one direction [A]; the driver's resistance counts where it
// is given.
func (c *Circuit) GateCurrent(s *stage.Switch, on bool) float64 {
	r := &c.Stage.Driver.PullDownResistance
	if on {
		r = &c.Stage.Driver.PullUpResistance
	}
	total := c.resistorsOf(s, on)
	if v, ok := c.Has(r); ok {
		total += v
	}
	return (c.driveVoltage(s) - c.Need(&s.OffBias)) / total
}

// Permitted is the lowest V_S that the driver's table permits for a time [V]: the deepest row that lasts as long. Where no row does, the
// circuit is open.
func (c *Circuit) Permitted(duration float64) float64 {
	l := &c.Stage.Driver.NodeUndershoot
	if len(l.Items) == 0 {
		return c.Want(l.Field)
	}
	var buf [8]transient.Row
	rows := buf[:0]
	for i := range l.Items {
		r := transient.Row{Level: c.Need(&l.Items[i].Voltage), Duration: math.Inf(1)}
		if d := &l.Items[i].Duration; d.Given() {
			r.Duration = c.Need(d)
		}
		rows = append(rows, r)
	}
	if duration != duration {
		return nan
	}
	level, ok := transient.Permitted(rows, duration)
	if !ok {
		return c.Open("the driver's table of negative node voltages has no row that lasts as long as the undershoot")
	}
	return level
}

// Plateau is a time for which the node stands below COM in normal operation.
type Plateau struct {
	Node     float64 // V_S at the driver's pin, 0 or negative [V]
	Duration float64 // [s]
}

// Slew is the fastest movement of the node in an event [V/s]; 0 where it does not occur at this draw.
func (c *Circuit) Slew(e Event) float64 {
	if c.absent(e) {
		return 0
	}
	if c.Simulates(e) {
		if k := c.Course(e, Running); k != nil {
			return math.Max(k.NodeSlew, k.PinSlew)
		}
		return nan
	}
	if e.off() || c.slewMeasured(e) {
		return c.Swing(e).Peak()
	}
	r := c.recovering(e)
	return r.Slew(*c.Swing(e))
}

// Bus is the DC-link voltage [V].
func (c *Circuit) Bus() float64 { return c.bus() }

// NodeHigh is the highest node voltage over all events [V].
func (c *Circuit) NodeHigh() float64 {
	v := c.bus()
	for _, e := range Events() {
		if c.Occurs(e) {
			v = math.Max(v, c.NodePeak(e))
		}
	}
	return v
}
