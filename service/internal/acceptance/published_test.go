package acceptance

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/recharge"
)

// Published examples through the REST interface. Each names its document; "from memory" stands where its text was not at hand, "derived"
// where it prints an equation but no result for these inputs. The tolerance is half of the last digit as published, or the bound of the
// difference between the document's simple formula and the exact model, which the comment of the case works out.

// sinking makes the low side an IGBT that carries the load in its channel at a fixed voltage, V_LS [V].
func sinking(v string) edits {
	return edits{"lowSide.kind": `"IGBT"`, "lowSide.channelPoints": `[{"current":"1 A","voltage":{"min":"` + v + `","typ":"` + v + `","max":"` + v + `"}}]`,
		"operatingPoints.0.loadCurrent": "-10 A"}
}

// noMargin is a policy by which limits count as they are written.
var noMargin = edits{"/policy": `{"lockoutMargin":"0 V","lockoutMarginRatio":"0","rippleRatio":"0.5"}`}

func ripple(ratio float64) edits {
	return edits{"/policy": `{"rippleRatio":"` + strconv.FormatFloat(ratio, 'g', 9, 64) + `"}`}
}

func supply(v float64) edits { return edits{"gateSupply.voltage": volts(v)} }

func capacitance(text string) edits { return edits{"bootstrap.capacitor.effectiveCapacitance": text} }

// join puts edits together; later ones replace earlier ones.
func join(parts ...edits) edits {
	out := edits{}
	for _, p := range parts {
		for k, v := range p {
			out[k] = v
		}
	}
	return out
}

