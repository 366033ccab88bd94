package circuit

import (
	"cmp"
	"math"
	"slices"

	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// Undershoot is a simulated event against the driver's table of negative node voltages, by depth: the time below the level of a row must not exceed the
// duration of the next deeper one, and be nothing below the last. The limit [V] is the level of the first row that is broken, else that of the first
// one that would be if the undershoot reached it, at the time that it spends below the level before. Near tells that a row is broken where its level
// stands its guard higher, or where the dips of an event count together.
func (c *Circuit) Undershoot(e Event) (value, limit float64, near bool) {
	rows := c.Stage.Driver.NodeUndershoot.Items
	if len(rows) == 0 {
		c.Want(c.Stage.Driver.NodeUndershoot.Field)
		return nan, nan, false
	}
	switch value = c.PinDip(e); {
	case value != value:
		return nan, nan, false
	case c.absent(e):
		return value, c.DeepestRow(), false
	}
	order := make([]int, len(rows))
	for i := range order {
		order[i] = i
		c.Need(&rows[i].Voltage)
	}
	slices.SortFunc(order, func(a, b int) int { return cmp.Compare(c.Value(&rows[b].Voltage), c.Value(&rows[a].Voltage)) })
	limit = nan
	t := c.Width(e) // below the deepest level reached so far [s]
	for k, i := range order {
		allowed := 0.0 // below the level of this row [s]
		if k+1 < len(order) {
			if d := &rows[order[k+1]].Duration; d.Given() {
				allowed = c.Need(d)
			} else {
				allowed = math.Inf(1)
			}
		}
		level := c.Value(&rows[i].Voltage)
		longest, together, guarded := c.timesBelow(e, i)
		near = near || together > allowed || guarded > allowed
		if value < level {
			t = longest
		}
		if limit != limit && (t > allowed || k+1 == len(order)) {
			limit = level
		}
	}
	if first := &rows[order[0]].Duration; first.Given() && c.Width(e) > c.Need(first) {
		c.Open("the driver's table of negative node voltages has no row that lasts as long as the undershoot")
		return nan, nan, false
	}
	return value, limit, near
}

// timesBelow are the longest time below the level of a row of the driver's table, that of all dips of an event together, and the longest below the
// level with its guard [s].
func (c *Circuit) timesBelow(e Event, row int) (longest, together, guarded float64) {
	return c.below(e, 2*row, longestDip), c.below(e, 2*row, func(d *transient.Dips) float64 { return d.Total }), c.below(e, 2*row+1, longestDip)
}

// longestDip is the longest time without a break.
func longestDip(d *transient.Dips) float64 { return d.Longest }

// below is a time below a level, by its number [s]. A dip that lasts beyond the end of the watch lasts for the dead time,
// or for the off-time where no low side takes over.
func (c *Circuit) below(e Event, level int, of func(*transient.Dips) float64) float64 {
	if c.absent(e) {
		return c.Current(e)
	}
	k := c.Course(e, Running)
	if k == nil {
		return nan
	}
	d := &k.BelowPin[level]
	switch {
	case !d.Lasting:
		return of(d)
	case c.Stage.LowSide.Kind == stage.DiodeOnly || c.lowVanishes(): // the diode carries the current all that time
		return math.Max(of(d), c.offTime())
	}
	return math.Max(of(d), c.Need(&c.Point.DeadTime))
}

// Spare is the time that a row of the driver's table leaves to a simulated event below its level, as a share of what it permits there, of that level
// [V]: negative where the event stays too long; +Inf where the row permits no time or any.
func (c *Circuit) Spare(e Event, row int) float64 {
	rows := c.Stage.Driver.NodeUndershoot.Items
	level := c.Need(&rows[row].Voltage)
	allowed, next := 0.0, math.Inf(-1)
	for i := range rows {
		if v := c.Need(&rows[i].Voltage); v < level && v > next {
			next = v
			if allowed = math.Inf(1); rows[i].Duration.Given() {
				allowed = c.Need(&rows[i].Duration)
			}
		}
	}
	longest, _, _ := c.timesBelow(e, row)
	if allowed == 0 || math.IsInf(allowed, 1) {
		return math.Inf(1)
	}
	return -level * (allowed - longest) / allowed
}

// TotalBelow is the time that a simulated event spends below the level of a row of the driver's table in all its dips together [s], and their lengths [s],
// of which the first are kept, and number.
func (c *Circuit) TotalBelow(e Event, row int) (total float64, each []float64, dips int) {
	c.Need(&c.Stage.Driver.NodeUndershoot.Items[row].Voltage)
	if c.absent(e) {
		return c.Current(e), nil, 0
	}
	k := c.Course(e, Running)
	if k == nil {
		return nan, nil, 0
	}
	d := &k.BelowPin[2*row]
	return d.Total, d.Each, d.Count
}

// DeepestRow is the lowest level of the driver's table [V].
func (c *Circuit) DeepestRow() float64 {
	v := 0.0
	for i := range c.Stage.Driver.NodeUndershoot.Items {
		v = math.Min(v, c.Need(&c.Stage.Driver.NodeUndershoot.Items[i].Voltage))
	}
	return v
}

// LongestBelow is the longest time that a simulated event stays below the level of a row of the driver's table [s].
func (c *Circuit) LongestBelow(e Event, row int) float64 {
	c.Need(&c.Stage.Driver.NodeUndershoot.Items[row].Voltage)
	return c.below(e, 2*row, longestDip)
}

// width is the longest time that a simulated event spends beyond the plateau of the diode that takes over: below the first of dipLevels at which the
// node does not stay [s].
func width(k *transient.Course) float64 {
	for _, d := range k.BelowPin[len(k.BelowPin)-len(dipLevels):] {
		if !d.Lasting {
			return d.Longest
		}
	}
	return math.Inf(1)
}
