// Package derive inverts the periodic steady state: the value of one quantity, the others standing at a draw, at which the floating supply
// just holds its limits. Limits are solved against the limit itself, not against the guard. The inversion is root finding on the same steady
// state that the rules judge, so that a limit and a rule cannot disagree.
package derive

import (
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/internal/numeric"
	"floatrail/calc/stage"
)

// Hold is the distance of the lowest V_BS to what it must keep: falling lockout, and specified drive while the channel carries forward
// current [V].
func Hold(c *circuit.Circuit) float64 { return c.Reserve() }

// Stand is the smaller distance of the highest V_BS to the driver's rating and of the highest gate voltage to the gate's [V].
func Stand(c *circuit.Circuit) float64 {
	v := c.High()
	return math.Min(c.Need(&c.Stage.Driver.FloatingVoltageMax)-v, c.Need(&c.Stage.HighSide.GateVoltageMax)-c.Gate(v))
}

// works is a condition that also fails where no high-side pulse reaches the switch.
func works(f func(*circuit.Circuit) float64) func(*circuit.Circuit) float64 {
	return func(c *circuit.Circuit) float64 {
		if c.Point.FixedDuty != nil {
			if c.Period().HighVanishes {
				return math.Inf(-1)
			}
		} else if c.LongestOn() <= 0 {
			return math.Inf(-1)
		}
		return f(c)
	}
}

// Restarts is the distance of V_BS at the first pulse after a pause to the rising lockout, or of the lowest to what it must keep [V].
func Restarts(c *circuit.Circuit) float64 {
	return math.Min(Hold(c), c.Restart()-c.Need(&c.Stage.Driver.UVLORising))
}

// both limits at once.
func both(c *circuit.Circuit) float64 { return math.Min(Hold(c), Stand(c)) }

// Result is one derived limit at one draw.
type Result struct {
	Value float64 // NaN where there is none
	Input float64 // of the input that was moved
	Found bool    // the limit turns at Value
	Whole bool    // the whole range holds
}

// Names lists the limits of a kind of mode that are found by moving an input, in the order of answers.
func Names(mode string) []string {
	first := []string{finding.LargestDuty, finding.LongestOnTime, finding.ShortestLowSidePulse}
	last := []string{finding.LargestResistance, finding.LargestDeadTime, finding.LowestSwitchingFrequency, finding.HighestSwitchingFreq}
	switch mode {
	case stage.ModeFixedDuty:
		return append(first, last...)
	case stage.ModeSinusoidal:
		return append([]string{finding.LargestIndex, finding.LongestOnTime, finding.ShortestLowSidePulse}, append(last, finding.LowestFundamental)...)
	case stage.ModeSixStep:
		return []string{finding.LargestDuty, finding.LongestOnTime, finding.LargestResistance, finding.LowestSwitchingFrequency, finding.HighestSwitchingFreq,
			finding.LowestFundamental}
	case stage.ModeBurst:
		return append(append(first, last...), finding.LongestIdle)
	}
	return nil
}

// search is how one limit is found: which input moves, from the drawn value, toward where, and what must hold.
type search struct {
	input  *stage.Quantity
	toward float64
	back   float64 // where to look when the drawn value does not hold
	holds  func(*circuit.Circuit) float64
	finish func(c *circuit.Circuit, v float64) float64 // turns the input's value into the limit
}

func (s search) limit(c *circuit.Circuit, v float64) float64 {
	if s.finish == nil {
		return v
	}
	return s.finish(c, v)
}

// at is the condition with the input moved.
func (s *search) at(c *circuit.Circuit, v float64) (out float64) {
	c.Space.Try(c.Draw, func(d *corner.Draw) { out = s.holds(circuit.Of(d)) }, corner.Change{ID: s.input.ID, Value: v})
	return out
}

// DutyOf is the duty of an operating point with switching periods, or what stands for it: the modulation index.
func DutyOf(op *stage.OperatingPoint) *stage.Quantity {
	switch {
	case op.Sinusoidal != nil:
		return &op.Sinusoidal.ModulationIndex
	case op.SixStep != nil:
		return &op.SixStep.Duty
	case op.Burst != nil:
		return &op.Burst.Duty
	}
	return &op.FixedDuty.Duty
}

// fundamental is the frequency of the fundamental.
func fundamental(op *stage.OperatingPoint) *stage.Quantity {
	if op.SixStep != nil {
		return &op.SixStep.ElectricalFrequency
	}
	return &op.Sinusoidal.FundamentalFrequency
}

