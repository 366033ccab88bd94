package transient

import (
	"math"
	"testing"
)

// gaussian is the abscissae and weights of Gauss's rule of 4 points over [0, 1].
var gaussian = [4][2]float64{
	{0.5 - 0.8611363115940526/2, 0.3478548451374538 / 2}, {0.5 - 0.3399810435848563/2, 0.6521451548625461 / 2},
	{0.5 + 0.3399810435848563/2, 0.6521451548625461 / 2}, {0.5 + 0.8611363115940526/2, 0.3478548451374538 / 2},
}

// stored is the energy of one cell's capacitances, the integral of C·v over v from 0 [J].
func (c *Cell) stored(vg, vd float64) float64 {
	integral := func(f func(v float64) float64, end float64, points []CurvePoint) (e float64) {
		a, sum := 0.0, 0.0
		part := func(b float64) {
			const n = 20
			for k := range n {
				for _, g := range gaussian {
					v := a + (b-a)*(float64(k)+g[0])/n
					sum += f(v) * v * g[1] * (b - a) / n
				}
			}
			a = b
		}
		for _, p := range points {
			if p.Voltage > a && p.Voltage < end {
				part(p.Voltage)
			}
		}
		part(end)
		return sum
	}
	e := c.GateSource * vg * vg / 2
	e += integral(c.Transfer.At, vd-vg, c.Transfer.Points)
	return e + integral(func(v float64) float64 {
		return math.Max(c.Output.At(v)-c.Transfer.At(v), leastShare*c.Output.At(v))
	}, vd, append(append([]CurvePoint(nil), c.Output.Points...), c.Transfer.Points...))
}

// energy is what the sources do and what is lost, per second, at the states y; and the work of the common source's voltage in the gate, which has
// no counterpart in the power loop, as the gate's current does not flow through it there.
func energy(b *Bridge, c *circuit, y []float64) (work, loss, oneWay float64) {
	s := (*[shared]float64)(y)
	node, u1, u2, j1, j2, ig1, ig2 := c.node.at(s), c.u1.at(s), c.u2.at(s), c.j1.at(s), c.j2.at(s), c.ig1.at(s), c.ig2.at(s)
	d1, _, _ := c.high.diodeCurrent(y)
	d2, _, _ := c.low.diodeCurrent(y)
	ch1, _, _ := c.high.channel(s[stateVg1], s[stateVd1])
	ch2, _, _ := c.low.channel(s[stateVg2], s[stateVd2])
	along := b.Supply - b.Floating - s[stateGain] - s[statePin]
	element, _ := c.elementCurrent(along)
	clamp, _ := c.clampCurrent(s[statePin])
	rvs := b.Load - j1 - j2 - ig1
	work = b.Bus*j1 + b.Supply*element - b.Load*node
	if b.Event == SinkingTurnOn {
		work += b.LowDrive * ig2
	} else {
		work += b.Low.OffBias * ig2
	}
	if b.Event != TurnOn {
		work += b.High.OffBias * ig1
	}
	g1, g2 := 0.0, 0.0
	if b.RingingResistance > 0 {
		g1, g2 = (b.L1+b.L2)/b.L1/b.RingingResistance, (b.L1+b.L2)/b.L2/b.RingingResistance
	}
	loss = b.R1*j1*j1 + b.R2*j2*j2 + g1*u1*u1 + g2*u2*u2 + b.High.GateResistance*ig1*ig1 + b.Low.GateResistance*ig2*ig2
	loss += s[stateVd1]*(ch1-d1) + s[stateVd2]*(ch2-d2) + b.NodeResistor*rvs*rvs + along*element - s[statePin]*clamp
	return work, loss, -b.HighCommonSource/b.L1*u1*ig1 + b.LowCommonSource/b.L2*u2*ig2
}

// TestBalances integrates, along the dense output of every reference case at the default tolerance, the energy: work of the sources less losses is the
// change of what is stored, within 0.5 % of what is lost; and the charge of C_B: what the element and the gate carry is C_B·gain, within 0.1 %.
func TestBalances(t *testing.T) {
	var s Simulator
	worstEnergy, worstCharge := 0.0, 0.0
	for _, c := range referenceCases(t) {
		b := c.bridge()
		all := func(y []float64) float64 {
			e := b.L1*y[stateI1]*y[stateI1] + b.L2*y[stateI2]*y[stateI2] + b.PinCapacitance*y[statePin]*y[statePin]
			v := b.Floating + y[stateGain]
			e += b.BootstrapCapacitance * y[stateGain] * (v + b.Floating) // less C_B·V²/2 at the start
			return e/2 + b.High.stored(y[stateVg1], y[stateVd1]) + b.Low.stored(y[stateVg2], y[stateVd2])
		}
		work, loss, oneWay, charge, gate := 0.0, 0.0, 0.0, 0.0, 0.0
		var start []float64
		y := make([]float64, most)
		s.seen = func(at *span) {
			if start == nil {
				start = make([]float64, most)
				at.states(0, start)
			}
			for _, g := range gaussian {
				at.states(g[0], y)
				w, l, o := energy(b, &s.circuit, y[:at.n])
				work, loss, oneWay = work+w*g[1]*at.length, loss+l*g[1]*at.length, oneWay+o*g[1]*at.length
				element, _ := s.circuit.elementCurrent(b.Supply - b.Floating - y[stateGain] - y[statePin])
				charge += element * g[1] * at.length
				if b.Event == TurnOn {
					gate += s.circuit.ig1.at((*[shared]float64)(y)) * g[1] * at.length
				}
			}
			at.states(1, y)
		}
		co, err := s.Run(b, Window{Limit: c.Input.End, Whole: true})
		if err != nil {
			t.Fatalf("%s: %v", c.Name, err)
		}
		residual := math.Abs(work-loss+oneWay-(all(y)-all(start))) / loss
		worstEnergy = math.Max(worstEnergy, residual)
		if !(residual < 0.005) {
			t.Errorf("%s: energy is out of balance by %.3g %% of the losses of %.3g J", c.Name, 100*residual, loss)
		}
		moved := math.Max(math.Abs(charge), math.Abs(gate))
		unequal := math.Abs(charge-gate-b.BootstrapCapacitance*co.Gain) / moved
		if moved > 1e-4*b.BootstrapCapacitance { // 0.1 mV
			worstCharge = math.Max(worstCharge, unequal)
			if !(unequal < 0.001) {
				t.Errorf("%s: charge of C_B is out of balance by %.3g %%", c.Name, 100*unequal)
			}
			same(t, c.Name+", charge through the element", co.ElementCharge, charge, math.Max(0.001, 0.001*moved/math.Abs(charge)))
		}
	}
	t.Logf("energy within %.2g %%, charge within %.2g %%", 100*worstEnergy, 100*worstCharge)
}