// Sizing: the charge of one cycle, the voltage budget, the smallest capacitance. The documents multiply every current by the whole on-time;
// here the loads flow for one period, which is made equal to it.
func TestPublishedSizing(t *testing.T) {
	c := serve(t)
	// A01, International Rectifier IR2114/IR2214 data sheet (PD60213), 2.1-2.2, and DT04-4; gate and diode leakage and the desaturation bias
	// from memory: 290 nC, 15 - 1 - 3.1 - 10.5 = 0.4 V, 725 nF. The required voltage is the document's V_GE,min, without margin.
	a01 := join(gate(160), sinking("3.1 V"), noMargin, supply(15), switching("10 kHz", "50 %", "0 s"), edits{
		"driver.floatingQuiescentCurrent": "800 uA", "driver.offsetLeakage": "50 uA", "driver.levelShiftCharge": "20 nC", "driver.uvloFalling": "10.5 V",
		"highSide.gateLeakage": "100 nA", "bootstrap.diode.forwardPoints": drops(1), "bootstrap.diode.reverseLeakage": "100 uA", "bootstrap.otherLoad": "150 uA",
	})
	// A02, Fairchild AN-6076 (2008), bootstrap capacitor example, from memory: 105.2 nC (it cuts 105.253 off), 105 nF at 1 V. The drop that the
	// example permits is 1/14 of V_BS = 15 V - 1 V.
	a02 := join(gate(98), ripple(1./14), supply(15), switching("40 kHz", "50 %", "0 s"), edits{
		"driver.floatingQuiescentCurrent": "120 uA", "driver.offsetLeakage": "50 uA", "driver.levelShiftCharge": "3 nC",
		"highSide.gateLeakage": "100 nA", "bootstrap.diode.forwardPoints": drops(1), "bootstrap.diode.reverseLeakage": "10 nA",
	})
	// A15, Intersil HIP4086 data sheet, boot capacitor (equation read, numbers from memory): 5 % of V_DD = 10 V is 0.5 V, of V_BS = 9.4 V it is
	// 0.5/9.4. The document lets the resistor see 9.4 V for the whole period: d is 0.9999, and C_B so large that V_BS stays there.
	a15 := join(gate(64), ripple(0.5/9.4), supply(10), capacitance("100 uF"), switching("1 kHz", "0.9999", "0 s"), edits{
		"driver.floatingQuiescentCurrent": "100 uA", "driver.offsetLeakage": "100 nA", "bootstrap.diode.forwardPoints": drops(0.6),
	})
	resistor := edits{"highSide.gatePullDown": `{"resistance":{"typ":"100 kohm 0 %"}}`}
	for _, z := range []struct {
		id                  string
		stage               edits
		total, totalWithin  float64 // [C]
		drop, dropWithin    float64 // [V]
		capacitance, within float64 // [F]
		factor              float64 // of the document on the charge [1]
	}{
		// The two near-equal points of the diode leave ±0.1 mV: 0.4 V ± 0.1 mV is 725 nF ± 0.2 nF.
		{"A01", a01, 290.01e-9, 0.005e-9, 0.4, 1e-4, 725.03e-9, 0.25e-9, 1},
		{"A02", a02, 105.253e-9, 0.0005e-9, 1, 1e-4, 105.25e-9, 0.02e-9, 1},
		{"A15", join(a15, resistor), 258.1e-9, 0.1e-9, 0.5, 1e-4, 0.52e-6, 0.005e-6, 1},
		{"A15 without the resistor", a15, 164.1e-9, 0.05e-9, 0.5, 1e-4, 0.33e-6, 0.005e-6, 1},
		// A16, Texas Instruments SLUS486B, eq. 1: 31 nC, 3 % of 6.0 V: 172 nF.
		{"A16", join(gate(31), ripple(0.03), supply(6.4), switching("100 kHz", "50 %", "0 s")), 31e-9, 0, 0.18, 1e-5, 172e-9, 0.5e-9, 1},
		// A11, Allegro A3946 data sheet 29319.150: C = 20·Q/V at 160 nC and 12 V: 0.266 µF (0.2667), which is 5 % of 12 V. The two points of
		// the fixed drop leave it 0.3 mV of freedom at small currents, and the budget 5 % of that.
		{"A11", join(gate(160), ripple(0.05), supply(12.4), switching("20 kHz", "50 %", "0 s")), 160e-9, 0, 0.6, 1.5e-5, 0.2667e-6, 0.00005e-6, 1},
		// A22, International Rectifier DT98-2a (derived): it counts Q_G twice, and the sum twice again as its safety factor.
		{"A22", join(gate(126), sinking("1.5 V"), noMargin, supply(12), switching("20 kHz", "50 %", "0 s"), edits{
			"driver.floatingQuiescentCurrent": "230 uA", "driver.levelShiftCharge": "5 nC", "driver.uvloFalling": "8 V", "bootstrap.diode.forwardPoints": drops(1.3),
		}), 142.5e-9, 0.05e-9, 1.2, 1e-4, 237.5e-9, 0.05e-9, 2},
	} {
		t.Run(z.id, func(t *testing.T) {
			s := c.of(t).size(request(t, z.stage))
			all(t, "Q_B", s.GetTotalCharge(), z.total, z.totalWithin+1e-6*z.total)
			all(t, "ΔV", s.GetVoltageBudget(), z.drop, z.dropWithin)
			all(t, "C", s.GetMinimumCapacitance(), z.capacitance/z.factor, z.within/z.factor)
			sum := 0.0
			for _, item := range s.GetBudget() {
				sum += item.GetCharge().GetMax().GetValue()
			}
			if !(math.Abs(sum-s.GetTotalCharge().GetMax().GetValue()) <= 1e-5*sum) {
				t.Errorf("the items add up to %g C of %v", sum, s.GetTotalCharge().GetMax())
			}
		})
	}
}

