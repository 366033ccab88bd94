package circuit

import (
	"math"

	"floatrail/calc/corner"
	"floatrail/calc/modulation"
	"floatrail/calc/recharge"
	"floatrail/calc/stage"
)

// leg is the half-bridge as the modulation takes it.
func (c *Circuit) leg() *modulation.Leg {
	op, s, l := c.Point, c.Stage, &c.legAt
	if s.LowSide.Kind == "" {
		c.Want(s.LowSide.Field + ".kind")
	}
	loads, e := c.Loads(), c.edge()
	c.legAt = modulation.Leg{
		Element: c.Element(), Capacitance: c.Capacitance(), Supply: c.Supply(), Bus: c.bus(), Period: 1 / c.Need(&op.SwitchingFrequency),
		Shortest: c.shortestPulse(), Load: loads.Total(), PullDown: loads.PullDown, Ripple: c.Need(&op.RippleCurrent), LowTime: math.Inf(1),
		DiodeLow: s.LowSide.Kind == stage.DiodeOnly, Nodes: (*read)(c),
		Charge: e.gate + e.offBias + e.levelShift, ChargePerVolt: e.gatePerVolt, Least: e.offBias + e.levelShift, Junction: e.junction,
		RecoverySpec: e.recovery, RecoveryTau: e.tau,
	}
	if op.SixStep == nil {
		l.DeadTime = c.Need(&op.DeadTime)
	}
	if op.Sinusoidal != nil || c.peakCurrent() > 0 || op.SixStep != nil {
		l.NodeCharge = c.outputCharge(&s.HighSide, l.Bus) + c.outputCharge(&s.LowSide, l.Bus)
	}
	return l
}

// curve is a drop over the current of a position: points, level below the first, and on the last slope beyond the last.
type curve struct{ x, y []float64 }

func (d *curve) at(i float64) float64 {
	n := len(d.x)
	if n == 0 {
		return nan
	}
	if i <= d.x[0] || n == 1 {
		return d.y[0]
	}
	k := 1
	for k+1 < n && i > d.x[k] {
		k++
	}
	return d.y[k-1] + (d.y[k]-d.y[k-1])*(i-d.x[k-1])/(d.x[k]-d.x[k-1])
}

// read reads the node voltages of a draw each time anew.
type read Circuit

func (r *read) Freewheeling(i float64) float64 { return (*Circuit)(r).freewheelNode(i) }

func (r *read) LowOn(i float64) float64 {
	if r.Stage.LowSide.Kind == stage.DiodeOnly { // which has no channel to ask for
		return r.Freewheeling(i)
	}
	return (*Circuit)(r).LowSideNode(i)
}

// drawn are the node voltages of a draw, read once.
type drawn struct {
	reverse, channel  curve
	shunt, resistance float64 // [ohm]
	kind              string
}

// nodes reads the node voltages once, for the thousands of periods of a modulated operating point at currents up to one [A].
func (c *Circuit) nodes(most float64) *drawn {
	s := &c.Stage.LowSide
	r := (*read)(c) // which notes what is missing or assumed
	r.Freewheeling(most)
	r.LowOn(most)
	r.LowOn(-most)
	out := &drawn{kind: s.Kind}
	for i := range s.Reverse.ForwardPoints.Items {
		x := c.Need(&s.Reverse.ForwardPoints.Items[i].Current) * s.Count()
		out.reverse.x, out.reverse.y = append(out.reverse.x, x), append(out.reverse.y, c.ReverseDrop(s, x))
	}
	for i := range s.ChannelPoints.Items {
		x := c.Need(&s.ChannelPoints.Items[i].Current) * s.Count()
		out.channel.x, out.channel.y = append(out.channel.x, x), append(out.channel.y, c.channelDrop(s, x))
	}
	out.shunt = c.shunt()
	if s.Kind != stage.IGBT && s.Kind != stage.DiodeOnly {
		out.resistance = c.Need(&s.OnResistance) / s.Count()
	}
	return out
}

// Freewheeling is freewheelNode.
func (d *drawn) Freewheeling(i float64) float64 {
	if i > 0 {
		return -d.reverse.at(i) - i*d.shunt
	}
	return 0
}

