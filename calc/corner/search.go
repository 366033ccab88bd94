package corner

import (
	"cmp"
	"math"
	"slices"

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
	// Carried tells that the directions were found at another set.
	Carried bool

	effects []Swing // where evaluations are dear, largest first: of each input from its typical value to one end
	hidden  bool    // an input with a range was not read at the typical draw: its direction is not seen from there
	ends    []end   // where each input stands that was moved from its typical value
	turning Bits    // inputs in which the function turns between their ends
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

// Effects are, where evaluations are dear, how far each input moves the function from its typical draw to its ends, largest first.
func (w *Worst) Effects() []Swing { return w.effects }

// tolerance below which two values count as equal, relative.
const tolerance = 1e-12

// above returns how far a lies above b, 0 where both count as equal.
func above(a, b float64) float64 {
	if d := a - b; !(math.Abs(d) <= tolerance*math.Abs(b)) {
		return d
	}
	return 0
}

func below(a, b float64) bool {
	return a < b-tolerance*math.Abs(b) || (math.IsInf(a, -1) && !math.IsInf(b, -1))
}

// Search finds the worst draw of a space by the directions seen from the typical draw.
func (s *Space) Search(f Function) Worst { return s.search(f, nil) }

// seen is one value of a function at a draw with one input moved; NaN where it cannot be evaluated there.
type seen struct {
	end
	draw  *Draw
	value float64
}

// search is Search; what it sees is appended to log, if any.
func (s *Space) search(f Function, log *[]seen) Worst {
	w := s.typicalAlone(f)
	v := w.Typical
	if w.Value != w.Value {
		return w
	}
	done := newBits(len(s.inputs))
	for pass := 0; ; pass++ {
		fresh := slices.Clone(w.Trace.used)
		for i := range fresh {
			fresh[i] &^= done[i]
		}
		done.or(fresh)
		any := false
		fresh.each(func(id int) {
			any = true
			s.beyond(&w, s.Typical(), f, v, id)
			if !(s.low[id] < s.high[id]) {
				return
			}
			w.hidden = w.hidden || pass > 0
			best, at := v, int8(0)
			try := func(step int8) float64 {
				p := s.sample(id, step)
				d := s.probe(id, step, p)
				u, t := Evaluate(d, f)
				w.Trace.Add(t)
				if !usable(u, t) {
					w.Partial = true
					u = math.NaN()
				}
				if log != nil {
					*log = append(*log, seen{end{id, step}, d, u})
				}
				if below(u, best) {
					best, at = u, step
				}
				if below(u, w.Value) {
					w.Value, w.Draw = u, d
				}
				return u
			}
			if s.Frugal {
				far := s.farEnd(id)
				u := try(far)
				other := 2*v - u // were the function a straight line
				if log != nil {
					*log = append(*log, seen{end{id, 3 - far}, nil, other})
				}
				if below(other, best) {
					at = 3 - far
				}
				w.effect(id, math.Abs(above(u, v)))
				if at != 0 {
					w.ends = append(w.ends, end{id, at})
				}
				return
			}
			lo, hi := try(1), try(2)
			if s.Dear {
				w.effect(id, max(math.Abs(above(lo, v)), math.Abs(above(hi, v))))
			}
			turns := above(lo, v)*above(hi, v) > 0
			if s.interior.has(id) && !turns { // look between the ends for a turn
				a, b := try(lookLow), try(lookHigh)
				way := hi - lo
				turns = above(a, lo)*way < 0 || above(b, lo)*way < 0 || above(hi, a)*way < 0 || above(hi, b)*way < 0 || above(b, a)*way < 0
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
	slices.SortStableFunc(w.effects, func(a, b Swing) int { return cmp.Compare(b.Range, a.Range) })
	if s.Frugal && log != nil {
		return w
	}
	s.gather(&w, f)
	if w.hidden {
		s.Polish(&w, f)
	}
	return w
}

// effect notes how far an input moves the function from its typical draw.
func (w *Worst) effect(id int, d float64) {
	if d > 0 && !math.IsInf(d, 0) {
		w.effects = append(w.effects, Swing{w.Space.inputs[id], d})
	}
}

// farEnd is the end of an input that is farther from its typical value: the sample number.
func (s *Space) farEnd(id int) int8 {
	if s.typ[id]-s.low[id] > s.high[id]-s.typ[id] {
		return 1
	}
	return 2
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
	s.scratch = append(s.scratch[:0], s.typ...)
	x := s.scratch
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
	d := s.at(slices.Clone(x))
	s.corners[h] = append(s.corners[h], d)
	return d
}

// Ends finds the smallest and, as that of the negative function, the largest value of a function. Both are seen from the same draws. In a frugal space
// they are those with one input moved.
func (s *Space) Ends(f Function) (low, high Worst) {
	var log []seen
	low = s.search(f, &log)
	v := low.Typical
	high = Worst{Space: s, Value: -low.Typical, Draw: s.Typical(), Typical: -low.Typical, Trace: low.Trace.clone(), Partial: false,
		turning: slices.Clone(low.turning), effects: low.effects}
	if low.Value != low.Value {
		high.Value = math.NaN()
		return low, high
	}
	high.Trace.used.each(func(id int) { // what lies beyond an open side counts for the end that gets worse there
		if q := s.inputs[id]; q.OpenBelow || q.OpenAbove {
			high.Trace.missing.clear(id)
			s.beyond(&high, s.Typical(), f.Negative(), -v, id)
		}
	})
	for i := 0; i < len(log); {
		id, best, at := log[i].id, -v, int8(0)
		for ; i < len(log) && log[i].id == id; i++ {
			u := -log[i].value
			if u != u && log[i].draw != nil {
				high.Partial = true
			}
			if below(u, best) {
				best, at = u, log[i].step
			}
			if log[i].draw != nil && below(u, high.Value) {
				high.Value, high.Draw = u, log[i].draw
			}
		}
		if at != 0 {
			high.ends = append(high.ends, end{id, at})
		}
	}
	if s.Frugal {
		return low, high
	}
	s.gather(&high, f.Negative())
	if high.hidden = low.hidden; high.hidden {
		s.Polish(&high, f.Negative())
	}
	return low, high
}

// SearchSets finds the worst draw of each temperature set of one operating point. The directions are found at the room set, or the first
// where there is none, and carried over to the others: temperature moves ranges, it does not turn the sense in which an input acts.
func SearchSets(sets []*Space, f Function) []Worst {
	out, home := make([]Worst, len(sets)), homeOf(sets)
	out[home] = sets[home].Search(f)
	for i, s := range sets {
		if i != home {
			out[i] = s.carry(&out[home], f)
		}
	}
	return out
}

// EndsOfSets is SearchSets for the smallest and the largest value. Frugal spaces are searched at one set, and looked at at the typical draw of the others.
func EndsOfSets(sets []*Space, f Function) (lows, highs []Worst) {
	home := homeOf(sets)
	lows, highs = make([]Worst, len(sets)), make([]Worst, len(sets))
	lows[home], highs[home] = sets[home].Ends(f)
	for i, s := range sets {
		switch {
		case i == home:
		case s.Frugal:
			lows[i], highs[i] = s.typicalAlone(f), s.typicalAlone(f.Negative())
		default:
			lows[i], highs[i] = s.carry(&lows[home], f), s.carry(&highs[home], f.Negative())
		}
	}
	return lows, highs
}

// typicalAlone is a function at the typical draw.
func (s *Space) typicalAlone(f Function) Worst {
	d := s.Typical()
	v, t := Evaluate(d, f)
	w := Worst{Space: s, Value: v, Draw: d, Typical: v, Trace: t.clone(), turning: newBits(len(s.inputs))}
	if !usable(v, t) {
		w.Value = math.NaN()
	}
	return w
}

// homeOf is the set at which directions are found.
func homeOf(sets []*Space) int {
	return max(0, slices.IndexFunc(sets, func(s *Space) bool { return s.Set.Name == "room" }))
}

// carry finds the worst draw with the directions found at another set; with its own where those do not serve.
func (s *Space) carry(ref *Worst, f Function) Worst {
	if ref.Value != ref.Value {
		return s.Search(f)
	}
	d := s.Typical()
	v, t := Evaluate(d, f)
	w := Worst{Space: s, Value: v, Draw: d, Typical: v, Trace: t.clone(), ends: ref.ends,
		turning: slices.Clone(ref.turning), effects: ref.effects, Carried: true}
	switch {
	case !usable(v, t):
		w.Value = math.NaN()
	case ref.Partial || s.moves(ref, t):
		return s.Search(f)
	default:
		s.gather(&w, f)
		if w.hidden = ref.hidden; w.hidden {
			s.Polish(&w, f)
		}
	}
	return w
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
