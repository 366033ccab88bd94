package acceptance

import (
	"math"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// Facts of the trade about switching events, through the REST interface. Common practice, no source: each is a direction, not a number.

// drivenStage is a bridge whose edges follow from the gate drive: nothing is measured.
func drivenStage(current string, more ...edits) []edits {
	return append([]edits{switching("100 kHz", "50 %", "200 ns"), {
		"operatingPoints.0.loadCurrent": current, "operatingPoints.0.busVoltage": "400 V",
		"layout.lowSideInductance": "5 nH", "layout.busLoopInductance": "10 nH",
		"layout.measured.turnOffCurrentSlope": "", "layout.measured.turnOnCurrentSlope": "",
		"layout.measured.turnOffVoltageSlope": "", "layout.measured.turnOnVoltageSlope": "",
		"highSide.thresholdVoltage": "3 V", "lowSide.thresholdVoltage": "3 V", "highSide.transconductance": "20 S", "lowSide.transconductance": "20 S",
		"highSide.outputCapacitance": level("50 pF"), "lowSide.outputCapacitance": level("50 pF"),
		"highSide.reverseTransferCapacitance": level("20 pF"), "lowSide.reverseTransferCapacitance": level("20 pF"),
		"driver.nodeUndershoot": `[{"voltage":"-100 V"}]`, "driver.railMin": `"-100 V"`, "driver.railOperationalMin": `"-50 V"`,
	}}, more...)
}

// course asks for a number at each of several values of one field, and demands that it rises, or falls, all the way.
func course(t *testing.T, c client, what, field string, values []string, rises bool, stage func(edits) string, number func(body string) float64) {
	t.Helper()
	last := math.NaN()
	for i, v := range values {
		n := number(stage(edits{field: v}))
		if n != n || i > 0 && (n > last) != rises || n == last {
			t.Errorf("%s: %s of %s: %g after %g", what, field, v, n, last)
		}
		last = n
	}
}

// More gate resistance lowers the undershoot and the slew; a smaller share of the inductance below the tap, the undershoot.
func TestPracticeGateResistance(t *testing.T) {
	c := serve(t)
	stage := func(e edits) string { return request(t, drivenStage("20 A", e)...) }
	ohms := []string{"2 ohm", "4.7 ohm", "10 ohm", "22 ohm", "47 ohm"}
	depth := func(body string) float64 { return -c.event(body, turnOff).GetNodeMin().GetTyp().GetValue() }
	course(t, c, "undershoot", "highSide.gateOff.resistance", ohms, false, stage, depth)
	course(t, c, "slew at turn-off", "highSide.gateOff.resistance", ohms[1:], false, stage, func(body string) float64 {
		return c.event(body, turnOff).GetSlewPeak().GetTyp().GetValue()
	})
	course(t, c, "slew at turn-on", "highSide.gateOn.resistance", ohms, false, stage, func(body string) float64 {
		return c.event(body, turnOn).GetSlewPeak().GetTyp().GetValue()
	})
	course(t, c, "current at turn-on", "highSide.gateOn.resistance", ohms, false, stage, func(body string) float64 {
		return c.event(body, turnOn).GetCurrentSlope().GetTyp().GetValue()
	})
	// The rules see it too, and what holds the gate of the other switch more weakly lets it be lifted more.
	course(t, c, "node/undershoot-pulse", "highSide.gateOff.resistance", ohms, true, stage, func(body string) float64 {
		return find(t, c.stress(body).GetFindings(), "node/undershoot-pulse", "driver").GetValue().GetValue()
	})
	course(t, c, "gate/miller-low", "lowSide.gateOff.resistance", ohms, true, stage, func(body string) float64 {
		return find(t, c.stress(body).GetFindings(), "gate/miller-low", "lowSide").GetValue().GetValue()
	})
}

// More inductance between COM and the tap deepens the undershoot, and leaves what lies above the tap without effect on it: a tap close to the
// low side's source is worth more than a short loop.
func TestPracticeInductance(t *testing.T) {
	c := serve(t)
	slope := edits{"layout.measured.turnOffCurrentSlope": "1 A/ns"}
	stage := func(e edits) string { return request(t, drivenStage("20 A", slope, e)...) }
	depth := func(body string) float64 { return -c.event(body, turnOff).GetNodeMin().GetTyp().GetValue() }
	course(t, c, "undershoot", "layout.lowSideInductance", []string{"1 nH", "2 nH", "5 nH", "10 nH", "20 nH"}, true, stage, depth)
	course(t, c, "drain-source peak", "layout.busLoopInductance", []string{"1 nH", "2 nH", "5 nH", "10 nH", "20 nH"}, true, stage, func(body string) float64 {
		return c.event(body, turnOff).GetHighSidePeak().GetTyp().GetValue()
	})
	if a, b := depth(stage(edits{"layout.busLoopInductance": "1 nH"})), depth(stage(edits{"layout.busLoopInductance": "20 nH"})); a != b {
		t.Errorf("inductance above the tap moves the undershoot from %g to %g V", a, b)
	}
	// The same where the gate drive sets the slope.
	course(t, c, "undershoot by the gate drive", "layout.lowSideInductance", []string{"1 nH", "2 nH", "5 nH", "10 nH"}, true,
		func(e edits) string {
			return request(t, drivenStage("20 A", edits{"highSide.gateOff.resistance": "22 ohm"}, e)...)
		}, depth)
}

// A source inductance that gate and load share slows the edge; a Kelvin source, which has none, is the fastest.
func TestPracticeKelvinSource(t *testing.T) {
	c := serve(t)
	shared := []string{"0 H", "0.5 nH", "1 nH", "2 nH", "4 nH"}
	sourcing := func(e edits) string { return request(t, drivenStage("20 A", e)...) }
	slope := func(e pb.TransientEvent_Event_Value) func(string) float64 {
		return func(body string) float64 { return c.event(body, e).GetCurrentSlope().GetTyp().GetValue() }
	}
	course(t, c, "turn-off", "layout.highSideCommonSource", shared, false, sourcing, slope(turnOff))
	course(t, c, "turn-on", "layout.highSideCommonSource", shared, false, sourcing, slope(turnOn))
	sinking := func(e edits) string { return request(t, drivenStage("-20 A", e)...) }
	course(t, c, "sinking turn-off", "layout.lowSideCommonSource", shared, false, sinking, slope(sinkingTurnOff))
	course(t, c, "sinking turn-on", "layout.lowSideCommonSource", shared, false, sinking, slope(sinkingTurnOn))
	course(t, c, "undershoot", "layout.highSideCommonSource", shared, true, sourcing, func(body string) float64 {
		return c.event(body, turnOff).GetNodeMin().GetTyp().GetValue()
	})
}

// A negative off bias lowers the gate that an edge lifts by as much, at the price of a plateau of a HEMT in reverse conduction that is deeper by
// as much. The body diode of a MOSFET does not know it. The deeper plateau pumps V_BS, which drives the edge harder and takes back part of what the
// bias gives, unless the edge is measured.
func TestPracticeOffBias(t *testing.T) {
	c := serve(t)
	bias := func(v string) edits {
		return edits{"lowSide.offBias": v, "lowSide.offBiasSource": `"SEPARATE"`, "lowSide.reverse.gateVoltage": `"0 V"`}
	}
	stage := func(kind string, e edits) string {
		return request(t, drivenStage("20 A", edits{"lowSide.kind": `"` + kind + `"`, "lowSide.reverse.forwardPoints": drops(2)}, e)...)
	}
	for _, z := range []struct {
		kind   string
		deeper float64 // plateau, by an off bias of -3 V [V]
	}{{"GAN_HEMT", 3}, {"SI_MOSFET", 0}} {
		without, with := stage(z.kind, bias("0 V")), stage(z.kind, bias("-3 V"))
		lift := func(body string) float64 { return c.event(body, turnOn).GetMillerLow().GetTyp().GetValue() }
		if fell := lift(without) - lift(with); !(fell > 0 && fell <= 3+1e-4) || (fell < 3-1e-4) != (z.deeper > 0) {
			t.Errorf("%s: a bias of 3 V lowers the gate by %g V", z.kind, fell)
		}
		measured := edits{"layout.measured.turnOnVoltageSlope": "20 V/ns"}
		lifted := lift(edit(t, without, measured))
		if !(lifted > 0.5) {
			t.Errorf("%s: gate lifted to %g V", z.kind, lifted)
		}
		with20 := edit(t, with, measured)
		all(t, z.kind+": gate with a bias", c.event(with20, turnOn).GetMillerLow(), lifted-3, 1e-4)
		near(t, z.kind+": gate/miller-low", find(t, c.stress(with20).GetFindings(), "gate/miller-low", "lowSide").GetValue(), lifted-3, 1e-4)

		plateau := find(t, c.stress(without).GetFindings(), "node/undershoot-static", "driver").GetValue()
		near(t, z.kind+": plateau", plateau, -2, 2e-4)
		near(t, z.kind+": plateau with a bias", find(t, c.stress(with).GetFindings(), "node/undershoot-static", "driver").GetValue(), -2-z.deeper, 2e-4)
		high := c.duty(without).GetFloatingVoltageHigh().GetTyp().GetValue()
		all(t, z.kind+": V_BS pumped", c.duty(with).GetFloatingVoltageHigh(), high+z.deeper, 0.02)
	}
	// On the switch that acts, a bias turns off faster.
	off := func(v string) float64 {
		return c.event(request(t, drivenStage("20 A", edits{"highSide.offBias": v, "highSide.offBiasSource": `"SEPARATE"`})...), turnOff).GetCurrentSlope().GetTyp().GetValue()
	}
	if a, b := off("0 V"), off("-3 V"); !(b > a) {
		t.Errorf("turn-off at %g A/s, with a bias at %g A/s", a, b)
	}
}

// Without data on the gate drive a measured slope decides, and with both the measured one does.
func TestPracticeMeasurementDecides(t *testing.T) {
	c := serve(t)
	slope := edits{"layout.measured.turnOffCurrentSlope": "1 A/ns"}
	for _, ohms := range []string{"2 ohm", "47 ohm"} {
		e := c.event(request(t, drivenStage("20 A", slope, edits{"highSide.gateOff.resistance": ohms})...), turnOff)
		all(t, "undershoot with "+ohms, e.GetNodeMin(), -(0.8 + 5), 2e-4)
	}
	f := find(t, c.stress(request(t, drivenStage("20 A", slope, edits{"highSide.gateOff.resistance": "", "highSide.transconductance": "", "highSide.thresholdVoltage": ""})...)).GetFindings(),
		"node/undershoot-pulse", "driver")
	judged(t, f, pass, none)
	near(t, "undershoot without the gate drive", f.GetValue(), -(0.8 + 5), 2e-4)
	f = find(t, c.stress(request(t, drivenStage("20 A", edits{"highSide.gateOff.resistance": "", "highSide.transconductance": ""})...)).GetFindings(),
		"node/undershoot-pulse", "driver")
	judged(t, f, open, major)
	says(t, f, "highSide.gateOff.resistance", "highSide.transconductance")
}
