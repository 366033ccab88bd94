package startup_test

import (
	"math"
	"testing"

	"floatrail/calc/recharge"
	"floatrail/calc/startup"
)

// Infineon IM393 application note V1.0, 6.2, eq. 12 (numbers from memory); Fairchild Motion-SPM guides (from memory): C 22 µF, R 20 ohm, δ 0.5,
// V_CC 15 V, to 13 V, V_F 0.5 V, V_LS 0.7 V: about 2.6 ms, 2.579 ms by t = (R·C/δ)·ln(V_CC/(V_CC - V_BS,min - V_F - V_LS)).
func TestPublishedInitialCharge(t *testing.T) {
	const r, c, delta, period = 20.0, 22e-6, 0.5, 100e-6
	printed := r * c / delta * math.Log(15/(15-13-0.5-0.7))
	near(t, "its own formula", printed, 2.579e-3, 0.0005e-3)

	ch := startup.Charge{Element: fixedDrop(0.5, r), Capacitance: c, Supply: 15, Node: 0.7}
	exact := ch.Time(13) / delta
	near(t, "exact law", exact, 2.51e-3, 0.005e-3)
	// all of the difference is the numerator, 15 V for the 13.8 V that are left of it below the drops
	near(t, "difference", printed-exact, r*c/delta*math.Log(15/13.8), 1e-3*exact)

	// Pulsed without a load: as much conducting time, so 2.506 ms fall into the 26th period, 5.99 µs after conducting for 1.25 ms
	time, n := ch.PulsedTime(delta*period, period, 13)
	within := ch.Time(13) - 25*delta*period
	near(t, "pulsed", time, 25*period+within, 1e-12)
	if n != 26 {
		t.Errorf("%d pulses, want 26", n)
	}
}

// Texas Instruments SLUA887A eq. 7 (equation read, numbers derived): E = ½·C·V²: 100 nF, 12 V: 7.2 µJ; 22 µF, 15 V: 2.475 mJ.
func TestPublishedEnergy(t *testing.T) {
	for _, c := range []struct{ c, v, want float64 }{{100e-9, 12, 7.2e-6}, {22e-6, 15, 2.475e-3}} {
		for _, e := range []recharge.Element{{Resistance: 2.7, Switch: true}, {Resistance: 2.7}} { // a switch; a diode without a drop
			near(t, "energy", startup.Charge{Element: e, Capacitance: c.c, Supply: c.v}.ResistorEnergy(2.7), c.want, 1e-6*c.want)
		}
	}
	// with a drop: R takes ½·C·(V - V_F)², a part of R its part
	ch := startup.Charge{Element: fixedDrop(0.7, 10), Capacitance: 1e-6, Supply: 12}
	near(t, "energy behind a drop", ch.ResistorEnergy(4), 0.4*0.5*1e-6*11.3*11.3, 1e-9)
}

// Texas Instruments SLUSCJ9 (from memory): 12 V, 1.5 V, 2.7 ohm: (V_DD - V_F)/R about 4 A, 3.889 A.
func TestPublishedPeakCurrent(t *testing.T) {
	ch := startup.Charge{Element: fixedDrop(1.5, 2.7), Capacitance: 100e-9, Supply: 12}
	near(t, "peak current", ch.PeakCurrent(), 10.5/2.7, 1e-4)
	near(t, "peak current to three digits", ch.PeakCurrent(), 3.889, 5e-4)
	near(t, "slew", ch.Slew(), 10.5/2.7/100e-9, 1e3)
}
