package circuit

import (
	"floatrail/calc/stage"
	"floatrail/calc/startup"
)

// firstCharge is the first charge of C_B at its largest, new and without bias, with the node at 0 V [design 4.5].
func (c *Circuit) firstCharge() startup.Charge {
	return startup.Charge{
		Element: c.Element(), Capacitance: c.Fresh(), Supply: c.Supply(), Load: c.Loads().Total(), Initial: c.Need(&c.Stage.Startup.InitialVoltage),
	}
}

// FirstTarget is the voltage that the first charge must reach: the rising lockout with the policy's margin [V].
func (c *Circuit) FirstTarget() float64 {
	v := c.Need(&c.Stage.Driver.UVLORising)
	return v + c.Margin(v)
}

// pulsed tells whether the low side is pulsed before the first pulse of the high side, not held on.
func (c *Circuit) pulsed() bool {
	return c.Stage.Startup.PulseWidth.Given() || c.Stage.Startup.PulsePeriod.Given()
}

// pulses returns how long the low side is on and how often [s]; 0 long where the driver does not pass so short a pulse.
func (c *Circuit) pulses() (width, period float64) {
	s, d := &c.Stage.Startup, &c.Stage.Driver
	width, period = c.Need(&s.PulseWidth), c.Need(&s.PulsePeriod)
	for _, q := range []*stage.Quantity{&d.MinimumPulse, &d.EdgeTime} {
		if _, ok := c.Has(q); !ok {
			c.Assume(stage.Assumption{Field: q.Field, Assumed: "shorter than the pulse", Direction: stage.Optimistic,
				Reason: "what the driver passes is not given; the pulses of the start are taken to pass"})
			return width, period
		}
	}
	if width < c.shortestPulse() {
		width = 0
	}
	return width, period
}

// FirstPeak is the element's current when an empty C_B is first charged [A].
func (c *Circuit) FirstPeak() float64 { return c.firstCharge().PeakCurrent() }

// FirstEnergy is the energy that R_B takes at first charge [J].
func (c *Circuit) FirstEnergy() float64 {
	return c.firstCharge().ResistorEnergy(c.series(&c.Stage.Bootstrap.Resistor))
}

// FirstSlew is the steepest rise of V_BS at first charge [V/s].
func (c *Circuit) FirstSlew() float64 { return c.firstCharge().Slew() }

// FirstSettled is the V_BS at which the first charge ends [V].
func (c *Circuit) FirstSettled() float64 {
	ch := c.firstCharge()
	if c.pulsed() {
		return ch.PulsedSettled(c.pulses())
	}
	return ch.Settled()
}

// PrebiasedVoltage is V_BS at the first pulse on a node that stands at a voltage already [V]. With pulses of the low side it is what they
// reach in the time available; without, what the element brings against the raised node.
func (c *Circuit) PrebiasedVoltage() float64 {
	available := c.Need(&c.Stage.Startup.TimeAvailable)
	ch, how := c.prebiased()
	switch how {
	case byPulses:
		width, period := c.pulses()
		return ch.PulsedReached(width, period, available)
	case disconnected:
		return ch.Initial + available*0
	}
	return max(0, ch.Reached(available))
}

// PrebiasedSettled is the V_BS to which PrebiasedVoltage tends in a time without end [V].
func (c *Circuit) PrebiasedSettled() float64 {
	ch, how := c.prebiased()
	switch how {
	case byPulses:
		return ch.PulsedSettled(c.pulses())
	case disconnected:
		return ch.Initial
	}
	return max(0, ch.Settled())
}

// Ways in which C_B is charged on a node that stands at a voltage.
const (
	againstNode  = iota // through a diode, against the raised node
	byPulses            // by pulses of the low side, which pull the node down
	disconnected        // not at all: an integrated switch conducts only while the low-side gate is on
)

// prebiased is the first charge on a node that stands at a voltage already, and how it comes about.
func (c *Circuit) prebiased() (ch startup.Charge, how int) {
	ch = c.firstCharge()
	node := c.Need(&c.Stage.Startup.Prebias)
	switch {
	case c.pulsed() && c.Stage.LowSide.Kind != stage.DiodeOnly: // a diode does not pull the node down
		return ch, byPulses
	case c.Stage.Bootstrap.Element == stage.IntegratedSwitch:
		ch.Initial += node * 0
		return ch, disconnected
	}
	ch.Node = node
	return ch, againstNode
}
