package acceptance

import (
	"fmt"
	"math"
	"strings"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// Published examples of switching events, gate drive and losses through the REST interface; sources and tolerances as in published_test.go.

// Undershoot by L2·di/dt, beside V_F.
func TestPublishedUndershoot(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		id                 string
		current, slope     string
		inductance         string
		volts, width, drop float64 // [V], [s], [V]
	}{
		// E05, Fairchild AN-6076, from memory: 10 A that fall in 50 ns through 100 nH: 20 V and the diode's drop.
		{"E05", "10 A", "0.2 A/ns", "100 nH", 20, 50e-9, 0.8},
		// E06, RECOM technical note: 10 A/ns through 25 mm of track, 15 nH (0.60 nH/mm): 150 V; through a via of 1.2 nH: 12 V.
		{"E06, track", "10 A", "10 A/ns", "15 nH", 150, 1e-9, 0.8},
		{"E06, via", "10 A", "10 A/ns", "1.2 nH", 12, 1e-9, 0.8},
	} {
		t.Run(z.id, func(t *testing.T) {
			c := c.of(t)
			body := request(t, switching("100 kHz", "50 %", "100 ns"), edits{
				"operatingPoints.0.loadCurrent": z.current, "layout.measured.turnOffCurrentSlope": z.slope, "layout.lowSideInductance": z.inductance,
				"lowSide.reverse.forwardPoints": drops(z.drop), "driver.nodeUndershoot": `[{"voltage":"-1 V"},{"voltage":"-500 V","duration":"50 ns"}]`,
			})
			f := find(t, c.review(body).GetFindings(), "node/undershoot-pulse", "driver")
			judged(t, f, pass, none)
			near(t, "undershoot", f.GetValue(), -z.volts-z.drop, 2e-4+5e-6*z.volts)
			e := c.event(body, pb.TransientEvent_Event_TURN_OFF)
			all(t, "node", e.GetNodeMin(), -z.volts-z.drop, 2e-4+5e-6*z.volts)
			undershoots(t, e, []float64{-1, -500}, []float64{z.width, 0})
		})
	}
}

// G05, Texas Instruments SLUSCJ9, from memory: peak gate currents 2.316, 2.481, 5.098, 5.488 A (2.3, 2.5, 5.1, 5.5 A) on 12 V with V_F 0.8 V of
// the bootstrap diode and 0.75 V of the diode in the turn-off path. Source: 1.47 Ω beside 5 Ω in the driver, R_on 2.2 Ω; sink: 0.55 Ω in the
// driver, R_off 0 Ω; R_int 1.5 Ω. The rule takes V_DD for the drive of the high side, which it does not exceed, and knows no diode in the gate
// path: V_DD is what is left of 12 V.
func TestPublishedGateCurrent(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		role    string
		supply  float64 // [V]
		amperes float64 // [A]
	}{
		{"highSide turn-on", 12 - 0.8, 2.316},
		{"lowSide turn-on", 12, 2.481},
		{"highSide turn-off", 12 - 0.8 - 0.75, 5.098},
		{"lowSide turn-off", 12 - 0.75, 5.488},
	} {
		more := edits{"driver.pullUpResistance": fmt.Sprintf("%.9g ohm", 1.47*5/(1.47+5)), "driver.pullDownResistance": "0.55 ohm"}
		for _, s := range []string{"highSide.", "lowSide."} {
			more[s+"gateOn.resistance"], more[s+"gateOff.resistance"], more[s+"internalGateResistance"] = "2.2 ohm", "0 ohm", "1.5 ohm"
		}
		f := find(t, c.review(request(t, supply(z.supply), switching("100 kHz", "50 %", "0 s"), more)).GetFindings(), "gate/drive-current", z.role)
		judged(t, f, pass, none)
		near(t, "G05, "+z.role, f.GetValue(), z.amperes, 0.0005)
	}
}

