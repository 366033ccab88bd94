package corner

import (
	"slices"

	"floatrail/calc/stage"
)

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
