package startup

import (
	"math"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/recharge"
)

const (
	mostLumps   = 8    // voltages that are told apart; of more, the two closest are taken together
	mostSteps   = 2000 // of one group
	alike       = 1e-5 // voltages no farther apart count as one [V]
	blocking    = 1e-5 // of the charging current, below which another group counts as blocked [1]
	farthest    = 1e5  // what has not arrived by then never does: beyond any time that can be asked for [s]
	rootDigits  = 1e-12
	timeDigits  = 1e-14 // by which sums of spans may miss the time that they make [1]
	stateDigits = 5e-5  // tolerance of a step of the integrator [V]
)

// lump is capacitors at one voltage.
type lump struct {
	n float64 // how many
	v float64 // V_BS [V]
}

// state is the reservoir and the lumps, in the order of their starts: the last one is the group that charges.
type state struct {
	v     float64 // V_DD [V]
	lumps [mostLumps]lump
	k     int
}

func (s *state) active() *lump { return &s.lumps[s.k-1] }

// course is a charge in groups on its way.
type course struct {
	state
	o       *Order
	t       float64 // [s]
	low     float64 // lowest V_DD so far [V]
	arrived float64 // when the group that charges arrived; NaN: not yet [s]
	never   bool    // some group never arrives
	ended   bool    // the rise of the group that charges has ended

	solver *numeric.Stiff
	size   int // states of the solver
	buffer [mostLumps + 1]float64
}

// begin connects n more capacitors. Lumps that have become alike are taken together first, and the closest two where there are too many.
func (c *course) begin(n float64) {
	for c.k > 1 {
		best, gap := 0, math.Inf(1)
		for i := range c.k - 1 {
			if d := math.Abs(c.lumps[i].v - c.lumps[i+1].v); d < gap {
				best, gap = i, d
			}
		}
		if gap > alike && c.k < mostLumps {
			break
		}
		c.join(best)
	}
	c.lumps[c.k] = lump{n, c.o.Initial}
	c.k++
	c.arrived, c.ended = math.NaN(), false
	if c.o.Initial >= c.o.Target {
		c.arrived = c.t
	}
}

// join takes lump i and the next one together, with their charge.
func (c *course) join(i int) {
	a, b := c.lumps[i], c.lumps[i+1]
	n := a.n + b.n
	c.lumps[i] = lump{n, a.v + (b.v-a.v)*b.n/n}
	copy(c.lumps[i+1:], c.lumps[i+2:c.k])
	c.k--
}

// demand is the current that all lumps take [A], and what they may come to take if V_DD stands: at least their loads.
func (c *course) demand(s *state) (now, later float64) {
	for i := range s.k {
		x := c.o.Element.Current(s.v - s.lumps[i].v)
		now += s.lumps[i].n * x
		later += s.lumps[i].n * math.Max(x, c.o.Load)
	}
	return now, later
}

// run follows the group that charges until a time [s], which may be +Inf: then until it has arrived, and for the last group until it no longer pulls
// V_DD down. ok is false where numbers fail.
func (c *course) run(until float64, last bool) (ok bool) {
	h := 0.0 // step of the closed form [s]
	for range mostSteps {
		if c.v != c.v || c.active().v != c.active().v {
			return false
		}
		if c.t >= until*(1-timeDigits) {
			return true
		}
		now, later := c.demand(&c.state)
		held := math.IsInf(c.o.Reservoir.Reservoir, 1) || c.v >= c.o.Supply && now <= c.o.SupplyCurrent
		if math.IsInf(until, 1) && c.finished(held || now <= c.o.SupplyCurrent, last) {
			return true
		}
		switch {
		case held:
			c.hold(until, later)
		case c.resting(now):
			c.ended = true
			if until < math.Inf(1) { // the loads go on, the charge does not
				c.drain(until)
				return true
			}
		case c.alone(&c.state):
			if !c.exact(until, &h) {
				return false
			}
		default:
			h = 0
			if !c.integrate(until) {
				return false
			}
		}
	}
	return false
}

// finished tells whether nothing more is to be followed: up tells that V_DD does not fall.
func (c *course) finished(up, last bool) bool {
	if c.t > farthest {
		c.ended = true
	}
	switch there := c.arrived == c.arrived; {
	case c.ended && !there:
		c.never = true
		return true
	case c.ended, there && !last:
		return true
	default:
		return there && up
	}
}

// resting tells whether nothing rises any more: neither V_DD nor any V_BS. Every rate depends on the other states in the rising sense, so that
// from then on nothing ever rises again.
func (c *course) resting(now float64) bool {
	if !(now >= c.o.SupplyCurrent) {
		return false
	}
	for i := range c.k {
		if c.o.Element.Current(c.v-c.lumps[i].v) > c.o.Load {
			return false
		}
	}
	return true
}

// drain lets the loads take what is left until a time [s]: all lumps and the reservoir as one.
func (c *course) drain(until float64) {
	n := 0.0
	for i := range c.k {
		n += c.lumps[i].n
	}
	fall := (n*c.o.Load - c.o.SupplyCurrent) * (until - c.t) / (c.o.Reservoir.Reservoir + n*c.o.Bootstrap)
	c.v = math.Max(c.v-fall, 0)
	for i := range c.k {
		c.lumps[i].v = math.Max(c.lumps[i].v-fall, 0)
	}
	c.t, c.low = until, math.Min(c.low, c.v)
}