// ΔV = Q/C, the ripple of one period and the droop while held on.
func TestPublishedDroop(t *testing.T) {
	c := serve(t)
	running := switching("20 kHz", "50 %", "0 s")
	for _, z := range []struct {
		id     string
		stage  edits
		drop   float64 // [V]
		within float64 // [V]
	}{
		// A03, Fairchild AN-6076, from memory: 105.2 nC.
		{"A03, 100 nF", join(gate(105.2), running, capacitance("100 nF")), 1.05, 0.005},
		{"A03, 150 nF", join(gate(105.2), running, capacitance("150 nF")), 0.7, 0.05},
		{"A03, 220 nF", join(gate(105.2), running, capacitance("220 nF")), 0.48, 0.005},
		{"A03, 570 nF", join(gate(105.2), running, capacitance("570 nF")), 0.18, 0.005},
		// A04, STMicroelectronics L6386E data sheet, Doc 13989 Rev 2, 4.1: 30 nC, 100 nF: 300 mV.
		{"A04", join(gate(30), running, capacitance("100 nF")), 0.300, 0.0005},
		// A05, same: 200 µA for 5 ms on 1 µF: 1 V.
		{"A05", join(held("12 V", "5 ms"), edits{"driver.floatingQuiescentCurrent": "200 uA"}), 1, 1e-6},
		// A21, Microchip synchronous buck controller data sheet, 4.5: 10 mA, 3.33 µs, 0.1 µF: 333 mV.
		{"A21", join(held("5 V", "3.33 us"), capacitance("0.1 uF"), edits{"bootstrap.otherLoad": "10 mA"}), 0.333, 1e-6},
		// A01, International Rectifier PD60213 (last inputs from memory): 290 nC on 725 nF are 0.4 V. The loads flow for d·T = 99.9 µs of the
		// document's 100 µs, which is 1.1 mA·0.1 µs/725 nF = 0.15 mV less.
		{"A01", join(gate(160), capacitance("725 nF"), supply(16), switching("10 kHz", "0.999", "0 s"), edits{
			"driver.floatingQuiescentCurrent": "800 uA", "driver.offsetLeakage": "50 uA", "driver.levelShiftCharge": "20 nC",
			"highSide.gateLeakage": "100 nA", "bootstrap.diode.reverseLeakage": "100 uA", "bootstrap.otherLoad": "150 uA",
		}), 0.4, 0.0002},
	} {
		t.Run(z.id, func(t *testing.T) {
			all(t, "drop", c.of(t).size(request(t, z.stage)).GetRipple(), z.drop, z.within)
		})
	}
}

// A11, Allegro A3946 data sheet 29319.150: with the 0.22 µF that it uses, 160 nC make 0.727 V, beyond its own limit of 0.4 V, 1/30 of 12 V.
func TestPublishedExampleBreaksItsOwnLimit(t *testing.T) {
	c := serve(t)
	answer := c.review(request(t, gate(160), capacitance("0.22 uF"), supply(12.4), ripple(1./30), switching("20 kHz", "50 %", "0 s")))
	f := find(t, answer.GetFindings(), "charge/droop", "")
	judged(t, f, fail, major)
	near(t, "droop", f.GetValue(), 0.727, 0.0005)
	near(t, "limit", f.GetLimit(), 0.4, 1e-5)
	f = find(t, answer.GetFindings(), "charge/capacitance", "")
	judged(t, f, fail, major)
	near(t, "C_min", f.GetLimit(), 160e-9/0.4, 1e-11)
}

// D10, the inverse of A05 (STMicroelectronics L6386E, Doc 13989 Rev 2) and of A01 (International Rectifier PD60213, last inputs from
// memory): t = C·ΔV/I.
func TestPublishedHoldTime(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		id    string
		stage edits
		time  float64 // [s]
	}{
		{"A05: 1 V at 200 µA on 1 µF", join(held("10 V", "1 ms"), edits{"driver.floatingQuiescentCurrent": "200 uA", "driver.uvloFalling": "9 V"}), 5.0e-3},
		// 0.4 V - 180 nC/725 nF = 151.724 mV are left for 1.1001 mA.
		{"A01", join(held("10.151724 V", "50 us"), capacitance("725 nF"), edits{"driver.floatingQuiescentCurrent": "1.1001 mA", "driver.uvloFalling": "10 V"}), 100.0e-6},
	} {
		t.Run(z.id, func(t *testing.T) {
			near(t, "hold time", c.of(t).duty(request(t, z.stage)).GetLongestOnTime(), z.time, 5e-4*z.time)
		})
	}
}

