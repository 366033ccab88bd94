package acceptance

import (
	"math"
	"strings"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// The cases of the design in which a naive answer is dangerously optimistic, through the REST interface; those of switching events stand in
// naive_events_test.go. Numbers within 2 %, voltages that decide within half of their last printed digit. What a case does not mention is that
// of the plain stage: 25 °C, no leakage, no spread.

const (
	pass     = pb.Outcome_PASS
	marginal = pb.Outcome_MARGINAL
	fail     = pb.Outcome_FAIL
	open     = pb.Outcome_OPEN

	none     = pb.Severity_UNSPECIFIED
	minor    = pb.Severity_MINOR
	major    = pb.Severity_MAJOR
	critical = pb.Severity_CRITICAL
)

// Case 1: the gate pull-down is the load that nobody counts. The naive answer is a droop of 150 µA·10.64 ms/6 µF = 0.27 V.
func TestPullDownLoadsTheHeldSupply(t *testing.T) {
	c := serve(t)
	body := request(t, held("11 V", "10.64 ms"), edits{
		"bootstrap.capacitor.effectiveCapacitance": "6 uF", "driver.floatingQuiescentCurrent": "150 uA", "driver.uvloFalling": "8.9 V",
		"highSide.gatePullDown": `{"resistance":{"typ":"10 kohm 0 %"}}`, "operatingPoints.0.loadCurrent": "5 A",
	})
	want := 12.5*math.Exp(-10.64e-3/(10e3*6e-6)) - 1.5
	answer := c.review(body)
	f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
	judged(t, f, marginal, minor)
	near(t, "V_BS", f.GetValue(), 8.97, 0.005)
	near(t, "V_BS by the closed form", f.GetValue(), want, 1e-5)
	near(t, "limit", f.GetLimit(), 8.9, 0)
	near(t, "margin", f.GetMargin().GetAbsolute(), 0.07, 0.005)
	says(t, f, "8.969 V", "68.76 mV")
	f = find(t, answer.GetFindings(), "charge/standing-load", "")
	judged(t, f, fail, minor)
	near(t, "share of R_GS", f.GetValue(), 0.87, 0.005)
	says(t, f, "R_GS takes 87 %")
	point := answer.GetDutyLimits().GetPoints()[0]
	all(t, "lowest V_BS", point.GetFloatingVoltageLow(), want, 1e-5)

	// without R_GS the naive answer is right
	body = edit(t, body, edits{"highSide.gatePullDown": `{"fit":"NOT_FITTED"}`})
	f = find(t, c.review(body).GetFindings(), "charge/lowest-voltage", "")
	judged(t, f, pass, none)
	near(t, "V_BS without R_GS", f.GetValue(), 11-0.266, 0.0005)
}

// Case 2: 1 µF 0402 X5R, -10 % tolerance, -15 % temperature, -60 % bias, -5 % ageing (2.5 % per decade over 100 h). V_BS is 10 V, so that
// 5 % of it are the limit of 0.5 V.
func TestLittleRemainsOfTheNominalCapacitance(t *testing.T) {
	c := serve(t)
	body := request(t, gate(200), switching("20 kHz", "50 %", "0 s"), edits{
		"gateSupply.voltage": "10.4 V", "bootstrap.capacitor": `{"capacitance":{"typ":"1 uF ±10 %"},"voltageRating":"25 V","dielectric":"X5R","caseSize":"0402",
			"biasCurve":[{"voltage":"0 V","remaining":"100 %"},{"voltage":"5 V","remaining":"70 %"},{"voltage":"10 V","remaining":"40 %"},{"voltage":"16 V","remaining":"40 %"}],
			"ageingPerDecade":"2.5 %","serviceTime":"100 h"}`,
		"bootstrap.capacitor.effectiveCapacitance": "", "bootstrap.capacitor.leakage": "0 A",
	})
	answer := c.review(body)
	const curve = "stage.bootstrap.capacitor.biasCurve"
	f := find(t, answer.GetFindings(), "charge/droop", "")
	judged(t, f, fail, major)
	near(t, "droop", f.GetValue(), 0.688, 0.0005)
	near(t, "limit", f.GetLimit(), 0.5, 0.0005)
	first(t, f, curve)
	f = find(t, answer.GetFindings(), "capacitor/effective-value", "")
	near(t, "C_eff/C", f.GetValue(), 0.9*0.85*0.4*0.95, 1e-6)
	first(t, f, curve)
	near(t, "C_eff", c.size(body).GetEffectiveCapacitance().GetMin(), 0.291e-6, 0.0005e-6)
	if answer.GetVerdict() != pb.Verdict_FAIL {
		t.Errorf("verdict %v", answer.GetVerdict())
	}
}

// Case 3: with 200 Ω and 1.5 µs the deficit is Q·R/t_c whatever C is.
func TestCapacitanceCancels(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		capacitance string
		deficit     float64 // [V]
	}{{"1 uF", 9.37}, {"10 uF", 9.34}} {
		// 50 kHz and 92.5 % leave 1.5 µs without dead time.
		body := request(t, gate(70), switching("50 kHz", "92.5 %", "0 s"), edits{
			"gateSupply.voltage": "14.25 V", "bootstrap.diode.forwardPoints": drops(1), "bootstrap.resistor.resistance": "200 ohm",
			"bootstrap.capacitor.effectiveCapacitance": z.capacitance, "driver.uvloFalling": "8.9 V",
		})
		answer := c.review(body)
		point := answer.GetDutyLimits().GetPoints()[0]
		all(t, z.capacitance+": window", point.GetRechargeWindow(), 1.5e-6, 1e-12)
		all(t, z.capacitance+": deficit", point.GetDeficit(), z.deficit, 0.005)
		all(t, z.capacitance+": lowest V_BS", point.GetFloatingVoltageLow(), 13.25-z.deficit, 0.005)
		if !point.GetCapacitanceCancels() {
			t.Errorf("%s: C does not cancel", z.capacitance)
		}
		f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
		judged(t, f, fail, major)
		near(t, z.capacitance+": lowest V_BS", f.GetValue(), 13.25-z.deficit, 0.005)
		says(t, f, "C cancels", "a larger capacitor is no fix")
		judged(t, find(t, answer.GetFindings(), "duty/recharge-window", ""), fail, critical)
		f = find(t, answer.GetFindings(), "charge/capacitance", "")
		judged(t, f, fail, major)
		says(t, f, "no capacitance suffices")
		judged(t, find(t, answer.GetFindings(), "charge/droop", ""), pass, none) // the naive answer: 0.07 V
		near(t, z.capacitance+": droop", find(t, answer.GetFindings(), "charge/droop", "").GetValue(), 70e-9/map[string]float64{"1 uF": 1e-6, "10 uF": 10e-6}[z.capacitance], 1e-4)
		offersNoLargerCapacitor(t, answer, c.size(body))
	}
}

