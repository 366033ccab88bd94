package modulation

import "math"

// Timing is what a plan says without any voltage.
type Timing struct {
	LongestOn      float64 // longest uninterrupted on-time of the high side [s]
	WithoutRefresh float64 // longest time from the end of a recharge to the end of an on-time before the next; +Inf: nothing ever recharges [s]
	ShortestHigh   float64 // shortest pulse that the high side is commanded for, whether the driver passes it or not; +Inf without any [s]
	ShortestLow    float64 // shortest time for which the low side is on in a period that turns the high side on and off; +Inf without any [s]
	HighVanishes   bool    // some pulses of the high side are shorter than the driver passes
	LowVanishes    bool    // so are some of the low side
}

// Timing returns what the plan says without any voltage. Pulses are longest or shortest where a piece of the law ends.
func (p *Plan) Timing() Timing {
	t := Timing{ShortestHigh: math.Inf(1), ShortestLow: math.Inf(1), WithoutRefresh: math.Inf(1)}
	since, refreshed := math.NaN(), false // time since the last recharge ended
	on := 0.0                             // since the high side turned on
	var y layout
	for i := range 2 * len(p.runs) { // the second round knows what the end of the first leaves
		r := &p.runs[i%len(p.runs)]
		for _, k := range r.marks {
			r.at(float64(k), &y)
			if y.commanded > 0 && !y.full() {
				t.ShortestHigh = math.Min(t.ShortestHigh, y.commanded)
				t.HighVanishes = t.HighVanishes || y.on == 0
				t.LowVanishes = t.LowVanishes || y.code&formGap != 0 && !p.leg.DiodeLow
			}
			for j := range y.n {
				if y.kinds[j] == LowSide && y.on > 0 {
					t.ShortestLow = math.Min(t.ShortestLow, y.off[j].Duration)
				}
			}
			if !y.full() {
				t.LongestOn = math.Max(t.LongestOn, y.on)
			}
			if !y.conducts() {
				continue
			}
			if y.on > 0 && since == since {
				refreshed = true
				t.WithoutRefresh = worst(t.WithoutRefresh, since+y.on)
			} else if since == since {
				refreshed = true
				t.WithoutRefresh = worst(t.WithoutRefresh, 0)
			}
			since = y.rest + y.idleTail()
		}
		r.at(float64(r.from), &y)
		n := float64(r.to - r.from)
		if y.full() {
			on += n * y.time
		} else {
			if y.on > 0 { // it has been on until here, and goes on in the first period
				on += y.on
			}
			t.LongestOn = math.Max(t.LongestOn, on)
			on = 0
		}
		if !y.conducts() && since == since {
			since += n * y.time
			if y.on > 0 || y.full() {
				t.WithoutRefresh = worst(t.WithoutRefresh, since-(y.time-y.on))
				refreshed = true
			}
		}
	}
	t.LongestOn = math.Max(t.LongestOn, on)
	if !refreshed {
		t.WithoutRefresh = math.Inf(1)
	}
	return t
}

// worst is the larger one of a time that is +Inf until it is known and another.
func worst(known, t float64) float64 {
	if math.IsInf(known, 1) {
		return t
	}
	return math.Max(known, t)
}

// idleTail is the time after the last interval of a period in which the element conducts, within the period [s].
func (y *layout) idleTail() float64 {
	tail := 0.0
	for k := y.n - 1; k >= 0 && !y.off[k].Conducts; k-- {
		tail += y.off[k].Duration
	}
	return tail
}
