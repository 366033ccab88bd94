package circuit

import (
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/corner"
	"floatrail/calc/loss"
	"floatrail/calc/recharge"
)

// Low is the lowest V_BS of the operating point [V]; -Inf where there is no positive steady state.
func (c *Circuit) Low() float64 {
	if c.Point != nil && c.Point.HeldOn != nil {
		h, t := c.Hold()
		return h.Voltage(t)
	}
	st := c.Steady()
	if st.Collapses {
		return math.Inf(-1)
	}
	return st.Low
}

// Empty cuts a voltage at 0: the hold law continues below, where C_B is empty. A collapse stays what it is [V].
func Empty(v float64) float64 {
	if v < 0 && !math.IsInf(v, -1) {
		return 0
	}
	return v
}

// High is the highest V_BS of the operating point [V], limited by a clamp where one is fitted.
func (c *Circuit) High() float64 {
	var v float64
	switch {
	case c.Point != nil && c.Point.HeldOn != nil:
		v = c.Need(&c.Point.HeldOn.InitialVoltage)
	default:
		st := c.Steady()
		if st.Collapses { // what stands before the supply collapses
			return c.Settled()
		}
		v = st.High
	}
	return c.clamped(v)
}

// Gate is the drive of the high-side gate at a floating voltage [V].
func (c *Circuit) Gate(vbs float64) float64 { return c.OffBias(&c.Stage.HighSide).Drive(vbs) }

// Required is the voltage that V_BS must keep, without margin: the falling lockout, or the specified drive where that is higher and the
// channel carries forward current [V].
func (c *Circuit) Required() float64 {
	v := c.Need(&c.Stage.Driver.UVLOFalling)
	if c.Forward() {
		drive := c.Need(&c.Stage.HighSide.DriveVoltageMin)
		if b := c.OffBias(&c.Stage.HighSide); b.Split {
			drive -= b.Voltage
		}
		v = math.Max(v, drive)
	}
	return v
}

// Forward tells whether the high-side channel carries forward current in its on-time.
func (c *Circuit) Forward() bool { return c.Point != nil && c.peakCurrent() > 0 }

// Margin is the policy's margin on a threshold [V].
func (c *Circuit) Margin(limit float64) float64 {
	return math.Max(c.Policy.LockoutMargin, c.Policy.LockoutMarginRatio*math.Abs(limit))
}

// Budget is the charge budget of one period at the steady state, or where there is none at the required voltage.
func (c *Circuit) Budget() []charge.Item {
	return *corner.Memo(c.Draw, slotBudget, false, &c.budgetAt, c.budget)
}

func (c *Circuit) budget() []charge.Item {
	p := c.Period()
	st := c.Steady()
	v, rec := st.AfterEdge, st.Recovery
	if st.Collapses {
		v, rec = c.Required(), p.RecoverySpec
	}
	edge := charge.Edge{}
	if p.Edges {
		edge = c.EdgeCharges(v, rec)
	}
	return charge.AppendItems(c.budgetAt[:0], c.Loads(), edge, charge.Interval{Period: p.T, OnTime: p.OnTime, Voltage: v})
}

// Drop is the voltage budget of C_B: what recharge leaves above a voltage that V_BS must keep, or the permitted ripple where that is
// smaller [V].
func (c *Circuit) Drop(keep float64) float64 {
	if c.Point.HeldOn != nil {
		return c.Need(&c.Point.HeldOn.InitialVoltage) - keep
	}
	return charge.AllowedDrop(c.Left(keep), c.PermittedRipple())
}

// Left is what recharge leaves above a voltage that V_BS must keep [V].
func (c *Circuit) Left(keep float64) float64 { return c.recharged(charge.Consumed(c.Budget())) - keep }

// PermittedRipple is the policy's share of V_BS before the rising edge, or of the required voltage where there is no steady state [V].
func (c *Circuit) PermittedRipple() float64 {
	v := c.Steady().BeforeEdge
	if c.Steady().Collapses {
		v = c.Required()
	}
	return c.Policy.RippleRatio * v
}

// Kept is Required with the policy's margin [V].
func (c *Circuit) Kept() float64 {
	v := c.Required()
	return v + c.Margin(v)
}

// CycleCharge is what C_B delivers between two recharges [C]; with the high side held on, what it delivers during the hold.
func (c *Circuit) CycleCharge() float64 {
	if c.Point.HeldOn != nil {
		h, t := c.Hold()
		return h.Capacitance * (h.Start - h.Voltage(t))
	}
	return charge.Total(c.Budget())
}

// MinimumCapacitance is the smallest effective capacitance that keeps a voltage [F]; +Inf where none suffices. The hold law depends on t/C
// alone, so that held on it is C·t/t_hold.
func (c *Circuit) MinimumCapacitance(keep float64) float64 {
	if c.Point.HeldOn != nil {
		h, t := c.Hold()
		hold := h.Time(keep)
		if !(h.Start > keep) && keep == keep {
			return math.Inf(1)
		}
		return h.Capacitance * t / hold
	}
	v, _ := charge.MinimumCapacitance(c.CycleCharge(), c.Drop(keep))
	return v
}

// BreakEvenWindow is the shortest recharge window, of the same make-up as the present one, that replaces the charge of a period at the
// required voltage [s]. The element then delivers the mean of the currents that it carries in the parts of the window at the required voltage
// and the ripple above it; +Inf where they carry none.
func (c *Circuit) BreakEvenWindow() float64 {
	p := c.Period()
	q := charge.Consumed(c.Budget())
	v := c.Required() + q/p.Capacitance
	if v != v || !(p.Capacitance > 0) {
		return nan
	}
	sum := 0.0 // charge that the window would bring
	for i := range p.Off {
		if iv := &p.Off[i]; iv.Conducts {
			sum += iv.Duration * math.Max(0, p.Element.Current(iv.Drive-v))
		}
	}
	if mean := sum / p.Window; mean > p.On.Load {
		return q / mean
	}
	return math.Inf(1)
}

// RepetitivePeak is the largest current of the element in the steady state [A].
func (c *Circuit) RepetitivePeak() float64 { return c.peak(c.Period(), c.Steady()) }

// peak is the largest current of the element over a period in its steady state [A].
func (c *Circuit) peak(p *Period, st *recharge.Steady) float64 {
	v := st.Low + p.Return/p.Capacitance
	if st.Collapses {
		v = 0
	}
	peak := 0.0
	if v != v {
		return nan
	}
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
	p, st := c.Period(), c.Steady()
	if st.Collapses || st.Low != st.Low {
		return nan
	}
	v := st.Low + p.Return/p.Capacitance
	energy := 0.0
	for i := range p.Off {
		energy += loss.ResistorEnergy(p.Element, p.Off[i], p.Capacitance, v, r)
		v, _ = p.Element.Advance(v, p.Off[i], p.Capacitance)
	}
	return energy / p.T
}
