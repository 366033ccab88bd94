package transient

import "math"

// circuit is a Bridge made ready: the initial value problem of (17)-(28).
type circuit struct {
	network
	n                    int // states
	high, low            device
	element, clamp       path
	conductance          float64 // of an integrated switch while it is on [S]
	supply, floating     float64 // V_DD; v_BS at t = 0 [V]
	load                 float64 // [A]
	perL1, perL2         float64
	perPin, perBootstrap float64
}

func (c *circuit) prepare(b *Bridge) {
	load := math.Abs(b.Load)
	if load == 0 {
		load = 1
	}
	c.network.prepare(b)
	next := c.high.prepare(&b.High, load, stateVg1, shared)
	c.n = c.low.prepare(&b.Low, load, stateVg2, next)
	c.element, c.clamp, c.conductance = path{}, path{}, 0
	switch {
	case !b.Element.Switch:
		j := b.Element.Junction
		j.Resistance = b.Element.Resistance
		c.element = newPath(j, 1)
	case b.Event == SinkingTurnOn: // only while the low side's gate is on
		c.conductance = 1 / b.Element.Resistance
	}
	if b.Clamped {
		c.clamp = newPath(b.Clamp, load)
	}
	c.supply, c.floating, c.load = b.Supply, b.Floating, b.Load
	c.perL1, c.perL2, c.perPin, c.perBootstrap = 1/b.L1, 1/b.L2, 1/b.PinCapacitance, 1/b.BootstrapCapacitance
}

// elementCurrent returns i_B [A] and its slope over the voltage v along the element [S].
func (c *circuit) elementCurrent(v float64) (i, slope float64) {
	if c.element.fitted {
		i, share := c.element.current(v, 0, 0)
		return i, share / c.element.series
	}
	if v > 0 {
		return v * c.conductance, c.conductance
	}
	return 0, 0
}

// clampCurrent returns the node clamp's current into the pin [A] at the pin's voltage, and its slope over -v_pin [S].
func (c *circuit) clampCurrent(pin float64) (i, slope float64) {
	if !c.clamp.fitted {
		return 0, 0
	}
	i, share := c.clamp.current(-pin, 0, 0)
	return i, share / c.clamp.series
}

// Rates implements numeric.Problem.
func (c *circuit) Rates(y, dy []float64) bool {
	s := (*[shared]float64)(y)
	j1, j2, ig1 := c.j1.at(s), c.j2.at(s), c.ig1.at(s)
	dy[stateI1], dy[stateI2] = c.u1.at(s)*c.perL1, c.u2.at(s)*c.perL2
	c.high.rates(y, dy, ig1, j1)
	c.low.rates(y, dy, c.ig2.at(s), -j2)
	element, _ := c.elementCurrent(c.supply - c.floating - s[stateGain] - s[statePin])
	clamp, _ := c.clampCurrent(s[statePin])
	dy[statePin] = (element + clamp + j1 + j2 - c.load) * c.perPin
	if c.driven {
		element -= ig1
	}
	dy[stateGain] = element * c.perBootstrap
	return true
}

// Jacobian implements numeric.Problem.
func (c *circuit) Jacobian(y, j []float64) bool {
	s, n := (*[shared]float64)(y), c.n
	c.high.jacobian(y, j, n, &c.ig1, &c.j1, 1)
	c.low.jacobian(y, j, n, &c.ig2, &c.j2, -1)
	_, element := c.elementCurrent(c.supply - c.floating - s[stateGain] - s[statePin])
	_, clamp := c.clampCurrent(s[statePin])
	row := func(state int) []float64 {
		r := j[state*n : state*n+n]
		clear(r[shared:])
		return r
	}
	r1, r2, pin, gain := row(stateI1), row(stateI2), row(statePin), row(stateGain)
	for k := range shared {
		r1[k], r2[k] = c.u1.c[k]*c.perL1, c.u2.c[k]*c.perL2
		pin[k], gain[k] = (c.j1.c[k]+c.j2.c[k])*c.perPin, 0
		if c.driven {
			gain[k] = -c.ig1.c[k] * c.perBootstrap
		}
	}
	pin[statePin] -= (element + clamp) * c.perPin
	pin[stateGain] -= element * c.perPin
	gain[statePin] -= element * c.perBootstrap
	gain[stateGain] -= element * c.perBootstrap
	return true
}