func offersNoLargerCapacitor(t *testing.T, answer *pb.ReviewStageResponse, r *pb.SizingResult) {
	t.Helper()
	if r.GetMinimumCapacitance().GetMax() != nil {
		t.Errorf("smallest capacitance %v", r.GetMinimumCapacitance())
	}
	for _, f := range answer.GetFindings() {
		if len(f.GetFixes()) > 0 {
			t.Errorf("%s offers %v", f.GetRule(), f.GetFixes())
		}
		if f.GetOutcome() != fail && f.GetOutcome() != marginal {
			continue
		}
		for _, b := range f.GetBreakEven() {
			if strings.Contains(b.GetField(), "apacitance") {
				t.Errorf("%s turns at %v", f.GetRule(), b)
			}
		}
	}
}

// Case 4: a GaN stage whose dead time pumps C_B. 1 MHz, half duty, 10 A, 48 V; V_DD 5.25 V, V_F 0.40 V, two dead times of 20 ns with the
// node at -V_SD, 6 nC, 100 nF; the gate's rating is 6.0 V. The naive answer is V_DD - V_F = 4.85 V.
func TestDeadTimePumpsTheGate(t *testing.T) {
	gan := func(more edits) string {
		return request(t, gate(6), switching("1 MHz", "50 %", "20 ns"), edits{
			"gateSupply.voltage": "5.25 V", "highSide.kind": `"GAN_HEMT"`, "lowSide.kind": `"GAN_HEMT"`, "highSide.gateChargeVoltage": `"5 V"`,
			"highSide.plateauVoltage": "2 V", "highSide.gateVoltageMax": `"6 V"`, "lowSide.reverse.gateVoltage": `"0 V"`, "lowSide.reverse.forwardPoints": drops(2.2),
			"bootstrap.resistor.resistance": "2.7 ohm", "bootstrap.capacitor.effectiveCapacitance": "100 nF", "operatingPoints.0.loadCurrent": "10 A",
		}, more)
	}
	c := serve(t)
	for _, z := range []struct {
		name     string
		more     edits
		high     float64 // [V]
		outcome  pb.Outcome_Value
		severity pb.Severity_Value
	}{
		{"2.7 ohm", nil, 6.67, fail, critical},
		{"10 ohm", edits{"bootstrap.resistor.resistance": "10 ohm"}, 5.58, marginal, major},
		// 5.25 V - 0.40 V + 5.2 V - Q·R/t_c with half of the ripple: the resistor takes 1.5 V of 4 V too many.
		{"10 ohm, V_SD 5.2 V", edits{"bootstrap.resistor.resistance": "10 ohm", "lowSide.reverse.forwardPoints": drops(5.2)}, 8.58, fail, critical},
		// The same drop as the sum of 2.2 V and an off bias of 3 V.
		{"10 ohm, V_SD 2.2 V, off bias -3 V", edits{"bootstrap.resistor.resistance": "10 ohm", "lowSide.offBias": "-3 V", "lowSide.offBiasSource": `"SEPARATE"`}, 8.58, fail, critical},
	} {
		t.Run(z.name, func(t *testing.T) {
			answer := c.of(t).review(gan(z.more))
			f := find(t, answer.GetFindings(), "gate/overvoltage", "highSide")
			judged(t, f, z.outcome, z.severity)
			near(t, "highest V_BS", f.GetValue(), z.high, 0.005)
			near(t, "limit", f.GetLimit(), 6, 0)
			says(t, f, "peak detector", "dead time")
			point := answer.GetDutyLimits().GetPoints()[0]
			all(t, "highest V_BS", point.GetFloatingVoltageHigh(), z.high, 0.005)
			if !point.GetPeakDetector() || !strings.Contains(point.GetHighInterval(), "dead time") {
				t.Errorf("peak detector %v, %q", point.GetPeakDetector(), point.GetHighInterval())
			}
			if z.outcome == fail && answer.GetVerdict() != pb.Verdict_FAIL {
				t.Errorf("verdict %v", answer.GetVerdict())
			}
		})
	}
}