// What R_B costs, and the first charge through it.
func TestPublishedResistor(t *testing.T) {
	c := serve(t)
	// A06, STMicroelectronics L6388E, Doc 13991 Rev 5, eq. 2-3, and A07, L6392, Doc 14494 Rev 5, eq. 3-4: V = Q·R/t for 30 nC in 5 µs, the
	// limit for large C: half of the ripple on 1 mF is 15 nV.
	for _, z := range []struct {
		id, resistance string
		drop           float64 // [V]
	}{{"A06, about 0.8 V", "125 ohm", 0.750}, {"A07, about 0.7 V", "120 ohm", 0.720}} {
		p := c.duty(request(t, gate(30), switching("20 kHz", "90 %", "0 s"), capacitance("1 mF"), edits{"bootstrap.resistor.resistance": z.resistance}))
		all(t, z.id, p.GetDeficit(), z.drop, 1e-4)
		all(t, z.id+": window", p.GetRechargeWindow(), 5e-6, 1e-11)
	}
	// B01, Fairchild AN-6076, from memory: 10 Ω, 1 µF, charging 10 % of the time: τ = R·C/D = 100 µs. At a period of just that the window is one
	// R·C.
	p := c.duty(request(t, switching("10 kHz", "90 %", "0 s"), edits{"bootstrap.resistor.resistance": "10 ohm"}))
	all(t, "B01: t_c/RC", p.GetRechargeRatio(), 1, 1e-6)
	// B04, Texas Instruments SLUSCJ9, from memory: (12 V - 1.5 V)/2.7 Ω: about 4 A.
	first := func(v, drop float64, ohms, farads string) *pb.ReviewStageResponse {
		return c.review(request(t, switching("10 kHz", "50 %", "0 s"), supply(v), capacitance(farads), edits{
			"bootstrap.diode.forwardPoints": drops(drop), "bootstrap.diode.surgeCurrentMax": `"10 A"`, "bootstrap.resistor.resistance": ohms,
			"bootstrap.resistor.pulseEnergyMax": `"5 mJ"`,
		}))
	}
	f := find(t, first(12, 1.5, "2.7 ohm", "1 uF").GetFindings(), "diode/peak-current", "first charge")
	judged(t, f, pass, none)
	near(t, "B04", f.GetValue(), 3.889, 0.0005)
	// B05, Texas Instruments SLUA887A, eq. 7 (derived): E = ½·C·V² at 100 nF, 12 V and at 22 µF, 15 V. The drop of the diode comes on top of V, so
	// that the resistor sees the document's voltage.
	for _, z := range []struct {
		v              float64 // [V]
		ohms, farads   string
		energy, within float64 // [J]
	}{{12, "2.7 ohm", "100 nF", 7.2e-6, 0.05e-6}, {15, "20 ohm", "22 uF", 2.475e-3, 0.0005e-3}} {
		f := find(t, first(z.v+0.4, 0.4, z.ohms, z.farads).GetFindings(), "resistor/pulse-energy", "")
		judged(t, f, pass, none)
		near(t, "B05", f.GetValue(), z.energy, z.within)
	}
}

// F01, Texas Instruments LMG1210 data sheet, eq. 1-3: V_BST = V_DD - V_F + I·R_DS(on), the node at -I·R_DS(on). 20 mΩ and 10 A are 0.2 V,
// up when the current flows out of the node, down when it flows in.
func TestPublishedSignRule(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		current string
		voltage float64 // [V]
	}{{"10 A", 4.8}, {"0 A", 4.6}, {"-10 A", 4.4}} {
		p := c.duty(request(t, gate(1), supply(5), switching("100 kHz", "50 %", "0 s"), edits{"lowSide.onResistance": "20 mohm", "operatingPoints.0.loadCurrent": z.current}))
		all(t, z.current, p.GetFloatingVoltageHigh(), z.voltage, 3e-4)
	}
}

