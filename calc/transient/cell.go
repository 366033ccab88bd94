package transient

import "math"

// device is a Cell made ready.
type device struct {
	gateSource         float64
	transfer, output   capacity
	atOutput           place // of C_oss at v_ds
	atTransfer, atGate place // of C_rss at v_ds and at v_ds - v_gs
	gfs, threshold     float64
	onResistance       float64
	oneWay             bool
	offBias            float64
	follows            bool
	reverse            path
	diode              bool
	gate, drain        int // states v_gs, v_ds
	charge, inductance int // states q_M, i_Lfr, -1: none
}

// prepare makes a cell ready; load is the current it carries [A], next the first free state.
func (d *device) prepare(c *Cell, load float64, gate, next int) int {
	d.gateSource, d.gfs, d.threshold, d.onResistance, d.oneWay = c.GateSource, c.Transconductance, c.Threshold, c.OnResistance, c.Unidirectional
	d.offBias, d.follows, d.diode = c.OffBias, c.FollowsGate && !c.Diode, c.Diode
	d.output.prepare(&c.Output)
	d.atOutput, d.atTransfer, d.atGate = place{}, place{}, place{} // nowhere
	if !c.Diode {
		d.transfer.prepare(&c.Transfer)
	}
	d.reverse = newPath(c.Reverse, load)
	d.reverse.offset = c.Offset
	d.reverse.recover(c.Recovery, c.Forward)
	d.gate, d.drain, d.charge, d.inductance = gate, gate+1, -1, -1
	if d.reverse.lifetime > 0 {
		d.charge = next
		next++
	}
	if d.reverse.inductance > 0 {
		d.inductance = next
		next++
	}
	return next
}

// capacitances are those of one cell at one state, and their slopes over their own voltages [F], [F/V].
type capacitances struct {
	gd, gdSlope float64 // over v_ds - v_gs
	ds, dsSlope float64 // over v_ds
}

func (d *device) capacitances(vg, vd float64) (c capacitances) {
	c.ds, c.dsSlope = d.output.at(vd, &d.atOutput)
	if d.diode {
		return c
	}
	rss, slope := d.transfer.at(vd, &d.atTransfer)
	if rest := c.ds - rss; rest > leastShare*c.ds {
		c.ds, c.dsSlope = rest, c.dsSlope-slope
	} else {
		c.ds, c.dsSlope = leastShare*c.ds, leastShare*c.dsSlope
	}
	c.gd, c.gdSlope = d.transfer.at(vd-vg, &d.atGate)
	return c
}

// channel returns the channel's current [A], eq. (26), and its slopes over v_gs and v_ds [S].
func (d *device) channel(vg, vd float64) (i, overGate, overDrain float64) {
	sat := d.gfs * (vg - d.threshold)
	if !(sat > 0) || d.diode || d.oneWay && vd < 0 {
		return 0, 0, 0
	}
	z := vd / (d.onResistance * sat)
	t := math.Tanh(z)
	open := 1 - t*t
	return sat * t, d.gfs * (t - z*open), open / d.onResistance
}

// forward returns the voltage along the reverse path [V] and its slope over v_gs.
func (d *device) forward(vg, vd float64) (v, overGate float64) {
	v = -vd
	if d.follows {
		if vg < d.threshold {
			return v + vg - d.offBias, 1
		}
		return v + d.threshold - d.offBias, 0
	}
	return v, 0
}

// diodeCurrent returns i_D [A] at the states y.
func (d *device) diodeCurrent(y []float64) (i, share, overGate float64) {
	v, overGate := d.forward(y[d.gate], y[d.drain])
	q, inner := 0.0, 0.0
	if d.charge >= 0 {
		q = y[d.charge]
	}
	if d.inductance >= 0 {
		inner = y[d.inductance]
	}
	i, share = d.reverse.current(v, q, inner)
	return i, share, overGate
}

