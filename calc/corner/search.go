package corner

import (
	"cmp"
	"math"
	"slices"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/stage"
)

// Function maps a draw to a number of which the smallest is the worst. NaN: it cannot be evaluated at that draw.
type Function func(*Draw) float64

// Negative turns a function round, so that its largest value is found.
func (f Function) Negative() Function { return func(d *Draw) float64 { return -f(d) } }

// Worst is the result of a search over one space.
type Worst struct {
	Space   *Space
	Value   float64 // smallest value found; NaN where the function cannot be evaluated
	Draw    *Draw   // where
	Typical float64 // value with every input at its typical value
	Trace   *Trace  // all that was read anywhere in the search
	Swings  []Swing // made by Polish, largest first
	// Partial tells that the function could not be evaluated at some draw of the search; Value is the smallest of the others.
	Partial bool

	ends    []end // where each input stands that was moved from its typical value
	turning Bits  // inputs in which the function turns between their ends
}

// Decided tells whether the function could be evaluated at every draw of the search.
func (w *Worst) Decided() bool { return w.Value == w.Value && !w.Partial }

// Swing tells how far one input moves the function, the others standing at the worst draw.
type Swing struct {
	Input *stage.Quantity
	Range float64
}

// Evaluate runs a function at a draw and returns what it read.
func Evaluate(d *Draw, f Function) (float64, *Trace) {
	d.trace.reset()
	v := f(d)
	return v, &d.trace
}

// usable tells whether a value counts: not NaN, and nothing was missing.
func usable(v float64, t *Trace) bool { return v == v && t.Complete() }

// tolerance below which two values count as equal, relative.
const tolerance = 1e-12

func below(a, b float64) bool {
	return a < b-tolerance*math.Abs(b) || (math.IsInf(a, -1) && !math.IsInf(b, -1))
}

// Search finds the worst draw of a space by the directions seen from the typical draw.
func (s *Space) Search(f Function) Worst {
	d := s.Typical()
	v, t := Evaluate(d, f)
	w := Worst{Space: s, Value: v, Draw: d, Typical: v, Trace: t.clone(), turning: newBits(len(s.inputs))}
	if !usable(v, t) {
		w.Value = math.NaN()
		return w
	}
	seen := newBits(len(s.inputs))
	for {
		fresh := slices.Clone(w.Trace.used)
		for i := range fresh {
			fresh[i] &^= seen[i]
		}
		seen.or(fresh)
		any := false
		fresh.each(func(id int) {
			any = true
			s.beyond(&w, s.Typical(), f, v, id)
			if !(s.low[id] < s.high[id]) {
				return
			}
			best, at := v, int8(0)
			try := func(step int8) float64 {
				p := s.sample(id, step)
				d := s.probe(id, step, p)
				u, t := Evaluate(d, f)
				w.Trace.Add(t)
				if !usable(u, t) {
					w.Partial = true
					return math.NaN()
				}
				if below(u, best) {
					best, at = u, step
				}
				if below(u, w.Value) {
					w.Value, w.Draw = u, d
				}
				return u
			}
			lo, hi := try(1), try(2)
			turns := (lo-v)*(hi-v) > 0
			if s.interior.has(id) && !turns { // look between the ends for a turn
				a, b := try(lookLow), try(lookHigh)
				turns = (a-lo)*(hi-lo) < 0 || (b-lo)*(hi-lo) < 0 || (a-hi)*(lo-hi) < 0 || (b-hi)*(lo-hi) < 0 || (b-a)*(hi-lo) < 0
			}
			if turns {
				w.turning.set(id)
				for k := int8(firstInterior); k < firstInterior+interiorSamples; k++ {
					try(k)
				}
			}
			if at != 0 {
				w.ends = append(w.ends, end{id, at})
			}
		})
		if !any {
			break
		}
	}
	s.gather(&w, f)
	return w
}

// end is one input's sample number.
type end struct {
	id   int
	step int8
}

// gather moves all inputs to their worse ends together.
func (s *Space) gather(w *Worst, f Function) {
	if len(w.ends) == 0 {
		return
	}
	s.visit(w, s.corner(w.ends), f)
}

// corner is the draw with inputs at given ends; kept, so that functions with the same worst ends share what models compute there.
func (s *Space) corner(ends []end) *Draw {
	x := slices.Clone(s.typ)
	for _, e := range ends {
		x[e.id] = s.sample(e.id, e.step)
	}
	h := uint64(0)
	for _, v := range x {
		h = (h ^ math.Float64bits(v)) * 1099511628211
	}
	for _, d := range s.corners[h] {
		if slices.EqualFunc(d.x, x, func(a, b float64) bool { return math.Float64bits(a) == math.Float64bits(b) }) {
			return d
		}
	}
	d := s.at(x)
	s.corners[h] = append(s.corners[h], d)
	return d
}