// moved is a number of the circuit with an input moved.
func moved(c *circuit.Circuit, q *stage.Quantity, v float64, f func(*circuit.Circuit) float64) (out float64) {
	c.Space.Try(c.Draw, func(d *corner.Draw) { out = f(circuit.Of(d)) }, corner.Change{ID: q.ID, Value: v})
	return out
}

func plan(c *circuit.Circuit, name string) search {
	op := c.Point
	f := c.Value(&op.SwitchingFrequency)
	period := 1 / f
	const backDuty, mostResistance, decades, mostIdle = 1e-3, 1e6, 1e4, 1e5
	s := search{input: DutyOf(op), toward: 1, back: backDuty, holds: works(Hold)}
	if op.Sinusoidal != nil {
		s.toward = mostIndex
	}
	if op.Burst != nil {
		s.holds = works(Restarts)
	}
	frequency := search{input: &op.SwitchingFrequency, holds: s.holds}
	switch name {
	case finding.LargestDuty, finding.LargestIndex:
		return s
	case finding.LongestOnTime:
		if op.SixStep != nil || op.Sinusoidal != nil && c.LongestOn() > period { // the high side is held on for a share of the fundamental
			s = plan(c, finding.LowestFundamental)
		}
		q := s.input
		s.finish = func(c *circuit.Circuit, v float64) float64 {
			if op.FixedDuty != nil {
				if v >= 1 {
					return math.Inf(1)
				}
				return math.Max(0, v*period-c.Value(&op.DeadTime))
			}
			return moved(c, q, v, (*circuit.Circuit).LongestOn)
		}
		return s
	case finding.ShortestLowSidePulse:
		q := s.input
		s.finish = func(c *circuit.Circuit, v float64) float64 {
			if op.Sinusoidal != nil {
				return moved(c, q, v, (*circuit.Circuit).ShortestLow)
			}
			return math.Max(0, (1-v)*period-c.Value(&op.DeadTime))
		}
		return s
	case finding.LargestResistance:
		return search{input: &c.Stage.Bootstrap.Resistor.Resistance, toward: mostResistance, back: 0, holds: s.holds}
	case finding.LargestDeadTime:
		return search{input: &op.DeadTime, toward: period / 2, back: 0, holds: works(both)}
	case finding.LowestSwitchingFrequency:
		frequency.toward, frequency.back = f/decades, f*30
		if op.Sinusoidal != nil || op.SixStep != nil { // a fundamental has some periods of it
			frequency.toward = math.Max(frequency.toward, fewestPeriods*c.Value(fundamental(op)))
		}
		return frequency
	case finding.LowestFundamental:
		q := fundamental(op)
		here := c.Value(q)
		return search{input: q, toward: here / decades, back: math.Min(here*decades, f/fewestPeriods), holds: works(Hold)}
	case finding.LongestIdle:
		return search{input: &op.Burst.IdleTime, toward: mostIdle, back: 0, holds: works(Restarts)}
	}
	frequency.toward, frequency.back = f*decades, f/30
	return frequency
}

// Modulation indices between which the largest one is looked for, where the drawn one turns no switch on and off [1].
const leastIndex, mostIndex = 1. / 1024, 4.

// fewestPeriods of the carrier in a fundamental that are looked at.
const fewestPeriods = 6 * (1 + 1e-9)

// Limit finds a derived limit at the draw of a circuit.
func Limit(c *circuit.Circuit, name string) Result {
	s := plan(c, name)
	here := c.Value(s.input)
	at := func(v float64) float64 { return s.at(c, v) }
	now := s.holds(c)
	if now != now || here != here {
		return Result{Value: math.NaN(), Input: math.NaN()}
	}
	good, bad := here, s.toward
	if least := leastDuty(c, at); name == Duty(c.Point) && here < least && now < 0 { // no pulse reaches the switch there: the first that does counts
		here = least
		now = at(here)
		good = here
	}
	if now < 0 {
		good, bad = s.back, here
		for k := 1; k <= backSteps && !(at(good) >= 0); k++ { // it may hold in between only: pulses vanish at the far end
			good = between(here, s.back, float64(k)/(backSteps+1))
		}
		if !(at(good) >= 0) {
			return Result{Value: math.NaN(), Input: math.NaN()}
		}
	} else if !(at(bad) < 0) {
		return Result{Value: s.limit(c, bad), Input: bad, Whole: true}
	}
	if far := bad * nearNothing; good == 0 && (name == finding.LongestIdle || name == finding.LargestResistance) && at(far) >= 0 {
		good = far // a range that begins at 0 and spans decades is searched by its logarithm
	}
	digits := float64(turnDigits)
	if c.Space.Dear {
		digits = dearDigits
	}
	v := turn(at, good, bad, digits)
	return Result{Value: s.limit(c, v), Input: v, Found: v == v}
}

