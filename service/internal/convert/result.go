package convert

import (
	"slices"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
)

func wireSizing(s *finding.Sizing) *pb.SizingResult {
	if s == nil {
		return nil
	}
	r := &s.Recommended
	return &pb.SizingResult{
		Budget: each(s.Budget, func(b *finding.BudgetItem) *pb.BudgetItem {
			return &pb.BudgetItem{Name: label(b.Name), Charge: wireSpan(&b.Charge), OperatingPoint: label(b.OperatingPoint)}
		}),
		TotalCharge:          wireSpan(&s.TotalCharge),
		VoltageBudget:        wireSpan(&s.VoltageBudget),
		MinimumCapacitance:   wireSpan(&s.MinimumCapacitance),
		EffectiveCapacitance: wireSpan(&s.EffectiveCapacitance),
		Ripple:               wireSpan(&s.Ripple),
		Recommended: &pb.RecommendedParts{
			Capacitance:          wireMeasure(&r.Capacitance),
			CapacitorVoltage:     wireMeasure(&r.CapacitorVoltage),
			Resistance:           wireMeasure(&r.Resistance),
			ResistanceWindow:     wireWindow(&r.ResistanceWindow),
			CapacitanceWindow:    wireWindow(&r.CapacitanceWindow),
			DiodeReverseVoltage:  wireMeasure(&r.DiodeReverseVoltage),
			DiodeAverageCurrent:  wireMeasure(&r.DiodeAverageCurrent),
			DiodePeakCurrent:     wireMeasure(&r.DiodePeakCurrent),
			ReservoirCapacitance: wireMeasure(&r.ReservoirCapacitance),
		},
		Notes: s.Notes,
	}
}

func wireWindow(w *finding.Window) *pb.Window {
	out := &pb.Window{Low: wireMeasure(&w.Low), High: wireMeasure(&w.High)}
	if out.Low == nil && out.High == nil {
		return nil
	}
	return out
}

func wireDutyLimits(d *finding.DutyLimits) *pb.DutyLimitsResult {
	if d == nil {
		return nil
	}
	return &pb.DutyLimitsResult{Points: each(d.Points, wireDutyPoint), Precharge: wirePrecharge(d.Precharge), Limits: each(d.Limits, wireLimit),
		Trace: each(d.Trace, wireTracePoint)}
}

func wireLimit(l *finding.DerivedLimit) *pb.DerivedLimit {
	return &pb.DerivedLimit{Name: label(l.Name), Measure: wireMeasure(&l.Measure), Corner: wireCorner(&l.Corner), Reason: label(l.Reason),
		OperatingPoint: label(l.OperatingPoint)}
}

func wireTracePoint(p *finding.TracePoint) *pb.TracePoint {
	of := func(v float64, d quantity.Dimension) *pb.Measure {
		return wireMeasure(&finding.Measure{Value: Round(v), Dimension: d})
	}
	return &pb.TracePoint{OperatingPoint: label(p.OperatingPoint), Kind: pb.TracePoint_Kind_Value(pb.TracePoint_Kind_Value_value[p.Kind]),
		Time: of(p.Time, quantity.Time), FloatingVoltage: of(p.FloatingVoltage, quantity.Voltage), Angle: of(p.Angle, quantity.Angle)}
}

func wirePrecharge(p *finding.Precharge) *pb.Precharge {
	if p == nil {
		return nil
	}
	out := &pb.Precharge{
		Time: wireSpan(&p.Time), PeakCurrent: wireSpan(&p.PeakCurrent), ResistorEnergy: wireSpan(&p.ResistorEnergy),
		ReservoirLow: wireSpan(&p.ReservoirLow), SettledVoltage: wireSpan(&p.SettledVoltage),
		ReservoirLowSimultaneous: wireSpan(&p.ReservoirLowSimultaneous), ReservoirLowStaged: wireSpan(&p.ReservoirLowStaged),
		TimeSimultaneous: wireSpan(&p.TimeSimultaneous), TimeStaged: wireSpan(&p.TimeStaged),
	}
	if p.Pulses > 0 {
		out.Pulses = count(p.Pulses)
	}
	return out
}

func wireTransient(t *finding.TransientStress) *pb.TransientStressResult {
	if t == nil {
		return nil
	}
	return &pb.TransientStressResult{Events: each(t.Events, wireEvent), Waveforms: each(t.Waveforms, wireWaveform)}
}

