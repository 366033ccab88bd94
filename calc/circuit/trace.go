package circuit

import (
	"math"
)

// tracePoints is the largest number of points of a trace.
const tracePoints = 1900

// Trace is V_BS over what the operating point repeats: one period, a fundamental, or a burst and its pause; or over a hold. Angles are NaN where there
// is no fundamental.
func (c *Circuit) Trace(f func(t, angle, v float64)) {
	switch {
	case c.Point == nil:
	case c.Point.HeldOn != nil:
		const points = 64
		h, t := c.Hold()
		for k := range points + 1 {
			at := t * float64(k) / points
			f(at, nan, Empty(h.Voltage(at)))
		}
	case c.modulated():
		y := c.Cycle()
		for _, p := range y.Trace(tracePoints) {
			angle := nan
			if alternates(c.Point) {
				angle = y.Plan.Angle(p.Period)
			}
			f(p.Time, angle, p.Voltage)
		}
	default:
		const points = 24
		if st := c.Steady(); st.BeforeEdge == st.BeforeEdge {
			p := c.Period()
			p.Trace(st.BeforeEdge, points, func(t, v float64) { f(t, nan, v) })
		}
	}
}

// TracePrecharge is V_BS over the first charge to its target, or for the time available where it does not arrive. Pulsed, it is V_BS at the end of
// pulses.
func (c *Circuit) TracePrecharge(f func(t, v float64)) {
	ch := c.firstCharge()
	end, pulses := c.FirstChargeTime()
	if math.IsInf(end, 1) {
		end = c.Need(&c.Stage.Startup.TimeAvailable)
	}
	if end != end || !(end > 0) {
		return
	}
	f(0, ch.Initial)
	if !c.pulsed() {
		const points = 200
		for k := 1; k <= points; k++ { // denser at the start, where it rises fastest
			t := end * math.Pow(float64(k)/points, 2)
			f(t, ch.Reached(t))
		}
		return
	}
	width, period := c.pulses()
	if pulses <= 0 {
		pulses = int(math.Min(end/period, math.MaxInt32)) + 1
	}
	const most = 900
	stride := (pulses + most - 1) / most
	for n := 0; n < pulses; n += stride {
		t := float64(n)*period + width
		f(t, ch.PulsedReached(width, period, t))
	}
}