// pumping is a stage at 1 MHz with two dead times of 20 ns, in which 10 A hold the node at -V_SD [V], and so little charge to replace that
// V_BS climbs all the way.
func pumping(vdd, vsd, vf float64, more ...edits) edits {
	return join(append([]edits{gate(0.01), supply(vdd), switching("1 MHz", "50 %", "20 ns"), capacitance("100 nF"), {
		"lowSide.kind": `"GAN_HEMT"`, "lowSide.reverse.gateVoltage": `"0 V"`, "lowSide.reverse.forwardPoints": drops(vsd), "bootstrap.diode.forwardPoints": drops(vf),
		"bootstrap.resistor.resistance": "1 ohm", "operatingPoints.0.loadCurrent": "10 A",
	}}, more...)...)
}

func TestPublishedOvercharge(t *testing.T) {
	c := serve(t)
	// F03, Texas Instruments SNOSDG7A: V_SD 2.1 V, 12 V, rating 14 V: 14.1 V with an ideal diode, which violates the rating; 13.4 V with
	// V_F 0.7 V (derived). The ideal diode is one that drops 2 mV. 10 pC through 1 Ω in 40 ns lose 0.25 mV.
	for _, z := range []struct {
		id       string
		vf       float64 // [V]
		high     float64 // [V]
		within   float64 // [V]
		outcome  pb.Outcome_Value
		severity pb.Severity_Value
	}{{"ideal diode", 0.002, 14.1, 0.003, fail, critical}, {"0.7 V", 0.7, 13.4, 0.001, marginal, major}} {
		f := find(t, c.review(request(t, pumping(12, 2.1, z.vf, edits{"driver.floatingVoltageMax": `"14 V"`}))).GetFindings(), "gate/overvoltage", "driver")
		judged(t, f, z.outcome, z.severity)
		near(t, "F03, "+z.id, f.GetValue(), z.high, z.within)
		says(t, f, "peak detector")
	}
	// F02, Texas Instruments SNVAA94 (2023): V_DD + |V_S| lies across C_B in dead time, "easily exceeding 6-7 V" on a 5 V supply.
	p := c.duty(request(t, pumping(5, 2.5, 0.4, gate(3), edits{"bootstrap.resistor.resistance": "2.7 ohm"})))
	if v := p.GetFloatingVoltageHigh().GetMax().GetValue(); !(v > 6 && v < 5+2.5-0.4) || !p.GetPeakDetector() || !strings.Contains(p.GetHighInterval(), "dead time") {
		t.Errorf("F02: %v, peak detector %v in the %s", p.GetFloatingVoltageHigh(), p.GetPeakDetector(), p.GetHighInterval())
	}
	// P1, common practice: V_BS can reach V_DD plus the amplitude of the negative node voltage, and no more; with an ideal diode it comes to
	// within millivolts of it.
	for _, vsd := range []float64{0.5, 1, 2, 4} {
		for _, vf := range []float64{0.002, 0.4, 1} {
			v := c.duty(request(t, pumping(8, vsd, vf))).GetFloatingVoltageHigh().GetMax().GetValue()
			if bound := 8 + vsd; !(v < bound+2e-4) || vf == 0.002 && !(v > bound-5e-3) {
				t.Errorf("P1: V_SD %g V, V_F %g V: %g V", vsd, vf, v)
			}
		}
	}
}

