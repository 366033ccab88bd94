package circuit

import (
	"math"

	"floatrail/calc/corner"
	"floatrail/calc/recharge"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// Names of the intervals in which an undershoot adds to V_BS.
const (
	IntervalUndershoot = "undershoot after the high side turns off"
	IntervalRinging    = "undershoot after the low side turns on"
)

// pumps are the events that take the node below COM, with the interval of the period in which they fall.
var pumps = [...]struct {
	event    Event
	name     string
	followed []string // intervals of which they take the beginning
	mean     float64  // depth over the width of the dip [1]
}{
	{TurnOff, IntervalUndershoot, []string{IntervalFirstDead, IntervalFreewheel}, 1}, // of a current that falls along a line
	{SinkingTurnOn, IntervalRinging, []string{IntervalLowSide}, 2 / math.Pi},         // half a period of a sine
}

// Pumped is the period with the undershoot of its switching events as intervals of their own: the node stands at the mean depth of the dip for
// its width. The diode takes less of the shallow parts than of the mean, the resistor as much.
func (c *Circuit) Pumped() *Period {
	return corner.Memo(c.Draw, slotPumped, false, &c.kept().pumped, c.pumped)
}

func (c *Circuit) pumped() Period {
	defer func(was bool) { c.estimating = was }(c.estimating)
	c.estimating = false // what is kept with the draw is what the space asks for, whatever one rule looks at
	p := *c.base()
	k := c.kept()
	off, names := k.pumpedOff[:0], k.pumpedNames[:0]
	var buf [len(dipLevels)]Plateau
	var pending []Plateau                   // of a dip, deepest first, that the intervals so far have not had the time for
	name, plateau, goesOn := "", 0.0, false // the width of an estimate is no more than that of the dead time
	for i := range p.Off {
		iv := p.Off[i]
		for _, m := range pumps {
			if iv.Conducts && follows(m.followed, p.Names[i]) && Occurs(c.Stage, c.Point, m.event) && !c.absent(m.event) {
				pending, name, plateau, goesOn = c.parts(m.event, m.mean, buf[:0]), m.name, iv.Drive, c.Simulates(m.event)
			}
		}
		for iv.Conducts && len(pending) > 0 {
			part := &pending[0]
			dip := iv
			dip.Drive = c.Supply() - part.Node
			if !(part.Duration > 0) || dip.Drive <= math.Max(iv.Drive, plateau) { // not deeper than the interval itself, or the one that it began in
				if part.Duration != part.Duration || dip.Drive != dip.Drive {
					dip.Duration = nan
					off, names = append(off, dip), append(names, name)
				}
				pending = pending[1:]
				continue
			}
			if dip.Duration = math.Min(part.Duration, iv.Duration); !(dip.Duration > 0) {
				break
			}
			iv.Duration -= dip.Duration
			part.Duration -= dip.Duration
			off, names = append(off, dip), append(names, name)
			if iv.Duration <= 0 {
				break // the rest of the dip lies in what follows
			}
		}
		if !goesOn {
			pending = nil
		}
		off, names = append(off, iv), append(names, p.Names[i])
	}
	p.Off, p.Names = off, names
	return p
}

// base is the period on which undershoots act: of a modulated operating point that in which the largest current leaves the node, as if it
// repeated. V_BS over a whole fundamental does not rise above what the strongest of its periods would bring it to.
func (c *Circuit) base() *Period {
	if !c.modulated() {
		return c.Period()
	}
	k := c.kept()
	k.crest = c.crest()
	return &k.crest
}

func (c *Circuit) crest() Period {
	op, plan := c.Point, c.plan()
	if plan == nil {
		return Period{}
	}
	share := 0.0 // of the fundamental
	switch {
	case op.Sinusoidal != nil:
		share = math.Mod(c.Need(&op.Sinusoidal.DisplacementAngle)/(2*math.Pi)+1.25, 1)
		if c.Need(&op.LoadCurrent) < 0 {
			share = math.Mod(share+0.5, 1)
		}
	case op.SixStep != nil:
		share = 0.25
		if c.Need(&op.LoadCurrent) < 0 {
			share = 0.75
		}
	}
	return c.described(plan.Alone(math.Floor(share*float64(plan.Periods()))), nil)
}

// parts divides the dip of an event. A current that falls drives the flux L2·I into the loop of COM, so that the inductance shares in the depth
// for I/(di/dt) of the width; in the rest the diode alone does. The ringing after a turn-on stands at its mean for half a period.
func (c *Circuit) parts(e Event, mean float64, out []Plateau) []Plateau {
	if c.Simulates(e) {
		return c.strata(e, out)
	}
	w := c.Width(e)
	if e != TurnOff {
		return append(out, Plateau{mean * c.PinDip(e), w})
	}
	steep := math.Min(w, c.Current(e)/c.CurrentSlope(e))
	return append(out, Plateau{mean * c.PinDip(e), steep}, Plateau{c.clampedPin(-c.commutated(e, 0)), w - steep})
}

// strata is how long a simulated event holds the node between neighbouring levels, all its dips together, ringing included. The element's current
// returns to the node through R_VS, which is part of the element; a clamp at the pin would take some of it. Deepest first.
func (c *Circuit) strata(e Event, out []Plateau) []Plateau {
	k := c.Course(e, Running)
	if k == nil {
		return append(out, Plateau{nan, nan})
	}
	dips := k.BelowNode[len(k.BelowNode)-len(dipLevels):]
	for i := len(dips) - 1; i >= 0; i-- { // deepest first; that of the diode's plateau counts at its mean level until the watch ends, a little too much
		if !(dips[i].Total > 0) {
			continue
		}
		bottom, deeper := k.Ranges[transient.Node].Min, 0.0
		if i+1 < len(dips) && dips[i+1].Total > 0 {
			bottom, deeper = dips[i+1].Level, dips[i+1].Total
		}
		out = append(out, Plateau{(dips[i].Level + bottom) / 2, dips[i].Total - deeper})
	}
	return out
}

func follows(names []string, name string) bool {
	for _, n := range names {
		if n == name {
			return true
		}
	}
	return false
}

// pumpedSteadyState is the periodic steady state with the undershoots.
func (c *Circuit) pumpedSteadyState() *recharge.Steady {
	return corner.Memo(c.Draw, slotPumpedSteady, true, &c.kept().steady, func() recharge.Steady {
		if len(c.Pumped().Off) == len(c.base().Off) { // nothing dips
			return *c.Steady()
		}
		offset := nan
		if typ := c.typical(); typ != c {
			offset = typ.pumpedSteadyState().Offset
		}
		return c.solve(c.Pumped(), offset)
	})
}

// Highest is the highest V_BS of the operating point with what undershoots add to it, limited by a clamp where one is fitted [V].
func (c *Circuit) Highest() float64 {
	if c.Point != nil && c.Point.HeldOn != nil {
		return c.High()
	}
	st := c.pumpedSteadyState()
	switch {
	case st.Collapses:
		return c.High()
	case c.modulated():
		return math.Max(c.High(), c.clamped(st.High))
	}
	return c.clamped(st.High)
}

// Unclamped is Highest as if there were no clamp [V].
func (c *Circuit) Unclamped() float64 {
	if c.Point != nil && c.Point.HeldOn != nil {
		return c.Need(&c.Point.HeldOn.InitialVoltage)
	}
	st := c.pumpedSteadyState()
	switch {
	case st.Collapses:
		return c.Settled()
	case c.modulated():
		return math.Max(c.Steady().High, st.High)
	}
	return st.High
}

// clamped cuts a floating voltage at the clamp [V].
func (c *Circuit) clamped(v float64) float64 {
	switch z := &c.Stage.Bootstrap.Clamp; z.Presence() {
	case stage.Fitted:
		return math.Min(v, c.Need(&z.Voltage))
	case stage.PresenceUnknown:
		return c.Want(z.Field)
	}
	return v
}

// Gain is what the undershoots add to the highest V_BS [V].
func (c *Circuit) Gain() float64 { return c.Highest() - c.High() }

// ClampPower is the mean power of the clamp across V_BS [W]. While it holds V_BS, an interval whose drive lies above its voltage brings at most
// the element's current at that voltage for its whole length.
func (c *Circuit) ClampPower() float64 {
	v := c.Need(&c.Stage.Bootstrap.Clamp.Voltage)
	power := v * c.Need(&c.Stage.Bootstrap.Clamp.Leakage)
	if c.Point == nil || c.Point.HeldOn != nil || !(c.Unclamped() > v) {
		return power + c.Unclamped()*0
	}
	p := c.Pumped()
	brought := 0.0
	for i := range p.Off {
		if iv := &p.Off[i]; iv.Conducts {
			brought += iv.Duration * math.Max(0, p.Element.Current(iv.Drive-v))
		}
	}
	return power + v*brought/p.T
}

// Normal is the highest V_BS that recharge with the low side on gives [V], without dead times and undershoots.
func (c *Circuit) Normal() float64 {
	if c.Point == nil || c.Point.HeldOn != nil {
		return c.Element().Settled(c.Supply(), c.Loads().Total())
	}
	p, best := c.base(), nan
	for i := range p.Off {
		iv, name := &p.Off[i], p.Names[i]
		if !iv.Conducts || name == IntervalFirstDead || name == IntervalSecondDead {
			continue
		}
		if v := p.Element.Settled(iv.Drive, iv.Load); !(v <= best) {
			best = v
		}
	}
	return best
}

// PumpedPeak is the largest current of the element in the steady state with the undershoots [A].
func (c *Circuit) PumpedPeak() float64 {
	if c.Point == nil {
		return c.NoPoint()
	}
	peak := c.peak(c.Pumped(), c.pumpedSteadyState())
	if c.modulated() { // after a pause or a hold more flows than at the crest
		peak = math.Max(peak, c.RepetitivePeak())
	}
	return peak
}
