package circuit

import (
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/corner"
	"floatrail/calc/modulation"
	"floatrail/calc/recharge"
)

// Low is the lowest V_BS of the operating point [V]; -Inf where there is no positive steady state.
func (c *Circuit) Low() float64 {
	if c.Point != nil && c.Point.HeldOn != nil {
		h, t := c.Hold()
		return h.Voltage(t)
	}
	if c.modulated() {
		y := c.Cycle()
		if y.Collapses {
			return math.Inf(-1)
		}
		return y.Low.Value
	}
	st := c.Steady()
	if st.Collapses {
		return math.Inf(-1)
	}
	return st.Low
}

// LowForward is the lowest V_BS while the high-side channel carries forward current [V]; +Inf where it never does.
func (c *Circuit) LowForward() float64 {
	if c.modulated() {
		y := c.Cycle()
		switch {
		case y.Collapses:
			return math.Inf(-1)
		case y.Plan != nil && y.OnLow.Period < 0:
			return math.Inf(1)
		}
		return y.OnLow.Value
	}
	if v := c.Low(); c.Forward() || v != v {
		return v
	}
	return math.Inf(1)
}

// Reserve is the smaller distance of the lowest V_BS to the falling lockout, and of the lowest while the high-side channel carries forward current to
// the specified drive [V].
func (c *Circuit) Reserve() float64 {
	spare := c.Low() - c.Need(&c.Stage.Driver.UVLOFalling)
	if c.Forward() {
		spare = math.Min(spare, c.LowForward()-c.driveNeeded())
	}
	return spare
}

// driveNeeded is the V_BS at which the gate has the drive of the specified on-state [V].
func (c *Circuit) driveNeeded() float64 {
	drive := c.Need(&c.Stage.HighSide.DriveVoltageMin)
	if b := c.OffBias(&c.Stage.HighSide); b.Split {
		drive -= b.Voltage
	}
	return drive
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
	if c.modulated() {
		if c.driveBinds() {
			return c.driveNeeded()
		}
		return v
	}
	if c.Forward() {
		v = math.Max(v, c.driveNeeded())
	}
	return v
}

// Droop is the fall of V_BS from before a rising edge to the next recharge, the largest of all periods [V]; +Inf where nothing is known of it.
func (c *Circuit) Droop() float64 {
	if c.modulated() {
		y := c.Cycle()
		if y.Collapses { // C_B is empty at its end
			return math.Inf(1)
		}
		return y.Droop
	}
	st := c.Steady()
	if st.Collapses {
		p := c.Period()
		return (p.Charge + p.ChargePerVolt*c.Required() + p.On.Load*p.OnTime) / p.Capacitance
	}
	return st.BeforeEdge - st.Low
}

// CapacitanceCancels tells whether the deficit does not depend on C_B: the recharge window is short against R·C. Over a fundamental it is so where
// twice the capacitance takes less than a tenth off the fall of V_BS below where recharge tends to.
func (c *Circuit) CapacitanceCancels() bool {
	switch {
	case c.Point == nil || c.Point.HeldOn != nil:
		return false
	case !c.modulated():
		p := c.Period()
		return p.Window > 0 && p.Window < 0.2*p.Element.Resistance*p.Capacitance
	}
	y := c.Cycle()
	if y.Plan == nil || !y.Converged {
		return false
	}
	if w, p := y.perPeriod(y.Window), c.Period(); !(w > 0) || w > 0.2*p.Element.Resistance*p.Capacitance {
		return false
	}
	if y.Collapses { // so large a capacitor that nothing empties it tells whether enough comes in the mean
		e, v := c.edge(), c.Required()
		leaves := c.Loads().Total()*y.Plan.Time() + y.Gates*math.Max(0, e.gate+e.offBias+e.levelShift+e.gatePerVolt*v)
		return y.Plan.WithCapacitance(c.Capacitance() + leaves/unmoved).Steady(nan).Collapses
	}
	twice := y.Plan.WithCapacitance(2 * c.Capacitance()).Steady(y.Start)
	if twice.Collapses {
		return false
	}
	return c.Settled()-twice.Low.Value > 0.9*(c.Settled()-y.Low.Value)
}