// SearchSets finds the worst draw of each temperature set of one operating point. The directions are found at the room set, or the first
// where there is none, and carried over to the others: temperature moves ranges, it does not turn the sense in which an input acts. The set
// that binds is then polished, which moves every input once more there.
func SearchSets(sets []*Space, f Function) []Worst {
	out := make([]Worst, len(sets))
	home := max(0, slices.IndexFunc(sets, func(s *Space) bool { return s.Set.Name == "room" }))
	for i := range sets {
		if i == home {
			out[i] = sets[i].Search(f)
		}
	}
	ref := &out[home]
	for i, s := range sets {
		if i == home {
			continue
		}
		if ref.Value != ref.Value {
			out[i] = s.Search(f)
			continue
		}
		d := s.Typical()
		v, t := Evaluate(d, f)
		w := Worst{Space: s, Value: v, Draw: d, Typical: v, Trace: t.clone(), ends: ref.ends, turning: ref.turning}
		switch {
		case !usable(v, t):
			w.Value = math.NaN()
		case ref.Partial || s.moves(ref, t):
			w = s.Search(f)
		default:
			s.gather(&w, f)
		}
		out[i] = w
	}
	return out
}

// moves tells whether a function reads an input that has a range here but was not moved in a reference search: it had no range there, or was
// not read.
func (s *Space) moves(ref *Worst, t *Trace) (yes bool) {
	all := slices.Clone(t.used)
	all.or(ref.Trace.used)
	all.each(func(id int) {
		moved := ref.Trace.used.has(id) && ref.Space.low[id] < ref.Space.high[id]
		yes = yes || s.low[id] < s.high[id] && !moved
	})
	return yes
}

// openStep is how far beyond a given value an open side is looked at, as a share of the value.
const openStep = 0.1

// beyond looks at the open sides of an input at a draw: where the function gets worse there, the missing end is missing for it.
func (s *Space) beyond(w *Worst, d *Draw, f Function, here float64, id int) {
	q := s.inputs[id]
	if !q.OpenBelow && !q.OpenAbove {
		return
	}
	look := func(open bool, v float64) {
		if !open {
			return
		}
		s.Try(d, func(n *Draw) {
			if u, t := Evaluate(n, f); usable(u, t) && below(u, here) {
				w.Trace.missing.set(id)
				w.Partial = true
			}
		}, Change{id, math.Min(math.Max(v, q.Declare.Low), q.Declare.High)})
	}
	step := openStep * math.Abs(d.x[id])
	if span := q.Declare.High - q.Declare.Low; step == 0 && !math.IsInf(span, 0) {
		step = openStep * span
	}
	look(q.OpenBelow, d.x[id]-step)
	look(q.OpenAbove, d.x[id]+step)
}

// visit evaluates a draw and keeps it if it is worse.
func (s *Space) visit(w *Worst, d *Draw, f Function) float64 {
	u, t := Evaluate(d, f)
	w.Trace.Add(t)
	if !usable(u, t) {
		w.Partial = true
		return math.NaN()
	}
	if below(u, w.Value) {
		w.Value, w.Draw = u, d
	}
	return u
}

// Polish moves one input at a time from the worst draw until nothing gets worse, and measures the swings there.
func (s *Space) Polish(w *Worst, f Function) {
	const passes = 4
	var ids []int
	w.Trace.used.each(func(id int) { ids = append(ids, id) })
	swings := make([]float64, len(ids))
	calm := 0 // inputs moved in a row without getting worse; all of them: done
	for k := 0; calm < len(ids) && k < passes*len(ids); k++ {
		start := w.Value
		swings[k%len(ids)] = s.move(w, f, ids[k%len(ids)])
		if calm++; below(w.Value, start) {
			calm = 1 // this input's swing was measured from the new worst draw's own end
			w.Trace.used.each(func(id int) {
				if !slices.Contains(ids, id) { // read for the first time
					ids, swings = append(ids, id), append(swings, 0)
				}
			})
		}
	}
	w.Swings = w.Swings[:0]
	for i, id := range ids {
		if swings[i] > 0 {
			w.Swings = append(w.Swings, Swing{s.inputs[id], swings[i]})
		}
	}
	slices.SortFunc(w.Swings, func(a, b Swing) int {
		if c := cmp.Compare(b.Range, a.Range); c != 0 {
			return c
		}
		return a.Input.ID - b.Input.ID
	})
}

