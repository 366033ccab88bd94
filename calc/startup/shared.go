package startup

import (
	"math"

	"floatrail/calc/internal/numeric"
)

// number is the number of states of (5): V_DD and each lump.
func (s *state) number() int { return s.k + 1 }

func (c *course) read(y []float64) (s state) {
	s = c.state
	s.v = y[0]
	for i := range s.k {
		s.lumps[i].v = y[i+1]
	}
	return s
}

// Rates are (5) of the package comment.
func (c *course) Rates(y, dy []float64) bool {
	o := c.o
	sum := 0.0
	for i := range c.k {
		x := c.current(y[0] - y[i+1])
		sum += c.lumps[i].n * x
		dy[i+1] = (x - o.Load) / o.Bootstrap
	}
	dy[0] = (o.SupplyCurrent - sum) / o.Reservoir.Reservoir
	return true
}

// Jacobian is the matrix of the derivatives of (5); each element adds its conductance.
func (c *course) Jacobian(y, j []float64) bool {
	o, n := c.o, c.number()
	clear(j)
	for i := range c.k {
		u := y[0] - y[i+1]
		g := c.saturation / o.Element.Slope * math.Exp(u/o.Element.Slope)
		if !(c.saturation > 0 && u < 0) {
			g = o.Element.Conductance(u)
		}
		into := c.lumps[i].n * g / o.Reservoir.Reservoir
		j[0] -= into
		j[i+1] += into
		j[(i+1)*n] = g / o.Bootstrap
		j[(i+1)*n+i+1] = -g / o.Bootstrap
	}
	return true
}

// current is the element's current [A]; that of a diode in reverse without the drop of at most R·I_S, which no digit of it needs.
func (c *course) current(u float64) float64 {
	if c.saturation > 0 && u < 0 {
		return c.saturation * math.Expm1(u/c.o.Element.Slope)
	}
	return c.o.Element.Current(u)
}

// integrate steps (5) until a time [s], or until something happens that calls for another way: V_DD is back, the group that charges
// arrives where that ends it, lumps come together, all but one are blocked, nothing rises any more.
func (c *course) integrate(until float64) bool {
	o, n := c.o, c.number()
	if c.solver == nil || c.size != n {
		c.solver, c.size = numeric.NewStiff(n), n
	}
	var tolerance [mostLumps + 1]float64
	y := c.buffer[:n]
	y[0] = c.v
	for i := range n {
		tolerance[i] = stateDigits
		if i > 0 {
			y[i] = c.lumps[i-1].v
		}
	}
	s := c.solver
	if s.Start(c, y, 0, 0, tolerance[:n]) != nil {
		return false
	}
	start, end := c.t, math.Min(until, farthest*10)-c.t
	for range mostSteps {
		if s.Step(end) != nil {
			return false
		}
		stop := c.passed(s, start, math.IsInf(until, 1))
		now, _ := c.demand(&c.state)
		if stop || s.To >= end || c.t > farthest || c.resting(now) || c.met() || c.alone(&c.state) {
			return true
		}
		if math.IsInf(until, 1) && c.arrived == c.arrived && now <= o.SupplyCurrent {
			return true
		}
	}
	return false
}

// passed takes over the last step, or the part of it that an event ends: then it is true.
func (c *course) passed(s *numeric.Stiff, start float64, endless bool) (stop bool) {
	v, w := s.Dense(0), s.Dense(c.k)
	theta := 1.0
	low, _ := v.Extremes()
	back := false
	if s.Y1[0] > c.o.Supply {
		if x, ok := v.Crossing(c.o.Supply, math.Max(low.Theta, 0), 1, 1); ok {
			theta, back = x, true
		}
	}
	if c.arrived != c.arrived && w.At(theta) >= c.o.Target {
		x, ok := w.Crossing(c.o.Target, 0, theta, 1)
		if !ok {
			x = theta
		}
		c.reach(start + s.From + x*(s.To-s.From))
		if endless {
			theta, back, stop = x, false, true
		}
	}
	y := c.buffer[:c.number()]
	for i := range y {
		y[i] = s.Y1[i]
		if theta < 1 {
			p := s.Dense(i)
			y[i] = p.At(theta)
		}
	}
	c.state = c.read(y)
	if stop {
		c.active().v = math.Max(c.active().v, c.o.Target)
	}
	if back {
		c.v = c.o.Supply
	}
	c.t = start + s.From + theta*(s.To-s.From)
	c.low = math.Min(c.low, c.v)
	if low.Theta < theta {
		c.low = math.Min(c.low, low.Value)
	}
	return stop || back
}

// met joins lumps that have come to the same voltage; true where any did.
func (c *course) met() (any bool) {
	for i := c.k - 2; i >= 0; i-- {
		if math.Abs(c.lumps[i].v-c.lumps[i+1].v) <= alike {
			c.join(i)
			any = true
		}
	}
	return any
}
