package transient

import "floatrail/calc/internal/numeric"

// The states. Those of the diodes follow where a circuit has them.
const (
	stateI1  = iota // current of L1, from the bus into the node [A]
	stateI2         // current of L2, from COM into the node [A]
	stateVg1        // v_gs of the high side at the die [V]
	stateVd1        // v_ds of the high side [V]
	stateVg2        // the same of the low side
	stateVd2
	statePin  // driver's V_S pin to COM [V]
	stateGain // v_BS less what it was at t = 0, so that the tolerance is that of the gain [V]
	shared    // number of states that every circuit has
	most      = shared + 4
)

// form is a linear function of the shared states, k + Σ c·y.
type form struct {
	c [shared]float64
	k float64
}

func unit(state int) (f form) {
	f.c[state] = 1
	return f
}

// plus returns f + s·g.
func (f form) plus(s float64, g form) form {
	for i := range f.c {
		f.c[i] += s * g.c[i]
	}
	f.k += s * g.k
	return f
}

func (f form) scaled(s float64) form { return form{}.plus(s, f) }

func (f *form) at(y *[shared]float64) float64 {
	c := &f.c
	return f.k + (c[0]*y[0] + c[1]*y[1] + c[2]*y[2] + c[3]*y[3]) + (c[4]*y[4] + c[5]*y[5] + c[6]*y[6] + c[7]*y[7])
}

// of returns the function over a step, from the states' polynomials.
func (f *form) of(states *[most]numeric.Polynomial) (p numeric.Polynomial) {
	for i, s := range f.c {
		switch s {
		case 0:
		case 1:
			p = p.Plus(states[i])
		default:
			p = p.Plus(states[i].Scaled(s))
		}
	}
	p[0] += f.k
	return p
}

// network is what is algebraic in the states, eq. (17)-(23).
type network struct {
	node     form // v_node [V]
	u1, u2   form // L·di/dt of both inductances [V]
	j1, j2   form // branch currents into the node, from the bus and from COM [A]
	ig1, ig2 form // gate currents into the gates [A]
	pin      form // [V]
	rail     form // v_pin + v_BS [V]
	driven   bool // the high side's gate takes its current out of C_B
}

func (n *network) prepare(b *Bridge) {
	constant := func(k float64) form { return form{k: k} }
	g1, g2 := 0.0, 0.0 // 1/R_p of each inductance
	if b.RingingResistance > 0 {
		g1, g2 = (b.L1+b.L2)/(b.RingingResistance*b.L1), (b.L1+b.L2)/(b.RingingResistance*b.L2)
	}
	k1, k2 := 1/(1+b.R1*g1), 1/(1+b.R2*g2)
	share1, share2 := b.HighCommonSource/b.L1, b.LowCommonSource/b.L2
	rvs, gg1 := b.NodeResistor, 1/b.High.GateResistance
	n.driven = b.Event == TurnOn
	drive1, drive2 := constant(b.High.OffBias), b.Low.OffBias
	if n.driven {
		drive1 = unit(stateGain).plus(b.Floating+b.Split, constant(1))
	}
	if b.Event == SinkingTurnOn {
		drive2 = b.LowDrive
	}
	i1, i2, pin := unit(stateI1), unit(stateI2), unit(statePin)
	a1 := constant(b.Bus).plus(-1, unit(stateVd1)).plus(-b.R1, i1)
	a2 := unit(stateVd2).plus(-b.R2, i2)
	// (22): everything on the node as a function of v_node, solved for it
	missing := constant(b.Load).plus(-1, i1).plus(-1, i2).plus(-k1*g1, a1).plus(-k2*g2, a2)
	gate := drive1.plus(1, pin).plus(-1, unit(stateVg1)).plus(-share1*k1, a1).scaled(gg1)
	denominator := 1 + rvs*(k1*g1+k2*g2+gg1*(1-share1*k1))
	n.node = pin.plus(-rvs, missing).plus(rvs, gate).scaled(1 / denominator)
	n.u1 = a1.plus(-1, n.node).scaled(k1)
	n.u2 = a2.plus(-1, n.node).scaled(k2)
	n.j1, n.j2 = i1.plus(g1, n.u1), i2.plus(g2, n.u2)
	n.ig1 = drive1.plus(1, pin).plus(-1, n.node).plus(-1, unit(stateVg1)).plus(-share1, n.u1).scaled(gg1)
	if b.Low.Diode {
		n.ig2 = form{}
	} else {
		n.ig2 = constant(drive2).plus(-1, unit(stateVg2)).plus(share2, n.u2).scaled(1 / b.Low.GateResistance)
	}
	n.pin = pin
	n.rail = pin.plus(1, unit(stateGain)).plus(b.Floating, constant(1))
}