// rates puts the rates of the cell's states into dy, for the gate current ig [A] and the current into the drain [A], eq. (24)-(28).
func (d *device) rates(y, dy []float64, ig, drain float64) {
	vg, vd := y[d.gate], y[d.drain]
	i, _, _ := d.diodeCurrent(y)
	c := d.capacitances(vg, vd)
	channel, _, _ := d.channel(vg, vd)
	into := drain - channel + i
	if d.diode {
		dy[d.gate], dy[d.drain] = 0, into/c.ds
	} else {
		a, b := d.gateSource+c.gd, c.ds+c.gd
		inverse := 1 / (a*c.ds + d.gateSource*c.gd) // a·b - C_gd², without the difference
		dy[d.gate], dy[d.drain] = (b*ig+c.gd*into)*inverse, (a*into+c.gd*ig)*inverse
	}
	if d.charge >= 0 {
		dy[d.charge] = i - y[d.charge]*d.reverse.perLifetime
	}
	if d.inductance >= 0 {
		dy[d.inductance] = d.reverse.resistance / d.reverse.inductance * (i - y[d.inductance])
	}
}

// jacobian puts the slopes of those rates into their rows of j, n columns each; ig, drain: the currents as functions of the shared states,
// drain times sign.
//
// With M(v)·v' = f it is M·∂v'/∂y = ∂f/∂y - (∂M/∂y)·v'.
func (d *device) jacobian(y, j []float64, n int, ig, drain *form, sign float64) {
	vg, vd := y[d.gate], y[d.drain]
	shape := (*[shared]float64)(y)
	i, share, diodeGate := d.diodeCurrent(y)
	c := d.capacitances(vg, vd)
	channel, overGate, overDrain := d.channel(vg, vd)
	p := &d.reverse
	overV := share / p.series
	var f, g [most]float64 // ∂f/∂y of the drain's and of the gate's row
	for k := range shared {
		f[k], g[k] = sign*drain.c[k], ig.c[k]
	}
	f[d.gate] += overV*diodeGate - overGate
	f[d.drain] += -overV - overDrain
	if d.charge >= 0 {
		f[d.charge] = (share - 1) * p.perTransit
	}
	if d.inductance >= 0 {
		f[d.inductance] = p.resistance * overV
	}
	current, into := ig.at(shape), sign*drain.at(shape)-channel+i
	rowGate, rowDrain := j[d.gate*n:d.gate*n+n], j[d.drain*n:d.drain*n+n]
	if d.diode {
		rate := into / c.ds
		f[d.drain] -= c.dsSlope * rate
		for k := range n {
			rowGate[k], rowDrain[k] = 0, f[k]/c.ds
		}
	} else {
		a, b := d.gateSource+c.gd, c.ds+c.gd
		inverse := 1 / (a*c.ds + d.gateSource*c.gd)
		gate, rate := (b*current+c.gd*into)*inverse, (a*into+c.gd*current)*inverse
		moved := c.gdSlope * (gate - rate) // what a volt more between drain and gate adds to the gate's row
		g[d.drain] -= moved
		g[d.gate] += moved
		f[d.drain] += moved - c.dsSlope*rate
		f[d.gate] -= moved
		b, a, m := b*inverse, a*inverse, c.gd*inverse
		for k := range n {
			rowGate[k], rowDrain[k] = b*g[k]+m*f[k], a*f[k]+m*g[k]
		}
	}
	// the diode's own states
	slope := func(row []float64, times float64) {
		clear(row)
		row[d.gate], row[d.drain] = times*overV*diodeGate, -times*overV
		if d.charge >= 0 {
			row[d.charge] = times * (share - 1) * p.perTransit
		}
		if d.inductance >= 0 {
			row[d.inductance] = times * p.resistance * overV
		}
	}
	if d.charge >= 0 {
		row := j[d.charge*n : d.charge*n+n]
		slope(row, 1)
		row[d.charge] -= p.perLifetime
	}
	if d.inductance >= 0 {
		row, rate := j[d.inductance*n:d.inductance*n+n], p.resistance/p.inductance
		slope(row, rate)
		row[d.inductance] -= rate
	}
}
