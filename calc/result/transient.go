package result

import (
	"math"
	"strings"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// eventsOf gives switching events of one operating point, simulated where its spaces do that, else as closed forms estimate them.
func eventsOf(b *rule.Bench, p *rule.Point, events []circuit.Event, waveforms bool) (out finding.TransientStress) {
	unset := finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: quantity.Voltage}
	gain := unset // of all undershoots of the period together
	for _, e := range events {
		if !circuit.Occurs(b.Stage, p.Operating, e) || b.Stopped() {
			continue
		}
		one, worst := event(b, p, e)
		one.FloatingVoltageGain = unset
		if e.Falls() {
			if gain.Max != gain.Max {
				gain = b.Adverse(p, func(c *circuit.Circuit) float64 { return c.Gain() }, quantity.Voltage, true).Span
			}
			one.FloatingVoltageGain = gain
		}
		if one.Method == finding.Simulation && worst != nil {
			corner.Evaluate(worst, func(d *corner.Draw) float64 {
				c := circuit.Of(d)
				if k := c.Course(e, circuit.Running); k != nil {
					one.Steps, one.Convergence = k.Steps, rule.Significant(c.Convergence(e))
					if waveforms {
						out.Waveforms = append(out.Waveforms, waveformsOf(c, p, e)...)
					}
				}
				return 0
			})
		}
		out.Events = append(out.Events, one)
	}
	return out
}

// shown are the signals whose waveforms are given, with their names.
var shown = []struct {
	signal transient.Signal
	name   string
	unit   string
}{
	{transient.Node, "node", "V"}, {transient.Pin, "V_S pin", "V"}, {transient.Rail, "V_B", "V"}, {transient.Floating, "V_BS", "V"},
	{transient.HighDrain, "v_DS high side", "V"}, {transient.LowDrain, "v_DS low side", "V"}, {transient.HighGate, "v_GS high side", "V"},
	{transient.LowGate, "v_GS low side", "V"}, {transient.HighCurrent, "current from the bus", "A"}, {transient.LowCurrent, "current from COM", "A"},
	{transient.ElementCurrent, "bootstrap current", "A"},
}

// waveformsOf gives the waveforms of an event at a draw.
func waveformsOf(c *circuit.Circuit, p *rule.Point, e circuit.Event) (out []finding.Waveform) {
	signals := make([]transient.Signal, len(shown))
	for i, s := range shown {
		signals[i] = s.signal
	}
	k := c.Again(e, 1, signals)
	if k == nil {
		return nil
	}
	for i, w := range k.Waveforms {
		out = append(out, finding.Waveform{Name: p.Name() + ", " + e.String() + ", " + shown[i].name, Unit: shown[i].unit, Time: w.Time, Value: w.Value})
	}
	return out
}

// event gives the numbers of one event, and the draw at which it takes the node farthest beyond a rail. What it does not stress stays unset.
func event(b *rule.Bench, p *rule.Point, e circuit.Event) (out finding.TransientEvent, farthest *corner.Draw) {
	out = finding.TransientEvent{Event: e.String(), OperatingPoint: p.Name(), Method: finding.Estimate, Convergence: math.NaN()}
	if circuit.Of(p.Spaces[0].Typical()).Simulates(e) {
		out.Method = finding.Simulation
	}
	var deepest corner.Worst
	var draws []*corner.Draw // the worst of the numbers with an end that matters; those without one reach as far there as they do anywhere
	for _, last := range []bool{false, true} {
		for _, n := range numbersOf(b.Stage, e, &out) {
			switch {
			case last != (n.end == neither):
			case n.to == &out.PinMin && n.show && out.Method == finding.Estimate && b.Stage.Layout.NodeClamp.Presence() == stage.NotFitted: // the same by the closed forms
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
					compare(&out, n.name, n.dim, w, n.of)
				}
				if n.to == &out.NodeMin || n.to == &out.NodeMax {
					if out.Missing, out.Reason = r.Missing, strings.Join(r.Reasons, "; "); w.Space != nil {
						farthest = w.Draw
					}
				}
				if n.to == &out.NodeMin || n.to == &out.PinMin {
					deepest = r.Low
				}
			}
		}
	}
	if !e.Falls() {
		return out, farthest
	}
	rows := b.Stage.Driver.NodeUndershoot.Items
	for i := range rows {
		level := rows[i].Voltage.Typ
		below := func(c *circuit.Circuit) float64 {
			if c.Simulates(e) {
				return c.LongestBelow(e, i)
			}
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
		one := finding.Undershoot{Level: finding.Measure{Value: level, Dimension: quantity.Voltage}, Duration: span,
			Total: finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: quantity.Time}}
		if out.Method == finding.Simulation {
			total := func(c *circuit.Circuit) float64 {
				t, _, n := c.TotalBelow(e, i)
				one.Dips = max(one.Dips, n)
				return t
			}
			if one.Total = b.Range(p, total, quantity.Time).Span; deepest.Space != nil {
				widen(&one.Total, deepest.Draw, total)
				one.Each = dipsAt(deepest.Draw, e, i)
			}
		}
		out.Undershoots = append(out.Undershoots, one)
	}
	return out, farthest
}

// Ends of a number, of which one matters or none.
const low, high, neither = -1, 1, 0

// number is one of an event's.
type number struct {
	name string // in the contract, of those that are compared with their estimates
	to   *finding.Span
	dim  quantity.Dimension
	show bool
	end  int
	of   rule.Number
}

