package circuit

import (
	"math"
	"strconv"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
	"floatrail/calc/startup"
)

// sharing is the number of stages on the supply.
func (c *Circuit) sharing() int {
	g := &c.Stage.GateSupply
	if g.StagesSharing > 0 {
		return g.StagesSharing
	}
	c.assumeSharing(1, "this one alone is assumed")
	return 1
}

func (c *Circuit) assumeSharing(n int, what string) {
	c.Assume(stage.Assumption{Field: c.Stage.GateSupply.Field + ".stagesSharing", Assumed: strconv.Itoa(n), Direction: stage.Optimistic,
		Reason: "the number of stages on the supply is not given; " + what})
}

// Charged are the stages on the supply whose capacitors are charged: how many there are, and how many of them at once.
func (c *Circuit) Charged() (stages, atOnce int) {
	s, given := &c.Stage.Startup, c.Stage.GateSupply.StagesSharing
	switch {
	case given > 0:
		stages = max(given, s.Simultaneous)
	case s.Simultaneous > 1:
		stages = s.Simultaneous
		c.assumeSharing(stages, "those charged at once are assumed to be all")
	case c.stiff() && s.Simultaneous == 0 && !s.StageInterval.Given():
		stages = 1 // however many there are, each is charged by itself
	default:
		stages = c.sharing()
	}
	switch {
	case s.Simultaneous > 0:
		return stages, s.Simultaneous
	case s.StageInterval.Given():
		return stages, 1
	}
	return stages, stages
}

// stiff tells whether V_DD stands, as no reservoir is fitted in which it could be stored.
func (c *Circuit) stiff() bool { return c.Stage.GateSupply.Reservoir.Presence() == stage.NotFitted }

// order is the first charge of all stages on the supply, which are taken to be equal, in the order of the request, without a target.
func (c *Circuit) order() startup.Order {
	o := startup.Order{Reservoir: c.reservoir(), Target: math.NaN()}
	o.Stages, o.Count = c.Charged()
	q := &c.Stage.Startup.StageInterval
	if o.Waits = !q.Given(); !o.Waits {
		o.Interval = c.Need(q)
	}
	return c.limited(o)
}

// limited gives an order the supply's current. Groups that follow each other need its limit: what it brings meanwhile decides. All at once without it
// takes a supply that brings nothing, which is on the safe side.
func (c *Circuit) limited(o startup.Order) startup.Order {
	switch limit := &c.Stage.GateSupply.CurrentLimit; {
	case c.stiff():
	case o.Groups() > 1:
		o.SupplyCurrent = c.Need(limit)
	default:
		o.SupplyCurrent, _ = c.Has(limit)
		if o.SupplyCurrent != o.SupplyCurrent {
			o.SupplyCurrent = 0
		}
	}
	return o
}

// reservoir is C_VDD with one branch, without the supply's current; +Inf where V_DD stands.
func (c *Circuit) reservoir() startup.Reservoir {
	r := &c.Stage.GateSupply.Reservoir
	out := startup.Reservoir{Element: c.Element(), Bootstrap: c.Fresh(), Reservoir: math.Inf(1), Supply: c.Supply(),
		Initial: c.Need(&c.Stage.Startup.InitialVoltage), Load: c.Loads().Total()}
	switch r.Presence() {
	case stage.NotFitted:
	case stage.PresenceUnknown:
		out.Reservoir = c.Want(r.Field)
	default:
		out.Reservoir = c.Effective(r, c.Supply)
	}
	if out.Reservoir <= 0 || out.Bootstrap <= 0 {
		out.Reservoir = c.Open("the bias curves leave no capacitance at this voltage")
	}
	return out
}

// Order is the first charge in the order of the request: how many stages there are, how many of them start at once, whether a group waits for the
// one before, and else the time between two starts [s].
func (c *Circuit) Order() (stages, atOnce int, waits bool, interval float64) {
	o := c.order()
	if o.Groups() == 1 {
		return o.Stages, o.Stages, false, 0
	}
	return o.Stages, o.Count, o.Waits, o.Interval
}

// alternative is the other one of two orders: all at once for groups, one after another, each waiting for the one before, for all at once.
func (c *Circuit) alternative() startup.Order {
	o := c.order()
	if o.Groups() > 1 {
		return c.limited(o.Together())
	}
	return c.limited(o.OneByOne())
}

// Orders of the first charge.
const (
	requested = iota
	other
)

// charged is how an order goes: V_DD as with the low side held on, the time as it is pulsed, and the pulses of one stage.
type charged struct {
	startup.Outcome
	pulses int // 0: held on, or it never arrives
}