// The gate resistance that the publisher works out for an edge makes that edge here. Fairchild AN-6076, from memory; its driver of 350 mA on 15 V
// has 42.86 Ω, that of 650 mA 23.08 Ω. Its plateau is V_th, so the transconductance is as large as the contract takes it, which also makes C_oss
// count for nothing; the low side drops 2 mV, by which the drive exceeds V_DD: 0.02 % of 10 V.
func TestPublishedEdge(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		id        string
		event     pb.TransientEvent_Event_Value
		threshold string
		outside   float64 // R_G [ohm]
		transfer  string  // C_gd
		slew      float64 // [V/s]
	}{
		// G01, switching time: Q_GS 13.5 nC and Q_GD 36 nC in 500 ns, V_th 5 V: 101 Ω in all, 58 Ω (58.15 Ω) beside the driver. 36 nC are 90 pF on
		// 400 V, which they cross in 36/49.5 of the time.
		{"G01", turnOn, "5 V", 58.15, "90 pF", 400 / (500e-9 * 36 / 49.5)},
		// G02, slope: 1 V/ns with C_gd 95 pF: 105 Ω in all, 62 Ω (62.41 Ω) beside the driver.
		{"G02", turnOn, "5 V", 62.41, "95 pF", 1e9},
		// G03, turn-off: V_th,min 3 V: 8.6 Ω beside the driver, unrounded 8.50 Ω.
		{"G03", turnOff, "3 V", 8.50, "95 pF", 1e9},
	} {
		t.Run(z.id, func(t *testing.T) {
			e := c.of(t).event(request(t, supply(15), switching("20 kHz", "50 %", "100 ns"), edits{
				"operatingPoints.0.busVoltage": "400 V", "operatingPoints.0.loadCurrent": "10 A", "lowSide.reverse.forwardPoints": drops(0.002),
				"driver.pullUpResistance": fmt.Sprintf("%.9g ohm", 15/0.350), "driver.pullDownResistance": fmt.Sprintf("%.9g ohm", 15/0.650),
				"highSide.gateOn.resistance": fmt.Sprintf("%g ohm", z.outside), "highSide.gateOff.resistance": fmt.Sprintf("%g ohm", z.outside),
				"highSide.thresholdVoltage": z.threshold, "highSide.plateauVoltage": z.threshold, "highSide.transconductance": "10 kS",
				"highSide.reverseTransferCapacitance": level(z.transfer), "highSide.outputCapacitance": level(z.transfer),
				"layout.measured.turnOnVoltageSlope": "", "layout.measured.turnOffVoltageSlope": "",
			}), z.event)
			if z.event == turnOff {
				all(t, "slew", e.GetSlewPeak(), z.slew, 6e-4*z.slew)
			} else if peak := e.GetSlewPeak().GetMax().GetValue(); !(peak >= z.slew*(1-6e-4) && peak <= 2*z.slew*(1+6e-4)) { // ringing beyond the edge at most doubles it
				t.Errorf("peak slew %g V/s, slew %g V/s", peak, z.slew)
			}
			all(t, "slew from 10 to 90 %", e.GetSlew_10To_90(), z.slew, 6e-4*z.slew)
		})
	}
}

// H02, Texas Instruments SLUP169, from memory: -7 mV/K from 25 to 100 °C take 0.525 V off the threshold, which is the limit of what an edge may
// induce; 80 % of it is the guard.
func TestPublishedThresholdShift(t *testing.T) {
	c := serve(t)
	for _, z := range []struct{ rule, role, current string }{{"gate/miller-low", "lowSide", "10 A"}, {"gate/miller-high", "highSide", "-10 A"}} {
		for temperature, shift := range map[string]float64{"25 degC": 0, "100 degC": -0.525} {
			f := find(t, c.review(request(t, switching("100 kHz", "50 %", "100 ns"), edits{
				"operatingPoints.0.loadCurrent": z.current, "operatingPoints.0.junctionTemperature": temperature,
				z.role + ".thresholdVoltage": "3 V", z.role + ".thresholdTemperatureCoefficient": `"-7 mV/K"`,
			})).GetFindings(), z.rule, z.role)
			judged(t, f, pass, none)
			near(t, z.rule+" at "+temperature, f.GetLimit(), 3+shift, 1e-9)
			near(t, z.rule+" guard at "+temperature, f.GetGuard(), 0.8*(3+shift), 1e-9)
		}
	}
}

// gates sets the gate charges of both positions [nC] and what lies between them and the driver; nothing else heats the driver.
func gates(high, low float64, outside string) edits {
	out := edits{"driver.thermalResistance": "100 K/W"}
	for s, q := range map[string]float64{"highSide.": high, "lowSide.": low} {
		for field, charge := range gate(q) {
			out[s+strings.TrimPrefix(field, "highSide.")] = charge
		}
		out[s+"gateOn.resistance"], out[s+"gateOff.resistance"] = outside, outside
	}
	return out
}