func wireEvent(e *finding.TransientEvent) *pb.TransientEvent {
	out := &pb.TransientEvent{
		Event:          pb.TransientEvent_Event_Value(pb.TransientEvent_Event_Value_value[e.Event]),
		OperatingPoint: label(e.OperatingPoint),
		Method:         pb.TransientEvent_Method_Value(pb.TransientEvent_Method_Value_value[e.Method]),
		NodeMin:        wireSpan(&e.NodeMin),
		PinMin:         wireSpan(&e.PinMin),
		RailToComMin:   wireSpan(&e.RailToCOMMin),
		Undershoots: each(e.Undershoots, func(u *finding.Undershoot) *pb.UndershootDuration {
			one := &pb.UndershootDuration{Level: wireMeasure(&u.Level), Duration: wireSpan(&u.Duration), Total: wireSpan(&u.Total)}
			one.Each = each(u.Each, wireMeasure)
			if u.Dips > 0 {
				one.Dips = count(u.Dips)
			}
			return one
		}),
		FloatingVoltageGain: wireSpan(&e.FloatingVoltageGain),
		NodeMax:             wireSpan(&e.NodeMax),
		RailMax:             wireSpan(&e.RailMax),
		HighSidePeak:        wireSpan(&e.HighSidePeak),
		LowSidePeak:         wireSpan(&e.LowSidePeak),
		SlewPeak:            wireSpan(&e.SlewPeak),
		Slew_10To_90:        wireSpan(&e.Slew10To90),
		MillerLow:           wireSpan(&e.MillerLow),
		MillerHigh:          wireSpan(&e.MillerHigh),
		GateMin:             wireSpan(&e.GateMin),
		CurrentSlope:        wireSpan(&e.CurrentSlope),
		RingFrequency:       wireSpan(&e.RingFrequency),
		RingDamping:         wireSpan(&e.RingDamping),
		Convergence:         number(e.Convergence),
		Comparisons: each(e.Comparisons, func(c *finding.Comparison) *pb.Comparison {
			return &pb.Comparison{Name: label(c.Name), Simulated: wireMeasure(&c.Simulated), Estimated: wireMeasure(&c.Estimated), Difference: number(c.Difference)}
		}),
		Missing: e.Missing,
		Reason:  label(e.Reason),
	}
	if e.Steps > 0 {
		out.Steps = count(e.Steps)
	}
	return out
}

// wireWaveform rounds a waveform as every number of an answer. Of points whose times round to one the first stays, or what is an extreme of the
// waveform, so that time rises and no peak is lost.
func wireWaveform(w *finding.Waveform) *pb.Waveform {
	out := &pb.Waveform{Name: label(w.Name), Unit: label(w.Unit), Time: make([]float64, 0, len(w.Time)), Value: make([]float64, 0, len(w.Time))}
	if len(w.Time) == 0 {
		return out
	}
	lowest, highest := slices.Min(w.Value), slices.Max(w.Value)
	for i, t := range w.Time {
		t, v := Round(t), Round(w.Value[i])
		switch last := len(out.Time) - 1; {
		case last < 0 || t > out.Time[last]:
			out.Time, out.Value = append(out.Time, t), append(out.Value, v)
		case w.Value[i] == lowest || w.Value[i] == highest:
			out.Value[last] = v
		}
	}
	return out
}

func wireDutyPoint(p *finding.DutyPoint) *pb.DutyPoint {
	out := &pb.DutyPoint{
		OperatingPoint:      label(p.OperatingPoint),
		RechargeWindow:      wireSpan(&p.RechargeWindow),
		RechargeRatio:       wireSpan(&p.RechargeRatio),
		Deficit:             wireSpan(&p.Deficit),
		FloatingVoltageLow:  wireSpan(&p.FloatingVoltageLow),
		FloatingVoltageHigh: wireSpan(&p.FloatingVoltageHigh),
		GateVoltageLow:      wireSpan(&p.GateVoltageLow),
		CapacitanceCancels:  proto.Bool(p.CapacitanceCancels),
		PeakDetector:        proto.Bool(p.PeakDetector),
		HighInterval:        label(p.HighInterval),
		Limits:              each(p.Limits, wireLimit),
		LowAngle:            wireMeasure(&p.LowAngle),
		HighAngle:           wireMeasure(&p.HighAngle),
		TimeWithoutRecharge: wireSpan(&p.WithoutRefresh),
		RestartVoltage:      wireSpan(&p.Restart),
		Missing:             p.Missing,
		Reason:              label(p.Reason),
	}
	if c := p.Collapses; c != nil {
		out.Collapses = &pb.Collapse{Periods: count(c.Periods), Corner: wireCorner(&c.Corner)}
	}
	for i := range p.Limits {
		l := &p.Limits[i]
		m := wireMeasure(&l.Measure)
		switch l.Name {
		case finding.LargestDuty:
			out.LargestDuty = m
		case finding.LongestOnTime:
			out.LongestOnTime = m
		case finding.ShortestLowSidePulse:
			out.ShortestLowSidePulse = m
		case finding.LargestResistance:
			out.LargestResistance = m
		case finding.LargestDeadTime:
			out.LargestDeadTime = m
		case finding.LowestSwitchingFrequency:
			out.LowestSwitchingFrequency = m
		case finding.HighestSwitchingFreq:
			out.HighestSwitchingFrequency = m
		case finding.LargestIndex:
			out.LargestModulationIndex = m
		case finding.LowestFundamental:
			out.LowestFundamentalFrequency = m
		case finding.LongestIdle:
			out.LongestIdleTime = m
		case finding.LongestStall:
			out.LongestStall = m
		}
	}
	return out
}
