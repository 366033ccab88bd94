package recharge

import (
	"math"
	"testing"
)

// Each check names its source; "from memory" marks a source whose text was not at hand.

func TestPublishedHoldAndDroop(t *testing.T) {
	// STMicroelectronics L6386E data sheet, Doc 13989 Rev 2, 4.1: 200 µA, 5 ms, 1 µF: 1 µC, 1 V
	near(t, "droop", 12-Hold(12, 200e-6, 0, 1e-6, 5e-3), 1, 1e-12)
	// its inverse
	near(t, "hold time", HoldTime(12, 200e-6, 0, 1e-6, 11), 5e-3, 1e-12)
	// Microchip synchronous buck controller data sheet, 4.5: 10 mA, 3.33 µs, 0.1 µF: 333 mV
	near(t, "droop", 5-Hold(5, 10e-3, 0, 0.1e-6, 3.33e-6), 0.333, 1e-12)
	// inverse of International Rectifier IR2114 data sheet PD60213, 2.1 (last inputs from memory): 725 nF, 0.4 V less 180 nC, at
	// 1.1001 mA: 100.0 µs
	near(t, "hold time", HoldTime(12-180e-9/725e-9, 1.1001e-3, 0, 725e-9, 12-0.4), 100.0e-6, 0.05e-6)
}

// STMicroelectronics L6388E, Doc 13991 Rev 5, eq. 2-3 (125 ohm, about 0.8 V), and L6392, Doc 14494 Rev 5, eq. 3-4 (120 ohm, about
// 0.7 V): 30 nC through R in 5 µs is V = Q·R/t, the limit of the steady state where C cancels.
func TestPublishedResistorDeficit(t *testing.T) {
	for _, c := range []struct{ r, want float64 }{{125, 0.750}, {120, 0.720}} {
		p := Period{
			Element: fixedDrop(t, 0.5, c.r), Capacitance: 1e-3, Charge: 30e-9,
			On: conducting(50e-6, 12-400), Off: []Interval{conducting(5e-6, 12)},
		}
		near(t, "deficit", p.SteadyState().Deficit, c.want, 1e-4)
	}
}

func TestPublishedCharging(t *testing.T) {
	// Fairchild AN-6076 (2008), from memory: 10 ohm, 1 µF, charging 10 % of the time: τ = R·C/D = 100 µs
	e := fixedDrop(t, 0.6, 10)
	toTau := 14.4 * (1 - math.Exp(-1))
	near(t, "time constant", e.TimeTo(1e-6, 15, 0, 0, toTau)/0.1, 100.0e-6, 0.01e-6)
	// Texas Instruments SLUSCJ9, from memory: (12 V - 1.5 V)/2.7 ohm = 3.889 A, about 4 A
	near(t, "peak current", fixedDrop(t, 1.5, 2.7).Current(12), 3.889, 5e-4)
	// Texas Instruments SLUA887A eq. 7: E = ½·C·V²: 100 nF, 12 V: 7.2 µJ; 22 µF, 15 V: 2.475 mJ
	near(t, "energy", Element{Resistance: 2.7}.ResistorEnergy(100e-9, 12, 0, 2.7), 7.2e-6, 1e-12)
	near(t, "energy", Element{Resistance: 20}.ResistorEnergy(22e-6, 15, 0, 20), 2.475e-3, 1e-9)
	// Infineon IM393 application note V1.0, 6.2, eq. 12 (numbers from memory): 22 µF, 20 ohm, δ 0.5, 15 V, to 13 V, V_F 0.5 V, V_LS 0.7 V.
	// Its logarithm takes V_CC on top and says 2.579 ms; the exact law starts from V_CC - V_F - V_LS = 13.8 V and gives
	// (R·C/δ)·ln(13.8/0.8) = 2.506 ms. Pulsed: the law with I_q/δ, its time over δ.
	const delta = 0.5
	time := fixedDrop(t, 0.5, 20).TimeTo(22e-6, 15-0.7, 0/delta, 0, 13) / delta
	near(t, "pre-charge", time, 2.506e-3, 0.002e-3)
	near(t, "its own formula", 20*22e-6/delta*math.Log(15/0.8), 2.579e-3, 0.001e-3)
	// pulsed against a cycle-by-cycle march through 20 kHz with a load
	march, v, n := fixedDrop(t, 0.5, 20), 0.0, 0
	for ; v < 13; n++ {
		v, _ = march.Advance(v, Interval{Duration: 1e-6, Drive: 14.3, Conducts: true, Load: 2e-3}, 22e-6)
		v, _ = march.Advance(v, Interval{Duration: 1e-6, Drive: -300, Conducts: true, Load: 2e-3}, 22e-6)
	}
	time = march.TimeTo(22e-6, 14.3, 2e-3/delta, 0, 13) / delta
	near(t, "pulsed rule", time/(float64(n)*2e-6), 1, 2e-3)
}