// Gate loss and supply current, as the temperature of a driver of 100 K/W at 25 °C and as the current from V_DD.
func TestPublishedGateLoss(t *testing.T) {
	c := serve(t)
	const resistance = 100.0 // [K/W]
	for _, z := range []struct {
		id              string
		stage           edits
		frequency       string
		power, amperes  float64 // [W], [A]; 0: not published
		within, withinA float64 // [W], [A]
	}{
		// I01, Texas Instruments UCC27523 family data sheet: 10 nF on 12 V at 300 kHz: 0.432 W, 36 mA. 10 nF are 120 nC at 12 V, of which the least
		// that a gate takes is put on the other side. 2 × 60 nC: 0.432 W.
		{"I01, 10 nF", gates(119.99, 0.01, "0 ohm"), "300 kHz", 0.432, 36e-3, 1e-6, 1e-8},
		{"I01, 2 × 60 nC", gates(60, 60, "0 ohm"), "300 kHz", 0.432, 36e-3, 1e-6, 1e-8},
		// I02, Texas Instruments SLUSAQ3F (2013): 0.5·Q·V·f·[R_off/(R_off + R_g) + R_on/(R_on + R_g)]. Revision E (2012) lacks the 0.5, by which the
		// driver would take more than there is. With 4.6 Ω outside, 5 Ω and 0.6 Ω inside (derived), and in the limit of R_g → 0.
		{"I02", join(gates(60, 60, "4.6 ohm"), edits{"driver.pullUpResistance": "5 ohm", "driver.pullDownResistance": "0.6 ohm"}), "300 kHz",
			0.5 * 0.432 * (0.6/5.2 + 5/9.6), 0, 2e-6, 0},
		{"I02, R_g → 0", join(gates(60, 60, "0 ohm"), edits{"driver.pullUpResistance": "5 ohm", "driver.pullDownResistance": "0.6 ohm"}), "300 kHz",
			0.432, 0, 1e-6, 0},
		// I08, National LM5104, eq. 12 (derived): 2·f·C·V² of two channels with 1 nF on 12 V at 100 kHz: 28.8 mW.
		{"I08", gates(12, 12, "0 ohm"), "100 kHz", 28.8e-3, 2.4e-3, 1e-6, 1e-8},
	} {
		t.Run(z.id, func(t *testing.T) {
			answer := c.of(t).review(request(t, switching(z.frequency, "50 %", "0 s"), z.stage))
			f := find(t, answer.GetFindings(), "thermal/driver", "driver")
			judged(t, f, pass, none)
			near(t, "temperature", f.GetValue(), 25+resistance*z.power, resistance*z.within)
			if z.amperes > 0 {
				near(t, "current", find(t, answer.GetFindings(), "supply/current", "").GetValue(), z.amperes, z.withinA)
			}
		})
	}
}

// I06, Infineon 2ED2109S06F data sheet: 200 K/W from 25 to 150 °C bear 0.625 W; half of it makes half of the rise. 50 mA of quiescent current from
// 12.5 V are 0.625 W.
func TestPublishedPower(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		current  string
		celsius  float64 // [degC]
		outcome  pb.Outcome_Value
		severity pb.Severity_Value
	}{{"25 mA", 87.5, pass, none}, {"50 mA", 150, marginal, minor}, {"51 mA", 152.5, fail, major}} {
		f := find(t, c.review(request(t, held("10 V", "1 us"), supply(12.5), edits{"driver.quiescentCurrent": z.current,
			"driver.thermalResistance": "200 K/W"})).GetFindings(), "thermal/driver", "driver")
		judged(t, f, z.outcome, z.severity)
		near(t, "temperature at "+z.current, f.GetValue(), z.celsius, 1e-4)
		near(t, "limit", f.GetLimit(), 150, 0)
	}
}

// The undershoots of the edges pump V_BS like a dead time does. F02, Texas Instruments SNVAA94 (2023): V_DD + |V_S| lies across C_B, "easily
// exceeding 6-7 V" on a 5 V supply. P1, common practice: V_DD plus the amplitude of the negative node voltage is never passed; with an ideal
// diode (2 mV) and next to nothing to replace, V_BS comes to within millivolts of it. 10 A fall by 1 A/ns, so the undershoot lasts for 10 ns,
// in which 10 pC through 1 Ω lose 1 mV.
func TestPublishedOverchargeByUndershoot(t *testing.T) {
	c := serve(t)
	spike := func(henry float64) edits {
		return edits{"layout.measured.turnOffCurrentSlope": "1 A/ns", "layout.lowSideInductance": fmt.Sprintf("%g nH", henry*1e9), "lowSide.kind": `"SI_MOSFET"`}
	}
	for _, volts := range []float64{1, 3, 6} {
		for _, vf := range []float64{0.002, 0.4} {
			body := request(t, pumping(5, 0.5, vf, spike(volts*1e-9), edits{"driver.floatingVoltageMax": `"20 V"`}))
			f := find(t, c.review(body).GetFindings(), "gate/overvoltage", "driver")
			bound := 5 + volts + 0.5
			if v := f.GetValue().GetValue(); !(v < bound+2e-4) || vf == 0.002 && !(v > bound-5e-3) {
				t.Errorf("P1: undershoot of %g V, V_F %g V: %g V", volts+0.5, vf, v)
			}
			near(t, "less the drop", f.GetValue(), bound-vf, 3e-3)
			// What the undershoot adds to that of the dead times.
			e := c.event(body, pb.TransientEvent_Event_TURN_OFF)
			all(t, "gain", e.GetFloatingVoltageGain(), volts, 3e-3)
		}
	}
	body := request(t, pumping(5, 0.5, 0.4, spike(3e-9), gate(3), edits{"bootstrap.resistor.resistance": "2.7 ohm"}))
	v := find(t, c.review(body).GetFindings(), "gate/overvoltage", "driver").GetValue().GetValue()
	if !(v > 6 && v < 5+3.5-0.4) {
		t.Errorf("F02: %g V", v)
	}
	// Without the undershoot it stays below.
	quiet := c.duty(body).GetFloatingVoltageHigh().GetMax().GetValue()
	if !(quiet < 5.2) || math.IsNaN(quiet) {
		t.Errorf("F02: %g V without the undershoot", quiet)
	}
}