// reach notes that the group that charges arrives at a time [s].
func (c *course) reach(t float64) {
	if c.arrived != c.arrived {
		c.arrived = t
	}
}

// hold follows a supply that holds V_DD, each lump by itself, eq. (3) of package recharge. Currents fall to the loads or rise to them, so that
// it holds on unless the loads themselves exceed it.
func (c *course) hold(until, later float64) {
	o, span := c.o, until-c.t
	if later > o.SupplyCurrent { // look again when lumps that have lost charge conduct again
		span = math.Min(span, 1e-3*o.Supply*o.Bootstrap/o.Load)
	}
	a := c.active()
	if c.arrived != c.arrived {
		t := o.Element.TimeTo(o.Bootstrap, c.v, o.Load, a.v, o.Target)
		if t <= span {
			c.reach(c.t + t)
			if math.IsInf(until, 1) {
				span = t
			}
		} else if math.IsInf(t, 1) && math.IsInf(span, 1) {
			c.ended = true
			span = 0
			settled := o.Element.Settled(c.v, o.Load)
			for i := range c.k {
				c.lumps[i].v = settled
			}
		}
	}
	if math.IsInf(span, 1) { // arrived, with nothing that ends it: finished before
		return
	}
	for i := range c.k {
		c.lumps[i].v, _ = o.Element.Advance(c.lumps[i].v, recharge.Interval{Duration: span, Drive: c.v, Conducts: true, Load: o.Load}, o.Bootstrap)
	}
	c.t += span
}

// others is what the lumps beside the one that charges exchange with the reservoir, of that one's current [1].
func (c *course) others(s *state) float64 {
	if s.k == 1 {
		return 0
	}
	sum, a := 0.0, s.active()
	for j := range s.k - 1 {
		l := &s.lumps[j]
		sum += l.n * math.Abs(c.o.Element.Current(s.v-l.v))
	}
	if i := a.n * c.o.Element.Current(s.v-a.v); i > 0 {
		return sum / i
	}
	return math.Inf(1)
}

// alone tells whether every lump but the one that charges is blocked.
func (c *course) alone(s *state) bool { return c.others(s) <= blocking }

// advanced is the state after a time [s] in which one lump charges and the others are blocked, eq. (2) and (4).
func (c *course) advanced(h float64) state {
	o, s := c.o, c.state
	a := s.active()
	cv, cb := o.Reservoir.Reservoir, a.n*o.Bootstrap
	series := 1 / (a.n/cv + 1/o.Bootstrap)
	pull := series * (o.SupplyCurrent/cv + o.Load/o.Bootstrap)
	x, _ := o.Element.Advance(a.v, recharge.Interval{Duration: h, Drive: s.v, Conducts: true, Load: pull}, series)
	u := s.v - x
	w := (cv*(s.v-u) + cb*a.v + (o.SupplyCurrent-a.n*o.Load)*h) / (cv + cb)
	s.v, a.v = w+u, w
	for i := range s.k - 1 {
		s.lumps[i].v = math.Max(s.lumps[i].v-o.Load*h/o.Bootstrap, 0)
	}
	return s
}

// exact takes one step in closed form, of a length that grows from step to step and ends at an event.
func (c *course) exact(until float64, h *float64) bool {
	o, a := c.o, c.active()
	if *h == 0 {
		u := c.v - a.v
		*h = 0.1 * o.Bootstrap * u / o.Element.Current(u)
		if !(*h > 1e-12) {
			*h = 1e-9
		}
	}
	span := math.Min(*h, until-c.t)
	next := c.advanced(span)
	if c.others(&next) > 4*blocking { // another lump conducts again before
		x, found := numeric.Root(func(x float64) float64 { s := c.advanced(x); return c.others(&s) - 2*blocking }, 0, span, rootDigits*span)
		if !found {
			return false
		}
		span, next = x, c.advanced(x)
	}
	excess := func(x float64) float64 {
		s := c.advanced(x)
		return a.n*o.Element.Current(s.v-s.active().v) - o.SupplyCurrent
	}
	// V_DD has one minimum, where the lump takes the supply's current.
	from, before := 0.0, a.n*o.Element.Current(c.v-a.v)-o.SupplyCurrent
	bottom := math.NaN()
	if before > 0 && excess(span) <= 0 {
		if x, found := numeric.Root(excess, 0, span, rootDigits*span); found {
			from, bottom = x, c.advanced(x).v
		}
	}
	back := false
	if next.v >= o.Supply && (c.v < o.Supply || from > 0) {
		x, found := numeric.Root(func(x float64) float64 { return c.advanced(x).v - o.Supply }, from, span, rootDigits*span)
		if !found {
			return false
		}
		span, back = x, true
		next = c.advanced(x)
	}
	if c.arrived != c.arrived && next.active().v >= o.Target {
		x, found := numeric.Root(func(x float64) float64 { s := c.advanced(x); return s.active().v - o.Target }, 0, span, rootDigits*span)
		if !found {
			return false
		}
		c.reach(c.t + x)
		if math.IsInf(until, 1) {
			span, back = x, false
			next = c.advanced(x)
			next.active().v = math.Max(next.active().v, o.Target)
			if span < from {
				bottom = math.NaN()
			}
		}
	}
	if next.v != next.v {
		return false
	}
	c.state = next
	if back {
		c.v = o.Supply
	}
	c.low = math.Min(c.low, c.v)
	if bottom == bottom {
		c.low = math.Min(c.low, bottom)
	}
	c.t += span
	*h = 6 * span
	return true
}
