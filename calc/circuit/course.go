package circuit

import (
	"math"

	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// least is the lowest a signal of the node goes in an event, 0 or negative [V]. Of all states of charge that of normal operation takes it deepest: the less
// V_BS is, the more current the element sends into the node.
func (c *Circuit) least(e Event, s transient.Signal) float64 {
	if k := c.Course(e, Running); k != nil {
		return math.Min(0, k.Ranges[s].Min)
	}
	return nan
}

// most is the highest a signal goes in an event [V].
func (c *Circuit) most(e Event, s transient.Signal) float64 {
	if k := c.Course(e, Running); k != nil {
		return k.Ranges[s].Max
	}
	return nan
}

// gateSignal is the gate voltage of a position.
func (c *Circuit) gateSignal(s *stage.Switch) transient.Signal {
	if s == &c.Stage.HighSide {
		return transient.HighGate
	}
	return transient.LowGate
}

// MeanSlew is the slew of the node between 10 and 90 % of V_BUS in an event [V/s].
func (c *Circuit) MeanSlew(e Event) float64 {
	if !c.Acts(e) {
		return c.Swing(e).Mean()
	}
	if k := c.Course(e, Running); k != nil {
		return k.Slew
	}
	return nan
}

// Steepness is the slope of the commutating current in an event [A/s]: of the branch that takes over as a switch turns off, at its steepest; from 10 to
// 90 % of the current in the channel of one that turns on.
func (c *Circuit) Steepness(e Event) float64 {
	if !c.Acts(e) {
		return c.CurrentSlope(e)
	}
	k := c.Course(e, Running)
	switch {
	case k == nil:
		return nan
	case e == TurnOff:
		return k.LowSlope
	case e == SinkingTurnOff:
		return k.HighSlope
	}
	return k.ChannelSlope
}

// Ringing is the frequency [Hz] and the damping of the loop after an event; of the loop itself where a simulation shows no ringing.
func (c *Circuit) Ringing(e Event) (frequency, damping float64) {
	if c.Acts(e) {
		switch k := c.Course(e, Running); {
		case k == nil:
			return nan, nan
		case k.RingFrequency > 0:
			return k.RingFrequency, k.RingDamping
		}
	}
	r := c.Ring(e)
	return r.Frequency(), r.Damping()
}

// RailLow is the lowest V_B to COM in an event, with V_BS from V_UV- upward [V].
func (c *Circuit) RailLow(e Event) float64 {
	if !c.Simulates(e) {
		return c.PinDip(e) + c.Need(&c.Stage.Driver.UVLOFalling)
	}
	if c.absent(e) {
		return c.Need(&c.Stage.Driver.UVLOFalling)
	}
	k := c.Course(e, e.charges()-1)
	if k == nil {
		return nan
	}
	v := k.Ranges[transient.Rail].Min
	if e.charges() == 1 { // the high side stays off: V_BS takes no part in the event, and only shifts the rail
		v += c.Need(&c.Stage.Driver.UVLOFalling) - k.Ranges[transient.Floating].Min
	}
	return v
}

// GateLow is the lowest gate voltage of a position in an event [V].
func (c *Circuit) GateLow(e Event, s *stage.Switch) float64 {
	switch {
	case s == c.passive(e):
		return c.Pulled(e)
	case !c.Simulates(e) || c.absent(e):
		return c.Need(&s.OffBias)
	}
	if k := c.Course(e, Running); k != nil {
		return k.Ranges[c.gateSignal(s)].Min
	}
	return nan
}

// Lifted is the highest gate voltage at which a turn-off of the high side leaves its gate through R_VS [V]: the less V_BS is, the more current of the
// element flows through that.
func (c *Circuit) Lifted() float64 {
	off := c.Need(&c.Stage.HighSide.OffBias)
	if c.absent(TurnOff) {
		return off
	}
	if k := c.Course(TurnOff, AtLockout); k != nil {
		return k.Lift
	}
	return nan
}

// MeasuredSlope is the slope of an event as measured on the board: of the current, else of the node's voltage.
func MeasuredSlope(s *stage.Stage, e Event, current bool) *stage.Quantity {
	m := &s.Layout.Measured
	switch {
	case current && e.off():
		return &m.TurnOffCurrentSlope
	case current:
		return &m.TurnOnCurrentSlope
	case e.off():
		return &m.TurnOffVoltageSlope
	}
	return &m.TurnOnVoltageSlope
}

// Largest tells whether no operating point has a larger current than this one, at its typical values.
func Largest(s *stage.Stage, op *stage.OperatingPoint) bool {
	if op == nil {
		return true
	}
	size := func(p *stage.OperatingPoint) float64 {
		return math.Abs(p.LoadCurrent.Triple.Typ) + zeroIfNone(p.RippleCurrent.Triple.Typ)/2
	}
	for i := range s.OperatingPoints.Items {
		if size(&s.OperatingPoints.Items[i]) > size(op) {
			return false
		}
	}
	return true
}

func zeroIfNone(v float64) float64 {
	if v != v {
		return 0
	}
	return v
}

// Again simulates an event once more from normal operation, with waveforms, and with a tolerance as a share of the usual one.
func (c *Circuit) Again(e Event, share float64, waveforms []transient.Signal) *transient.Course {
	b, ok := c.bridge(e, Running)
	if !ok {
		return nil
	}
	return c.run(&b, transient.Window{Limit: longestWindow, Levels: c.levels(), Tolerance: share * transient.DefaultTolerance, Waveforms: waveforms})
}

// leastDepth is what an extreme counts for at least where a change of it is taken as a share [V_BUS].
const leastDepth = 0.02

// Convergence is the largest change of an event's extremes under a ten times tighter tolerance: of the pin's undershoot as a share of its depth, of all
// other voltages as a share of V_BUS, of the gates' as a share of V_DD [1].
func (c *Circuit) Convergence(e Event) float64 {
	k, fine := c.Course(e, Running), c.Again(e, 0.1, nil)
	if k == nil || fine == nil {
		return nan
	}
	bus, worst := c.bus(), 0.0
	for s := transient.Node; s <= transient.LowGate; s++ {
		low, high := bus, bus
		switch s {
		case transient.Pin, transient.Node:
			low = math.Max(-fine.Ranges[s].Min, leastDepth*bus)
		case transient.HighGate, transient.LowGate, transient.Floating:
			low, high = c.Supply(), c.Supply()
		}
		worst = math.Max(worst, math.Abs(k.Ranges[s].Min-fine.Ranges[s].Min)/low)
		worst = math.Max(worst, math.Abs(k.Ranges[s].Max-fine.Ranges[s].Max)/high)
	}
	return worst
}
