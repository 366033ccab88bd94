package transient

import (
	"math"

	"floatrail/calc/internal/numeric"
)

// start puts the states at t = 0 into y: everything at rest but the load current, which one switch carries together with what the bootstrap
// element and the node clamp leave to it, eq. (29). One unknown, that switch's v_ds; what must vanish rises or falls with it throughout.
func (c *circuit) start(b *Bridge, y []float64) error {
	clear(y)
	y[stateVg1], y[stateVg2] = c.high.offBias, c.low.offBias
	if c.low.diode {
		y[stateVg2] = 0
	}
	carrier, sign, rest := &c.low, -1.0, 0.0 // the branch current is sign·(channel - diode)
	series := b.R2
	state := stateI2
	if b.Event == TurnOff || b.Event == SinkingTurnOn {
		carrier, sign, rest, series, state = &c.high, 1, b.Bus, b.R1, stateI1
	}
	switch b.Event {
	case TurnOff:
		y[stateVg1] = b.Floating + b.Split
	case SinkingTurnOff:
		y[stateVg2] = b.LowDrive
	}
	gate := y[carrier.gate]
	branch := func(vd float64) (i, node float64) {
		channel, _, _ := carrier.channel(gate, vd)
		v, _ := carrier.forward(gate, vd)
		i = sign * (channel - carrier.reverse.rest(v))
		return i, rest - sign*vd - series*i
	}
	left := func(vd float64) float64 { // what the load lacks, falling with v_ds at the low side and rising with it at the high side
		i, node := branch(vd)
		pin := node + b.NodeResistor*(b.Load-i)
		element, _ := c.elementCurrent(c.supply - c.floating - pin)
		clamp, _ := c.clampCurrent(pin)
		return i + element + clamp - b.Load
	}
	lowest := -1.0
	for range 60 {
		if sign*left(lowest) < 0 {
			break
		}
		lowest *= 2
	}
	if sign*left(b.Bus) < 0 {
		if b.Event.off() {
			return outside("the load current of %.4g A is more than the channel carries at a gate voltage of %.4g V", math.Abs(b.Load), gate)
		}
		return outside("no switch carries the load current of %.4g A before the command", b.Load)
	}
	vd, ok := numeric.Root(left, lowest, b.Bus, 0)
	if !ok {
		return outside("no state of the circuit carries the load current of %.4g A before the command", b.Load)
	}
	i, node := branch(vd)
	pin := node + b.NodeResistor*(b.Load-i)
	y[state], y[carrier.drain], y[statePin] = i, vd, pin
	if carrier == &c.high {
		y[stateVd2] = node
	} else {
		y[stateVd1] = b.Bus - node
	}
	v, _ := carrier.forward(gate, vd)
	diode := carrier.reverse.rest(v)
	if carrier.charge >= 0 {
		y[carrier.charge] = carrier.reverse.lifetime * diode
	}
	if carrier.inductance >= 0 {
		y[carrier.inductance] = diode
	}
	return nil
}
