package corner

import (
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// Bound tells where in its range an input stands; none where it has no range.
func (s *Space) Bound(q *stage.Quantity, v float64) finding.Bound {
	r := s.Range(q)
	if q.Along > 0 {
		return finding.NoBound
	}
	switch {
	case !(r.Min < r.Max):
		return finding.NoBound
	case v == r.Min:
		return finding.AtMin
	case v == r.Max:
		return finding.AtMax
	case v == r.Typ:
		return finding.AtTyp
	}
	return finding.Interior
}
