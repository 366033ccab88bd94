package rule

import (
	"cmp"
	"math"
	"slices"
	"strings"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

// Number is a number of a circuit; NaN where it cannot be had.
type Number func(*circuit.Circuit) float64

// Range is a number over the sets of one operating point.
type Range struct {
	Span      finding.Span
	Low, High corner.Worst // where the ends lie; Space is nil where there is none
	Missing   []string
	Reasons   []string
}

// Range searches both ends of a number over the sets of an operating point. Its typical value is that of the room set. Where any set cannot
// be evaluated the number is unset, with what was missing.
func (b *Bench) Range(p *Point, f Number, d quantity.Dimension) Range {
	out := Range{Span: finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: d}}
	if b.Stopped() {
		return out
	}
	fn := corner.Function(func(d *corner.Draw) float64 { return f(circuit.Of(d)) })
	lows, highs := corner.EndsOfSets(p.Spaces, fn)
	for i, s := range p.Spaces {
		low, high := lows[i], highs[i]
		for _, w := range []*corner.Worst{&low, &high} {
			b.note(s, w.Trace)
			if w.Decided() {
				continue
			}
			out.Span.Min, out.Span.Typ, out.Span.Max = math.NaN(), math.NaN(), math.NaN()
			out.Missing, out.Reasons = s.Missing(w.Trace), slices.Clone(w.Trace.Reasons())
			out.Low, out.High = corner.Worst{}, corner.Worst{}
			return out
		}
		if i == 0 || s.Set.Name == "room" {
			out.Span.Typ = significant(low.Typical)
		}
		if i == 0 || low.Value < out.Low.Value {
			out.Low = low
		}
		if i == 0 || high.Value < out.High.Value {
			out.High = high
		}
	}
	out.Span.Min, out.Span.Max = significant(out.Low.Value), significant(-out.High.Value)
	return out
}

// Adverse is Range with the end that matters polished, as the rules' worst draws are: the smallest, or with high the largest.
func (b *Bench) Adverse(p *Point, f Number, d quantity.Dimension, high bool) Range {
	out := b.Range(p, f, d)
	fn := corner.Function(func(d *corner.Draw) float64 { return f(circuit.Of(d)) })
	if out.Low.Space != nil && out.Low.Space.Frugal { // of which Range has searched one set
		end, adverse := &out.Low, fn
		if high {
			end, adverse = &out.High, fn.Negative()
		}
		for i, w := range corner.SearchSets(p.Spaces, adverse) {
			b.note(p.Spaces[i], w.Trace)
			if !w.Decided() {
				return Range{Span: finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: d},
					Missing: p.Spaces[i].Missing(w.Trace), Reasons: slices.Clone(w.Trace.Reasons())}
			}
			if w.Value < end.Value {
				*end = w
			}
		}
	}
	switch {
	case out.Low.Space == nil:
	case high:
		out.High.Space.Scour(&out.High, fn.Negative())
		out.Span.Max = significant(-out.High.Value)
	default:
		out.Low.Space.Scour(&out.Low, fn)
		out.Span.Min = significant(out.Low.Value)
	}
	return out
}

// note collects the assumptions behind what was read.
func (b *Bench) note(s *corner.Space, t *corner.Trace) {
	b.mu.Lock()
	defer b.mu.Unlock()
	for _, a := range s.Assumptions(t) {
		if !slices.Contains(b.assumed, a) {
			b.assumed = append(b.assumed, a)
		}
	}
}

// Assumptions lists what was assumed in all that ran on the bench, by field.
func (b *Bench) Assumptions() []stage.Assumption {
	out := slices.Clone(b.assumed)
	slices.SortFunc(out, func(x, y stage.Assumption) int {
		return cmp.Or(strings.Compare(x.Field, y.Field), strings.Compare(x.Assumed, y.Assumed), strings.Compare(x.Reason, y.Reason),
			cmp.Compare(x.Direction, y.Direction))
	})
	return out
}

// Corner names the corner of a draw by the inputs that stand away from their only value.
func Corner(w *corner.Worst) finding.Corner {
	out := finding.Corner{Name: w.Space.Set.Name}
	for _, q := range w.Space.Inputs(w.Trace) {
		v := w.Draw.Value(q)
		if bound := w.Space.Bound(q, v); bound != finding.NoBound {
			out.Settings = append(out.Settings, finding.Setting{Field: q.Field, Bound: bound,
				Value: finding.Measure{Value: significant(v), Dimension: q.Declare.Dimension}})
		}
	}
	return out
}

// Significant rounds to six significant digits, as results are before they are compared.
func Significant(v float64) float64 { return significant(v) }

// Adopt adds an assumption made beside the bench.
func (b *Bench) Adopt(a stage.Assumption) {
	if !slices.Contains(b.assumed, a) {
		b.assumed = append(b.assumed, a)
	}
}
