package acceptance

import (
	"math"
	"strings"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// Starts that never come about, and holds that nothing ends: design 4.3 and 4.5 (derived), common practice.

// Without a pulse of the low side V_BS only comes to V_DD - V_F - V_prebias, design 4.5: 12 V - 0.4 V - 5 V = 6.6 V, or nothing on a node above V_DD,
// however long one waits. A pulse pulls the node down. An integrated switch does not conduct at all before the low side does.
func TestPrebiasedOutputNeverStarts(t *testing.T) {
	c := serve(t)
	of := func(prebias string, more edits) *pb.Finding {
		return find(t, c.review(request(t, exactLockout, switching("20 kHz", "50 %", "100 ns"), edits{"startup.prebias": prebias, "driver.uvloFalling": "8.9 V",
			"driver.floatingQuiescentCurrent": "200 uA", "bootstrap.resistor.resistance": "10 ohm", "driver.minimumPulse": `"100 ns"`}, more)).
			GetFindings(), "duty/idle-refresh", "")
	}
	for _, z := range []struct {
		prebias string
		more    edits
		reached float64 // [V]
	}{{"5 V", nil, 6.6}, {"30 V", nil, 0},
		{"5 V", edits{"bootstrap.element": `"INTEGRATED_SWITCH"`, "bootstrap.switchResistance": "2 ohm"}, 0}} {
		f := of(z.prebias, z.more)
		judged(t, f, fail, major)
		near(t, "V_BS on "+z.prebias, f.GetValue(), z.reached, 3e-3) // R_B and the fixed drop at 200 µA
		near(t, "lockout", f.GetLimit(), 8.9, 0)
		says(t, f, "the stage never starts", "comes to no more than "+f.GetValue().GetText(), "on a node at "+z.prebias, "no pulse of the low side pulls the node down")
	}
	judged(t, of("5 V", edits{"startup.pulseWidth": "10 us", "startup.pulsePeriod": "50 us"}), pass, none)
	judged(t, of("2 V", nil), pass, none) // 9.6 V
	// What would start if only it had the time is not said never to.
	f := of("2 V", edits{"startup.timeAvailable": "10 us"})
	judged(t, f, fail, major)
	if text := f.GetMessage() + strings.Join(f.GetNotes(), " "); strings.Contains(text, "never starts") {
		t.Errorf("%s", text)
	}
	// The diode of a rectifier pulls nothing down, whatever is commanded.
	says(t, of("5 V", edits{"startup.pulseWidth": "10 us", "startup.pulsePeriod": "50 us", "lowSide.kind": `"DIODE"`}), "the stage never starts",
		"does not pull the node down")
}

// At d = 1 there is neither edge nor dead time (design, section 2): nothing recharges C_B, and what is left is its hold, C·ΔV/I (D10, the
// inverse of STMicroelectronics L6386E, Doc 13989 Rev 2): 1 µF from 11.6 V to 3 V at 100 µA are 86.0 ms, 1,720 periods of 50 µs.
func TestNothingRechargesAtDutyOfOne(t *testing.T) {
	c := serve(t)
	body := request(t, switching("20 kHz", "1", "100 ns"), edits{"driver.floatingQuiescentCurrent": "100 uA", "operatingPoints.0.loadCurrent": "5 A"})
	answer := c.review(body)
	for rule, z := range map[string]struct {
		outcome  pb.Outcome_Value
		severity pb.Severity_Value
	}{"charge/lowest-voltage": {fail, major}, "charge/gate-sufficiency": {fail, major}, "duty/recharge-window": {fail, critical}, "duty/largest-duty": {fail, major}} {
		f := find(t, answer.GetFindings(), rule, "")
		judged(t, f, z.outcome, z.severity)
		if m := f.GetMessage(); !strings.Contains(m, "nothing recharges C_B") || !strings.Contains(m, "from 11.6 V its hold lasts 86 ms to lockout") {
			t.Errorf("%s: %s", rule, m)
		}
		for _, wrong := range []string{"shorter than the driver passes", "no window suffices"} {
			if text := f.GetMessage() + strings.Join(f.GetNotes(), " "); strings.Contains(text, wrong) {
				t.Errorf("%s: %s", rule, text)
			}
		}
	}
	near(t, "window", find(t, answer.GetFindings(), "duty/recharge-window", "").GetValue(), 0, 0)
	if n := answer.GetDutyLimits().GetPoints()[0].GetCollapses().GetPeriods(); n < 1720 || n > 1722 {
		t.Errorf("%d periods", n)
	}
	if answer.GetVerdict() != pb.Verdict_FAIL {
		t.Errorf("verdict %v", answer.GetVerdict())
	}
	// Without a load the share of avoidable loads is none, not unknown.
	answer = c.review(request(t, switching("20 kHz", "1", "100 ns")))
	judged(t, find(t, answer.GetFindings(), "charge/standing-load", ""), pass, none)
	says(t, find(t, answer.GetFindings(), "duty/recharge-window", ""), "nothing recharges C_B", "as long as nothing discharges it")
}

// Where C cancels (case 3 of the design), the message says why, and what is offered is less resistance, not more capacitance.
func TestCancellingCapacitanceIsNotSizedUp(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		text   string
		farads float64
	}{{"1 uF", 1e-6}, {"10 uF", 10e-6}} {
		body := request(t, gate(70), switching("50 kHz", "92.5 %", "0 s"), capacitance(z.text), supply(14.25), edits{
			"bootstrap.diode.forwardPoints": drops(1), "bootstrap.resistor.resistance": "200 ohm", "driver.uvloFalling": "8.9 V"})
		answer := c.review(body)
		for _, rule := range []string{"charge/lowest-voltage", "charge/capacitance", "duty/recharge-window", "duty/largest-duty"} {
			f := find(t, answer.GetFindings(), rule, "")
			for _, why := range []string{"the recharge window of 1.5 µs is short against R·C", "the deficit tends to Q_B·R/t_c and C cancels",
				"a larger capacitor is no fix"} {
				if !strings.Contains(f.GetMessage(), why) {
					t.Errorf("%s: no %q in %q", rule, why, f.GetMessage())
				}
			}
		}
		s := c.size(body)
		offersNoLargerCapacitor(t, answer, s)
		if v := s.GetRecommended().GetCapacitance().GetValue(); !(v <= z.farads) {
			t.Errorf("%s: %v recommended", z.text, s.GetRecommended().GetCapacitance())
		}
		if v := s.GetRecommended().GetResistance().GetValue(); !(v > 0 && v < 200*1.5/3.271) { // the break-even window is 3.271 µs
			t.Errorf("%s: %v recommended", z.text, s.GetRecommended().GetResistance())
		}
	}
}

