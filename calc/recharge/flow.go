package recharge

// Flow carries V_BS through periods of one element. What repeated passes share is computed once, and each pass starts from what the one before
// found, so that a sequence of similar periods is fast. Not for several goroutines at once.
type Flow struct{ w law }

// Flow returns the flow of the element.
func (e Element) Flow() Flow { return Flow{w: e.law()} }

// Passage is what happens to V_BS in one period, from just before its rising edge to just before the next. Slopes are derivatives by V_BS before
// the edge.
type Passage struct {
	Next, NextSlope  float64 // V_BS just before the next edge [V], [1]
	After            float64 // V_BS just after the rising edge [V]
	OnEnd            float64 // V_BS at the end of the on-time [V]
	Low, High        float64 // lowest and highest [V]
	HighInterval     int     // index into Period.Off of the interval that ends at High; -1: the edge, the on-time or the charge returned
	Recovery         float64 // Q_rr that left at the rising edge [C]
	Drawn, Recharged float64 // charge of edges, less Return, and loads; ∫i dt through the element [C]
}

// Pass carries V_BS = v [V], just before the rising edge, through a period of the flow's element.
func (f *Flow) Pass(p *Period, v float64) Passage {
	var tr trace
	next, slope := p.pass(&f.w, v, &tr)
	return Passage{Next: next, NextSlope: slope, After: tr.after, OnEnd: tr.onEnd, Low: tr.low, High: tr.high, HighInterval: tr.highest,
		Recovery: tr.recovery, Drawn: tr.drawn, Recharged: tr.carried}
}
