package circuit

import (
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/corner"
	"floatrail/calc/recharge"
	"floatrail/calc/stage"
)

// Names of the intervals in which C_B can be recharged.
const (
	IntervalFirstDead  = "dead time after the high side turns off"
	IntervalLowSide    = "low side on"
	IntervalFreewheel  = "freewheeling of the low-side diode"
	IntervalSecondDead = "dead time before the high side turns on"
	IntervalNone       = ""
)

// Period is one switching period in the models' terms.
type Period struct {
	recharge.Period
	Names        []string // of Off
	T            float64  // length of a period [s]
	OnTime       float64  // the high side conducts [s]
	LowOnTime    float64  // the low-side gate is on [s]
	Window       float64  // the element can recharge C_B [s]
	Edges        bool     // the node rises and falls; without a high-side pulse it does not
	HighVanishes bool     // the high-side pulse is shorter than the driver passes
	LowVanishes  bool     // the low-side pulse is shorter than the driver passes
}

// peakCurrent and valleyCurrent are the ends of the ripple of the current out of the node [A].
func (c *Circuit) peakCurrent() float64 { return c.current(1) }

func (c *Circuit) valleyCurrent() float64 { return c.current(-1) }

// current is the load current with half the ripple to one side [A]. That of a modulated leg runs through both signs.
func (c *Circuit) current(side float64) float64 {
	if alternates(c.Point) {
		return c.Open(noModel)
	}
	return c.Need(&c.Point.LoadCurrent) + side*c.Need(&c.Point.RippleCurrent)/2
}

// alternates tells whether the current of an operating point runs through both signs.
func alternates(op *stage.OperatingPoint) bool { return op.Sinusoidal != nil || op.SixStep != nil }

// ReverseDrop is the drop of a switch in reverse conduction at a positive total current [V]: its points, linear between them; level below
// the first, and beyond the last on the last slope. That of a HEMT grows by the gate voltage of its points less the off bias.
func (c *Circuit) ReverseDrop(s *stage.Switch, i float64) float64 {
	points := s.Reverse.ForwardPoints.Items
	if len(points) == 0 {
		return c.Want(s.Reverse.ForwardPoints.Field)
	}
	i /= s.Count()
	hemt := s.Kind == stage.GaNHEMT
	at := func(k int) (x, y float64) {
		q := &points[k].Voltage
		y = c.Need(q)
		if hemt && len(q.At) == 0 {
			y += 2e-3 * (c.Set.Junction - stage.ReferenceTemperature) // no junction: the drop does not follow the diode law
			if c.Set.Junction != stage.ReferenceTemperature {
				c.Assume(stage.Assumption{Field: s.Reverse.ForwardPoints.Field, Assumed: "the drop at 25 °C", Direction: stage.Optimistic,
					Reason: "the reverse drop of a HEMT moves with temperature and is given at one only"})
			}
		}
		return c.Need(&points[k].Current), y
	}
	x0, y0 := at(0)
	drop := y0
	switch {
	case i == x0:
	case len(points) == 1:
		c.Assume(stage.Assumption{Field: s.Reverse.ForwardPoints.Field, Assumed: "the drop at the one point given", Direction: stage.Optimistic,
			Reason: "the current is not that of the only point"})
	case i < x0:
	default:
		k := 1
		x1, y1 := at(1)
		for i > x1 && k+1 < len(points) {
			x0, y0 = x1, y1
			k++
			x1, y1 = at(k)
		}
		drop = y0 + (y1-y0)*(i-x0)/(x1-x0)
	}
	if hemt {
		off := c.Need(&s.OffBias)
		taken, ok := c.Has(&s.Reverse.GateVoltage)
		if !ok {
			taken = 0
			if off != 0 {
				c.Want(s.Reverse.GateVoltage.Field)
			}
		}
		drop += taken - off
	}
	return drop
}

// shunt is the resistance of the current shunt [ohm].
func (c *Circuit) shunt() float64 {
	s := &c.Stage.Layout.Shunt
	switch s.Presence() {
	case stage.NotFitted:
		return 0
	case stage.PresenceUnknown:
		c.Assume(stage.Assumption{Field: s.Field, Assumed: "0 Ω", Direction: stage.Optimistic, Reason: "no shunt is given; none is assumed"})
		return 0
	}
	return c.Need(&s.Resistance)
}

