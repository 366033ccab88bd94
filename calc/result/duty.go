// Package result makes the typed results of an answer: what the methods return beside findings. It runs on the same bench as the rules.
package result

import (
	"cmp"
	"math"
	"slices"

	"floatrail/calc/catalog"
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/derive"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// OfPoints gives what is known of each operating point: the floating voltages with their derived limits, and the switching events, with their waveforms
// where they are simulated, as asked for.
func OfPoints(b *rule.Bench, dutyLimits, transient, waveforms, trace bool) (*finding.DutyLimits, *finding.TransientStress) {
	duty, stress := &finding.DutyLimits{}, &finding.TransientStress{}
	if n := len(b.Points); b.Points[0].Operating != nil {
		kinds := [][]circuit.Event{circuit.Events()} // of work on the events of one point, each simulated one by itself
		if b.Simulates() {
			kinds = kinds[:0]
			for _, e := range circuit.Events() {
				kinds = append(kinds, []circuit.Event{e})
			}
		}
		first := make([]finding.Precharge, n)
		events := make([]finding.TransientStress, n*len(kinds))
		duty.Points = make([]finding.DutyPoint, n)
		traces := make([][]finding.TracePoint, n)
		rule.SideBySide(n*(len(kinds)+1), func(i int) { // the events first: they take most
			k := i % n
			switch p, kind := &b.Points[k], i/n; {
			case kind < len(kinds) && transient:
				at := &rule.Point{Operating: p.Operating, Spaces: p.Events}
				if b.Simulates() {
					at = b.Twins(p)
				}
				events[k*len(kinds)+kind] = eventsOf(b, at, kinds[kind], waveforms)
			case kind == len(kinds) && dutyLimits:
				var worst corner.Worst
				duty.Points[k], worst = dutyPoint(b, p)
				first[k] = precharge(b, p)
				if trace && !b.Stopped() {
					traces[k] = traceOf(p, &worst)
				}
			}
		})
		duty.Precharge, duty.Limits = overPoints(first), tightest(duty.Points)
		if trace && dutyLimits {
			duty.Trace = append(slices.Concat(traces...), tracePrecharge(b)...)
		}
		for _, e := range events {
			stress.Events, stress.Waveforms = append(stress.Events, e.Events...), append(stress.Waveforms, e.Waveforms...)
		}
	}
	if !dutyLimits {
		duty = nil
	}
	if !transient {
		stress = nil
	}
	return duty, stress
}

// dutyPoint is what is known of an operating point, and the draw at which its V_BS is lowest.
func dutyPoint(b *rule.Bench, p *rule.Point) (finding.DutyPoint, corner.Worst) {
	out := finding.DutyPoint{OperatingPoint: p.Name()}
	fail := func(r *rule.Range) {
		for _, m := range r.Missing {
			if !slices.Contains(out.Missing, m) {
				out.Missing = append(out.Missing, m)
			}
		}
		if len(r.Reasons) > 0 && out.Reason == "" {
			out.Reason = r.Reasons[0]
		}
	}
	span := func(r rule.Range) (finding.Span, rule.Range) {
		fail(&r)
		return r.Span, r
	}
	none := func(d quantity.Dimension) finding.Span {
		return finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: d}
	}
	out.RechargeWindow, out.RechargeRatio, out.Deficit = none(quantity.Time), none(quantity.Ratio), none(quantity.Voltage)
	out.GateVoltageLow, out.WithoutRefresh, out.Restart = none(quantity.Voltage), none(quantity.Time), none(quantity.Voltage)
	out.LowAngle = finding.Measure{Value: math.NaN(), Dimension: quantity.Angle}
	out.HighAngle = out.LowAngle
	var low rule.Range
	out.FloatingVoltageLow, low = span(b.Adverse(p, func(c *circuit.Circuit) float64 { return circuit.Empty(c.Low()) }, quantity.Voltage, false))
	var high rule.Range
	out.FloatingVoltageHigh, high = span(b.Adverse(p, func(c *circuit.Circuit) float64 { return c.High() }, quantity.Voltage, true))
	if op := p.Operating; op.Sinusoidal != nil || op.LoadCurrent.Known() && op.LoadCurrent.Max+firstKnown(op.RippleCurrent.Max)/2 > 0 {
		h := &b.Stage.HighSide
		if op.Sinusoidal == nil && op.SixStep == nil && h.OffBias.Known() && h.OffBias.Min == 0 && h.OffBias.Max == 0 { // all of V_BS drives the gate
			out.GateVoltageLow = out.FloatingVoltageLow
		} else {
			out.GateVoltageLow, _ = span(b.Adverse(p, func(c *circuit.Circuit) float64 { return circuit.Empty(c.Gate(c.LowForward())) }, quantity.Voltage, false))
		}
	}
	if p.Operating.HeldOn != nil {
		out.Limits = []finding.DerivedLimit{timeLimit(b, p, finding.LongestOnTime, func(c *circuit.Circuit) float64 {
			h, _ := c.Hold()
			return h.Time(c.Required())
		})}
		return out, low.Low
	}
	if low.Low.Space == nil {
		return out, low.Low
	}
	out.RechargeWindow, _ = span(b.Range(p, func(c *circuit.Circuit) float64 { return c.Period().Window }, quantity.Time))
	out.RechargeRatio, _ = span(b.Range(p, func(c *circuit.Circuit) float64 {
		q := c.Period()
		return q.Window / (q.Element.Resistance * q.Capacitance)
	}, quantity.Ratio))
	out.Deficit, _ = span(b.Range(p, func(c *circuit.Circuit) float64 {
		if p := c.Period(); p.Window == 0 && p.T > 0 {
			return math.Inf(1)
		}
		return c.Settled() - c.Low()
	}, quantity.Voltage))
	worst := circuit.Of(low.Low.Draw)
	out.CapacitanceCancels = worst.CapacitanceCancels()
	if math.IsInf(low.Low.Value, -1) {
		out.Collapses = &finding.Collapse{Periods: worst.PeriodsToLockout(), Corner: rule.Corner(&low.Low)}
	}
	for _, s := range p.Spaces {
		if c := circuit.Of(s.Typical()); catalog.PeakDetector(c) {
			out.PeakDetector = true
			q, k := c.HighPeriod()
			out.HighInterval = q.Names[k]
		}
	}
	if p.Operating.FixedDuty == nil {
		out.LowAngle.Value = rule.Significant(worst.LowAngle())
		if high.High.Space != nil {
			out.HighAngle.Value = rule.Significant(circuit.Of(high.High.Draw).HighAngle())
		}
		out.WithoutRefresh, _ = span(b.Range(p, (*circuit.Circuit).Unrefreshed, quantity.Time))
	}
	if p.Operating.Burst != nil {
		out.Restart, _ = span(b.Adverse(p, func(c *circuit.Circuit) float64 { return circuit.Empty(c.Restart()) }, quantity.Voltage, false))
	}
	if !b.Stopped() {
		out.Limits = limits(b, p)
	}
	return out, low.Low
}

