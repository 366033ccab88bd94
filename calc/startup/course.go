package startup

import (
	"math"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/recharge"
)

const (
	mostLumps   = 8    // voltages that are told apart; of more, the two closest are taken together
	mostSteps   = 2000 // of one group
	alike       = 1e-3 // voltages no farther apart count as one [V]
	blocking    = 1e-5 // of the charging current, below which another group counts as blocked [1]
	leastSlope  = 1e-9 // of a diode that has one [V]
	farthest    = 1e5  // what has not arrived by then never does: beyond any time that can be asked for [s]
	rootDigits  = 1e-11
	balanced    = 1e-9  // by which currents may miss each other and count as equal [1]
	timeDigits  = 1e-14 // by which sums of spans may miss the time that they make [1]
	stateDigits = 2e-4  // tolerance of a step of the integrator [V]
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

	saturation float64 // I_S of a diode [A]; 0: a switch, or too little to be told
	solver     *numeric.Stiff
	size       int // states of the solver
	buffer     [mostLumps + 1]float64
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
		x := c.current(s.v - s.lumps[i].v)
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
		if math.IsInf(until, 1) && c.finished(held || now <= c.o.SupplyCurrent*(1+balanced), last) {
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
		if c.current(c.v-c.lumps[i].v) > c.o.Load*(1+balanced) {
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
		sum += l.n * math.Abs(c.current(s.v-l.v))
	}
	if i := a.n * c.current(s.v-a.v); i > 0 {
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
	series, pull := c.series(a.n)
	x, _ := o.Element.Advance(a.v, recharge.Interval{Duration: h, Drive: s.v, Conducts: true, Load: pull}, series)
	u := s.v - x
	w := (cv*(s.v-u) + cb*a.v + (o.SupplyCurrent-a.n*o.Load)*h) / (cv + cb)
	s.v, a.v = w+u, w
	for i := range s.k - 1 {
		s.lumps[i].v = math.Max(s.lumps[i].v-o.Load*h/o.Bootstrap, 0)
	}
	return s
}

// stride is a step of the closed form that ends at the next event to be expected: where V_DD is lowest, the group taking the supply's current, or
// its rise has ended; thereafter where V_DD would be back if the group took no more than its load, and no less than six times the last step h [s].
// falls tells which.
func (c *course) stride(h float64) (span float64, falls bool) {
	o, a := c.o, c.active()
	i := c.current(c.v - a.v)
	if a.n*i > o.SupplyCurrent*(1+balanced) {
		series, pull := c.series(a.n)
		rest := o.Element.Drop(math.Max(o.SupplyCurrent/a.n, o.Load))
		span, falls = o.Element.TimeTo(series, c.v, pull, a.v, c.v-rest), true
	} else {
		span = math.Max((o.Supply-c.v)*(o.Reservoir.Reservoir+a.n*o.Bootstrap)/(o.SupplyCurrent-a.n*o.Load), 6*h)
	}
	if span > 0 && !math.IsInf(span, 1) {
		return span, falls
	}
	if span = 6 * h; !(span > 0) {
		span = math.Max(0.1*o.Bootstrap*(c.v-a.v)/i, 1e-9)
	}
	return span, falls
}

// series is C' of (2) for n capacitors [F], and I' [A].
func (c *course) series(n float64) (farads, pull float64) {
	o := c.o
	farads = 1 / (n/o.Reservoir.Reservoir + 1/o.Bootstrap)
	return farads, farads * (o.SupplyCurrent/o.Reservoir.Reservoir + o.Load/o.Bootstrap)
}

// exact takes one step in closed form, to an event or the end of a stride.
func (c *course) exact(until float64, h *float64) bool {
	o := c.o
	span, falls := c.stride(*h)
	span = math.Min(span, until-c.t)
	next := c.advanced(span)
	if c.others(&next) > 4*blocking { // another lump conducts again before
		conducts := func(s *state) float64 {
			if x := c.others(s); x < blocking || x > 4*blocking {
				return x - 2*blocking
			}
			return 0
		}
		if !c.cut(&span, &next, conducts) {
			return false
		}
	}
	back := !falls && next.v >= o.Supply
	if back && c.v < o.Supply && !c.cut(&span, &next, func(s *state) float64 { return s.v - o.Supply }) {
		return false
	}
	if c.arrived != c.arrived && next.active().v >= o.Target {
		there, at := span, next
		if !c.cut(&there, &at, func(s *state) float64 { return s.active().v - o.Target }) {
			return false
		}
		c.reach(c.t + there)
		if math.IsInf(until, 1) {
			span, next, back = there, at, false
			next.active().v = math.Max(next.active().v, o.Target)
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
	c.t += span
	*h = span
	return true
}

// cut shortens a step to where something turns from below 0 to above.
func (c *course) cut(span *float64, next *state, of func(*state) float64) bool {
	x, found := numeric.Root(func(x float64) float64 { s := c.advanced(x); return of(&s) }, 0, *span, rootDigits**span)
	if found {
		*span, *next = x, c.advanced(x)
	}
	return found
}
