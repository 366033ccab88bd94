package convert

import (
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
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
	return &pb.DutyLimitsResult{Points: each(d.Points, wireDutyPoint), Precharge: wirePrecharge(d.Precharge)}
}

func wirePrecharge(p *finding.Precharge) *pb.Precharge {
	if p == nil {
		return nil
	}
	out := &pb.Precharge{
		Time: wireSpan(&p.Time), PeakCurrent: wireSpan(&p.PeakCurrent), ResistorEnergy: wireSpan(&p.ResistorEnergy),
		ReservoirLow: wireSpan(&p.ReservoirLow), SettledVoltage: wireSpan(&p.SettledVoltage),
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
	return &pb.TransientStressResult{Events: each(t.Events, wireEvent)}
}

func wireEvent(e *finding.TransientEvent) *pb.TransientEvent {
	return &pb.TransientEvent{
		Event:          pb.TransientEvent_Event_Value(pb.TransientEvent_Event_Value_value[e.Event]),
		OperatingPoint: label(e.OperatingPoint),
		Method:         pb.TransientEvent_Method_ESTIMATE,
		NodeMin:        wireSpan(&e.NodeMin),
		PinMin:         wireSpan(&e.PinMin),
		RailToComMin:   wireSpan(&e.RailToCOMMin),
		Undershoots: each(e.Undershoots, func(u *finding.Undershoot) *pb.UndershootDuration {
			return &pb.UndershootDuration{Level: wireMeasure(&u.Level), Duration: wireSpan(&u.Duration)}
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
	}
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
		Limits: each(p.Limits, func(l *finding.DerivedLimit) *pb.DerivedLimit {
			return &pb.DerivedLimit{Name: label(l.Name), Measure: wireMeasure(&l.Measure), Corner: wireCorner(&l.Corner), Reason: label(l.Reason)}
		}),
		Missing: p.Missing,
		Reason:  label(p.Reason),
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
		}
	}
	return out
}