func firstKnown(v float64) float64 {
	if v != v {
		return 0
	}
	return v
}

// limits finds the derived limits of an operating point at the worst draws of what must hold, over all sets; the tightest one binds.
func limits(b *rule.Bench, p *rule.Point) []finding.DerivedLimit {
	op := p.Operating
	holds := derive.Hold
	if op.Burst != nil {
		holds = derive.Restarts
	}
	hold := worstDraws(p, holds)
	stand := worstDraws(p, derive.Stand)
	both := append(slices.Clone(hold), stand...)
	duties := duties{}
	var out []finding.DerivedLimit
	for _, name := range derive.Names(op.Mode()) {
		if b.Stopped() {
			return out
		}
		draws := hold
		if name == finding.LargestDeadTime {
			draws = both
		}
		out = append(out, bindingLimit(name, draws, duties))
	}
	if op.Sinusoidal != nil || op.SixStep != nil {
		out = append(out, timeLimit(b, p, finding.LongestStall, (*circuit.Circuit).Stall))
	}
	return out
}

// duties keeps the largest duty found at a draw: other limits follow from it.
type duties map[*corner.Draw]derive.Result

func (k duties) limit(c *circuit.Circuit, name string) derive.Result {
	if !derive.OfDuty(c.Point, name) {
		return derive.Limit(c, name)
	}
	r, ok := k[c.Draw]
	if !ok {
		r = derive.LargestDuty(c)
		k[c.Draw] = r
	}
	return derive.From(c, name, r)
}

