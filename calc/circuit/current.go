package circuit

import (
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/loss"
	"floatrail/calc/modulation"
	"floatrail/calc/recharge"
)

// RepetitivePeak is the largest current of the element in the steady state [A].
func (c *Circuit) RepetitivePeak() float64 {
	if !c.modulated() {
		return c.peak(c.Period(), c.Steady())
	}
	y := c.Cycle()
	switch {
	case y.Plan == nil || !y.Converged:
		return nan
	case y.Collapses:
		return peakFrom(&c.base().Period, 0)
	}
	// The current is largest where most drives it at the end of the on-time.
	peak := 0.0
	y.Strongest(func(at modulation.Layout, onEnd, across float64) (more bool) {
		peak = math.Max(peak, peakFrom(&at.Period, onEnd+at.Return/at.Capacitance))
		return at.Element.Current(across) > peak
	})
	return peak
}

// peak is the largest current of the element over a period in its steady state [A].
func (c *Circuit) peak(p *Period, st *recharge.Steady) float64 {
	v := st.Low + p.Return/p.Capacitance
	if st.Collapses {
		v = 0
	}
	return peakFrom(&p.Period, v)
}

// peakFrom is the largest current of the element from V_BS = v [V] at the end of the on-time on [A].
func peakFrom(p *recharge.Period, v float64) float64 {
	peak := 0.0
	if v != v {
		return nan
	}
	v = math.Max(v, 0) // a steady state below 0 V is a number of the law, not a charge of C_B
	for i := range p.Off {
		iv := p.Off[i]
		if iv.Conducts {
			peak = math.Max(peak, p.Element.Current(iv.Drive-v))
		}
		v, _ = p.Element.Advance(v, iv, p.Capacitance)
	}
	return peak
}

// ResistorPower is the mean power of R_B in the steady state [W].
func (c *Circuit) ResistorPower() float64 {
	return c.elementPower(c.series(&c.Stage.Bootstrap.Resistor))
}

// elementPower is the mean power of a resistance r [ohm] of the element in the steady state [W].
func (c *Circuit) elementPower(r float64) float64 {
	if c.modulated() {
		y := c.Cycle()
		if y.Plan == nil || y.Collapses || !y.Converged {
			return nan
		}
		energy := 0.0
		y.eachPass(func(at modulation.Layout, p recharge.Passage, weight float64) {
			energy += weight * resistorEnergy(&at.Period, p.OnEnd+at.Return/at.Capacitance, r)
		})
		return energy / y.Plan.Time()
	}
	p, st := c.Period(), c.Steady()
	if st.Collapses || st.Low != st.Low {
		return nan
	}
	return resistorEnergy(&p.Period, st.Low+p.Return/p.Capacitance, r) / p.T
}

// resistorEnergy is what a resistance r [ohm] of the element takes in a period from V_BS = v [V] at the end of the on-time on [J].
func resistorEnergy(p *recharge.Period, v, r float64) float64 {
	energy := 0.0
	v = math.Max(v, 0)
	for i := range p.Off {
		energy += loss.ResistorEnergy(p.Element, p.Off[i], p.Capacitance, v, r)
		v, _ = p.Element.Advance(v, p.Off[i], p.Capacitance)
	}
	return energy
}

// AverageCurrent is the mean current of the element in the steady state [A].
func (c *Circuit) AverageCurrent() float64 {
	if c.modulated() {
		y := c.Cycle()
		switch {
		case y.Plan == nil || !y.Converged:
			return nan
		case !y.Collapses:
			return y.Charge / y.Plan.Time()
		}
	}
	return charge.Consumed(c.Budget()) / c.Period().T
}
