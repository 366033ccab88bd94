package acceptance

import (
	"testing"
)

// A pulse shorter than the driver passes charges nothing (common practice).
func TestStartPulseThatTheDriverSwallows(t *testing.T) {
	c := serve(t)
	of := func(shortest string) string {
		return request(t, exactLockout, switching("20 kHz", "50 %", "0 s"), edits{"driver.minimumPulse": `"` + shortest + `"`, "startup.pulseWidth": "5 us",
			"startup.pulsePeriod": "50 us"})
	}
	judged(t, find(t, c.review(of("4 us")).GetFindings(), "duty/pre-charge", ""), pass, none)
	f := find(t, c.review(of("6 us")).GetFindings(), "duty/pre-charge", "")
	judged(t, f, fail, major)
	says(t, f, "never reaches", "settles at 0 V")
}

// The diode of a rectifier pulls no node down that stands at 30 V, whatever is commanded; a switch does.
func TestPrebiasOverARectifier(t *testing.T) {
	c := serve(t)
	of := func(kind string) string {
		return request(t, exactLockout, switching("20 kHz", "50 %", "0 s"), edits{"lowSide.kind": kind, "startup.prebias": "30 V",
			"startup.pulseWidth": "10 us", "startup.pulsePeriod": "50 us", "startup.timeAvailable": "10 ms"})
	}
	judged(t, find(t, c.review(of(`"SI_MOSFET"`)).GetFindings(), "duty/idle-refresh", ""), pass, none)
	f := find(t, c.review(of(`"DIODE"`)).GetFindings(), "duty/idle-refresh", "")
	judged(t, f, fail, major)
	says(t, f, "does not pull the node down")
}

// Without a pulse the node's voltage is left to the element, and it takes its time: τ = R·C = 10 ms reaches 12 V - 0.4 V - 2 V only after several.
func TestPrebiasTakesTime(t *testing.T) {
	c := serve(t)
	of := func(time string) string {
		return request(t, exactLockout, switching("20 kHz", "50 %", "0 s"), capacitance("10 uF"), edits{"bootstrap.resistor.resistance": "1 kohm",
			"driver.uvloRising": "8 V", "driver.uvloFalling": "7 V", "startup.prebias": "2 V", "startup.timeAvailable": time})
	}
	judged(t, find(t, c.review(of("100 ms")).GetFindings(), "duty/idle-refresh", ""), pass, none)
	judged(t, find(t, c.review(of("10 ms")).GetFindings(), "duty/idle-refresh", ""), fail, major)
}

// A duty of 1 leaves nothing to recharge in, so that no supply holds it however close below 1 it still does.
func TestDutyOfOneDoesNotHold(t *testing.T) {
	c := serve(t)
	f := find(t, c.review(request(t, switching("20 kHz", "1", "100 ns"), edits{"driver.floatingQuiescentCurrent": "100 uA",
		"operatingPoints.0.loadCurrent": "5 A"})).GetFindings(), "duty/largest-duty", "")
	judged(t, f, fail, major)
	if l := f.GetLimit().GetValue(); !(l < 1) {
		t.Errorf("largest duty %g", l)
	}
}

// Only where the slope and the inductance are both at their ends does the node pass a level: 10 nH·0.6 A/ns is 6 V, 10 nH·0.5 A/ns and
// 5 nH·0.6 A/ns with the drop of the diode stay above -5.5 V. It lasts for 10 A/(0.6 A/ns).
func TestLevelOfAnUndershootAtTheCornerOnly(t *testing.T) {
	c := serve(t)
	e := c.of(t).event(request(t, switching("20 kHz", "50 %", "100 ns"), edits{
		"operatingPoints.0.loadCurrent": "10 A", "lowSide.reverse.forwardPoints": drops(0.3),
		"layout.lowSideInductance":            `{"min":"4 nH","typ":"5 nH","max":"10 nH"}`,
		"layout.measured.turnOffCurrentSlope": `{"min":"0.4 A/ns","typ":"0.5 A/ns","max":"0.6 A/ns"}`,
		"driver.nodeUndershoot":               `[{"voltage":"-5.5 V","duration":"100 ns"}]`,
	}), turnOff)
	if n := len(e.GetUndershoots()); n != 1 {
		t.Fatalf("%d levels", n)
	}
	d := e.GetUndershoots()[0].GetDuration()
	near(t, "typical", d.GetTyp(), 0, 0)
	near(t, "largest", d.GetMax(), 10/0.6e9, 1e-12)
}

