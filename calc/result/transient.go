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
	for _, e := range circuit.Events() {
		if circuit.Occurs(b.Stage, p.Operating, e) && !b.Stopped() {
			out = append(out, event(b, p, e))
		}
	}
	return out
}

// event gives the numbers of one event. What it does not stress stays unset.
func event(b *rule.Bench, p *rule.Point, e circuit.Event) finding.TransientEvent {
	out := finding.TransientEvent{Event: e.String(), OperatingPoint: p.Name()}
	turnsOn := e == circuit.TurnOn || e == circuit.SinkingTurnOn
	low, high := &b.Stage.LowSide, &b.Stage.HighSide
	switched := low.Kind != stage.DiodeOnly
	sourcing := e == circuit.TurnOff || e == circuit.TurnOn
	for _, n := range []struct {
		to   *finding.Span
		dim  quantity.Dimension
		show bool
		of   rule.Number
	}{
		{&out.NodeMin, quantity.Voltage, e.Falls(), func(c *circuit.Circuit) float64 { return c.Dip(e) }},
		{&out.PinMin, quantity.Voltage, e.Falls(), func(c *circuit.Circuit) float64 { return c.PinDip(e) }},
		{&out.RailToCOMMin, quantity.Voltage, e.Falls(), func(c *circuit.Circuit) float64 {
			return c.PinDip(e) + c.Need(&c.Stage.Driver.UVLOFalling)
		}},
		{&out.FloatingVoltageGain, quantity.Voltage, e.Falls(), func(c *circuit.Circuit) float64 { return c.Gain() }},
		{&out.NodeMax, quantity.Voltage, !e.Falls(), func(c *circuit.Circuit) float64 { return c.NodePeak(e) }},
		{&out.RailMax, quantity.Voltage, !e.Falls(), func(c *circuit.Circuit) float64 { return c.NodePeak(e) + c.Highest() }},
		{&out.HighSidePeak, quantity.Voltage, e.Falls(), func(c *circuit.Circuit) float64 { return c.SwitchPeak(e, high) }},
		{&out.LowSidePeak, quantity.Voltage, !e.Falls(), func(c *circuit.Circuit) float64 { return c.SwitchPeak(e, low) }},
		{&out.SlewPeak, quantity.VoltageSlew, true, func(c *circuit.Circuit) float64 { return c.Slew(e) }},
		{&out.Slew10To90, quantity.VoltageSlew, true, func(c *circuit.Circuit) float64 { return c.Swing(e).Mean() }},
		{&out.MillerLow, quantity.Voltage, turnsOn && sourcing && switched, func(c *circuit.Circuit) float64 { return c.Induced(e) }},
		{&out.MillerHigh, quantity.Voltage, turnsOn && !sourcing, func(c *circuit.Circuit) float64 { return c.Induced(e) }},
		{&out.GateMin, quantity.Voltage, !sourcing || switched, func(c *circuit.Circuit) float64 { return c.Pulled(e) }},
		{&out.CurrentSlope, quantity.CurrentSlew, true, func(c *circuit.Circuit) float64 { return c.CurrentSlope(e) }},
		{&out.RingFrequency, quantity.Frequency, true, func(c *circuit.Circuit) float64 { return c.Ring(e).Frequency() }},
		{&out.RingDamping, quantity.Ratio, true, func(c *circuit.Circuit) float64 { return c.Ring(e).Damping() }},
	} {
		*n.to = finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: n.dim}
		if n.show {
			low := n.to == &out.NodeMin || n.to == &out.PinMin || n.to == &out.RailToCOMMin || n.to == &out.GateMin
			*n.to = b.Adverse(p, n.of, n.dim, !low).Span
		}
	}
	if !e.Falls() {
		return out
	}
	deepest := b.Adverse(p, func(c *circuit.Circuit) float64 { return c.PinDip(e) }, quantity.Voltage, false).Low
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
			w, _ := corner.Evaluate(deepest.Draw, func(d *corner.Draw) float64 { return below(circuit.Of(d)) })
			span.Max = math.Max(span.Max, rule.Significant(w)) // NaN stays NaN
		}
		out.Undershoots = append(out.Undershoots, finding.Undershoot{
			Level: finding.Measure{Value: level, Dimension: quantity.Voltage}, Duration: span,
		})
	}
	return out
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