// charge follows one of the orders, once per draw.
func (c *Circuit) charge(which int) *charged {
	return corner.Memo(c.Draw, slotOrders+which, true, &c.ordersAt[which], func() charged {
		o := c.order()
		if which == other {
			o = c.alternative()
		}
		o.Target = c.FirstTarget()
		out := charged{Outcome: o.Run()}
		if c.pulsed() {
			out = c.chargePulsed(o, out.Lowest)
		}
		switch limit := &c.Stage.GateSupply.CurrentLimit; {
		case math.IsInf(out.Time, 1) && !c.stiff() && !limit.Given():
			out.Time = c.Need(limit) // without it nobody knows whether they arrive
		case out.Time != out.Time && c.known(o):
			out.Time = c.Open("the first charge of the stages on the supply did not converge")
		}
		return out
	})
}

// known tells whether all is there that an order is made of.
func (c *Circuit) known(o startup.Order) bool {
	sum := o.Bootstrap + o.Reservoir.Reservoir + o.Supply + o.Initial + o.Load + o.SupplyCurrent + o.Interval + o.Target + o.Element.Drop(1e-3)
	if c.pulsed() {
		width, period := c.pulses()
		sum += width + period
	}
	return sum == sum
}

// chargePulsed is an order in which the low side is pulsed. On a V_DD that stands pulses are counted; how much later a reservoir lets them arrive
// follows from their mean, in which the supply brings its limit all the time and the element conducts for the share w/p of it. lowest is the
// lowest V_DD of a continuous charge, below which pulses with pauses between them do not take it [V].
func (c *Circuit) chargePulsed(o startup.Order, lowest float64) charged {
	width, period := c.pulses()
	ch := c.firstCharge()
	one, n := ch.PulsedTime(width, period, o.Target)
	out := charged{Outcome: startup.Outcome{Lowest: lowest}, pulses: n}
	if groups := float64(o.Groups() - 1); groups > 0 {
		if out.Last = groups * o.Interval; o.Waits {
			out.Last = groups * one
		}
	}
	out.Time = out.Last + one
	if c.stiff() || !(one > 0) || math.IsInf(one, 1) {
		return out
	}
	mean, below, ok := ch.PulsedMean(width, period)
	if !ok {
		out.Time = nan
		return out
	}
	share := min(width/period, 1)
	o.Load, o.Initial, o.Target = mean.Load, mean.Initial, o.Target-below
	o.SupplyCurrent /= share
	o.Interval *= share
	sagging := o.Run()
	o.Reservoir.Reservoir = math.Inf(1)
	standing := o.Run()
	if math.IsInf(sagging.Time, 1) {
		out.Time, out.Last, out.pulses = sagging.Time, sagging.Last, 0
		return out
	}
	out.Time += max(0, sagging.Time-standing.Time) / share
	out.Last += max(0, sagging.Last-standing.Last) / share
	if late := sagging.Time - sagging.Last - (standing.Time - standing.Last); late > 0 {
		out.pulses += int(min(math.Ceil(late/share/period), math.MaxInt32))
	}
	return out
}

// FirstChargeTime is the time until the last stage on the supply is charged [s], without the driver's enable delay, and the pulses of one stage.
func (c *Circuit) FirstChargeTime() (float64, int) {
	k := c.charge(requested)
	return k.Time, k.pulses
}

// FirstChargeDelay is the part of FirstChargeTime that lies between given starts, whatever C_B is [s].
func (c *Circuit) FirstChargeDelay() float64 {
	o := c.order()
	if o.Waits {
		return 0
	}
	return float64(o.Groups()-1) * o.Interval
}

// PrechargeTime is the time from the beginning of the first charge to the first accepted pulse of the stage that is charged last [s].
func (c *Circuit) PrechargeTime() float64 {
	t, _ := c.FirstChargeTime()
	return t + c.Need(&c.Stage.Driver.EnableDelay)
}

// OtherTime is PrechargeTime in the other order: all at once in the place of groups, one after another in that of all at once [s].
func (c *Circuit) OtherTime() float64 {
	return c.charge(other).Time + c.Need(&c.Stage.Driver.EnableDelay)
}

// ReservoirLow is the lowest V_DD while the bootstrap capacitors of all stages on the supply are charged from the reservoir [V].
func (c *Circuit) ReservoirLow() float64 { return c.lowest(requested) }

// OtherLow is ReservoirLow in the other order [V].
func (c *Circuit) OtherLow() float64 { return c.lowest(other) }

func (c *Circuit) lowest(which int) float64 {
	if c.stiff() {
		return c.Supply()
	}
	o := c.order()
	if which == other {
		o = c.alternative()
	}
	if o.Groups() == 1 { // no target plays a part
		return o.Together().Lowest()
	}
	return c.charge(which).Lowest
}