// LowOn is LowSideNode.
func (d *drawn) LowOn(i float64) float64 {
	switch {
	case d.kind == stage.DiodeOnly, d.kind == stage.IGBT && i >= 0:
		return d.Freewheeling(i)
	case d.kind == stage.IGBT:
		return d.channel.at(-i) - i*d.shunt
	}
	drop := i * d.resistance
	if i > 0 && len(d.reverse.x) > 0 && drop > 0.3 { // the body diode takes over where the channel drops more
		drop = math.Min(drop, d.reverse.at(i))
	}
	return -drop - i*d.shunt
}

// complete tells whether a leg has all its numbers for currents up to one out of the node [A].
func complete(l *modulation.Leg, current float64) bool {
	sum := l.Element.Resistance + l.Element.Slope + l.Element.LogSaturation + l.Capacitance + l.Supply + l.Bus + l.Period + l.DeadTime + l.Shortest +
		l.Load + l.PullDown + l.NodeCharge + l.Ripple + l.Charge + l.ChargePerVolt + l.Junction + l.RecoverySpec + l.RecoveryTau
	if current != 0 {
		sum += l.Nodes.Freewheeling(math.Abs(current)) + l.Nodes.LowOn(current) + l.Nodes.LowOn(-current)
	}
	return sum == sum && !math.IsInf(l.Period, 0)
}

// Cycle is the periods of a modulated operating point, which differ from one another, with their periodic solution.
type Cycle struct {
	modulation.Steady
	Plan *modulation.Plan // nil where an input is missing
}

// perPeriod is a sum over all periods as the mean of one of the carrier.
func (y *Cycle) perPeriod(sum float64) float64 {
	if y.Plan == nil {
		return nan
	}
	return sum * y.Plan.Carrier() / y.Plan.Time()
}

// modulated tells whether the carrier periods of an operating point differ from one another.
func (c *Circuit) modulated() bool {
	return c.Point != nil && c.Point.FixedDuty == nil && c.Point.HeldOn == nil
}

// Cycle finds the periodic solution over a fundamental, a revolution, or a burst with its pause.
func (c *Circuit) Cycle() *Cycle {
	return corner.Memo(c.Draw, slotCycle, true, &c.cycleAt, func() Cycle {
		var like modulation.Steady
		if typ := c.typical(); typ != c {
			like = typ.Cycle().Steady
		} else {
			like.Start = nan
		}
		return c.cycle(&like)
	})
}

// fewestPeriods of the carrier that a fundamental needs to be modulated.
const fewestPeriods = 6

var zeroSequences = map[string]modulation.ZeroSequence{"NONE": modulation.None, "THIRD_HARMONIC": modulation.ThirdHarmonic, "MIN_MAX": modulation.MinMax,
	"CLAMP_60": modulation.Clamp60, "CLAMP_120_HIGH": modulation.Clamp120High, "CLAMP_120_LOW": modulation.Clamp120Low}

// plan is the periods of a modulated operating point; nil where an input is missing.
func (c *Circuit) plan() *modulation.Plan {
	return *corner.Memo(c.Draw, slotPlan, false, &c.planAt, c.makePlan)
}

func (c *Circuit) makePlan() *modulation.Plan {
	op := c.Point
	own := *c.leg() // plans outlive the draw
	l, current := &own, c.Need(&op.LoadCurrent)
	l.Nodes = c.nodes(math.Abs(current))
	usable := complete(l, current)
	fundamental := func(f float64) {
		if f*l.Period*fewestPeriods > 1 {
			c.Open("the fundamental has fewer than 6 periods of the switching frequency")
			usable = false
		}
	}
	switch {
	case op.Sinusoidal != nil:
		m := op.Sinusoidal
		z, known := zeroSequences[m.ZeroSequence]
		if !known {
			c.Want(m.Field + ".zeroSequence")
		}
		in := modulation.Sinusoidal{Index: c.Need(&m.ModulationIndex), Fundamental: c.Need(&m.FundamentalFrequency),
			Displacement: c.Need(&m.DisplacementAngle), Current: current, ZeroSequence: z}
		fundamental(in.Fundamental)
		if sum := in.Index + in.Fundamental + in.Displacement; usable && known && sum == sum {
			return l.Sinusoidal(in)
		}
	case op.SixStep != nil:
		m := op.SixStep
		if m.Chopping == "" {
			c.Want(m.Field + ".chopping")
		}
		in := modulation.SixStep{Electrical: c.Need(&m.ElectricalFrequency), Duty: c.Need(&m.Duty), Current: current,
			High: m.Chopping != "LOW_SIDE", Low: m.Chopping != "HIGH_SIDE"}
		fundamental(in.Electrical)
		if sum := in.Electrical + in.Duty; usable && m.Chopping != "" && sum == sum {
			return l.SixStep(in)
		}
	case op.Burst != nil:
		m := op.Burst
		in := modulation.Burst{Duty: c.Need(&m.Duty), Current: current, Active: c.Need(&m.ActiveTime), Idle: c.Need(&m.IdleTime),
			IdleNode: c.Need(&m.IdleNodeVoltage)}
		if sum := in.Duty + in.Active + in.Idle + in.IdleNode; usable && sum == sum {
			return l.Burst(in)
		}
	}
	return nil
}