// unmoved is by how little a capacitor's voltage moves that is taken to have none [V].
const unmoved = 0.1

// PeriodsToLockout counts the periods from the settled supply until V_BS falls below its lockout; 0 where that cannot be told.
func (c *Circuit) PeriodsToLockout() int {
	lockout := c.Need(&c.Stage.Driver.UVLOFalling)
	if c.modulated() {
		y := c.Cycle()
		if y.Plan == nil {
			return 0
		}
		return max(0, y.Plan.PeriodsUntil(c.Supply()-c.Element().Drop(1e-3), lockout, mostModulated))
	}
	return max(0, c.Period().PeriodsUntil(c.ChargedTo(), lockout, mostCounted))
}

// ChargedTo is the V_BS to which the low side at the load current charges C_B [V].
func (c *Circuit) ChargedTo() float64 {
	return c.Supply() - c.Element().Drop(1e-3) - c.LowSideNode(c.Need(&c.Point.LoadCurrent))
}

// How many periods are counted until lockout; where each has a law of its own fewer.
const (
	mostCounted   = 100_000
	mostModulated = 20_000
)

// Forward tells whether the high-side channel carries forward current in some on-time.
func (c *Circuit) Forward() bool {
	switch {
	case c.Point == nil:
		return false
	case c.Point.SixStep != nil: // in the sector of the high side the current has the sign that is written
		return c.Need(&c.Point.LoadCurrent)+c.Need(&c.Point.RippleCurrent)/2 > 0
	}
	return c.peakCurrent() > 0
}

// Margin is the policy's margin on a threshold [V].
func (c *Circuit) Margin(limit float64) float64 {
	return math.Max(c.Policy.LockoutMargin, c.Policy.LockoutMarginRatio*math.Abs(limit))
}

// Budget is the charge budget of one period at the steady state, or where there is none at the required voltage.
func (c *Circuit) Budget() []charge.Item {
	return *corner.Memo(c.Draw, slotBudget, false, &c.budgetAt, c.budget)
}

// edgeCharge is what leaves at a rising edge in the steady state, or where there is none at the required voltage, and that voltage [V].
func (c *Circuit) edgeCharge() (edge charge.Edge, v float64) {
	st := c.Steady()
	v, rec := st.AfterEdge, st.Recovery
	if st.Collapses {
		v, rec = c.Required(), c.Period().RecoverySpec
	}
	return c.EdgeCharges(v, rec), v
}

// EdgeGate is the gate charge of one rising edge [C]; 0 where the node never rises. A mean over all periods says nothing beside it of a modulation
// that turns the high side on in some of them only.
func (c *Circuit) EdgeGate() float64 {
	if !c.modulated() && !c.Period().Edges {
		return 0
	}
	edge, _ := c.edgeCharge()
	return edge.Gate
}