// P2, common practice: C_B charges to nearly V_DD while the low side is on; duty and on-time are limited by the need to refresh it. P3: at
// high-side turn-off a current out of the node pulls it below COM; a current into it does not.
func TestCommonPractice(t *testing.T) {
	c := serve(t)
	load := edits{"bootstrap.resistor.resistance": "10 ohm", "driver.floatingQuiescentCurrent": "200 uA", "driver.uvloFalling": "9 V", "bootstrap.capacitor.effectiveCapacitance": "470 nF"}
	last := math.Inf(1)
	for _, d := range []float64{0.1, 0.5, 0.9, 0.99, 0.999} {
		p := c.duty(request(t, gate(50), switching("10 kHz", strconv.FormatFloat(d, 'g', 6, 64), "0 s"), load))
		high, low := p.GetFloatingVoltageHigh().GetMax().GetValue(), p.GetFloatingVoltageLow().GetMin().GetValue()
		if d == 0.1 && !(math.Abs(high-11.6) < 0.01) {
			t.Errorf("P2: V_BS reaches %g V of 12 V less 0.4 V", high)
		}
		if !(low < last) {
			t.Errorf("P2: duty %g: V_BS falls to %g V, at less duty to %g V", d, low, last)
		}
		last = low
		if v := p.GetLargestDuty().GetValue(); !(v > 0.9 && v < 1) {
			t.Errorf("P2: largest duty %g", v)
		}
		if v := p.GetLongestOnTime().GetValue(); !(v > 90e-6 && v < 100e-6) {
			t.Errorf("P2: longest on-time %g s", v)
		}
	}
	for current, pumped := range map[string]bool{"10 A": true, "-10 A": false} {
		p := c.duty(request(t, pumping(5, 2.5, 0.4, edits{"operatingPoints.0.loadCurrent": current})))
		if v := p.GetFloatingVoltageHigh().GetMax().GetValue(); (v > 4.61) != pumped || p.GetPeakDetector() != pumped {
			t.Errorf("P3: %s: V_BS reaches %g V, peak detector %v", current, v, p.GetPeakDetector())
		}
	}
}

// D01, Infineon IM393 application note V1.0, 6.2, eq. 12 (numbers from memory): 22 µF through 20 Ω at δ 0.5 to 13 V. Its logarithm takes
// V_CC on top and gives 2.579 ms; the exact law starts from V_CC - V_F - V_LS and gives 2.506 ms, 1.253 ms of conduction. What the time available
// permits is judged as the capacitance that it charges: C·t_avail/t. V_LS is taken off V_DD, as the node stands at 0 V here.
func TestPublishedFirstCharge(t *testing.T) {
	c := serve(t)
	const available = 2.6e-3 / 2
	f := find(t, c.review(request(t, supply(15-0.7), capacitance("22 uF"), switching("20 kHz", "50 %", "0 s"), edits{
		"/policy": `{"lockoutMargin":"0 V","lockoutMarginRatio":"0"}`, "bootstrap.diode.forwardPoints": drops(0.5), "bootstrap.resistor.resistance": "20 ohm",
		"driver.uvloRising": "13 V", "startup.timeAvailable": fmt.Sprintf("%g ms", available*1e3), "startup.initialVoltage": "0 V",
	})).GetFindings(), "charge/oversize", "")
	near(t, "time of the first charge at δ 0.5", &pb.Measure{Value: proto.Float64(2 * 22e-6 * available / f.GetLimit().GetValue())}, 2.506e-3, 0.0015e-3)
}

// Thermal voltage kT/q from the exact SI constants, -40 °C 20.091, 25 °C 25.693, 300 K 25.852, 125 °C 34.310, 150 °C 36.464 mV: a single
// forward point takes the emission coefficient 1.5, so that n·V_T is 1.5 of them.
func TestThermalVoltage(t *testing.T) {
	for celsius, millivolts := range map[float64]float64{-40: 20.091, 25: 25.693, 26.85: 25.852, 125: 34.310, 150: 36.464} {
		j, err := recharge.FitJunction([]recharge.DiodePoint{{Current: 0.1, Voltage: 0.7}}, 0, celsius)
		if err != nil || !(math.Abs(j.Slope/1.5-millivolts*1e-3) <= 0.0005e-3) {
			t.Errorf("%g °C: %g V, %v", celsius, j.Slope/1.5, err)
		}
	}
}

// Silicon, from memory: leakage doubles about every 10 K, from 25 to 125 °C by 1024; V_F falls by about 2 mV/K, in 100 K by 0.2 V.
func TestDiodeOverTemperature(t *testing.T) {
	c := serve(t)
	at := func(temperature string) (leakage float64, high *pb.Span) {
		body := request(t, switching("10 kHz", "50 %", "0 s"), edits{"bootstrap.diode.reverseLeakage": "1 nA", "operatingPoints.0.ambientTemperature": temperature})
		return item(t, c.size(body), "diode leakage").GetMax().GetValue(), c.duty(body).GetFloatingVoltageHigh()
	}
	cold, warm := at("25 degC")
	hot, hotter := at("125 degC")
	if !(math.Abs(cold-1e-13) <= 1e-19) || !(math.Abs(hot/cold-1024) <= 0.01) {
		t.Errorf("leakage charge %g and %g C", cold, hot)
	}
	all(t, "V_BS at 25 °C", warm, 11.6, 4e-4)
	all(t, "V_BS at 125 °C", hotter, 11.8, 4e-4)
}