// LargestDuty is the limit on the duty, or on what stands for it, at the draw of a circuit, found once.
func LargestDuty(c *circuit.Circuit) Result {
	return (*corner.Memo(c.Draw, circuit.SlotDuty, false, &c.DutyAt, func() any { return Limit(c, Duty(c.Point)) })).(Result)
}

// OfDuty tells whether a limit follows from the largest duty; From then spares solving again.
func OfDuty(op *stage.OperatingPoint, name string) bool {
	switch name {
	case finding.LargestDuty, finding.LargestIndex, finding.ShortestLowSidePulse:
		return true
	case finding.LongestOnTime:
		return op.FixedDuty != nil || op.Burst != nil
	}
	return false
}

// Duty is the name of the limit on the duty of a kind of mode, or on what stands for it.
func Duty(op *stage.OperatingPoint) string {
	if op.Sinusoidal != nil {
		return finding.LargestIndex
	}
	return finding.LargestDuty
}

// From is the limit that follows from the largest duty found at the same draw.
func From(c *circuit.Circuit, name string, duty Result) Result {
	s := plan(c, name)
	if duty.Input == duty.Input {
		duty.Value = s.limit(c, duty.Input)
	}
	return duty
}

// leastDuty is the smallest duty whose pulse reaches the high side. Of a modulation index it is the first of a series that holds, where the drawn one
// leaves the high side either off or on throughout; 0 elsewhere.
func leastDuty(c *circuit.Circuit, at func(float64) float64) float64 {
	if c.Point.Sinusoidal == nil {
		return c.LeastDuty() * (1 + 1e-9)
	}
	if y := c.Cycle(); y.Plan == nil || y.Gates > 0 {
		return 0
	}
	for m := leastIndex; m <= mostIndex; m *= 2 {
		if at(m) >= 0 {
			return m
		}
	}
	return 0
}

// nearNothing is so small a share of a range from 0 on that nothing turns within it.
const nearNothing = 1e-13

// backSteps is the number of values tried on the way back where neither the drawn value holds nor the far end.
const backSteps = 24

// between is a value on the way from one to another, geometric where both are positive.
func between(from, to, share float64) float64 {
	if from > 0 && to > 0 {
		return from * math.Pow(to/from, share)
	}
	return from + share*(to-from)
}

// Holds tells whether the limit's condition holds at another draw with the input of a result found elsewhere.
func Holds(c *circuit.Circuit, name string, input float64) bool {
	s := plan(c, name)
	return s.at(c, input) >= 0
}

// How exactly a limit is found, relative; dearDigits where evaluations take some time.
const (
	turnDigits = 1e-7
	dearDigits = 1e-5
)

// turn finds where a function that is not negative at good becomes negative toward bad, to some digits of the value, on the good side. The search
// runs over the logarithm where both ends are positive and far apart.
func turn(f func(float64) float64, good, bad, digits float64) float64 {
	to := func(u float64) float64 { return u }
	from := to
	if good > 0 && bad > 0 && (bad > 4*good || good > 4*bad) {
		to, from = math.Log, math.Exp
	}
	a, b := to(good), to(bad)
	best := good
	g := func(u float64) float64 {
		v := from(u)
		y := f(v)
		if y >= 0 && math.Abs(to(v)-b) < math.Abs(to(best)-b) {
			best = v
		}
		return y
	}
	scale := math.Max(math.Abs(a), math.Abs(b))
	if to(2) != 2 {
		scale = 1
	}
	if _, ok := numeric.Root(g, a, b, digits*scale); !ok {
		return math.NaN()
	}
	return best
}

// Tightest is the binding one of a limit's results at several draws: the smallest where the quantity is limited from above.
func Tightest(name string, a, b Result) bool {
	if a.Value != a.Value || b.Value != b.Value {
		return a.Value != a.Value && b.Value == b.Value // none anywhere is the tightest
	}
	if name == finding.ShortestLowSidePulse || name == finding.LowestSwitchingFrequency || name == finding.LowestFundamental {
		return a.Value > b.Value
	}
	return a.Value < b.Value
}