// numbersOf are the numbers of an event with their places in it.
func numbersOf(s *stage.Stage, e circuit.Event, out *finding.TransientEvent) []number {
	turnsOn := e == circuit.TurnOn || e == circuit.SinkingTurnOn
	switched := s.LowSide.Kind != stage.DiodeOnly
	sourcing := e == circuit.TurnOff || e == circuit.TurnOn
	return []number{
		{"nodeMin", &out.NodeMin, quantity.Voltage, e.Falls(), low, func(c *circuit.Circuit) float64 { return c.Dip(e) }},
		{"pinMin", &out.PinMin, quantity.Voltage, e.Falls(), low, func(c *circuit.Circuit) float64 { return c.PinDip(e) }},
		{"railToComMin", &out.RailToCOMMin, quantity.Voltage, e.Falls(), low, func(c *circuit.Circuit) float64 { return c.RailLow(e) }},
		{"nodeMax", &out.NodeMax, quantity.Voltage, !e.Falls(), high, func(c *circuit.Circuit) float64 { return c.NodePeak(e) }},
		{"", &out.RailMax, quantity.Voltage, !e.Falls(), neither, func(c *circuit.Circuit) float64 { return c.NodePeak(e) + c.Highest() }},
		{"highSidePeak", &out.HighSidePeak, quantity.Voltage, e.Falls(), high, func(c *circuit.Circuit) float64 { return c.SwitchPeak(e, &s.HighSide) }},
		{"lowSidePeak", &out.LowSidePeak, quantity.Voltage, !e.Falls(), high, func(c *circuit.Circuit) float64 { return c.SwitchPeak(e, &s.LowSide) }},
		{"slewPeak", &out.SlewPeak, quantity.VoltageSlew, true, high, func(c *circuit.Circuit) float64 { return c.Slew(e) }},
		{"", &out.Slew10To90, quantity.VoltageSlew, true, neither, func(c *circuit.Circuit) float64 { return c.MeanSlew(e) }},
		{"millerLow", &out.MillerLow, quantity.Voltage, turnsOn && sourcing && switched, high, func(c *circuit.Circuit) float64 { return c.Induced(e) }},
		{"millerHigh", &out.MillerHigh, quantity.Voltage, turnsOn && !sourcing, high, func(c *circuit.Circuit) float64 { return c.Induced(e) }},
		{"gateMin", &out.GateMin, quantity.Voltage, !sourcing || switched, low, func(c *circuit.Circuit) float64 { return c.Pulled(e) }},
		{"", &out.CurrentSlope, quantity.CurrentSlew, true, neither, func(c *circuit.Circuit) float64 { return c.Steepness(e) }},
		{"", &out.RingFrequency, quantity.Frequency, true, neither, func(c *circuit.Circuit) float64 { f, _ := c.Ringing(e); return f }},
		{"", &out.RingDamping, quantity.Ratio, true, neither, func(c *circuit.Circuit) float64 { _, z := c.Ringing(e); return z }},
	}
}

// dipsAt are the lengths of the dips of an event below a row of the driver's table at a draw.
func dipsAt(d *corner.Draw, e circuit.Event, row int) (out []finding.Measure) {
	corner.Evaluate(d, func(d *corner.Draw) float64 {
		_, each, _ := circuit.Of(d).TotalBelow(e, row)
		for _, t := range each {
			out = append(out, finding.Measure{Value: rule.Significant(t), Dimension: quantity.Time})
		}
		return 0
	})
	return out
}

// compare puts a simulated number beside what closed forms estimate at the same draw.
func compare(out *finding.TransientEvent, name string, dim quantity.Dimension, w *corner.Worst, of rule.Number) {
	if out.Method != finding.Simulation || name == "" {
		return
	}
	corner.Evaluate(w.Draw, func(d *corner.Draw) float64 {
		c := circuit.Of(d)
		v, estimate := rule.Significant(of(c)), rule.Significant(c.Estimated(of))
		if v == v && estimate == estimate {
			one := finding.Comparison{Name: name, Simulated: finding.Measure{Value: v, Dimension: dim},
				Estimated: finding.Measure{Value: estimate, Dimension: dim}, Difference: math.NaN()}
			if v != 0 {
				one.Difference = rule.Significant(estimate/v - 1)
			}
			out.Comparisons = append(out.Comparisons, one)
		}
		return 0
	})
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
	orders(&out, p, span)
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

// orders gives the lowest V_DD and the time of several stages on the supply in both orders: that of the request is known already.
func orders(out *finding.Precharge, p *rule.Point, span func(rule.Number, quantity.Dimension) finding.Span) {
	none := finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: quantity.Voltage}
	out.ReservoirLowSimultaneous, out.ReservoirLowStaged = none, none
	none.Dimension = quantity.Time
	out.TimeSimultaneous, out.TimeStaged = none, none
	stages, atOnce := 1, 1
	corner.Evaluate(p.Spaces[0].Typical(), func(d *corner.Draw) float64 {
		stages, atOnce, _, _ = circuit.Of(d).Order()
		return 0
	})
	if stages == 1 {
		return
	}
	low := span(func(c *circuit.Circuit) float64 { return c.OtherLow() }, quantity.Voltage)
	time := span(func(c *circuit.Circuit) float64 { return c.OtherTime() }, quantity.Time)
	out.ReservoirLowSimultaneous, out.TimeSimultaneous = out.ReservoirLow, out.Time
	out.ReservoirLowStaged, out.TimeStaged = low, time
	if atOnce < stages {
		out.ReservoirLowSimultaneous, out.ReservoirLowStaged = low, out.ReservoirLow
		out.TimeSimultaneous, out.TimeStaged = time, out.Time
	}
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
		join(&out.ReservoirLowSimultaneous, &p.ReservoirLowSimultaneous)
		join(&out.ReservoirLowStaged, &p.ReservoirLowStaged)
		join(&out.TimeSimultaneous, &p.TimeSimultaneous)
		join(&out.TimeStaged, &p.TimeStaged)
		out.Pulses = max(out.Pulses, p.Pulses)
	}
	return &out
}
