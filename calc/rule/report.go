package rule

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

const (
	mostRanked     = 8    // inputs in a ranking
	mostBreakEvens = 4    // inputs for which the break-even is sought
	passBreakEvens = 1    // the same where the rule passes
	leastSwing     = 0.01 // of the largest swing; below it an input is not ranked
)

// report words the finding.
func (b *Bench) report(r *Rule, role, mode string, all []result, best int) finding.Finding {
	res := &all[best]
	if res.rule != nil {
		r = res.rule
	}
	f := finding.Finding{
		Rule: r.ID, Role: role, Mode: mode, Outcome: res.outcome, Title: r.Title, Equation: r.Equation, Sources: r.Sources,
		Severity: r.severity(res.outcome, b.Stage, role, b.Policy), Subjects: b.subjects(role),
		OperatingPoint: res.point.Name(),
		Value:          unset(r.Dimension), Limit: unset(r.Dimension), Guard: unset(r.Dimension), Typical: unset(r.Dimension),
		Margin: finding.Margin{Absolute: unset(r.Dimension), Relative: math.NaN()},
	}
	if r.Stagewide && res.outcome == finding.NotApplicable {
		f.OperatingPoint = ""
	}
	b.points(r, &f, all, best)
	switch res.outcome {
	case finding.NotApplicable:
		f.Message = fmt.Sprintf("Not applicable: %s.", res.reason)
	case finding.Open:
		b.open(r, role, &f, res)
	default:
		b.decided(r, role, &f, res)
	}
	finding.Stamp(&f, b.Stage.Identity())
	return f
}

func unset(d quantity.Dimension) finding.Measure {
	return finding.Measure{Value: math.NaN(), Dimension: d}
}

// subjects names the part of a role.
func (b *Bench) subjects(role string) []string {
	if role == "" {
		return []string{b.Stage.ID}
	}
	if h := b.Stage.Part(role); h != nil && h.Refdes != "" {
		return []string{h.Refdes}
	}
	return []string{role}
}

func (b *Bench) points(r *Rule, f *finding.Finding, all []result, best int) {
	for i := range all {
		if i == best {
			continue
		}
		o := &all[i]
		p := finding.PointResult{OperatingPoint: o.point.Name(), Outcome: o.outcome, Value: unset(r.Dimension), Limit: unset(r.Dimension),
			Margin: finding.Margin{Absolute: unset(r.Dimension), Relative: math.NaN()}}
		if o.outcome != finding.Open && o.outcome != finding.NotApplicable {
			p.Value, p.Limit, p.Margin = b.numbers(r, o)
		}
		f.Points = append(f.Points, p)
	}
}

// boundless is from where on a number is no number of a circuit but the lack of a bound.
const boundless = 1e30

// finite makes a measure; what has no bound is not printed.
func (r *Rule) finite(v float64) finding.Measure {
	if math.Abs(v) > boundless {
		v = math.NaN()
	}
	return finding.Measure{Value: significant(v), Dimension: r.Dimension}
}

func (b *Bench) numbers(r *Rule, o *result) (value, limit finding.Measure, m finding.Margin) {
	return r.finite(o.check.Value), r.finite(o.check.Limit), r.Margin(o.margin, o.check.Limit)
}

// Measure is a value of the rule; what has no bound is not set.
func (r *Rule) Measure(v float64) finding.Measure { return r.finite(v) }

// Margin is a distance to a limit, and its share of the limit.
func (r *Rule) Margin(margin, limit float64) finding.Margin {
	m := finding.Margin{Absolute: r.finite(margin), Relative: math.NaN()}
	if m.Absolute.Dimension == quantity.Temperature {
		m.Absolute.Dimension = quantity.TemperatureDifference
	}
	if limit != 0 && !(math.Abs(margin) > boundless) && !math.IsInf(limit, 0) {
		m.Relative = significant(margin / math.Abs(limit))
	}
	return m
}

