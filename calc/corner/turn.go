package corner

import (
	"math"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/stage"
)

// BreakEven finds the value of one input, the others standing at a draw, at which f turns from its sign there, between low and high.
// Of two the nearer one is given; ok is false where the sign holds at both ends.
func (s *Space) BreakEven(d *Draw, q *stage.Quantity, f Function, low, high float64) (float64, bool) {
	start := d.get(q.ID)
	v0, t0 := Evaluate(d, f)
	if !usable(v0, t0) || start != start {
		return math.NaN(), false
	}
	at := func(p float64) float64 {
		n := s.take(d, Change{q.ID, p})
		defer s.give(n)
		u, t := Evaluate(n, f)
		if !usable(u, t) {
			return math.NaN()
		}
		return u
	}
	digits := float64(breakEvenDigits)
	switch {
	case s.Frugal:
		digits = frugalDigits
	case s.Dear:
		digits = dearDigits
	}
	best, found := math.NaN(), false
	for _, end := range []float64{low, high} {
		if v := at(end); start == end || v != v || (v < 0) == (v0 < 0) {
			continue
		}
		var p float64
		var ok bool
		if start > 0 && end > 0 && (end > 4*start || start > 4*end) { // far apart: over the logarithm
			p, ok = numeric.Root(func(u float64) float64 { return at(math.Exp(u)) }, math.Log(start), math.Log(end), digits)
			p = math.Exp(p)
		} else {
			p, ok = numeric.Root(at, start, end, digits*math.Max(math.Abs(start), math.Abs(end)))
		}
		if ok && (!found || distance(p, start) < distance(best, start)) {
			best, found = p, true
		}
	}
	return best, found
}

// How exactly a break-even value is found, relative; frugalDigits where evaluations are dear.
const (
	breakEvenDigits = 1e-4
	dearDigits      = 1e-3
	frugalDigits    = 1e-2
)

func distance(a, b float64) float64 {
	return math.Abs(a-b) / (math.Abs(a) + math.Abs(b) + math.SmallestNonzeroFloat64)
}

// bisect narrows a turn to six digits; the value returned lies on the inside.
func bisect(inside, outside float64, turned func(float64) (bool, bool)) float64 {
	for range 60 {
		if math.Abs(outside-inside) <= 1e-7*math.Max(math.Abs(inside), math.Abs(outside)) {
			break
		}
		mid := inside/2 + outside/2
		if inside > 0 && outside > 4*inside || outside > 0 && inside > 4*outside {
			mid = math.Sqrt(inside) * math.Sqrt(outside)
		}
		t, usable := turned(mid)
		if !usable {
			return math.NaN()
		}
		if t {
			outside = mid
		} else {
			inside = mid
		}
	}
	return inside
}

// OnlyMissing is the single input that was missing; nil where none or more was, or where something else stands in the way.
func (s *Space) OnlyMissing(t *Trace) *stage.Quantity {
	if len(t.wants) > 0 || len(t.reasons) > 0 {
		return nil
	}
	var only *stage.Quantity
	n := 0
	t.missing.each(func(id int) { only, n = s.inputs[id], n+1 })
	if n != 1 || only.OpenBelow || only.OpenAbove {
		return nil
	}
	return only
}

// Turn finds the value of one unknown input at which the worst case of f turns its sign within the input's plausible range.
func (s *Space) Turn(q *stage.Quantity, f Function) (float64, bool) {
	sign := func(v float64) (negative, ok bool) {
		w := s.Replace(Replacement{q.ID, stage.Triple{Min: v, Typ: v, Max: v}}).Search(f)
		return w.Value < 0, w.Decided()
	}
	low, okLow := sign(q.Declare.Low)
	high, okHigh := sign(q.Declare.High)
	if !okLow || !okHigh || low == high {
		return math.NaN(), false
	}
	inside, outside := q.Declare.Low, q.Declare.High // inside is where the rule holds
	if low {
		inside, outside = outside, inside
	}
	v := bisect(inside, outside, sign)
	return v, v == v
}
