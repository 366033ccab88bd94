package corner

import (
	"cmp"
	"math"
	"slices"
)

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
	step := openStep * math.Abs(d.get(id))
	if span := q.Declare.High - q.Declare.Low; step == 0 && !math.IsInf(span, 0) {
		step = openStep * span
	}
	look(q.OpenBelow, d.get(id)-step)
	look(q.OpenAbove, d.get(id)+step)
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

// frugalMoves is the number of inputs that are moved where evaluations are dear.
const frugalMoves = 4

const (
	dearPasses = 2
	minorShare = 0.05 // of all effects together that those of minor inputs make [1]
)

// minor are the inputs whose effects together are a small share of all.
func (w *Worst) minor() []Swing {
	all := 0.0
	for _, e := range w.effects {
		all += e.Range
	}
	n, sum := len(w.effects), 0.0
	for n > 0 && sum+w.effects[n-1].Range <= minorShare*all {
		n--
		sum += w.effects[n].Range
	}
	return w.effects[n:]
}

// Polish moves one input at a time from the worst draw until nothing gets worse, and measures the swings there. A frugal space moves those alone that
// had most effect at the typical draw, once.
func (s *Space) Polish(w *Worst, f Function) { s.polish(w, f, false) }

// Scour is Polish that moves the inputs of little effect, too: what matters at the worst draw may not have at the typical one.
func (s *Space) Scour(w *Worst, f Function) { s.polish(w, f, true) }

func (s *Space) polish(w *Worst, f Function, all bool) {
	passes := 4
	var ids []int
	minor := newBits(len(s.inputs)) // inputs of little effect, which stay where they are
	switch {
	case s.Frugal:
		passes = 1
		for _, e := range w.effects[:min(frugalMoves, len(w.effects))] {
			ids = append(ids, e.Input.ID)
		}
	case s.Dear:
		passes = dearPasses
		for _, e := range w.minor() {
			if !all {
				minor.set(e.Input.ID)
			}
		}
		fallthrough
	default:
		w.Trace.used.each(func(id int) {
			if !minor.has(id) {
				ids = append(ids, id)
			}
		})
	}
	swings := make([]float64, len(ids))
	calm := 0 // inputs moved in a row without getting worse; all of them: done
	for k := 0; calm < len(ids) && k < passes*len(ids); k++ {
		start := w.Value
		swings[k%len(ids)] = s.move(w, f, ids[k%len(ids)])
		if calm++; below(w.Value, start) {
			calm = 1 // this input's swing was measured from the new worst draw's own end
			w.Trace.used.each(func(id int) {
				if !s.Frugal && !minor.has(id) && !slices.Contains(ids, id) { // read for the first time
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
		if d := math.Abs(above(u, here)); d > swing && !math.IsInf(d, 0) {
			swing = d
		}
	}
	try := func(v float64) {
		if v == w.Draw.get(id) {
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
		if s.interior.has(id) && !w.turning.has(id) && !s.Frugal { // it may turn here although it does not at the typical draw
			s.Try(w.Draw, func(d *Draw) {
				if u, t := Evaluate(d, f); usable(u, t) && below(u, w.Value) {
					w.turning.set(id)
				}
			}, Change{id, s.sample(id, middle)})
		}
		if w.turning.has(id) {
			for k := int8(firstInterior); k < firstInterior+interiorSamples; k++ {
				try(s.sample(id, k))
			}
		}
	}
	if n := s.inputs[id].Naive; n == n && n != w.Draw.get(id) {
		s.Try(w.Draw, func(d *Draw) {
			u, _ := Evaluate(d, f)
			changed(u)
		}, Change{id, n})
	}
	return swing
}

// Stretch moves every input that stands at an end filled by the policy as far again: by the same ratio where all is positive, else by the same
// distance. What holds only short of that rests on the policy's spread.
func (s *Space) Stretch(d *Draw, t *Trace) (changes []Change, fields []string) {
	t.used.each(func(id int) {
		q, v, typ := s.inputs[id], d.get(id), s.typ[id]
		if !(q.FilledAbove && v == s.high[id] && v > typ) && !(q.FilledBelow && v == s.low[id] && v < typ) {
			return
		}
		far := 2*v - typ
		if v > 0 && typ > 0 {
			far = v * (v / typ)
		}
		changes = append(changes, Change{id, math.Min(math.Max(far, q.Declare.Low), q.Declare.High)})
		fields = append(fields, q.Field)
	})
	return changes, fields
}
