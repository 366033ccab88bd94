package result

import (
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// eventsOf gives the switching events of one operating point, as closed forms estimate them.
func eventsOf(b *rule.Bench, p *rule.Point) (out []finding.TransientEvent) {
	unset := finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: quantity.Voltage}
	gain := unset // of all undershoots of the period together
	for _, e := range circuit.Events() {
		if !circuit.Occurs(b.Stage, p.Operating, e) || b.Stopped() {
			continue
		}
		one := event(b, p, e)
		one.FloatingVoltageGain = unset
		if e.Falls() {
			if gain.Max != gain.Max {
				gain = b.Adverse(p, func(c *circuit.Circuit) float64 { return c.Gain() }, quantity.Voltage, true).Span
			}
			one.FloatingVoltageGain = gain
		}
		out = append(out, one)
	}
	return out
}

// event gives the numbers of one event. What it does not stress stays unset.
func event(b *rule.Bench, p *rule.Point, e circuit.Event) finding.TransientEvent {
	out := finding.TransientEvent{Event: e.String(), OperatingPoint: p.Name()}
	turnsOn := e == circuit.TurnOn || e == circuit.SinkingTurnOn
	switched := b.Stage.LowSide.Kind != stage.DiodeOnly
	sourcing := e == circuit.TurnOff || e == circuit.TurnOn
	const low, high, neither = -1, 1, 0 // the end that matters
	var deepest corner.Worst
	numbers := []struct {
		to   *finding.Span
		dim  quantity.Dimension
		show bool
		end  int
		of   rule.Number
	}{
		{&out.NodeMin, quantity.Voltage, e.Falls(), low, func(c *circuit.Circuit) float64 { return c.Dip(e) }},
		{&out.PinMin, quantity.Voltage, e.Falls(), low, func(c *circuit.Circuit) float64 { return c.PinDip(e) }},
		{&out.RailToCOMMin, quantity.Voltage, e.Falls(), low, func(c *circuit.Circuit) float64 {
			return c.PinDip(e) + c.Need(&c.Stage.Driver.UVLOFalling)
		}},
		{&out.NodeMax, quantity.Voltage, !e.Falls(), high, func(c *circuit.Circuit) float64 { return c.NodePeak(e) }},
		{&out.RailMax, quantity.Voltage, !e.Falls(), neither, func(c *circuit.Circuit) float64 { return c.NodePeak(e) + c.Highest() }},
		{&out.HighSidePeak, quantity.Voltage, e.Falls(), high, func(c *circuit.Circuit) float64 { return c.SwitchPeak(e, &b.Stage.HighSide) }},
		{&out.LowSidePeak, quantity.Voltage, !e.Falls(), high, func(c *circuit.Circuit) float64 { return c.SwitchPeak(e, &b.Stage.LowSide) }},
		{&out.SlewPeak, quantity.VoltageSlew, true, high, func(c *circuit.Circuit) float64 { return c.Slew(e) }},
		{&out.Slew10To90, quantity.VoltageSlew, true, neither, func(c *circuit.Circuit) float64 { return c.Swing(e).Mean() }},
		{&out.MillerLow, quantity.Voltage, turnsOn && sourcing && switched, high, func(c *circuit.Circuit) float64 { return c.Induced(e) }},
		{&out.MillerHigh, quantity.Voltage, turnsOn && !sourcing, high, func(c *circuit.Circuit) float64 { return c.Induced(e) }},
		{&out.GateMin, quantity.Voltage, !sourcing || switched, low, func(c *circuit.Circuit) float64 { return c.Pulled(e) }},
		{&out.CurrentSlope, quantity.CurrentSlew, true, neither, func(c *circuit.Circuit) float64 { return c.CurrentSlope(e) }},
		{&out.RingFrequency, quantity.Frequency, true, neither, func(c *circuit.Circuit) float64 { return c.Ring(e).Frequency() }},
		{&out.RingDamping, quantity.Ratio, true, neither, func(c *circuit.Circuit) float64 { return c.Ring(e).Damping() }},
	}
	var draws []*corner.Draw // the worst of the numbers with an end that matters; those without one reach as far there as they do anywhere
	for _, last := range []bool{false, true} {
		for _, n := range numbers {
			switch {
			case last != (n.end == neither):
			case n.to == &out.PinMin && n.show && b.Stage.Layout.NodeClamp.Presence() == stage.NotFitted: // nothing between the node and the pin
				out.PinMin = out.NodeMin
			case !n.show:
				*n.to = finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: n.dim}
			case last:
				*n.to = b.Range(p, n.of, n.dim).Span
				for _, d := range draws {
					widen(n.to, d, n.of)
				}
			default:
				r := b.Adverse(p, n.of, n.dim, n.end == high)
				*n.to = r.Span
				w := &r.Low
				if n.end == high {
					w = &r.High
				}
				if w.Space != nil {
					draws = append(draws, w.Draw)
				}
				if n.to == &out.NodeMin || n.to == &out.PinMin {
					deepest = r.Low
				}
			}
		}
	}
	if !e.Falls() {
		return out
	}
	rows := b.Stage.Driver.NodeUndershoot.Items
	for i := range rows {
		level := rows[i].Voltage.Typ
		below := func(c *circuit.Circuit) float64 {
			switch v, w := c.PinDip(e), c.Width(e); {
			case v != v || w != w:
				return math.NaN()
			case v < level:
				return w
			}
			return 0
		}
		span := b.Range(p, below, quantity.Time).Span
		if deepest.Space != nil { // a level that only the deepest dips pass is a step that a search from the typical draw does not see
			widen(&span, deepest.Draw, below)
		}
		out.Undershoots = append(out.Undershoots, finding.Undershoot{
			Level: finding.Measure{Value: level, Dimension: quantity.Voltage}, Duration: span,
		})
	}
	return out
}