// Case 7: between 7.5 V and 15 V the driver switches a SiC switch that no data sheet describes there, and no lockout protects it.
func TestLockoutDoesNotSuitTheSwitch(t *testing.T) {
	c := serve(t)
	body := request(t, switching("50 kHz", "50 %", "100 ns"), edits{
		"gateSupply.voltage": "18 V", "driver.uvloFalling": `{"min":"7.5 V","typ":"8.2 V","max":"8.9 V"}`,
		"highSide.kind": `"SIC_MOSFET"`, "highSide.driveVoltageMin": `"15 V"`, "operatingPoints.0.loadCurrent": "10 A",
	})
	answer := c.review(body)
	f := find(t, answer.GetFindings(), "charge/lockout-suits-switch", "")
	judged(t, f, fail, critical)
	near(t, "lockout", f.GetValue(), 7.5, 0)
	near(t, "limit", f.GetLimit(), 15, 0)
	says(t, f, "7.5 V", "15 V", "unprotected")
	if answer.GetVerdict() != pb.Verdict_FAIL {
		t.Errorf("verdict %v", answer.GetVerdict())
	}
	// running, the supply is sound: nothing but the lockout is wrong
	judged(t, find(t, answer.GetFindings(), "charge/gate-sufficiency", ""), pass, none)
	// on a silicon switch the same lockout is a fault of function, not a danger
	body = edit(t, body, edits{"highSide.kind": `"SI_MOSFET"`})
	judged(t, find(t, c.review(body).GetFindings(), "charge/lockout-suits-switch", ""), fail, major)
}

// Case 8: a 60° clamp at standstill holds the high side for 1/(6·f_1). The naive answer is the millivolts of one carrier period. Held on for the same
// times from 13.4 V the numbers are the same.
func TestClampHoldsTheHighSide(t *testing.T) {
	c := serve(t)
	// The switch is specified from the limit of the case on.
	drive := edits{"driver.floatingQuiescentCurrent": "180 uA", "bootstrap.capacitor.effectiveCapacitance": "2.8 uF", "driver.uvloFalling": "9.8 V",
		"gateSupply.voltage": "13.8 V", "highSide.gateCharge": "100 pC", "highSide.gateSourceCharge": "50 pC", "highSide.gateDrainCharge": "50 pC"}
	for _, z := range []struct {
		frequency, duration string
		hold, droop         float64 // [s], [V]
		outcome             pb.Outcome_Value
		severity            pb.Severity_Value
	}{{"2 Hz", "83.3333 ms", 1. / 12, 5.36, fail, major}, {"20 Hz", "8.33333 ms", 1. / 120, 0.54, pass, none}} {
		answer := c.review(request(t, drive, held("13.4 V", z.duration)))
		f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
		judged(t, f, z.outcome, z.severity)
		near(t, "lowest V_BS, held on", f.GetValue(), 13.4-z.droop, 0.005)
		f = find(t, answer.GetFindings(), "duty/longest-on-time", "")
		judged(t, f, z.outcome, z.severity)
		near(t, "hold time", f.GetLimit(), 2.8e-6*3.6/180e-6, 1e-7)

		answer = c.review(request(t, drive, edits{"operatingPoints.0.switchingFrequency": "20 kHz", "operatingPoints.0.deadTime": "500 ns",
			"operatingPoints.0.sinusoidal": `{"modulationIndex":{"typ":"0.9"},"fundamentalFrequency":{"typ":"` + z.frequency +
				`"},"displacementAngle":{"typ":"30 deg"},"zeroSequence":"CLAMP_60"}`}))
		f = find(t, answer.GetFindings(), "charge/lowest-voltage", "")
		judged(t, f, z.outcome, z.severity)
		near(t, "lowest V_BS", f.GetValue(), 13.4-z.droop, 0.005)
		says(t, f, "without recharge for "+z.duration[:3], "lowest at 120")
		near(t, "droop", find(t, answer.GetFindings(), "charge/droop", "").GetValue(), z.droop, 0.005)
		f = find(t, answer.GetFindings(), "duty/longest-on-time", "")
		judged(t, f, z.outcome, z.severity)
		near(t, "time without recharge", f.GetValue(), z.hold, 6e-5) // whole periods of 50 µs, and the on-time of the next
		near(t, "time that the supply endures", f.GetLimit(), 2.8e-6*3.6/180e-6, 5e-5)
	}
}