func (c *Circuit) cycle(like *modulation.Steady) Cycle {
	out := Cycle{}
	out.Low, out.OnLow, out.High = modulation.Extreme{Value: nan}, modulation.Extreme{Value: nan}, modulation.Extreme{Value: nan}
	out.Droop, out.Held, out.OnHeld, out.Charge, out.Start = nan, nan, nan, nan, nan
	p := c.plan()
	if p == nil {
		return out
	}
	out.Steady, out.Plan = p.SteadyLike(like), p
	if !out.Converged {
		c.Open("the periodic solution was not found")
	}
	return out
}

// names of the kinds of interval.
var kindNames = [...]string{modulation.Waiting: IntervalNone, modulation.FirstDead: IntervalFirstDead, modulation.LowSide: IntervalLowSide,
	modulation.SecondDead: IntervalSecondDead, modulation.Freewheel: IntervalFreewheel, modulation.Idle: IntervalIdle}

// described is one carrier period in the models' terms.
func (c *Circuit) described(y modulation.Layout, names []string) Period {
	p := Period{Period: y.Period, T: y.Time, OnTime: y.OnTime, LowOnTime: y.LowTime, Window: y.Window, Edges: y.Gated, HighVanishes: y.HighVanishes,
		LowVanishes: y.LowVanishes, Names: names}
	for _, k := range y.Kinds {
		p.Names = append(p.Names, kindNames[k])
	}
	return p
}

// representative is the period in which V_BS is lowest, with the means of all periods for what adds up.
func (c *Circuit) representative() Period {
	y := c.Cycle()
	if y.Plan == nil || !(y.Low.Period >= 0) {
		if y.Plan == nil || !y.Collapses {
			return Period{}
		}
	}
	p := c.described(y.Plan.At(math.Max(0, y.Low.Period)), nil) // the first, whatever V_BS it is that nothing holds
	p.T, p.Window, p.OnTime = y.Plan.Carrier(), y.perPeriod(y.Window), y.perPeriod(y.OnTime)
	return p
}

// overall is the periodic solution of a modulated operating point in the terms of one period.
func (c *Circuit) overall() recharge.Steady {
	y := c.Cycle()
	st := recharge.Steady{Low: nan, High: nan, AfterEdge: nan, BeforeEdge: nan, Deficit: nan, Recovery: nan, Charge: nan, Offset: nan, HighInterval: -1,
		Collapses: y.Collapses, Converged: y.Converged}
	if y.Plan == nil || y.Collapses || !y.Converged {
		return st
	}
	low := y.Plan.At(y.Low.Period)
	flow := low.Element.Flow()
	pass := flow.Pass(&low.Period, y.Low.Before)
	st.Low, st.High, st.BeforeEdge, st.AfterEdge, st.Charge = y.Low.Value, y.High.Value, y.Held, y.Held, y.perPeriod(y.Charge)
	if low.Gated {
		st.AfterEdge = pass.After
	}
	st.Recovery = y.Recovery
	return st
}

// eachPass calls f with periods that stand for all, what happens in each, and the number of periods that it stands for.
func (y *Cycle) eachPass(f func(at modulation.Layout, p recharge.Passage, weight float64)) {
	var flow recharge.Flow
	first := true
	y.Each(func(at modulation.Layout, before, weight float64) {
		if first {
			flow, first = at.Element.Flow(), false
		}
		f(at, flow.Pass(&at.Period, before), weight)
	})
}