func TestPublishedNegativeNode(t *testing.T) {
	// Texas Instruments LMG1210 data sheet, eq. 1-3: V_BST = V_DD - V_F + I·R_DS(on) with the node at -I·R_DS(on)
	node := -10 * 20e-3
	near(t, "sign rule", fixedDrop(t, 0.4, 0).Settled(5-node, 1e-3), 5-0.4+0.2, 2e-4)
	// Texas Instruments SNOSDG7A: V_SD 2.1 V, 12 V: 14.1 V with an ideal diode, beyond a rating of 14 V; 13.4 V with V_F 0.7 V
	pumped := func(e Element, vdd, vsd, charge float64) Steady {
		return Period{
			Element: e, Capacitance: 100e-9, Charge: charge,
			On:  conducting(1e-6, vdd-48),
			Off: []Interval{conducting(50e-9, vdd+vsd), conducting(1e-6, vdd), conducting(50e-9, vdd+vsd)},
		}.SteadyState()
	}
	near(t, "ideal diode", pumped(Element{Resistance: 0.1}, 12, 2.1, 1e-15).High, 14.1, 1e-3)
	near(t, "0.7 V", pumped(fixedDrop(t, 0.7, 0.1), 12, 2.1, 1e-15).High, 13.4, 1e-3)
	// Texas Instruments SNVAA94 (2023): V_DD + |V_S| lies across C_B in dead time; "easily exceeding 6-7 V" on a 5 V supply, in
	// the steady state where charge in equals charge out
	s := pumped(fixedDrop(t, 0.4, 2.7), 5, 2.5, 3e-9)
	if !(s.High > 6 && s.High < 5+2.5-0.4) || s.HighInterval != 2 {
		t.Errorf("5 V supply: %+v", s)
	}
	near(t, "charge in equals charge out", s.Charge/3e-9, 1, 1e-9)
}

// Cases where a hand calculation is optimistic.
func TestHandCalculationIsOptimistic(t *testing.T) {
	// held on 10.64 ms from 11 V, 6 µF, 150 µA, R_GS 10 kohm: 12.5·exp(-0.177) - 1.5 = 8.97 V, not a droop of 0.27 V
	near(t, "hold", Hold(11, 150e-6, 1e-4, 6e-6, 10.64e-3), 8.97, 0.005)
	// 70 nC, 200 ohm, 1.5 µs, 14.25 V, V_F 1.0 V: deficit 9.37 V with 1 µF, 9.34 V with 10 µF; ripple alone says 0.07 V
	for _, c := range []struct{ c, want float64 }{{1e-6, 9.37}, {10e-6, 9.34}} {
		p := Period{
			Element: fixedDrop(t, 1, 200), Capacitance: c.c, Charge: 70e-9,
			On: conducting(20e-6, 14.25-400), Off: []Interval{conducting(1.5e-6, 14.25)},
		}
		s := p.SteadyState()
		near(t, "deficit", s.Deficit, c.want, 0.005)
		near(t, "lowest", s.Low, 13.25-c.want, 0.005)
		near(t, "window", s.TimeConducting, 1.5e-6, 0)
	}
	// GaN: 5.25 V, V_F 0.40 V, V_SD 2.2 V, 2 × 20 ns, 6 nC, 2.7 ohm, 100 nF: 6.67 V, not 4.85 V; 10 ohm gives 5.58 V
	for _, c := range []struct{ r, vsd, want float64 }{{2.7, 2.2, 6.67}, {10, 2.2, 5.58}} {
		s := pump(t, c.r, c.vsd)
		near(t, "pumped", s.High, c.want, 0.005)
		near(t, "window", s.TimeConducting, 40e-9, 0)
	}
	if s := pump(t, 10, 5.2); !(s.High > 6) {
		t.Errorf("at V_SD 5.2 V 10 ohm would help: %g V", s.High)
	}
}

func pump(t *testing.T, r, vsd float64) Steady {
	return Period{
		Element: fixedDrop(t, 0.4, r), Capacitance: 100e-9, Charge: 6e-9,
		On:  conducting(0.46e-6, 5.25-48),
		Off: []Interval{conducting(20e-9, 5.25+vsd), conducting(0.46e-6, 5.25), conducting(20e-9, 5.25+vsd)},
	}.SteadyState()
}