func (b *Bench) open(r *Rule, role string, f *finding.Finding, res *result) {
	w := &res.worst
	if w.Trace == nil {
		f.Message = r.Quantity + " was not evaluated: the caller no longer waits."
		return
	}
	f.Missing = w.Space.Missing(w.Trace)
	var parts []string
	if len(f.Missing) > 0 {
		names := make([]string, len(f.Missing))
		for i, m := range f.Missing {
			names[i] = stage.Relative(m)
		}
		parts = append(parts, "missing "+strings.Join(names, ", "))
	}
	parts = append(parts, w.Trace.Reasons()...)
	if len(parts) == 0 {
		parts = append(parts, "internal: the result is not a number")
	}
	f.Message = fmt.Sprintf("%s cannot be evaluated: %s.", r.Quantity, strings.Join(parts, "; "))
	b.unknownBreakEven(r, role, f, res)
}

// notes explains the check at the worst draw.
func (b *Bench) notes(r *Rule, role string, res *result) []string {
	var out []string
	if r.Explain != nil {
		corner.Evaluate(res.worst.Draw, func(d *corner.Draw) float64 {
			out = r.Explain(circuit.Of(d), role, res.check)
			return 0
		})
	}
	if res.worst.Space.Model != nil {
		corner.Evaluate(res.worst.Draw, func(d *corner.Draw) float64 {
			c := circuit.Of(d)
			estimate := c.Estimated(func(c *circuit.Circuit) float64 { return r.Check(c, role).Value })
			if v := res.check.Value; estimate == estimate && !math.IsInf(estimate, 0) && significant(estimate) != significant(v) {
				out = append(out, fmt.Sprintf("simulated; closed forms give %s here, %s", quantity.Format(estimate, r.Dimension), apart(estimate, v)))
			}
			return 0
		})
	}
	return append(slices.Clone(res.notes), out...) // what keeps the rule from passing comes first
}

// apart tells how far an estimate lies from a value.
func apart(estimate, v float64) string {
	if v == 0 || estimate/v < 0.1 || estimate/v > 10 {
		return "of another size"
	}
	return fmt.Sprintf("%+.0f %%", 100*(estimate/v-1))
}

// unknownBreakEven finds, where one value alone is missing, the value of it at which the rule turns.
func (b *Bench) unknownBreakEven(r *Rule, role string, f *finding.Finding, res *result) {
	q := res.worst.Space.OnlyMissing(res.worst.Trace)
	if q == nil || q.Declare == nil || math.IsInf(q.Declare.Low, 0) || math.IsInf(q.Declare.High, 0) {
		return
	}
	f1 := r.function(role)
	if res.worst.Space.Frugal { // a search for every value tried is too dear to simulate
		inner := f1
		f1 = func(d *corner.Draw) float64 {
			return circuit.Of(d).Estimated(func(*circuit.Circuit) float64 { return inner(d) })
		}
	}
	if v, ok := res.worst.Space.Turn(q, f1); ok {
		f.BreakEven = append(f.BreakEven, finding.BreakEven{Field: q.Field, Measure: finding.Measure{Value: significant(v), Dimension: q.Declare.Dimension}})
	}
}

func (b *Bench) decided(r *Rule, role string, f *finding.Finding, res *result) {
	w := &res.worst
	f.Value, f.Limit, f.Margin = b.numbers(r, res)
	f.Guard = r.finite(res.check.Guard)
	var typical Check
	_, t := corner.Evaluate(w.Space.Typical(), func(d *corner.Draw) float64 {
		typical = r.Check(circuit.Of(d), role)
		return 0
	})
	if t.Complete() {
		f.Typical = r.finite(typical.Value)
	}
	f.Notes = b.notes(r, role, res)
	b.corner(f, w)
	dim := r.Dimension
	if r.Proxy != nil {
		dim = r.ProxyDimension
	}
	if dim == quantity.Temperature {
		dim = quantity.TemperatureDifference
	}
	for i, s := range w.Swings {
		if i == mostRanked || s.Range < leastSwing*w.Swings[0].Range {
			break
		}
		f.Ranking = append(f.Ranking, finding.Ranking{Field: s.Input.Field, Swing: finding.Measure{Value: significant(s.Range), Dimension: dim}})
	}
	b.breakEvens(r, role, f, w)
	f.Message = message(r, f, math.IsInf(res.check.Limit, 0), res.check.Value > boundless)
}