// A peak detector's message names the interval that pumps it and the node there: the dead time after which V_BS is highest, or the whole low-side time of
// a rectifier, whose node stays at -V_SD.
func TestPeakDetectorNamesItsInterval(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		name, interval string
		more           edits
	}{
		{"two dead times", "dead time before the high side turns on", nil},
		{"rectifier", "freewheeling of the low-side diode", edits{"lowSide.kind": `"DIODE"`}},
	} {
		answer := c.review(request(t, pumping(12, 2.1, 0.4, edits{"driver.floatingVoltageMax": `"13 V"`}, z.more)))
		f := find(t, answer.GetFindings(), "gate/overvoltage", "driver")
		judged(t, f, fail, critical)
		near(t, z.name, f.GetValue(), 12+2.1-0.4, 3e-3)
		p := answer.GetDutyLimits().GetPoints()[0]
		if !p.GetPeakDetector() || p.GetHighInterval() != z.interval {
			t.Errorf("%s: peak detector %v in the %q", z.name, p.GetPeakDetector(), p.GetHighInterval())
		}
		says(t, f, "the "+z.interval+", with the node 2.1 V below COM, pumps V_BS")
	}
}

// A05 (STMicroelectronics L6386E data sheet, Doc 13989 Rev 2, 4.1), A21 (Microchip synchronous buck controller data sheet, 4.5) and D10 (derived from
// both A05 and A01, International Rectifier PD60213, last inputs from memory), as the findings tell them.
func TestPublishedHoldInFindings(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		id         string
		stage      edits
		from, drop float64 // [V]
		within     float64 // [V]
		hold       float64 // to the falling lockout [s]
	}{
		// 200 µA for 5 ms on 1 µF: 1 V; down to 9 V from 10 V the same 5.0 ms.
		{id: "A05", stage: join(held("10 V", "5 ms"), edits{"driver.floatingQuiescentCurrent": "200 uA", "driver.uvloFalling": "8.5 V"}), from: 10, drop: 1.000,
			within: 0.0005, hold: 7.5e-3},
		// 10 mA for 3.33 µs on 0.1 µF: 333 mV.
		{id: "A21", stage: join(held("5 V", "3.33 us"), capacitance("0.1 uF"), edits{"bootstrap.otherLoad": "10 mA", "driver.uvloFalling": "4 V"}), from: 5, drop: 0.333,
			within: 0.0005, hold: 10e-6},
		// 0.4 V - 180 nC/725 nF at 1.1001 mA: 100.0 µs.
		{id: "D10", stage: join(held("10.151724 V", "50 us"), capacitance("725 nF"), edits{"driver.floatingQuiescentCurrent": "1.1001 mA", "driver.uvloFalling": "10 V"}),
			from: 10.151724, drop: 1.1001e-3 * 50e-6 / 725e-9, within: 5e-5, hold: 100.0e-6},
	} {
		t.Run(z.id, func(t *testing.T) {
			answer := c.of(t).review(request(t, noMargin, z.stage))
			near(t, "lowest V_BS", find(t, answer.GetFindings(), "charge/lowest-voltage", "").GetValue(), z.from-z.drop, z.within)
			near(t, "hold time", find(t, answer.GetFindings(), "duty/longest-on-time", "").GetLimit(), z.hold, 5e-4*z.hold)
			if h := answer.GetDutyLimits().GetPoints()[0].GetLongestOnTime().GetValue(); !(math.Abs(h-z.hold) <= 5e-4*z.hold) {
				t.Errorf("duty limits: hold time %g s", h)
			}
		})
	}
	// D10 of A05: 5.0 ms for 1 V.
	f := find(t, c.review(request(t, noMargin, held("10 V", "1 ms"), edits{"driver.floatingQuiescentCurrent": "200 uA", "driver.uvloFalling": "9 V"})).GetFindings(),
		"duty/longest-on-time", "")
	judged(t, f, pass, none)
	near(t, "D10 of A05", f.GetLimit(), 5.0e-3, 5e-7)
}