// Derating as fraction of the rating, NASA EEE-INST-002, from memory: ceramic capacitor 0.60, resistor power 0.60, diode reverse voltage
// 0.70; the ceramic and the diode figure also System Reliability Center, part derating parameters, severe environment. The guard is the derated
// rating.
func TestPublishedDerating(t *testing.T) {
	c := serve(t)
	answer := c.review(request(t, gate(200), switching("10 kHz", "50 %", "0 s"), edits{
		"bootstrap.capacitor.voltageRating": `"25 V"`, "bootstrap.capacitor.dielectric": `"X7R"`, "bootstrap.resistor.resistance": "2.2 ohm", "bootstrap.resistor.power": `"250 mW"`,
		"bootstrap.diode.reverseVoltageMax":  `"60 V"`,
		"layout.measured.turnOnVoltageSlope": "10 V/us", // so slow that the node does not ring beyond its rails
	}))
	for _, z := range []struct {
		rule, role    string
		limit, guard  float64
		outcome       pb.Outcome_Value
		severity      pb.Severity_Value
		value, within float64
	}{
		{"capacitor/voltage", "bootstrap.capacitor", 25, 15, pass, none, 11.6, 2e-4},
		// 48 V + 11.6 V - 12 V lie between 42 V and 60 V.
		{"diode/reverse-voltage", "", 60, 42, marginal, major, 47.6, 2e-4},
		// Q²/(2·C)·f: 200 nC recharged on 1 µF in far more than R·C. The two points of the diode leave 0.2 mV of the 200 mV, twice in the square.
		{"resistor/power", "", 0.25, 0.15, pass, none, 200e-9 * 200e-9 / 2e-6 * 10e3, 0.4e-6},
	} {
		f := find(t, answer.GetFindings(), z.rule, z.role)
		judged(t, f, z.outcome, z.severity)
		near(t, z.rule+" limit", f.GetLimit(), z.limit, 1e-9)
		near(t, z.rule+" guard", f.GetGuard(), z.guard, 1e-6)
		near(t, z.rule, f.GetValue(), z.value, z.within)
	}
}

// Leakage of capacitors by class where none is given. KEMET C1002: 500 MΩ·µF or 10 GΩ, the lower: 1 µF at 25 V 50 nA, 0.1 µF 5 nA.
// Aluminium electrolytic, several makers: 0.01·C·V or 3 µA, the greater: 100 µF at 10 V 10 µA, 10 µF at 25 V 3 µA. All derived.
func TestPublishedCapacitorLeakage(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		dielectric, capacitance string
		vdd                     float64 // [V]
		leakage                 float64 // [A]
	}{{"X7R", "1 uF", 25, 50e-9}, {"X7R", "0.1 uF", 25, 5e-9}, {"ALUMINIUM", "100 uF", 10, 10e-6}, {"ALUMINIUM", "10 uF", 25, 3e-6}} {
		s := c.size(request(t, supply(z.vdd), capacitance(z.capacitance), switching("1 kHz", "50 %", "0 s"), edits{
			"bootstrap.capacitor.leakage": "", "bootstrap.capacitor.dielectric": `"` + z.dielectric + `"`}))
		near(t, z.dielectric+" "+z.capacitance, item(t, s, "capacitor leakage").GetMax(), z.leakage*1e-3, 1e-6*z.leakage*1e-3)
	}
}

// item is the charge of one line of the budget.
func item(t *testing.T, s *pb.SizingResult, name string) *pb.Span {
	t.Helper()
	for _, i := range s.GetBudget() {
		if i.GetName() == name {
			return i.GetCharge()
		}
	}
	t.Fatalf("no %q in the budget", name)
	return nil
}
