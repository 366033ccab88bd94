package circuit

import (
	"math"

	"floatrail/calc/corner"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// Threshold is V_th of a switch at the junction temperature of the set [V]: by its entries at temperatures, else by its coefficient from 25 °C.
func (c *Circuit) Threshold(s *stage.Switch) float64 {
	v := c.Need(&s.ThresholdVoltage)
	if dT := c.Set.Junction - stage.ReferenceTemperature; len(s.ThresholdVoltage.At) == 0 && dT != 0 {
		v += dT * c.Need(&s.ThresholdTemperatureCoefficient)
	}
	return v
}

// channel is what the current through a position's channel follows from, all parallel devices together.
func (c *Circuit) channel(s *stage.Switch) transient.Switch {
	n := s.Count()
	return transient.Switch{Threshold: c.Threshold(s), Transconductance: n * c.Need(&s.Transconductance)}
}

// commonSource is the inductance that load loop and gate loop of a position share [H].
func (c *Circuit) commonSource(s *stage.Switch) float64 {
	if s == &c.Stage.HighSide {
		return c.Need(&c.Stage.Layout.HighSideCommonSource)
	}
	return c.Need(&c.Stage.Layout.LowSideCommonSource)
}

// Slots of curves kept with a circuit.
const (
	curveHighTransfer = iota
	curveHighOutput
	curveLowTransfer
	curveLowOutput
	curves
)

// curve is a capacitance curve of all parallel devices of a position.
func (c *Circuit) curve(slot int, l *stage.List[stage.CapacitancePoint], n float64) transient.Curve {
	points := c.curveAt[slot][:0]
	for i := range l.Items {
		p := &l.Items[i]
		points = append(points, transient.CurvePoint{Voltage: c.Need(&p.Voltage), Capacitance: c.Need(&p.Capacitance)})
	}
	c.curveAt[slot] = points
	return transient.Curve{Points: points, Scale: n}
}

// output is C_oss of a position over its voltage.
func (c *Circuit) output(s *stage.Switch) transient.Curve {
	if len(s.OutputCapacitance.Items) == 0 {
		c.Want(s.OutputCapacitance.Field)
		return transient.Curve{Scale: nan}
	}
	slot := curveLowOutput
	if s == &c.Stage.HighSide {
		slot = curveHighOutput
	}
	return c.curve(slot, &s.OutputCapacitance, s.Count())
}

// fewPoints is the number of points from which on a curve of C_rss is taken as it is [design 4.6].
const fewPoints = 3

// lowestPoint is the voltage at which a curve of C_rss must begin to tell its charge [V].
const lowestPoint = 1

// transfer is C_rss of a position over its voltage, which is C_gd. A curve of fewer than three points is scaled to Q_GD.
func (c *Circuit) transfer(s *stage.Switch) transient.Curve {
	slot, n := curveLowTransfer, s.Count()
	if s == &c.Stage.HighSide {
		slot = curveHighTransfer
	}
	l := &s.ReverseTransferCapacitance
	if len(l.Items) >= fewPoints {
		if first := &l.Items[0].Voltage; c.Need(first) > lowestPoint {
			c.Assume(stage.Assumption{Field: l.Field, Assumed: "level below the first point", Direction: stage.Optimistic,
				Reason: "the curve begins at " + quantity.Format(c.Value(first), quantity.Voltage) + "; toward 0 V the capacitance is larger"})
		}
		return c.curve(slot, l, n)
	}
	q, known := c.Has(&s.GateDrainCharge)
	bus := c.bus()
	switch {
	case len(l.Items) == 0 && !known:
		c.Want(l.Field)
		return transient.Curve{Scale: nan}
	case len(l.Items) == 0:
		c.Assume(stage.Assumption{Field: l.Field, Assumed: "Q_GD/V_BUS at every voltage", Direction: stage.Optimistic,
			Reason: "no reverse transfer capacitance is given; where it is smaller the node is faster"})
		return transient.Curve{Points: append(c.curveAt[slot][:0], transient.CurvePoint{Capacitance: q / bus}), Scale: n}
	}
	curve := c.curve(slot, l, n)
	if !known {
		c.Assume(stage.Assumption{Field: l.Field, Assumed: "level beyond the points given", Direction: stage.Optimistic,
			Reason: "fewer than three points of the reverse transfer capacitance and no gate-drain charge are given; toward 0 V it is larger"})
		return curve
	}
	if whole := curve.Charge(bus); whole > 0 {
		curve.Scale *= n * q / whole
	}
	return curve
}

// drive is the gate drive of a position for one direction. Fast asks for the resistance that makes edges steep, else that which makes them
// slow and holds the gate weakly.
func (c *Circuit) drive(s *stage.Switch, on, fast bool) transient.Gate {
	return transient.Gate{Resistance: c.gateResistance(s, on, fast), On: c.driveVoltage(s), Off: c.Need(&s.OffBias)}
}

// driveVoltage is the highest drive that a position's gate sees in normal operation [V].
func (c *Circuit) driveVoltage(s *stage.Switch) float64 {
	v := c.Supply()
	if s == &c.Stage.HighSide {
		v = c.Ceiling()
	}
	return c.OffBias(s).Drive(v)
}

// external is the external gate resistor of a direction.
func external(s *stage.Switch, on bool) *stage.Resistor {
	if on {
		return &s.GateOn
	}
	return &s.GateOff
}

// gateResistance is the whole resistance of a position's gate loop, all parallel devices together [ohm].
func (c *Circuit) gateResistance(s *stage.Switch, on, fast bool) float64 {
	return c.resistorsOf(s, on) + c.driverResistance(on, fast)
}

// resistorsOf is what lies between the driver and the gates of a position [ohm]. The gate current of the high side returns through R_VS.
func (c *Circuit) resistorsOf(s *stage.Switch, on bool) float64 {
	r := c.loopResistors(s, on)
	if s == &c.Stage.HighSide {
		r += c.series(&c.Stage.Layout.NodeResistor)
	}
	return r
}

// loopResistors is resistorsOf without R_VS [ohm].
func (c *Circuit) loopResistors(s *stage.Switch, on bool) float64 {
	return (c.series(external(s, on)) + c.Need(&s.InternalGateResistance)) / s.Count()
}

// driverResistance is the output resistance of the driver [ohm]. A driver that is given by its peak current has at most V_DD over that, and
// less at small voltages across it.
func (c *Circuit) driverResistance(on, fast bool) float64 {
	d := &c.Stage.Driver
	r, peak := &d.PullDownResistance, &d.PeakSinkCurrent
	if on {
		r, peak = &d.PullUpResistance, &d.PeakSourceCurrent
	}
	if v, ok := c.Has(r); ok {
		return v
	}
	i, ok := c.Has(peak)
	switch {
	case !ok:
		return c.Need(r)
	case fast:
		c.Assume(stage.Assumption{Field: r.Field, Assumed: "0 Ω for the steepest edge", Direction: stage.Conservative,
			Reason: "the driver is given by its peak current; its resistance at small voltages is not known"})
		return 0
	}
	c.Assume(stage.Assumption{Field: r.Field, Assumed: "V_DD over the peak current", Direction: stage.Conservative,
		Reason: "the driver is given by its peak current; its resistance is not above this"})
	return c.Supply() / i
}

// LowInductance is L2, from the COM pin to the tap [H]. Where only the sum is known it is at most that.
func (c *Circuit) LowInductance() float64 {
	l := &c.Stage.Layout
	return c.inductance(&l.LowSideInductance)
}

// BusInductance is L1, the rest of the commutation loop [H].
func (c *Circuit) BusInductance() float64 {
	l := &c.Stage.Layout
	return c.inductance(&l.BusLoopInductance)
}

func (c *Circuit) inductance(part *stage.Quantity) float64 {
	l := &c.Stage.Layout
	if v, ok := c.Has(part); ok || !l.LoopInductance.Given() {
		if ok {
			return v
		}
		return c.Need(part)
	}
	c.Assume(stage.Assumption{Field: part.Field, Assumed: "the whole of loopInductance", Direction: stage.Conservative,
		Reason: "only the sum of both parts is given"})
	return c.Need(&l.LoopInductance)
}

// LoopInductance is L1 + L2 [H].
func (c *Circuit) LoopInductance() float64 {
	l := &c.Stage.Layout
	if l.LoopInductance.Given() {
		return c.Need(&l.LoopInductance)
	}
	return c.Need(&l.LowSideInductance) + c.Need(&l.BusLoopInductance)
}

// recovery is the reverse recovery of a position's diode, all parallel devices together. A HEMT has no junction to recover.
func (c *Circuit) recovery(s *stage.Switch) transient.Recovery {
	side := 0
	if s == &c.Stage.LowSide {
		side = 1
	}
	return *corner.Memo(c.Draw, slotRecovery+side, true, &c.kept().recovery[side], func() transient.Recovery { return c.fitRecovery(s) })
}

func (c *Circuit) fitRecovery(s *stage.Switch) transient.Recovery {
	r := &s.Reverse
	if s.Kind == stage.GaNHEMT && !r.RecoveryCharge.Given() {
		return transient.Recovery{}
	}
	q := c.Need(&r.RecoveryCharge)
	if q == 0 {
		return transient.Recovery{}
	}
	i, a, t := c.Need(&r.RecoveryTestCurrent), c.Need(&r.RecoveryTestSlope), c.Need(&r.RecoveryTime)
	if typ := c.Space.Range(&r.RecoveryCharge).Typ; typ > 0 { // a charge that is larger by k takes longer by sqrt(k): the shape of the current stays
		t = c.Space.Range(&r.RecoveryTime).Typ * math.Sqrt(q/typ)
	}
	if sum := q + i + a + t; sum != sum {
		return transient.Recovery{Tau: nan, Transit: nan, TauRR: nan}
	}
	out, err := transient.FitRecovery(i, a, q, t)
	if err != nil {
		c.Open(stage.Relative(r.Field) + ": " + err.Error())
		return transient.Recovery{Tau: nan, Transit: nan, TauRR: nan}
	}
	return out
}

// forwardRecovery is what a position's diode drops beyond its static law while its current rises at a slope up to a current [V].
func (c *Circuit) forwardRecovery(s *stage.Switch, current, slope float64) float64 {
	f, n := c.forward(s), s.Count()
	if f == (transient.ForwardRecovery{}) {
		return 0
	}
	return f.Peak(slope/n, current/n)
}

// forward is the forward recovery of one device's diode.
func (c *Circuit) forward(s *stage.Switch) (none transient.ForwardRecovery) {
	r := &s.Reverse
	if s.Kind == stage.GaNHEMT { // reverse conduction of the channel knows no conductivity modulation
		return none
	}
	if !r.PeakForwardRecovery.Given() {
		c.Assume(stage.Assumption{Field: r.PeakForwardRecovery.Field, Assumed: "no forward recovery", Direction: stage.Optimistic,
			Reason: "the peak forward recovery voltage is not given; it deepens the undershoot"})
		return none
	}
	peak := c.Need(&r.PeakForwardRecovery)
	if peak == 0 {
		return none
	}
	i, a, t := c.Need(&r.ForwardRecoveryTestCurrent), c.Need(&r.ForwardRecoveryTestSlope), c.Need(&r.ForwardRecoveryTime)
	if q, rise := &r.ForwardRecoveryTime, i/a; q.FilledBelow { // the policy's spread is one of what follows the ramp of the test
		if typ := c.Space.Range(q).Typ; t < typ && rise < typ {
			t = rise + (typ-rise)*t/typ
		}
	}
	bad := transient.ForwardRecovery{Inductance: nan, Resistance: nan}
	static := c.staticDrop(s, i)
	if sum := peak + i + a + t + static; sum != sum {
		return bad
	}
	fit, err := transient.FitForwardRecovery(i, a, peak, static, t)
	if err != nil {
		c.Open(stage.Relative(r.Field) + ": " + err.Error())
		return bad
	}
	return fit
}

// staticDrop is the drop of one device's diode at a current of its forward recovery test [V].
func (c *Circuit) staticDrop(s *stage.Switch, i float64) float64 {
	return c.ReverseDrop(s, i*s.Count())
}

// clampedPin is V_S at the driver's pin for a node voltage below COM [V]: a clamp there shares the difference with R_VS.
func (c *Circuit) clampedPin(node float64) float64 {
	l := &c.Stage.Layout
	switch l.NodeClamp.Presence() {
	case stage.NotFitted:
		return node
	case stage.PresenceUnknown:
		c.Assume(stage.Assumption{Field: l.NodeClamp.Field, Assumed: "none", Direction: stage.Conservative, Reason: "no clamp from COM to V_S is given"})
		return node
	}
	r := c.series(&l.NodeResistor)
	if !(r > 0) || !(node < 0) { // without a resistor the clamp only shares the current of the low side
		return node + r*0
	}
	return transient.ClampedPin(node, c.junction(&l.NodeClamp), r)
}
