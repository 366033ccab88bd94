package circuit

import (
	"math"

	"floatrail/calc/stage"
)

// Plateaus are those of an operating point: the reverse conduction of the low side in the dead times, and its on-time, or the whole time for which
// a diode carries the current.
func (c *Circuit) Plateaus() [3]Plateau {
	if c.Point == nil {
		return [3]Plateau{{c.NoPoint(), nan}}
	}
	if c.Stage.LowSide.Kind == stage.DiodeOnly {
		return [3]Plateau{{min(0, c.clampedPin(c.freewheelNode(c.peakCurrent()))), c.offTime()}}
	}
	dead := c.Need(&c.Point.DeadTime)
	if c.lowVanishes() { // both dead times and the pulse that vanished are one plateau
		dead = c.offTime()
	}
	at := func(i float64) float64 { return min(0, c.clampedPin(c.freewheelNode(i))) }
	return [3]Plateau{{at(c.peakCurrent()), dead}, {at(c.valleyCurrent()), dead}, {min(0, c.LowSideNode(c.peakCurrent())), c.offTime()}}
}

// offTime is the time for which the high side is off in a period [s]; without end where the mode has no period.
func (c *Circuit) offTime() float64 {
	if c.Point.FixedDuty == nil {
		return math.Inf(1)
	}
	return (1 - c.Need(&c.Point.FixedDuty.Duty)) / c.Need(&c.Point.SwitchingFrequency)
}

// Commanded is the lowest node voltage at which the high side is commanded to turn on [V]: in reverse conduction of the low side at the valley
// of the current.
func (c *Circuit) Commanded() float64 {
	if c.Point == nil {
		return c.NoPoint()
	}
	return min(0, c.clampedPin(c.freewheelNode(c.valleyCurrent())))
}