// A forward recovery time of 45 ns after a ramp of 25 ns is a valid test; the policy's spread of half of it must not make it one that ends before
// the current is there.
func TestForwardRecoveryTimeOfATypicalValue(t *testing.T) {
	c := serve(t)
	f := find(t, c.review(request(t, switching("20 kHz", "50 %", "100 ns"), edits{
		"operatingPoints.0.loadCurrent": "10 A", "lowSide.reverse.forwardPoints": drops(0.8), "lowSide.reverse.peakForwardRecovery": "2 V",
		"lowSide.reverse.forwardRecoveryTime": `{"typ":"45 ns"}`, "lowSide.reverse.forwardRecoveryTestCurrent": `"50 A"`,
		"lowSide.reverse.forwardRecoveryTestSlope": `"2 A/ns"`,
	})).GetFindings(), "node/undershoot-pulse", "driver")
	judged(t, f, pass, none)
}

// With 10 mS a switch at 12 V does not carry 10 A: what depends on how it turns off is OPEN and says so.
func TestDriveThatDoesNotCarryTheCurrent(t *testing.T) {
	c := serve(t)
	f := find(t, c.review(request(t, switching("20 kHz", "50 %", "100 ns"), edits{
		"operatingPoints.0.loadCurrent": "10 A", "highSide.transconductance": "10 mS",
	})).GetFindings(), "duty/dead-time", "")
	judged(t, f, open, major)
	says(t, f, "cannot carry the current")
}

// A clamp from COM to V_S behind 10 Ω holds the pin at its static drop; what it lets through before it conducts is not known, so that its help is
// never more than MARGINAL.
func TestNodeClampIsAnOptimisticAssumption(t *testing.T) {
	c := serve(t)
	stage := edits{"operatingPoints.0.loadCurrent": "10 A", "layout.lowSideInductance": "10 nH", "layout.measured.turnOffCurrentSlope": "1 A/ns",
		"driver.nodeUndershoot": `[{"voltage":"-5 V"}]`, "layout.nodeResistor.resistance": "10 ohm"}
	running := switching("20 kHz", "50 %", "100 ns")
	judged(t, find(t, c.review(request(t, running, stage)).GetFindings(), "node/undershoot-pulse", "driver"), fail, critical)
	f := find(t, c.review(request(t, running, stage, edits{"layout.nodeClamp": `{"forwardPoints":` + drops(0.7) + `}`})).GetFindings(),
		"node/undershoot-pulse", "driver")
	judged(t, f, marginal, major)
	says(t, f, "forward recovery of the clamp")
}

// Start pulses of a driver whose shortest pulse or edge is not given are no sure pass.
func TestStartPulsesOfAnUnknownDriver(t *testing.T) {
	c := serve(t)
	for _, field := range []string{"driver.minimumPulse", "driver.edgeTime"} {
		f := find(t, c.review(request(t, exactLockout, switching("20 kHz", "50 %", "0 s"), edits{field: "", "startup.pulseWidth": "5 us",
			"startup.pulsePeriod": "50 us"})).GetFindings(), "duty/pre-charge", "")
		judged(t, f, marginal, minor)
		says(t, f, field)
	}
}

// Temperatures are judged where the stage lasts; overloads alone leave them open.
func TestOverloadsAloneLeaveTemperaturesOpen(t *testing.T) {
	c := serve(t)
	running := switching("20 kHz", "50 %", "100 ns")
	judged(t, find(t, c.review(request(t, running)).GetFindings(), "thermal/driver", "driver"), pass, none)
	answer := c.review(request(t, running, edits{"operatingPoints.0.overload": "true"}))
	for rule, role := range map[string]string{"thermal/driver": "driver", "thermal/diode": "bootstrap.diode"} {
		f := find(t, answer.GetFindings(), rule, role)
		judged(t, f, open, major)
		says(t, f, "every operating point is an overload")
	}
}
