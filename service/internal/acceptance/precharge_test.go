package acceptance

import (
	"math"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// exactLockout judges the rising lockout without margin.
var exactLockout = edits{"/policy": `{"lockoutMargin":"0 V","lockoutMarginRatio":"0"}`}

// D01, Infineon IM393 application note V1.0, 6.2, eq. 12, and Fairchild Motion-SPM guides (numbers from memory): 22 µF through 20 Ω to 13 V from
// V_CC 15 V, V_F 0.5 V, V_LS 0.7 V, δ 0.5: about 2.6 ms, 2.579 ms by their formula. Its logarithm takes V_CC where the exact law takes V_CC - V_F -
// V_LS = 13.8 V: 2.506 ms at δ 0.5, of which C_B is charged for 1.253 ms. V_LS is taken off V_DD, as the node stands at 0 V here.
func TestPrechargeOfThePublishedExample(t *testing.T) {
	c := serve(t)
	d01 := join(exactLockout, supply(15-0.7), capacitance("22 uF"), switching("20 kHz", "50 %", "0 s"), edits{
		"bootstrap.diode.forwardPoints": drops(0.5), "bootstrap.resistor.resistance": "20 ohm", "driver.uvloRising": "13 V", "driver.uvloFalling": "12 V",
		"driver.floatingQuiescentCurrent": "1 uA", // it settles where the diode carries this
	})
	conducting := 20 * 22e-6 * math.Log(13.8/0.8)
	p := c.precharge(request(t, d01))
	// The two points of the diode leave 0.1 mV of the last 0.8 V.
	all(t, "low side on throughout", p.GetTime(), 1.253e-3, 0.0005e-3)
	all(t, "by the law of R·C", p.GetTime(), conducting, 2e-4*conducting)
	if p.GetPulses() != 0 {
		t.Errorf("%d pulses with the low side on throughout", p.GetPulses())
	}
	all(t, "settled", p.GetSettledVoltage(), 13.8, 4e-4)
	all(t, "peak current", p.GetPeakCurrent(), 13.8/20, 1e-5)
	all(t, "energy", p.GetResistorEnergy(), 0.5*22e-6*13.8*13.8, 1e-7)

	// Pulses of 50 µs in 100 µs: 25 of them make 1.25 ms, and the target is reached in the 26th.
	p = c.precharge(request(t, d01, edits{"startup.pulseWidth": "50 us", "startup.pulsePeriod": "100 us"}))
	if p.GetPulses() != 26 {
		t.Errorf("%d pulses, want 26", p.GetPulses())
	}
	all(t, "pulsed", p.GetTime(), 25*100e-6+(conducting-1.25e-3), 0.0005e-3)
	f := find(t, c.review(request(t, d01, edits{"startup.pulseWidth": "50 us", "startup.pulsePeriod": "100 us", "startup.timeAvailable": "2.6 ms"})).
		GetFindings(), "duty/pre-charge", "")
	judged(t, f, marginal, minor)
	near(t, "time judged", f.GetValue(), p.GetTime().GetMax().GetValue(), 1e-8)
}

// D05, Texas Instruments SLUSCE9B: a floating lockout releases 20 to 50 µs after its threshold; that comes on top of the time to the threshold.
func TestPrechargeWaitsForTheLockout(t *testing.T) {
	c := serve(t)
	stage := func(delay string) string {
		return request(t, exactLockout, switching("20 kHz", "50 %", "0 s"), edits{"bootstrap.resistor.resistance": "10 ohm", "driver.uvloFalling": "8 V",
			"driver.enableDelay": delay, "startup.timeAvailable": "60 us"})
	}
	without := c.precharge(stage("0 s")).GetTime().GetTyp().GetValue()
	near(t, "to the threshold", c.precharge(stage("0 s")).GetTime().GetTyp(), 1e-5*math.Log(11.6/3.6), 2e-9)
	p := c.precharge(stage(`{"min":"20 us","typ":"35 us","max":"50 us"}`)).GetTime()
	near(t, "shortest", p.GetMin(), without+20e-6, 1e-10)
	near(t, "typical", p.GetTyp(), without+35e-6, 1e-10)
	near(t, "longest", p.GetMax(), without+50e-6, 1e-10)
	// 11.7 µs alone would be in time.
	judged(t, find(t, c.review(stage("0 s")).GetFindings(), "duty/pre-charge", ""), pass, none)
	f := find(t, c.review(stage(`{"min":"20 us","typ":"35 us","max":"50 us"}`)).GetFindings(), "duty/pre-charge", "")
	judged(t, f, fail, major)
	near(t, "time judged", f.GetValue(), without+50e-6, 1e-10)
}

// B04, Texas Instruments SLUSCJ9, from memory: (12 V - 1.5 V)/2.7 Ω, about 4 A. B05, Texas Instruments SLUA887A, eq. 7 (derived): ½·C·V², 7.2 µJ
// at 100 nF and 12 V, 2.475 mJ at 22 µF and 15 V.
func TestPrechargeStressesTheElement(t *testing.T) {
	c := serve(t)
	first := func(v, drop float64, ohms, farads string) *pb.Precharge {
		return c.precharge(request(t, switching("10 kHz", "50 %", "0 s"), supply(v), capacitance(farads), edits{
			"bootstrap.diode.forwardPoints": drops(drop), "bootstrap.resistor.resistance": ohms}))
	}
	all(t, "B04", first(12, 1.5, "2.7 ohm", "1 uF").GetPeakCurrent(), 3.889, 0.0005)
	all(t, "B05, 100 nF", first(12.4, 0.4, "2.7 ohm", "100 nF").GetResistorEnergy(), 7.2e-6, 0.05e-6)
	all(t, "B05, 22 µF", first(15.4, 0.4, "20 ohm", "22 uF").GetResistorEnergy(), 2.475e-3, 0.0005e-3)
}

// What the first charge ends at, and what it leaves of the reservoir: conservation of charge alone. C_VDD of 10 µF shares its charge with n C_B of
// 1 µF, V_DD·C_VDD = V·(C_VDD + n·C_B), as a diode that carries nothing drops nothing in the end.
func TestPrechargeSettlesAndSags(t *testing.T) {
	c := serve(t)
	stage := func(more edits) string {
		return request(t, switching("20 kHz", "50 %", "0 s"), edits{"bootstrap.resistor.resistance": "1 kohm", "driver.floatingQuiescentCurrent": "1 mA"}, more)
	}
	p := c.precharge(stage(nil))
	all(t, "settled: V_DD - V_F - I·R", p.GetSettledVoltage(), 12-0.4-1, 4e-4)
	all(t, "without a reservoir V_DD stands", p.GetReservoirLow(), 12, 0)
	sagging := edits{"gateSupply.reservoir": `{"effectiveCapacitance":{"min":"10 uF","typ":"10 uF","max":"10 uF"}}`, "gateSupply.currentLimit": "",
		"startup.simultaneous": "3", "driver.floatingQuiescentCurrent": "0 A"}
	all(t, "three at once", c.precharge(stage(sagging)).GetReservoirLow(), 12*10/13., 1e-5)
	sagging["startup.simultaneous"] = "1"
	all(t, "one", c.precharge(stage(sagging)).GetReservoirLow(), 12*10/11., 1e-4)
	// Without the charge that C_B starts with nothing is left to bring: V_BS begins where it ends.
	p = c.precharge(stage(edits{"startup.initialVoltage": "11 V", "driver.floatingQuiescentCurrent": "0 A"}))
	all(t, "peak from 11 V", p.GetPeakCurrent(), 0.6e-3, 4e-7)
	all(t, "energy from 11 V", p.GetResistorEnergy(), 0.5*1e-6*0.36, 3e-10)
	all(t, "no time from 11 V to 3.3 V", p.GetTime(), 0, 0)
}
