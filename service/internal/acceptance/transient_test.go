package acceptance

import (
	"math"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

const (
	turnOff        = pb.TransientEvent_Event_TURN_OFF
	turnOn         = pb.TransientEvent_Event_TURN_ON
	sinkingTurnOff = pb.TransientEvent_Event_SINKING_TURN_OFF
	sinkingTurnOn  = pb.TransientEvent_Event_SINKING_TURN_ON
)

// Which events an operating point has: none without an edge, none without a current, sinking ones for a current into the node, all four where
// the ripple takes the current through zero, and no sinking ones where the low side is a diode.
func TestEventsOfAnOperatingPoint(t *testing.T) {
	c := serve(t)
	running := switching("100 kHz", "50 %", "100 ns")
	load := func(current string) edits { return edits{"operatingPoints.0.loadCurrent": current} }
	rectifier := edits{"lowSide.kind": `"DIODE"`}
	for _, z := range []struct {
		name  string
		stage []edits
		want  []pb.TransientEvent_Event_Value
	}{
		{"sourcing", []edits{running, load("10 A")}, []pb.TransientEvent_Event_Value{turnOff, turnOn}},
		{"sinking", []edits{running, load("-10 A")}, []pb.TransientEvent_Event_Value{sinkingTurnOff, sinkingTurnOn}},
		{"through zero", []edits{running, load("1 A"), {"operatingPoints.0.rippleCurrent": "4 A"}}, []pb.TransientEvent_Event_Value{turnOff, turnOn, sinkingTurnOff}},
		{"either way", []edits{running, {"operatingPoints.0.loadCurrent": `{"min":"-5 A","typ":"1 A","max":"5 A"}`}},
			[]pb.TransientEvent_Event_Value{turnOff, turnOn, sinkingTurnOff, sinkingTurnOn}},
		{"no current", []edits{running, load("0 A")}, []pb.TransientEvent_Event_Value{turnOn, sinkingTurnOn}}, // the node moves, nothing is taken over,
		{"always on", []edits{switching("100 kHz", "1", "100 ns"), load("10 A")}, nil},
		{"always off", []edits{switching("100 kHz", "0", "100 ns"), load("-10 A")}, nil},
		{"held on without a current", []edits{held("12 V", "1 ms"), load("0 A")}, []pb.TransientEvent_Event_Value{turnOn, sinkingTurnOn}},
		{"held on", []edits{held("12 V", "1 ms"), load("10 A")}, []pb.TransientEvent_Event_Value{turnOff, turnOn}},
		{"sourcing, diode", []edits{running, rectifier, load("10 A")}, []pb.TransientEvent_Event_Value{turnOff, turnOn}},
		{"sinking, diode", []edits{running, rectifier, load("-10 A")}, nil},
	} {
		t.Run(z.name, func(t *testing.T) {
			answer := c.of(t).stress(request(t, z.stage...))
			events := answer.GetTransientStress().GetEvents()
			if len(events) != len(z.want) {
				t.Fatalf("%d events, want %v", len(events), z.want)
			}
			for i, e := range events {
				if e.GetEvent() != z.want[i] || e.GetOperatingPoint() != "point" || e.GetMethod() != pb.TransientEvent_Method_ESTIMATE {
					t.Errorf("%v at %q by %v, want %v", e.GetEvent(), e.GetOperatingPoint(), e.GetMethod(), z.want[i])
				}
				shown(t, e, z.name == "sourcing, diode")
			}
			// A rule about an edge applies where there is one.
			slew := find(t, answer.GetFindings(), "node/slew", "driver")
			if (slew.GetOutcome() != pb.Outcome_NOT_APPLICABLE) != (len(events) > 0) {
				t.Errorf("node/slew with %d events: %v %s", len(events), slew.GetOutcome(), slew.GetMessage())
			}
		})
	}
}

// shown demands that an event shows the numbers of what it stresses, each with its three ends in order, and no others.
func shown(t *testing.T, e *pb.TransientEvent, rectifier bool) {
	t.Helper()
	falls := e.GetEvent() == turnOff || e.GetEvent() == sinkingTurnOn
	sourcing := e.GetEvent() == turnOff || e.GetEvent() == turnOn
	for _, n := range []struct {
		name string
		span *pb.Span
		show bool
	}{
		{"nodeMin", e.GetNodeMin(), falls}, {"pinMin", e.GetPinMin(), falls}, {"railToComMin", e.GetRailToComMin(), falls},
		{"floatingVoltageGain", e.GetFloatingVoltageGain(), falls}, {"nodeMax", e.GetNodeMax(), !falls}, {"railMax", e.GetRailMax(), !falls},
		{"highSidePeak", e.GetHighSidePeak(), falls}, {"lowSidePeak", e.GetLowSidePeak(), !falls}, {"slewPeak", e.GetSlewPeak(), true},
		{"slew10To90", e.GetSlew_10To_90(), true}, {"millerLow", e.GetMillerLow(), e.GetEvent() == turnOn && !rectifier},
		{"millerHigh", e.GetMillerHigh(), e.GetEvent() == sinkingTurnOn}, {"gateMin", e.GetGateMin(), !sourcing || !rectifier},
		{"currentSlope", e.GetCurrentSlope(), true}, {"ringFrequency", e.GetRingFrequency(), true}, {"ringDamping", e.GetRingDamping(), true},
	} {
		low, typ, high := n.span.GetMin(), n.span.GetTyp(), n.span.GetMax()
		switch {
		case !n.show && (low != nil || typ != nil || high != nil):
			t.Errorf("%v: %s = %v", e.GetEvent(), n.name, n.span)
		case n.show && (low == nil || typ == nil || high == nil || low.Value == nil || typ.Value == nil || high.Value == nil):
			t.Errorf("%v: %s = %v is not whole", e.GetEvent(), n.name, n.span)
		case n.show && !(low.GetValue() <= typ.GetValue() && typ.GetValue() <= high.GetValue()):
			t.Errorf("%v: %s = %v is not in order", e.GetEvent(), n.name, n.span)
		}
	}
	if (len(e.GetUndershoots()) > 0) != falls {
		t.Errorf("%v: %d undershoots", e.GetEvent(), len(e.GetUndershoots()))
	}
}

// measuredStage is a bridge of which all slopes are measured: its numbers follow from them by the textbook.
func measuredStage(current string) []edits {
	return []edits{switching("100 kHz", "50 %", "100 ns"), {
		"operatingPoints.0.loadCurrent": current, "operatingPoints.0.busVoltage": "400 V",
		"layout.lowSideInductance": "4 nH", "layout.busLoopInductance": "6 nH", "highSide.reverse.forwardPoints": drops(1.5), "lowSide.reverse.forwardPoints": drops(1.2),
		"layout.measured.turnOffCurrentSlope": "2 A/ns", "layout.measured.turnOnCurrentSlope": "0.5 A/ns",
		"layout.measured.turnOffVoltageSlope": "20 V/ns", "layout.measured.turnOnVoltageSlope": "10 V/ns",
		"highSide.outputCapacitance": level("100 pF"), "lowSide.outputCapacitance": level("100 pF"),
		"highSide.reverseTransferCapacitance": level("10 pF"), "lowSide.reverseTransferCapacitance": level("10 pF"),
		"highSide.gateOff.resistance": "4 ohm", "lowSide.gateOff.resistance": "4 ohm", "driver.nodeUndershoot": rows, "driver.uvloFalling": "8 V",
		"driver.offsetVoltageMax": `"600 V"`, "highSide.thresholdVoltage": "3 V", "lowSide.thresholdVoltage": "3 V",
	}}
}

// Every number of the events against the textbook's closed forms, with the slopes as measured.
func TestEventsByTheTextbook(t *testing.T) {
	c := serve(t)
	// A level C_gd under a level slope: R_g·C_gd·dv/dt·(1 - exp(-t_r/(R_g·C_iss))), R_g of 4 Ω and 1 Ω of the driver, t_r = 400 V over the slope.
	lift := func(slope float64) float64 { return 5 * 10e-12 * slope * (1 - math.Exp(-400/slope/(5*1e-9))) }
	ring := 1 / (2 * math.Pi * math.Sqrt(10e-9*100e-12))
	rise := func(e *pb.TransientEvent, voltage, current float64) {
		t.Helper()
		all(t, "peak slew", e.GetSlewPeak(), voltage, 1)
		all(t, "slew from 10 to 90 %", e.GetSlew_10To_90(), voltage, 1e-5*voltage)
		all(t, "current slope", e.GetCurrentSlope(), current, 0)
		all(t, "ringing", e.GetRingFrequency(), ring, 1e-5*ring)
		all(t, "damping at a quality of 10", e.GetRingDamping(), 0.05, 1e-9)
	}
	sourcing, sinking := request(t, measuredStage("30 A")...), request(t, measuredStage("-30 A")...)

	e := c.event(sourcing, turnOff)
	rise(e, 20e9, 2e9)
	all(t, "node: V_F + L2·di/dt", e.GetNodeMin(), -(1.2 + 8), 2e-4)
	all(t, "rail: with V_UV-", e.GetRailToComMin(), 8-9.2, 2e-4)
	all(t, "high side: V_BUS + V_F + (L1 + L2)·di/dt", e.GetHighSidePeak(), 400+1.2+20, 1e-3)
	all(t, "gate of the low side, pulled", e.GetGateMin(), -lift(20e9), 1e-4)
	undershoots(t, e, []float64{-5, -12, -20}, []float64{15e-9, 0, 0})

	e = c.event(sourcing, turnOn)
	rise(e, 10e9, 0.5e9)
	all(t, "gate of the low side, lifted", e.GetMillerLow(), lift(10e9), 1e-4)
	// Nothing recovers: what is left is the loop that rings under a ramp of 40 ns, 2·V_BUS/(ω·t), L1 of it at the node.
	over := 400 * 2 / (2 * math.Pi * ring * 40e-9)
	all(t, "low side", e.GetLowSidePeak(), 400+over, 5e-3)
	all(t, "node", e.GetNodeMax(), 400+0.6*over, 5e-3)

	// What the dip of the loop's ringing adds to V_BS is not more than its depth.
	e = c.event(sinking, sinkingTurnOn)
	gain := e.GetFloatingVoltageGain().GetTyp().GetValue()
	if dip := -e.GetNodeMin().GetTyp().GetValue(); !(gain > 0.1 && gain < dip) {
		t.Errorf("a dip of %g V adds %g V", dip, gain)
	}

	e = c.event(sinking, sinkingTurnOff)
	rise(e, 20e9, 2e9)
	all(t, "node: V_BUS + V_F + L1·di/dt", e.GetNodeMax(), 400+1.5+12, 1e-3)
	all(t, "low side: V_BUS + V_F + (L1 + L2)·di/dt", e.GetLowSidePeak(), 400+1.5+20, 1e-3)
	all(t, "rail: with V_BS", e.GetRailMax(), 400+1.5+12+11.6+gain, 2e-3)
	all(t, "gate of the high side, pulled", e.GetGateMin(), -lift(20e9), 1e-4)

	e = c.event(sinking, sinkingTurnOn)
	rise(e, 10e9, 0.5e9)
	all(t, "gate of the high side, lifted", e.GetMillerHigh(), lift(10e9), 1e-4)

	// The rules judge the same numbers.
	for _, z := range []struct {
		body, rule, role string
		value            float64 // in the rule's unit
		within           float64
	}{
		{sourcing, "node/undershoot-pulse", "driver", -9.2, 2e-4}, {sourcing, "node/rail-below-com", "driver", -1.2, 2e-4},
		{sourcing, "node/switch-overshoot", "highSide", 421.2, 1e-3}, {sourcing, "gate/miller-low", "lowSide", lift(10e9), 1e-4},
		{sourcing, "node/slew", "driver", 20e9, 1}, {sinking, "node/rail-overshoot", "driver", 425.1 + gain, 2e-3},
		{sinking, "gate/miller-high", "highSide", lift(10e9), 1e-4}, {sinking, "gate/negative", "highSide", -lift(20e9), 1e-4},
	} {
		near(t, z.rule, find(t, c.review(z.body).GetFindings(), z.rule, z.role).GetValue(), z.value, z.within)
	}
}

// A spread of what an event follows from is a spread of its numbers: L2 of 8, 10, 12 nH at 1 A/ns.
func TestEventsSpread(t *testing.T) {
	c := serve(t)
	body := request(t, switching("100 kHz", "50 %", "100 ns"), edits{
		"operatingPoints.0.loadCurrent": "30 A", "layout.measured.turnOffCurrentSlope": "1 A/ns", "lowSide.reverse.forwardPoints": drops(1.2),
		"layout.lowSideInductance": `{"min":"8 nH","typ":"10 nH","max":"12 nH"}`, "driver.nodeUndershoot": `[{"voltage":"-5 V"},{"voltage":"-10 V","duration":"50 ns"}]`,
	})
	e := c.event(body, turnOff)
	near(t, "deepest", e.GetNodeMin().GetMin(), -13.2, 2e-4)
	near(t, "typical", e.GetNodeMin().GetTyp(), -11.2, 2e-4)
	near(t, "shallowest", e.GetNodeMin().GetMax(), -9.2, 2e-4)
	below := e.GetUndershoots()[1].GetDuration()
	near(t, "shortest below -10 V", below.GetMin(), 0, 0)
	near(t, "typical below -10 V", below.GetTyp(), 30e-9, 1e-15)
	near(t, "longest below -10 V", below.GetMax(), 30e-9, 1e-15)
	f := find(t, c.stress(body).GetFindings(), "node/undershoot-pulse", "driver")
	judged(t, f, fail, critical)
	near(t, "worst", f.GetValue(), -13.2, 2e-4)
	near(t, "typical", f.GetTypical(), -11.2, 2e-4)
}

// Options that the service does not carry out are refused by name, all at once.
func TestOptionsOfStressAreRefused(t *testing.T) {
	c := serve(t)
	good := request(t, switching("100 kHz", "50 %", "100 ns"), sound())
	refused(t, c, "/v1/transient-stress", edit(t, good, edits{"/options": `{"fixes":true,"waveforms":true,"trace":true}`}),
		at("options.waveforms", "read true without simulate", "true in options.simulate"), at("options.fixes", "no search for fixes"),
		at("options.trace", "read true", "CheckDutyLimits", "expected false or absent"))
	refused(t, c, "/v1/sizing", edit(t, good, edits{"/options": `{"trace":true}`}), at("options.trace", "read true", "CheckDutyLimits", "expected false or absent"))
	for _, path := range []string{"/v1/sizing", "/v1/duty-limits"} { // which judge no events
		refused(t, c, path, edit(t, good, edits{"/options": `{"simulate":true,"waveforms":true}`}),
			at("options.simulate", "read true", "CheckTransientStress", "expected false or absent"),
			at("options.waveforms", "read true", "CheckTransientStress", "expected false or absent"))
	}
	for _, path := range []string{"/v1/transient-stress", "/v1/reviews"} {
		refused(t, c, path, edit(t, good, edits{"/options": `{"fixes":true}`}), at("options.fixes", "read true", "expected false or absent"))
	}
	for _, option := range []string{"fixes", "trace"} {
		if code, data := c.post("/v1/transient-stress", edit(t, good, edits{"/options": `{"` + option + `":false}`})); code != 200 {
			t.Errorf("%s false: %d %s", option, code, data)
		}
	}
	refused(t, c, "/v1/transient-stress", edit(t, good, edits{"layout.lowSideInductance.typ": `"2"`, "layout.measured.turnOffCurrentSlope": "1 V/ns"}),
		at("stage.layout.lowSideInductance.typ", "unit is missing"), at("stage.layout.measured.turnOffCurrentSlope.min", `read "1 V/ns"`),
		at("stage.layout.measured.turnOffCurrentSlope.typ"), at("stage.layout.measured.turnOffCurrentSlope.max"))
}