// LowSideNode is V_LS, the node voltage while the low side is on, at a current out of the node [V].
func (c *Circuit) LowSideNode(i float64) float64 {
	s := &c.Stage.LowSide
	if s.Kind == stage.IGBT || s.Kind == stage.DiodeOnly {
		if i > 0 {
			return -c.ReverseDrop(s, i) - i*c.shunt()
		}
		if i == 0 {
			return 0
		}
		return c.channelDrop(s, -i) - i*c.shunt()
	}
	if s.Kind == "" {
		return c.Want(s.Field + ".kind")
	}
	channel := i * c.Need(&s.OnResistance) / s.Count()
	if i > 0 && len(s.Reverse.ForwardPoints.Items) > 0 && channel > 0.3 { // the body diode takes over where the channel drops more
		channel = math.Min(channel, c.ReverseDrop(s, i))
	}
	return -channel - i*c.shunt()
}

// channelDrop is the on-state voltage of an IGBT at a positive current [V].
func (c *Circuit) channelDrop(s *stage.Switch, i float64) float64 {
	points := s.ChannelPoints.Items
	if len(points) == 0 {
		return c.Want(s.ChannelPoints.Field)
	}
	i /= s.Count()
	x0, y0 := c.Need(&points[0].Current), c.Need(&points[0].Voltage)
	if i <= x0 || len(points) == 1 {
		return y0
	}
	for k := 1; k < len(points); k++ {
		x1, y1 := c.Need(&points[k].Current), c.Need(&points[k].Voltage)
		if i <= x1 || k+1 == len(points) {
			return y0 + (y1-y0)*(i-x0)/(x1-x0)
		}
		x0, y0 = x1, y1
	}
	return y0
}

// outputCharge is Q_oss of a switch up to the DC-link voltage, all devices in parallel [C].
func (c *Circuit) outputCharge(s *stage.Switch, v float64) float64 {
	if len(s.OutputCapacitance.Items) == 0 {
		return c.Need(&s.CommutationCharge)
	}
	return c.output(s).Charge(v)
}

// Modes that this rule set has no model for.
const noModel = "no model of this mode of operation in this rule set"

// Period lays out one switching period [design 4.3]. Only a fixed duty has one.
func (c *Circuit) Period() *Period {
	return corner.Memo(c.Draw, slotPeriod, false, &c.periodAt, c.period)
}