// Case 9 with another datum: what is not given leaves its rule open, names the field and returns the break-even.
func TestMissingDataNeverPasses(t *testing.T) {
	c := serve(t)
	body := request(t, gate(70), switching("50 kHz", "50 %", "100 ns"), edits{"bootstrap.resistor.resistance": "2.2 ohm"})
	lowest := find(t, c.review(body).GetFindings(), "charge/lowest-voltage", "")
	judged(t, lowest, pass, none)

	answer := c.review(edit(t, body, edits{"driver.uvloFalling": ""}))
	f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
	judged(t, f, open, major)
	const field = "stage.driver.uvloFalling"
	if m := f.GetMissing(); len(m) != 1 || m[0] != field {
		t.Errorf("missing %v", m)
	}
	says(t, f, "driver.uvloFalling")
	if b := f.GetBreakEven(); len(b) != 1 || b[0].GetField() != field {
		t.Errorf("break-even %v", b)
	} else {
		near(t, "break-even", b[0].GetMeasure(), lowest.GetValue().GetValue(), 1e-4)
	}
	if answer.GetVerdict() != pb.Verdict_INCOMPLETE {
		t.Errorf("verdict %v", answer.GetVerdict())
	}
}

// Case 10: 1 MHz, d 0.95, dead time 15 ns, edges 12 ns, minimum pulse 40 ns. 50 ns less the dead time are shorter than the driver passes:
// the low side never turns on, and only the freewheeling current of a sourcing node could recharge C_B, through a diode.
func TestLowSidePulseVanishes(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		name string
		more edits
		dead bool
	}{
		{"sinking", edits{"operatingPoints.0.loadCurrent": "-5 A"}, true},
		{"sourcing through an integrated switch", edits{"operatingPoints.0.loadCurrent": "5 A", "bootstrap.element": `"INTEGRATED_SWITCH"`, "bootstrap.switchResistance": "2 ohm"}, true},
		{"sinking through an integrated switch", edits{"operatingPoints.0.loadCurrent": "-5 A", "bootstrap.element": `"INTEGRATED_SWITCH"`, "bootstrap.switchResistance": "2 ohm"}, true},
		{"sourcing through a diode", edits{"operatingPoints.0.loadCurrent": "5 A"}, false},
	} {
		t.Run(z.name, func(t *testing.T) {
			answer := c.of(t).review(request(t, gate(5), switching("1 MHz", "95 %", "15 ns"), edits{
				"driver.minimumPulse": `"40 ns"`, "driver.edgeTime": "12 ns", "bootstrap.resistor.resistance": "1 ohm", "driver.floatingQuiescentCurrent": "100 uA",
			}, z.more))
			f := find(t, answer.GetFindings(), "duty/recharge-window", "")
			says(t, f, "the low-side pulse is shorter than the driver passes and vanishes")
			point := answer.GetDutyLimits().GetPoints()[0]
			if !z.dead {
				judged(t, f, pass, none)
				near(t, "window", f.GetValue(), 65e-9, 1e-12) // the pulse, and both dead times
				return
			}
			judged(t, f, fail, critical)
			near(t, "window", f.GetValue(), 0, 0)
			says(t, f, "nothing recharges C_B")
			if point.GetCollapses().GetPeriods() <= 0 || point.GetFloatingVoltageLow().GetMin() != nil {
				t.Errorf("%v", point)
			}
			if answer.GetVerdict() != pb.Verdict_FAIL {
				t.Errorf("verdict %v", answer.GetVerdict())
			}
		})
	}
}
