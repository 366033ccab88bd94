package transient

import (
	"math"
	"testing"
)

// kinks moves the states of a circuit to both sides of every kink: v_ds = 0, the points of the capacitances, v_gs = V_th, the element's zero.
func kinks(c *circuit, y []float64, seen func(y []float64)) {
	const beside = 2e-4
	at := func(state int, v float64) {
		for _, d := range [2]float64{-beside, beside} {
			old := y[state]
			y[state] = v + d
			if !nearKink(c, y) {
				seen(y)
			}
			y[state] = old
		}
	}
	for _, d := range [2]*device{&c.high, &c.low} {
		at(d.drain, 0)
		for _, v := range d.output.v {
			at(d.drain, v)
		}
		if d.diode {
			continue
		}
		at(d.gate, d.threshold)
		for _, v := range d.transfer.v {
			at(d.drain, v)
			at(d.drain, v+y[d.gate])
		}
	}
	at(statePin, c.supply-c.floating-y[stateGain])
	at(statePin, 0)
}

// nearKink tells whether a difference would reach over a kink.
func nearKink(c *circuit, y []float64) bool {
	const reach = 5e-6
	near := math.Abs(y[statePin]+c.floating+y[stateGain]-c.supply) < reach
	for _, d := range [2]*device{&c.high, &c.low} {
		vd, vg := y[d.drain], y[d.gate]
		near = near || math.Abs(vd) < reach || math.Abs(vg-d.threshold) < reach
		for _, v := range d.output.v {
			near = near || math.Abs(vd-v) < reach
		}
		for _, v := range d.transfer.v {
			near = near || math.Abs(vd-v) < reach || math.Abs(vd-vg-v) < reach
		}
	}
	return near
}

// exact has the capacitances evaluated anew instead of by their series.
func exact(c *circuit) {
	for _, d := range [2]*device{&c.high, &c.low} {
		d.atOutput, d.atTransfer, d.atGate = place{}, place{}, place{}
	}
}

// checkJacobian compares the Jacobian at y with central differences; both over what a natural change of each state makes of each rate.
func checkJacobian(t *testing.T, name string, s *Simulator, y []float64) float64 {
	t.Helper()
	c := &s.circuit
	n := c.n
	j, up, down := make([]float64, n*n), make([]float64, n), make([]float64, n)
	x := append([]float64(nil), y...)
	exact(c)
	c.Jacobian(x, j)
	step := make([]float64, n)
	for k := range n {
		step[k] = 1e-6
		if k == stateI1 || k == stateI2 || k >= shared {
			step[k] = 1e-6 * s.sizes[k]
		}
	}
	worst := 0.0
	for k := range n {
		h := (x[k] + step[k]) - x[k]
		x[k] = y[k] + h
		exact(c)
		c.Rates(x, up)
		x[k] = y[k] - h
		exact(c)
		c.Rates(x, down)
		x[k] = y[k]
		for i := range n {
			scale := 0.0
			for m := range n {
				scale = math.Max(scale, math.Abs(j[i*n+m])*s.sizes[m])
			}
			got, want := j[i*n+k]*s.sizes[k], (up[i]-down[i])/(2*h)*s.sizes[k]
			// rounding of the rates
			noise := 1e-14 * (math.Abs(up[i]) + math.Abs(down[i]) + 10*scale) / h * s.sizes[k]
			d := math.Abs(got - want)
			if d > noise && d > 2e-4*math.Max(math.Abs(got), math.Abs(want)) && d > 1e-7*scale {
				t.Errorf("%s: ∂f%d/∂y%d %.8g, differences %.8g, row's scale %.3g at %v", name, i, k, got, want, scale, y)
				return 1
			}
			if math.Abs(want) > 1e-3*scale && noise < 1e-4*math.Abs(want) {
				worst = math.Max(worst, d/math.Abs(want))
			}
		}
	}
	return worst
}

// TestJacobian holds the analytic Jacobian to differences of the rates along the way of every reference case and of random bridges, and beside
// every kink.
func TestJacobian(t *testing.T) {
	var s Simulator
	states, worst := 0, 0.0
	check := func(name string, b *Bridge, limit float64) {
		var at [][]float64
		n := 0
		s.seen = func(span *span) {
			if n++; n%23 == 1 {
				y := make([]float64, span.n)
				span.states(0.5, y)
				at = append(at, y)
			}
		}
		if _, err := s.Run(b, Window{Limit: limit, Whole: true}); err != nil {
			return // TestRandomBridges counts these
		}
		for k, y := range at {
			if nearKink(&s.circuit, y) {
				continue
			}
			worst = math.Max(worst, checkJacobian(t, name, &s, y))
			states++
			if k%4 == 0 {
				kinks(&s.circuit, y, func(y []float64) {
					worst = math.Max(worst, checkJacobian(t, name+", beside a kink", &s, y))
					states++
				})
			}
			if t.Failed() {
				return
			}
		}
	}
	for _, c := range referenceCases(t) {
		check(c.Name, c.bridge(), c.Input.End)
	}
	for seed := range uint64(60) {
		check("random", randomBridge(seed), 200e-9)
	}
	t.Logf("%d states, large entries within %.2g", states, worst)
	if states < 3000 {
		t.Errorf("only %d states", states)
	}
}