func worstDraws(p *rule.Point, f rule.Number) []corner.Worst {
	return corner.SearchSets(p.Spaces, func(d *corner.Draw) float64 { return f(circuit.Of(d)) })
}

func dimensionOf(name string) quantity.Dimension {
	switch name {
	case finding.LargestDuty, finding.LargestIndex:
		return quantity.Ratio
	case finding.LargestResistance:
		return quantity.Resistance
	case finding.LowestSwitchingFrequency, finding.HighestSwitchingFreq, finding.LowestFundamental:
		return quantity.Frequency
	}
	return quantity.Time
}

func bindingLimit(name string, draws []corner.Worst, known duties) finding.DerivedLimit {
	out := finding.DerivedLimit{Name: name, Measure: finding.Measure{Value: math.NaN(), Dimension: dimensionOf(name)}}
	for i := range draws {
		if w := &draws[i]; !w.Decided() {
			m := append(w.Space.Missing(w.Trace), w.Trace.Reasons()...)
			out.Reason = "cannot be evaluated"
			if len(m) > 0 {
				out.Reason += ": " + stage.Relative(m[0])
			}
			return out
		}
	}
	// The worst draw first; the others need solving only where they do not hold at what was found so far.
	order := slices.Clone(draws)
	slices.SortStableFunc(order, func(a, b corner.Worst) int { return cmp.Compare(a.Value, b.Value) })
	var best derive.Result
	for i := range order {
		w := &order[i]
		tighter := false
		_, t := corner.Evaluate(w.Draw, func(d *corner.Draw) float64 {
			c := circuit.Of(d)
			if i > 0 && (best.Value != best.Value || derive.Holds(c, name, best.Input)) {
				return 0
			}
			if r := known.limit(c, name); i == 0 || derive.Tightest(name, r, best) {
				best, tighter = r, true
			}
			return 0
		})
		if !t.Complete() {
			out.Reason = "cannot be evaluated"
			return out
		}
		if tighter {
			out.Corner = rule.Corner(w)
		}
	}
	out.Measure.Value = rule.Significant(best.Value)
	switch {
	case best.Value != best.Value:
		out.Reason = "holds nowhere in the range searched"
	case math.IsInf(best.Value, 0):
		out.Measure.Value = math.NaN()
		out.Reason = "without limit"
	case best.Whole:
		out.Reason = "the whole range searched holds"
	}
	return out
}

// timeLimit is a limit that is a time of the circuit itself; the shortest one binds.
func timeLimit(b *rule.Bench, p *rule.Point, name string, f rule.Number) finding.DerivedLimit {
	out := finding.DerivedLimit{Name: name, Measure: finding.Measure{Value: math.NaN(), Dimension: quantity.Time}}
	r := b.Range(p, f, quantity.Time)
	switch {
	case r.Low.Space == nil:
		out.Reason = "cannot be evaluated"
		if len(r.Missing) > 0 {
			out.Reason += ": " + stage.Relative(r.Missing[0])
		}
	case math.IsInf(r.Span.Min, 1):
		out.Reason = "without limit"
	default:
		out.Measure.Value, out.Corner = r.Span.Min, rule.Corner(&r.Low)
	}
	return out
}

// tightest is the binding one of each derived limit over all operating points.
func tightest(points []finding.DutyPoint) (out []finding.DerivedLimit) {
	for i := range points {
		for _, l := range points[i].Limits {
			l.OperatingPoint = points[i].OperatingPoint
			k := slices.IndexFunc(out, func(o finding.DerivedLimit) bool { return o.Name == l.Name })
			switch {
			case k < 0:
				out = append(out, l)
			case l.Reason == "without limit" || out[k].Measure.Value != out[k].Measure.Value && out[k].Reason != "without limit":
			case out[k].Reason == "without limit",
				derive.Tightest(l.Name, derive.Result{Value: l.Measure.Value}, derive.Result{Value: out[k].Measure.Value}):
				out[k] = l
			}
		}
	}
	return out
}
