package startup

import (
	"math"

	"floatrail/calc/recharge"
)

// mostCounted is the number of pulses that are taken one by one before the rest is averaged, and again after it.
const mostCounted = 64

// exactTail is the number of pulses before the expected last one at which averaging hands back to single pulses.
const exactTail = 2

// train is a row of equal pulses of the low side.
type train struct {
	Charge
	width  float64 // w, the element conducts [s]
	period float64 // p [s]
	drop   float64 // D, what the load takes off V_BS in a pause [V]
}

// pulses returns the train; a width beyond the period conducts throughout. ok is false where nothing can be computed.
func (c Charge) pulses(width, period float64) (tr train, ok bool) {
	if !(period > 0) || width != width || !c.valid() {
		return train{}, false
	}
	width = math.Max(0, math.Min(width, period))
	return train{Charge: c, width: width, period: period, drop: c.Load * (period - width) / c.Capacitance}, true
}

// fire returns V_BS at the end of a pulse from v before it [V].
func (t train) fire(v float64) float64 { return t.advance(v, t.width) }

// pause returns V_BS after a whole pause from v at its start [V].
func (t train) pause(v float64) float64 { return math.Max(v-t.drop, 0) }

// count fires at most mostCounted pulses from v before the first until one reaches the target. It returns the number fired, V_BS [V]
// before the next or, once found, the time since that last pulse began [s].
func (t train) count(v, target float64) (next float64, n int, within float64, found bool) {
	for n < mostCounted {
		end := t.fire(v)
		n++
		if end >= target {
			if v < target {
				within = math.Min(t.Element.TimeTo(t.Capacitance, t.drive(), t.Load, v, target), t.width)
			}
			return v, n, within, true
		}
		v = t.pause(end)
	}
	return v, n, 0, false
}

// steady returns the lowest V_BS of the periodic steady state, before a pulse, and the highest, at its end [V].
func (t train) steady() (low, high float64) {
	switch {
	case t.width == 0:
		return 0, 0
	case t.drop == 0:
		return t.Settled(), t.Settled()
	}
	s := recharge.Period{
		Element: t.Element, Capacitance: t.Capacitance,
		On:  recharge.Interval{Duration: t.period - t.width, Load: t.Load},
		Off: []recharge.Interval{t.conducting(t.width)},
	}.SteadyState()
	switch {
	case s.Collapses || s.Low < 0: // each pause empties the capacitor
		return 0, t.fire(0)
	case !s.Converged:
		return math.NaN(), math.NaN()
	}
	return s.Low, s.BeforeEdge
}

// centred is the average of the train as a charge with the element conducting throughout, V_BS taken in the middle of the pauses. Its load
// is what the element carries at the exact steady state, I_0/δ but for the second order of the width; I_0/δ itself where there is none above 0.
func (t train) centred() Charge {
	low, high := t.steady()
	c := t.Charge
	c.Load = math.Max(t.Element.Current(t.drive()-(high-t.drop/2)), 0)
	if low == 0 {
		c.Load = t.Load * t.period / t.width
	}
	return c
}

// PulsedMean returns the charge, with the element conducting throughout, that the pulses of a width [s] each period [s] follow in the mean, in
// conducting time, and how far below the ends of the pulses it stands [V]; see the package comment. ok is false where there is no pulse, or
// nothing can be computed.
func (c Charge) PulsedMean(width, period float64) (mean Charge, below float64, ok bool) {
	t, ok := c.pulses(width, period)
	if !ok || !(t.width > 0) {
		return Charge{}, math.NaN(), false
	}
	mean = t.centred()
	mean.Initial += t.drop / 2
	return mean, t.drop / 2, true
}

// PulsedTime returns the time [s] from the start of the first pulse to the target [V] and the number of pulses to it, the last one
// included, for pulses of a width [s] each period [s]: 0 and 0 when V_BS starts there, +Inf and 0 when it never arrives. Up to
// 64 pulses it is exact. Beyond, the average between them leaves an error of the order of (w/(R·C))²/12 of the time; see the package
// comment. More pulses than an int holds are given as the largest int.
func (c Charge) PulsedTime(width, period, target float64) (time float64, pulses int) {
	t, ok := c.pulses(width, period)
	switch {
	case !ok || target != target:
		return math.NaN(), 0
	case c.Initial >= target:
		return 0, 0
	}
	v, n, within, found := t.count(c.Initial, target)
	if found {
		return float64(n-1)*period + within, n
	}
	if v != v {
		return math.NaN(), 0
	}
	if !(t.fire(t.pause(target)) > target) {
		return math.Inf(1), 0
	}
	mean := t.centred()
	mean.Initial = v + t.drop/2
	more := mean.Time(target-t.drop/2) / width // pulses
	if !(more < math.MaxInt/2) {
		return more * period, never(more)
	}
	if skip := math.Floor(more) - exactTail; skip > 0 {
		v = mean.Reached(skip*width) - t.drop/2
		n += int(skip)
	}
	_, last, within, found := t.count(v, target)
	if !found { // the target is the steady state to a few digits
		return (float64(mostCounted) + more) * period, mostCounted + int(math.Ceil(more))
	}
	n += last
	return float64(n-1)*period + within, n
}

// never returns the number of pulses that goes with a number too large to count: 0 if it never arrives.
func never(n float64) int {
	if n < math.Inf(1) {
		return math.MaxInt
	}
	return 0
}

// PulsedReached returns V_BS after the time t [s] since the start of the first pulse of a width [s], one each period [s] [V]. Exact up to
// 64 pulses, as PulsedTime beyond.
func (c Charge) PulsedReached(width, period, time float64) float64 {
	t, ok := c.pulses(width, period)
	if !ok || time != time {
		return math.NaN()
	}
	if math.IsInf(time, 1) {
		low, _ := t.steady()
		return low
	}
	if t.width == 0 {
		return math.Max(c.Initial-c.Load*math.Max(time, 0)/c.Capacitance, 0)
	}
	v := c.Initial
	whole := math.Floor(math.Max(time, 0) / period)
	rest := math.Max(time-whole*period, 0)
	if skip := whole - mostCounted - exactTail; skip > 0 {
		v = t.repeat(v, mostCounted)
		mean := t.centred()
		mean.Initial = v + t.drop/2
		v = math.Max(mean.Reached(skip*t.width)-t.drop/2, 0)
		whole = exactTail
	}
	v = t.repeat(v, int(whole))
	if rest <= t.width {
		return t.advance(v, rest)
	}
	return math.Max(t.fire(v)-c.Load*(rest-t.width)/c.Capacitance, 0)
}

// repeat returns V_BS after n whole periods from v before the first pulse [V].
func (t train) repeat(v float64, n int) float64 {
	for range n {
		v = t.pause(t.fire(v))
	}
	return v
}

// PulsedSettled returns the V_BS to which the ends of the pulses tend [V]: PulsedTime is finite for every target below. With short pulses
// it is where the element's current is I_0/δ.
func (c Charge) PulsedSettled(width, period float64) float64 {
	_, high := c.PulsedSteady(width, period)
	return high
}

// PulsedSteady returns the lowest V_BS, before a pulse, and the highest, at its end, to which the pulses tend [V]; both 0 where
// nothing is left at the end of a pulse.
func (c Charge) PulsedSteady(width, period float64) (low, high float64) {
	t, ok := c.pulses(width, period)
	if !ok {
		return math.NaN(), math.NaN()
	}
	return t.steady()
}