// corner records where each input stands and the inputs behind the number.
func (b *Bench) corner(f *finding.Finding, w *corner.Worst) {
	f.Corner = Corner(w)
	for _, q := range w.Space.Inputs(w.Trace) {
		if v := w.Draw.Value(q); v == v {
			f.Inputs = append(f.Inputs, finding.Input{Symbol: q.Symbol(), Field: q.Field, Source: q.Source,
				Measure: finding.Measure{Value: significant(v), Dimension: q.Declare.Dimension}})
		}
	}
}

func (b *Bench) breakEvens(r *Rule, role string, f *finding.Finding, w *corner.Worst) {
	fn := r.function(role)
	most := mostBreakEvens
	if f.Outcome == finding.Pass {
		most = passBreakEvens
	}
	swings := w.Swings
	if w.Space.Frugal {
		swings, most = b.frugalSwings(w), frugalBreakEvens
		if f.Outcome == finding.Pass && !r.Bounds {
			return
		}
	}
	for i, s := range swings {
		if len(f.BreakEven) == most || s.Range < leastSwing*swings[0].Range || w.Space.Dear && i == dearBreakEvens {
			return
		}
		d := s.Input.Declare
		if d == nil || math.IsInf(d.Low, 0) || math.IsInf(d.High, 0) {
			continue
		}
		low, high := d.Low, d.High
		if w.Space.Frugal { // beyond that another design is needed
			at := w.Draw.Value(s.Input)
			low, high = math.Max(low, at/frugalReach), math.Min(high, at*frugalReach)
			if at < 0 {
				low, high = math.Max(d.Low, at*frugalReach), math.Min(d.High, at/frugalReach)
			}
		}
		if v, ok := w.Space.BreakEven(w.Draw, s.Input, fn, low, high); ok {
			f.BreakEven = append(f.BreakEven, finding.BreakEven{Field: s.Input.Field,
				Measure: finding.Measure{Value: significant(v), Dimension: d.Dimension}})
		}
	}
}

// What is sought where every value tried is a simulation.
const (
	frugalBreakEvens = 3
	dearBreakEvens   = 4   // inputs that are tried where evaluations take some time
	frugalReach      = 8.0 // times the value at the worst draw, and as small
)

// frugalSwings are those of what a board can change: the loop's inductances, gate resistors and the current.
func (b *Bench) frugalSwings(w *corner.Worst) []corner.Swing {
	l, high, low := &b.Stage.Layout, &b.Stage.HighSide, &b.Stage.LowSide
	changeable := []*stage.Quantity{&l.LowSideInductance, &l.BusLoopInductance, &l.LoopInductance, &high.GateOff.Resistance, &high.GateOn.Resistance,
		&low.GateOff.Resistance, &low.GateOn.Resistance, &l.NodeResistor.Resistance}
	if p := w.Space.Point; p != nil {
		changeable = append(changeable, &p.LoadCurrent)
	}
	var out []corner.Swing
	for _, s := range w.Effects() {
		if slices.Contains(changeable, s.Input) {
			out = append(out, s)
		}
	}
	return out
}