func (c *Circuit) period() Period {
	if c.Point == nil {
		c.NoPoint()
		return Period{}
	}
	if c.Point.FixedDuty == nil {
		c.Open(noModel)
		return Period{}
	}
	op, s := c.Point, c.Stage
	d, f := c.Need(&op.FixedDuty.Duty), c.Need(&op.SwitchingFrequency)
	dead := c.Need(&op.DeadTime)
	bus, vdd := c.Need(&op.BusVoltage), c.Supply()
	load, peak, valley := c.Need(&op.LoadCurrent), c.peakCurrent(), c.valleyCurrent()
	shortest := c.shortestPulse()
	el, loads, e := c.Element(), c.Loads(), c.edge()
	if s.LowSide.Kind == "" {
		c.Want(s.LowSide.Field + ".kind")
	}
	p := Period{T: 1 / f}
	p.Element, p.Capacitance = el, c.Capacitance()
	i0 := loads.Total()
	p.OnTime = d * p.T
	low := (1 - d) * p.T
	diode := s.LowSide.Kind == stage.DiodeOnly
	if d < 1 && d > 0 && !diode {
		p.OnTime = math.Max(0, p.OnTime-dead)
		low = math.Max(0, low-dead)
	}
	rest := 0.0 // neither switch conducts and the node floats
	if t, ok := c.Has(&op.FixedDuty.LowSideOnTime); ok && t < low {
		rest, low = low-t, t
	}
	p.HighVanishes = p.OnTime < shortest
	p.LowVanishes = d > 0 && !diode && low < shortest

	add := func(name string, t, node float64, conducts bool) {
		if t <= 0 {
			return
		}
		p.Off = append(p.Off, recharge.Interval{Duration: t, Drive: vdd - node, Conducts: conducts, Load: i0})
		p.Names = append(p.Names, name)
		if conducts {
			p.Window += t
		}
	}
	p.Off, p.Names = c.offAt[:0], c.namesAt[:0]
	if p.HighVanishes { // the low side stays on, or its diode carries the current
		p.OnTime, p.LowOnTime = 0, p.T
		if diode {
			add(IntervalFreewheel, p.T, c.freewheelNode(load), load > 0)
		} else {
			add(IntervalLowSide, p.T, c.LowSideNode(load), true)
		}
		p.On = recharge.Interval{Drive: vdd - bus, Load: i0}
		return p
	}
	fall := 0.0
	if peak > 0 {
		fall = (c.outputCharge(&s.HighSide, bus) + c.outputCharge(&s.LowSide, bus)) / peak
	}
	// A period begins as the node rises. Where it rises before the high side turns on, the loads of the time between are drawn with the edge:
	// the element is blocked, and V_BS is lowest after both.
	blocked := 0.0
	free := !el.Switch // a diode conducts whenever the node is low
	switch {
	case d >= 1:
		p.OnTime = p.T
	case diode || p.LowVanishes:
		// The node is low only while the load current freewheels through the low side.
		t := low
		if p.LowVanishes {
			t = low + 2*dead // both dead times and the pulse that vanished
			t = math.Min(t, p.T-p.OnTime)
		}
		fall = math.Min(fall, t)
		blocked = rest
		add(IntervalNone, fall, bus, false)
		add(IntervalFreewheel, t-fall, c.freewheelNode(load), load > 0 && free)
	default:
		p.LowOnTime = low
		held := valley > 0 && rest == 0
		if !held {
			blocked = rest + dead
		}
		if peak > 0 {
			t := math.Min(fall, dead)
			add(IntervalNone, t, bus, false)
			add(IntervalFirstDead, dead-t, c.freewheelNode(peak), free)
		} else {
			add(IntervalNone, dead, bus, false)
		}
		add(IntervalLowSide, low, c.LowSideNode(load), true)
		if held {
			add(IntervalSecondDead, dead, c.freewheelNode(valley), free)
		}
	}
	p.On = recharge.Interval{Duration: p.OnTime, Drive: vdd - bus, Conducts: free && bus < vdd, Load: i0, Conductance: loads.PullDown}
	if d >= 1 { // nothing rises or falls
		return p
	}
	p.Edges = true
	p.Charge = e.gate + e.offBias + e.levelShift + e.junction + i0*blocked
	p.ChargePerVolt = e.gatePerVolt
	p.ChargeLeast = e.offBias + e.levelShift + e.junction + i0*blocked
	p.Return = e.junction
	p.RecoverySpec, p.RecoveryTau = e.recovery, e.tau
	return p
}

// freewheelNode is the node voltage while a current out of the node flows through the low side in reverse, and the shunt [V]; 0 where it
// does not flow out.
func (c *Circuit) freewheelNode(i float64) float64 {
	if i > 0 {
		return -c.ReverseDrop(&c.Stage.LowSide, i) - i*c.shunt()
	}
	return 0
}

// complete tells whether a period has all its numbers.
func (p *Period) complete() bool {
	sum := p.T + p.OnTime + p.Charge + p.ChargePerVolt + p.Capacitance + p.Element.Resistance + p.On.Load + p.On.Conductance + p.On.Drive +
		p.RecoverySpec + p.RecoveryTau + p.Element.Slope + p.Element.LogSaturation
	for i := range p.Off {
		sum += p.Off[i].Duration + p.Off[i].Drive + p.Off[i].Load
	}
	return sum == sum && p.T > 0
}

// Steady is the periodic steady state; its numbers are NaN where the period is incomplete.
func (c *Circuit) Steady() *recharge.Steady {
	return corner.Memo(c.Draw, slotSteady, true, &c.steadyAt, func() recharge.Steady {
		offset := nan
		if typ := c.typical(); typ != c {
			offset = typ.Steady().Offset
		}
		return c.solve(c.Period(), offset)
	})
}