// move tries the other ends of one input at the worst draw, and its interior where the function turns in it. It returns the largest change.
func (s *Space) move(w *Worst, f Function, id int) (swing float64) {
	here := w.Value
	s.beyond(w, w.Draw, f, here, id)
	changed := func(u float64) {
		if d := math.Abs(u - here); d > swing && !math.IsInf(d, 0) {
			swing = d
		}
	}
	try := func(v float64) {
		if v == w.Draw.x[id] {
			return
		}
		n := s.take(w.Draw, Change{id, v})
		changed(s.visit(w, n, f))
		if w.Draw != n {
			s.give(n)
		}
	}
	if s.low[id] < s.high[id] {
		try(s.low[id])
		try(s.high[id])
		if w.turning.has(id) {
			for k := int8(firstInterior); k < firstInterior+interiorSamples; k++ {
				try(s.sample(id, k))
			}
		}
	}
	if n := s.inputs[id].Naive; n == n && n != w.Draw.x[id] {
		s.Try(w.Draw, func(d *Draw) {
			u, _ := Evaluate(d, f)
			changed(u)
		}, Change{id, n})
	}
	return swing
}

// Inputs lists what was read, in the order of the stage.
func (s *Space) Inputs(t *Trace) []*stage.Quantity {
	var out []*stage.Quantity
	s.read(t).each(func(id int) { out = append(out, s.inputs[id]) })
	return out
}

// read is all that was read: inputs and points of curves.
func (s *Space) read(t *Trace) Bits {
	all := slices.Clone(t.used)
	all.or(t.shown)
	return all
}

// Missing lists the paths of what was missing: inputs in the order of the stage, then components and lists.
func (s *Space) Missing(t *Trace) []string {
	var out []string
	t.missing.each(func(id int) {
		q := s.inputs[id]
		if t := s.temperature(q); q.Known() && t != nil && (t.OpenBelow || t.OpenAbove) && s.low[id] != s.low[id] { // what is missing is the temperature that moves it
			q = t
		}
		names := []string{q.Field}
		if q.OpenBelow || q.OpenAbove {
			names = names[:0]
		}
		if q.OpenBelow {
			names = append(names, q.Field+".min")
		}
		if q.OpenAbove {
			names = append(names, q.Field+".max")
		}
		for _, n := range names {
			if !slices.Contains(out, n) {
				out = append(out, n)
			}
		}
	})
	for _, w := range t.wants {
		if !slices.Contains(out, w) {
			out = append(out, w)
		}
	}
	return out
}

// temperature is the quantity by which an input's temperature is given; nil without an operating point.
func (s *Space) temperature(q *stage.Quantity) *stage.Quantity {
	switch {
	case s.Point == nil:
		return nil
	case q.Domain == stage.Junction:
		return &s.Point.JunctionTemperature
	}
	return &s.Point.AmbientTemperature
}

// Reasons tells why the function could not be evaluated, beside what was missing.
func (t *Trace) Reasons() []string { return t.reasons }

// Assumptions lists what was assumed among the inputs read and while evaluating.
func (s *Space) Assumptions(t *Trace) []stage.Assumption {
	var out []stage.Assumption
	s.read(t).each(func(id int) {
		if a := s.inputs[id].Assumption; a != nil {
			out = append(out, *a)
		}
	})
	return append(out, t.assumptions...)
}

// BreakEven finds the value of one input, the others standing at a draw, at which f turns from its sign there, between low and high.
// Of two the nearer one is given; ok is false where the sign holds at both ends.
func (s *Space) BreakEven(d *Draw, q *stage.Quantity, f Function, low, high float64) (float64, bool) {
	start := d.x[q.ID]
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
	best, found := math.NaN(), false
	for _, end := range []float64{low, high} {
		if v := at(end); start == end || v != v || (v < 0) == (v0 < 0) {
			continue
		}
		var p float64
		var ok bool
		if start > 0 && end > 0 && (end > 4*start || start > 4*end) { // far apart: over the logarithm
			p, ok = numeric.Root(func(u float64) float64 { return at(math.Exp(u)) }, math.Log(start), math.Log(end), breakEvenDigits)
			p = math.Exp(p)
		} else {
			p, ok = numeric.Root(at, start, end, breakEvenDigits*math.Max(math.Abs(start), math.Abs(end)))
		}
		if ok && (!found || distance(p, start) < distance(best, start)) {
			best, found = p, true
		}
	}
	return best, found
}

// breakEvenDigits is how exactly a break-even value is found, relative.
const breakEvenDigits = 1e-4

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