// tally is the finding of a rule that judges what the others assumed and left open.
func (b *Bench) tally(r *Rule, before []finding.Finding) finding.Finding {
	open := 0
	for i := range before {
		if before[i].Outcome == finding.Open {
			open++
		}
	}
	f := finding.Finding{
		Rule: r.ID, Title: r.Title, Equation: r.Equation, Sources: r.Sources, Subjects: b.subjects(""),
		Value: unset(r.Dimension), Limit: unset(r.Dimension), Guard: unset(r.Dimension), Typical: unset(r.Dimension),
		Margin: finding.Margin{Absolute: unset(r.Dimension), Relative: math.NaN()},
	}
	c, notes := r.Tally(b.Assumptions(), open)
	f.Notes = notes
	switch {
	case c.Value != c.Value:
		f.Outcome = finding.Open
	case r.guardSlack(c) < 0:
		f.Outcome = finding.Marginal
	default:
		f.Outcome = finding.Pass
	}
	f.Value, f.Guard = r.finite(c.Value), r.finite(c.Guard)
	f.Severity = r.severity(f.Outcome, b.Stage, "", b.Policy)
	if f.Outcome == finding.Open {
		f.Message = r.Quantity + " cannot be evaluated: " + notes[0] + "."
		f.Notes = notes[1:]
	} else {
		f.Message = fmt.Sprintf("%s %s.", r.Quantity, text(f.Value))
	}
	finding.Stamp(&f, b.Stage.Identity())
	return f
}

func text(m finding.Measure) string {
	if m.Value != m.Value {
		return "none"
	}
	return quantity.Format(m.Value, m.Dimension)
}

// message is one sentence with the numbers.
func message(r *Rule, f *finding.Finding, unlimited, unbounded bool) string {
	var s strings.Builder
	value := text(f.Value)
	switch {
	case unbounded:
		value = "is without bound"
	case f.Value.Value != f.Value.Value:
		value = "does not exist"
	}
	fmt.Fprintf(&s, "%s %s", r.Quantity, value)
	if f.Limit.Value == f.Limit.Value {
		side := "at most"
		if r.Sense == AtLeast {
			side = "at least"
		}
		fmt.Fprintf(&s, ", %s %s (%s)", side, text(f.Limit), r.Against)
	}
	if g := f.Guard; g.Value == g.Value && f.Outcome == finding.Marginal {
		fmt.Fprintf(&s, ", guard %s", text(g))
	}
	if m := f.Margin.Absolute; m.Value == m.Value {
		if m.Value < 0 {
			m.Value = -m.Value
			how := "beyond it"
			if r.Sense == AtLeast && f.Limit.Value >= 0 {
				how = "short of it"
			}
			fmt.Fprintf(&s, ": %s by %s", how, text(m))
		} else {
			fmt.Fprintf(&s, ": margin %s", text(m))
		}
	}
	if f.OperatingPoint != "" {
		fmt.Fprintf(&s, " at %q, %s", f.OperatingPoint, f.Corner.Name)
	} else {
		fmt.Fprintf(&s, ", %s", f.Corner.Name)
	}
	if len(f.Notes) > 0 && (f.Outcome != finding.Pass || unlimited || f.Value.Value != f.Value.Value) {
		s.WriteString(": " + f.Notes[0])
		f.Notes = f.Notes[1:]
	}
	s.WriteByte('.')
	return s.String()
}

// Broken is the finding of a rule that panicked.
func (b *Bench) Broken(r *Rule) finding.Finding {
	f := finding.Finding{
		Rule: r.ID, Outcome: finding.Open, Title: r.Title, Equation: r.Equation, Sources: r.Sources, Severity: r.Open,
		Subjects: []string{b.Stage.ID}, Message: r.Quantity + " cannot be evaluated: internal.",
		Value: unset(r.Dimension), Limit: unset(r.Dimension), Guard: unset(r.Dimension), Typical: unset(r.Dimension),
		Margin: finding.Margin{Absolute: unset(r.Dimension), Relative: math.NaN()},
	}
	finding.Stamp(&f, b.Stage.Identity())
	return f
}