// typical is the circuit at the typical draw of the stage as it was given.
func (c *Circuit) typical() *Circuit { return Of(c.Space.Origin().Typical()) }

// solve finds the periodic steady state of a period, whose offset is that of the typical draw, NaN where that is not known.
func (c *Circuit) solve(p *Period, offset float64) recharge.Steady {
	if !p.complete() {
		return recharge.Steady{Low: nan, High: nan, AfterEdge: nan, BeforeEdge: nan, Deficit: nan, Recovery: nan, Charge: nan}
	}
	st := p.SteadyStateNear(offset)
	if !st.Converged && !st.Collapses {
		c.Open("the periodic steady state was not found")
	}
	return st
}

// Settled is the voltage toward which recharge tends [V]: at the drop of the junction alone at the mean recharge current, from which the
// deficit of the steady state counts. Where there is none, at the drop of the whole element at the standing load.
func (c *Circuit) Settled() float64 {
	if st := c.Steady(); st.Deficit == st.Deficit {
		return st.Low + st.Deficit
	}
	p := c.Period()
	el := p.Element
	best, recharged := nan, false
	for i := range p.Off {
		if iv := &p.Off[i]; iv.Conducts {
			recharged = true
			if v := el.Settled(iv.Drive, iv.Load); !(v <= best) {
				best = v
			}
		}
	}
	if !recharged { // nothing does: what stands is what the first charge left
		return el.Settled(c.Supply(), c.Loads().Total())
	}
	return best
}

// recharged is the voltage that the longest conducting interval reaches when it carries the mean recharge current of a charge per period [V].
func (c *Circuit) recharged(q float64) float64 {
	p := c.Period()
	best, at := 0.0, -1
	for i := range p.Off {
		if iv := &p.Off[i]; iv.Conducts && iv.Duration > best {
			best, at = iv.Duration, i
		}
	}
	switch {
	case !p.complete():
		return nan
	case at < 0:
		return c.Open("nothing recharges C_B in a period")
	}
	return p.Off[at].Drive - p.Element.Drop(math.Max(q/p.Window, p.Off[at].Load))
}

// Hold is V_BS while the high side is held on.
func (c *Circuit) Hold() (h charge.Hold, duration float64) {
	m := c.Point.HeldOn
	return charge.Hold{Start: c.Need(&m.InitialVoltage), Capacitance: c.Capacitance(), Loads: c.Loads()}, c.Need(&m.Duration)
}

// lowVanishes tells whether the low-side pulse of a fixed duty is shorter than the driver passes.
func (c *Circuit) lowVanishes() bool {
	op := c.Point
	if op.FixedDuty == nil {
		return false
	}
	d := c.Need(&op.FixedDuty.Duty)
	low := (1-d)/c.Need(&op.SwitchingFrequency) - c.Need(&op.DeadTime)
	if t, ok := c.Has(&op.FixedDuty.LowSideOnTime); ok {
		low = math.Min(low, t)
	}
	return d > 0 && low < c.shortestPulse()
}

// shortestPulse is the shortest command that the driver passes whole [s].
func (c *Circuit) shortestPulse() float64 {
	return c.Need(&c.Stage.Driver.MinimumPulse) + c.Need(&c.Stage.Driver.EdgeTime)
}

// HighPulse is the pulse that the high side is commanded for in a period, whether the driver passes it or not [s].
func (c *Circuit) HighPulse() float64 {
	switch {
	case c.Point == nil:
		return c.NoPoint()
	case c.Point.FixedDuty == nil:
		return c.Open(noModel)
	case c.Stage.LowSide.Kind == "":
		return c.Want(c.Stage.LowSide.Field + ".kind")
	}
	pulse := c.Need(&c.Point.FixedDuty.Duty) / c.Need(&c.Point.SwitchingFrequency)
	if c.Stage.LowSide.Kind != stage.DiodeOnly {
		pulse -= c.Need(&c.Point.DeadTime)
	}
	return math.Max(0, pulse)
}