// widen lets a span reach the number at another draw; NaN stays NaN.
func widen(s *finding.Span, d *corner.Draw, of rule.Number) {
	v, _ := corner.Evaluate(d, func(d *corner.Draw) float64 { return of(circuit.Of(d)) })
	v = rule.Significant(v)
	s.Min, s.Max = math.Min(s.Min, v), math.Max(s.Max, v)
}

// precharge gives the first charge as one operating point sees it.
func precharge(b *rule.Bench, p *rule.Point) finding.Precharge {
	span := func(of rule.Number, d quantity.Dimension) finding.Span { return b.Range(p, of, d).Span }
	out := finding.Precharge{
		Time:           span(func(c *circuit.Circuit) float64 { return c.PrechargeTime() }, quantity.Time),
		PeakCurrent:    span(func(c *circuit.Circuit) float64 { return c.FirstPeak() }, quantity.Current),
		ResistorEnergy: span(func(c *circuit.Circuit) float64 { return c.FirstEnergy() }, quantity.Energy),
		ReservoirLow:   span(func(c *circuit.Circuit) float64 { return c.ReservoirLow() }, quantity.Voltage),
		SettledVoltage: span(func(c *circuit.Circuit) float64 { return c.FirstSettled() }, quantity.Voltage),
	}
	if s := &b.Stage.Startup; s.PulseWidth.Given() || s.PulsePeriod.Given() {
		if n := span(func(c *circuit.Circuit) float64 {
			_, n := c.FirstChargeTime()
			return float64(n)
		}, quantity.Count).Max; n > 0 && n < math.MaxInt32 {
			out.Pulses = int(n)
		}
	}
	return out
}

// overPoints joins the first charge of all operating points: it does not depend on the mode, but on the temperatures. What one point does not
// know nobody knows.
func overPoints(points []finding.Precharge) *finding.Precharge {
	out := points[0]
	join := func(a, b *finding.Span) {
		a.Min, a.Max = math.Min(a.Min, b.Min), math.Max(a.Max, b.Max) // NaN stays NaN
		a.Typ += 0 * b.Typ
	}
	for i := range points[1:] {
		p := &points[i+1]
		join(&out.Time, &p.Time)
		join(&out.PeakCurrent, &p.PeakCurrent)
		join(&out.ResistorEnergy, &p.ResistorEnergy)
		join(&out.ReservoirLow, &p.ReservoirLow)
		join(&out.SettledVoltage, &p.SettledVoltage)
		out.Pulses = max(out.Pulses, p.Pulses)
	}
	return &out
}
