package circuit

import (
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/modulation"
)

// driveBinds tells whether at a modulated operating point the drive while the channel carries forward current is nearer to its limit than the lowest
// V_BS to its lockout.
func (c *Circuit) driveBinds() bool {
	y := c.Cycle()
	return c.Forward() && y.OnLow.Value-c.driveNeeded() < y.Low.Value-c.Need(&c.Stage.Driver.UVLOFalling)
}

// fallen is V_BS before a modulated operating point's binding fall, and at its end [V].
func (c *Circuit) fallen() (from, to float64) {
	y := c.Cycle()
	if c.driveBinds() {
		return y.OnHeld, y.OnLow.Value
	}
	return y.Held, y.Low.Value
}

// emptied tells whether a modulated operating point has no periodic solution at all, so that nothing is known of any fall of V_BS.
func (c *Circuit) emptied() bool {
	y := c.Cycle()
	return y.Collapses && y.Held != y.Held
}

// Restart is V_BS at the first pulse after the pause of a burst [V].
func (c *Circuit) Restart() float64 {
	y := c.Cycle()
	if y.Collapses && y.Start != y.Start {
		return 0
	}
	return y.Start
}

// timing is what the periods of a modulated operating point say without any voltage.
func (c *Circuit) timing() modulation.Timing {
	if p := c.plan(); p != nil {
		return p.Timing()
	}
	return modulation.Timing{LongestOn: nan, WithoutRefresh: nan, ShortestHigh: nan, ShortestLow: nan}
}

// Vanishing tells which pulses of a modulated operating point the driver does not pass at some angles.
func (c *Circuit) Vanishing() (low, high bool) {
	t := c.timing()
	return t.LowVanishes, t.HighVanishes
}

// Unrefreshed is the longest time from the end of a recharge to the end of an on-time before the next one [s]; +Inf where nothing recharges C_B.
func (c *Circuit) Unrefreshed() float64 { return c.timing().WithoutRefresh }

// LongestOn is the longest uninterrupted on-time of the high side at a modulated operating point [s].
func (c *Circuit) LongestOn() float64 { return c.timing().LongestOn }

// ShortestLow is the shortest pulse of the low side at a modulated operating point [s]; +Inf without any.
func (c *Circuit) ShortestLow() float64 { return c.timing().ShortestLow }

// justShort is by what share a time that V_BS does not endure is shown shorter at least [1].
const justShort = 1e-3

// Endures is how long a modulated operating point's longest time without recharge could last until V_BS falls to what it must keep [s].
func (c *Circuit) Endures() float64 {
	t := c.Unrefreshed()
	y := c.Cycle()
	switch {
	case y.Plan == nil || t != t:
		return nan
	case math.IsInf(t, 1) || c.emptied():
		return 0
	}
	keep := c.Required()
	from, to := c.fallen()
	if to >= keep {
		h := charge.Hold{Start: to, Capacitance: c.Capacitance(), Loads: c.Loads()}
		return t + h.Time(keep)
	}
	return math.Min(c.heldFrom(from, keep), t*(1-justShort)) // too long, whatever the loads did before the high side turned on
}

// Stall is how long the high side can stay on where the fundamental stops as it turns on for long, from V_BS in running operation to what V_BS must
// keep [s]; +Inf where the modulation never holds it on, and a stalled leg goes on switching.
func (c *Circuit) Stall() float64 {
	y := c.Cycle()
	switch {
	case y.Plan == nil:
		return nan
	case y.Collapses:
		return 0
	case !(c.LongestOn() > y.Plan.Carrier()):
		return math.Inf(1)
	}
	keep := c.Need(&c.Stage.Driver.UVLOFalling)
	if c.Forward() {
		keep = math.Max(keep, c.driveNeeded())
	}
	return c.heldFrom(y.Held, keep)
}

// heldFrom is how long the high side can stay on from V_BS just before it turns on, until V_BS falls to what it must keep [V], [s].
func (c *Circuit) heldFrom(before, keep float64) float64 {
	e := c.edge()
	h := charge.Hold{Capacitance: c.Capacitance(), Loads: c.Loads()}
	h.Start = (h.Capacitance*before - e.gate - e.offBias - e.levelShift - e.junction) / (h.Capacitance + e.gatePerVolt)
	return h.Time(keep)
}

// HighPeriod is the period in which V_BS is highest, and the number of the interval that ends there; negative: the edge or the on-time.
func (c *Circuit) HighPeriod() (*Period, int) {
	if !c.modulated() {
		return c.Period(), c.Steady().HighInterval
	}
	y := c.Cycle()
	if y.Plan == nil || y.High.Period < 0 {
		return c.Period(), -1
	}
	at := y.Plan.At(y.High.Period)
	flow := at.Element.Flow()
	pass := flow.Pass(&at.Period, y.High.Before)
	p := c.described(at, nil)
	return &p, pass.HighInterval
}

// LowAngle is where in the fundamental V_BS is lowest [rad]; NaN where the operating point has none.
func (c *Circuit) LowAngle() float64 { return c.angle(func(y *Cycle) float64 { return y.Low.Period }) }

// HighAngle is where in the fundamental V_BS is highest [rad]; NaN where the operating point has none.
func (c *Circuit) HighAngle() float64 {
	return c.angle(func(y *Cycle) float64 { return y.High.Period })
}

// OnLowAngle is where in the fundamental V_BS is lowest while the high-side channel carries forward current [rad].
func (c *Circuit) OnLowAngle() float64 {
	return c.angle(func(y *Cycle) float64 { return y.OnLow.Period })
}

func (c *Circuit) angle(of func(*Cycle) float64) float64 {
	if c.Point == nil || !alternates(c.Point) {
		return nan
	}
	y := c.Cycle()
	if y.Plan == nil || !(of(y) >= 0) {
		return nan
	}
	return y.Plan.Angle(of(y))
}
