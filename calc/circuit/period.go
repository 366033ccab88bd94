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
	IntervalIdle       = "pause between bursts"
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

// peakCurrent and valleyCurrent are the ends of the ripple of the current out of the node [A]; of one that runs through both signs those at the
// crest at which it leaves the node.
func (c *Circuit) peakCurrent() float64 { return c.current(1) }

func (c *Circuit) valleyCurrent() float64 { return c.current(-1) }

// current is the load current with half the ripple to one side [A].
func (c *Circuit) current(side float64) float64 {
	i := c.Need(&c.Point.LoadCurrent)
	if alternates(c.Point) {
		i = math.Abs(i)
	}
	return i + side*c.Need(&c.Point.RippleCurrent)/2
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

// Period lays out one switching period [design 4.3]; of a modulated operating point the one in which V_BS is lowest.
func (c *Circuit) Period() *Period {
	return corner.Memo(c.Draw, slotPeriod, false, &c.periodAt, c.period)
}

func (c *Circuit) period() Period {
	switch {
	case c.Point == nil:
		c.NoPoint()
		return Period{}
	case c.Point.HeldOn != nil:
		c.Open("the high side is held on; there is no switching period")
		return Period{}
	case c.modulated():
		return c.representative()
	}
	l, d := c.leg(), c.Need(&c.Point.FixedDuty.Duty)
	if t, ok := c.Has(&c.Point.FixedDuty.LowSideOnTime); ok {
		l.LowTime = t
	}
	return c.described(l.Fixed(d, c.Need(&c.Point.LoadCurrent), &c.bufferAt), c.namesAt[:0])
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
		if c.modulated() {
			return c.overall()
		}
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
	if c.modulated() {
		return c.settledCycle()
	}
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

// settledCycle is Settled of a modulated operating point: in the period in which V_BS is lowest, where that is one with recharge, else V_BS before the
// time without recharge in which it falls.
func (c *Circuit) settledCycle() float64 {
	y := c.Cycle()
	if y.Plan == nil || y.Collapses {
		return c.Element().Settled(c.Supply(), c.Loads().Total())
	}
	p := c.Period()
	best := math.Inf(-1)
	for i := range p.Off {
		if iv := &p.Off[i]; iv.Conducts {
			best = math.Max(best, iv.Drive)
		}
	}
	if math.IsInf(best, -1) {
		return y.Held
	}
	return best - recharge.Element{Junction: p.Element.Junction, Switch: p.Element.Switch}.Drop(math.Max(c.AverageCurrent()*p.T/p.Window, p.On.Load))
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
	if c.modulated() {
		return c.timing().LowVanishes
	}
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

// LeastDuty is the smallest duty whose pulse the driver passes to the high side [1].
func (c *Circuit) LeastDuty() float64 {
	pulse := c.Value(&c.Stage.Driver.MinimumPulse) + c.Value(&c.Stage.Driver.EdgeTime)
	if c.Stage.LowSide.Kind != stage.DiodeOnly && c.Point.SixStep == nil {
		pulse += c.Value(&c.Point.DeadTime)
	}
	return pulse * c.Value(&c.Point.SwitchingFrequency)
}

// HighPulse is the shortest pulse that the high side is commanded for, whether the driver passes it or not [s]; +Inf where it is commanded for none.
func (c *Circuit) HighPulse() float64 {
	switch {
	case c.Point == nil:
		return c.NoPoint()
	case c.Stage.LowSide.Kind == "":
		return c.Want(c.Stage.LowSide.Field + ".kind")
	case c.modulated():
		return c.timing().ShortestHigh
	}
	pulse := c.Need(&c.Point.FixedDuty.Duty) / c.Need(&c.Point.SwitchingFrequency)
	if c.Stage.LowSide.Kind != stage.DiodeOnly {
		pulse -= c.Need(&c.Point.DeadTime)
	}
	return math.Max(0, pulse)
}