func (c *Circuit) budget() []charge.Item {
	p := c.Period()
	edge, v := c.edgeCharge()
	switch {
	case c.modulated():
		y := c.Cycle()
		edge = edge.Share(y.perPeriod(y.Gates))
	case !p.Edges:
		edge = charge.Edge{}
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
func (c *Circuit) Left(keep float64) float64 {
	if c.modulated() {
		left := math.Inf(1)
		c.eachFall(keep > c.Required(), func(from, _, keep float64) { left = math.Min(left, from-keep) })
		return left
	}
	return c.recharged(charge.Consumed(c.Budget())) - keep
}

// eachFall calls f with the falls of V_BS at a modulated operating point that end nearest to what they must keep, with the policy's margin or without:
// V_BS before, at the end, and what it keeps there [V]. Which of them asks for the largest capacitance is another question than which ends nearest.
func (c *Circuit) eachFall(margin bool, f func(from, to, keep float64)) {
	y := c.Cycle()
	kept := func(v float64) float64 {
		if margin {
			return v + c.Margin(v)
		}
		return v
	}
	lockout := kept(c.Need(&c.Stage.Driver.UVLOFalling))
	if c.emptied() {
		f(math.Inf(-1)+0*lockout, math.Inf(-1), lockout)
		return
	}
	f(y.Held, y.Low.Value, lockout)
	if c.Forward() && (y.Plan == nil || y.OnLow.Period >= 0) {
		f(y.OnHeld, y.OnLow.Value, kept(c.driveNeeded()))
	}
}

// SpareVoltage is how far V_BS stays above what it must keep, with the policy's margin or without, whatever ripple is permitted [V].
func (c *Circuit) SpareVoltage(margin bool) float64 {
	if !c.modulated() {
		keep := c.Required()
		if margin {
			keep = c.Kept()
		}
		return c.Left(keep) - c.CycleCharge()/c.Capacitance()
	}
	spare := math.Inf(1)
	c.eachFall(margin, func(_, to, keep float64) { spare = math.Min(spare, to-keep) })
	return spare
}

// RippleSpare is how far the fall of V_BS stays below the permitted ripple [V].
func (c *Circuit) RippleSpare() float64 {
	if c.modulated() {
		return c.PermittedRipple() - c.Droop()
	}
	return c.PermittedRipple() - c.CycleCharge()/c.Capacitance()
}

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
	if c.modulated() {
		if c.emptied() {
			return math.Inf(1)
		}
		from, to := c.fallen()
		return c.Capacitance() * (from - to)
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
	if c.modulated() { // the falls are in proportion to 1/C, whatever they start from
		most := c.Droop() / c.PermittedRipple()
		c.eachFall(keep > c.Required(), func(from, to, keep float64) {
			ratio := (from - to) / (from - keep)
			if from-keep <= 0 {
				ratio = math.Inf(1)
			}
			most = math.Max(most, ratio)
		})
		return c.Capacitance() * most
	}
	v, _ := charge.MinimumCapacitance(c.CycleCharge(), c.Drop(keep))
	return v
}

// BreakEvenWindow is the shortest recharge window, of the same make-up as the present one, that replaces the charge of a period at the
// required voltage [s]. The element then delivers the mean of the currents that it carries in the parts of the window at the required voltage
// and the ripple above it; +Inf where they carry none.
func (c *Circuit) BreakEvenWindow() float64 {
	if c.modulated() {
		return c.breakEvenOfCycle()
	}
	p := c.Period()
	q := charge.Consumed(c.Budget())
	v := c.Required() + q/p.Capacitance
	if v != v || !(p.Capacitance > 0) {
		return nan
	}
	return breakEven(q, brought(&p.Period, v), p.Window, p.On.Load)
}

// breakEvenOfCycle is BreakEvenWindow of a modulated operating point, whose windows are taken to grow all alike.
func (c *Circuit) breakEvenOfCycle() float64 {
	y := c.Cycle()
	if y.Plan == nil {
		return nan
	}
	v, q, loads := c.Required(), y.perPeriod(y.Charge), c.Loads().Total()
	if c.emptied() { // what leaves at the required voltage, whatever comes
		e := c.edge()
		q = loads*y.Plan.Carrier() + y.perPeriod(y.Gates)*math.Max(0, e.gate+e.offBias+e.levelShift+e.gatePerVolt*v)
	}
	// What V_BS falls in a long time without recharge is for the capacitor to bear, not for the window.
	if v += q / c.Capacitance(); v != v || q != q {
		return nan
	}
	sum := 0.0
	y.Each(func(at modulation.Layout, _, weight float64) { sum += weight * brought(&at.Period, v) })
	return breakEven(q, y.perPeriod(sum), y.perPeriod(y.Window), loads)
}

// breakEven is the window that brings a charge where another one brings so much [s], [C], if it carries more than the load [A].
func breakEven(q, brings, window, load float64) float64 {
	if mean := brings / window; mean > load {
		return q / mean
	}
	return math.Inf(1)
}

// brought is the charge that the recharge window of a period would bring at a floating voltage [C], [V].
func brought(p *recharge.Period, v float64) float64 {
	sum := 0.0
	for i := range p.Off {
		if iv := &p.Off[i]; iv.Conducts {
			sum += iv.Duration * math.Max(0, p.Element.Current(iv.Drive-v))
		}
	}
	return sum
}
