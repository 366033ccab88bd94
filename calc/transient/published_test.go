package transient

import "testing"

// Each check names its source; Fairchild AN-6076 (2008) is cited from memory.

// AN-6076, from memory: 10 A that fall in 50 ns through 100 nH give 20 V. Here a common source of 20 nH alone limits the fall, 4 V across
// it at the plateau.
func TestPublishedUndershoot(t *testing.T) {
	s := &Switch{Threshold: 3, Transconductance: 10, InputCapacitance: 1e-9, CommonSource: 20e-9}
	fall := CurrentFall(10, s, Gate{Resistance: 0, On: 12, Off: 0})
	same(t, "fall", fall, 10/50e-9, 1e-14)
	same(t, "L·di/dt", 100e-9*fall, 20, 1e-14)
	same(t, "across 100 nH", 100e-9*TurnOffSlope(fall, 10, 100e-9, 1e-12), 20, 1e-14)
}

// AN-6076, from memory, switching-time method: Q_GS 13.5 nC and Q_GD 36 nC in 500 ns, V_DD 15 V, V_th 5 V: 99 mA, 101 ohm; driver 350 mA:
// 43 ohm; R_G 58 ohm. Its gate current is (V_DD - V_th)/R, so the plateau stands at V_th here: no current, no capacitance but C_gd. The
// time of the swing is proportional to R, so that of 1 ohm tells the R for the share of the time that Q_GD has.
func TestPublishedSwitchingTime(t *testing.T) {
	const gateSource, gateDrain, time = 13.5e-9, 36e-9, 500e-9
	s := &Switch{Threshold: 5, Transconductance: 10, Transfer: level(gateDrain / 400), Output: level(0)}
	swing := func(r float64) float64 {
		return TurnOnSwing(400, 0, s, level(0), Gate{Resistance: r, On: 15}).Time()
	}
	total := time * gateDrain / (gateSource + gateDrain) / swing(1)
	near(t, "gate current", gateDrain/swing(total), 99.0e-3, 0.05e-3)
	near(t, "total", total, 101.01, 0.005)
	near(t, "external", total-15/0.350, 58.15, 0.005)
}

// AN-6076, from memory, slope method: 1 V/ns, C_gd 95 pF: 105 ohm in all, 62 ohm beside the driver of 350 mA; turn-off with V_th,min 3 V and
// a driver of 650 mA: 8.6 ohm, unrounded 8.50 ohm. The slew is inversely proportional to R.
func TestPublishedSlope(t *testing.T) {
	s := &Switch{Threshold: 5, Transconductance: 10, Transfer: level(95e-12), Output: level(0)}
	total := TurnOnSwing(400, 0, s, level(0), Gate{Resistance: 1, On: 15}).Peak() / 1e9
	near(t, "turn-on, total", total, 105.26, 0.005)
	near(t, "turn-on, external", total-15/0.350, 62.41, 0.005)
	s.Threshold = 2 // the plateau of 10 A at 3 V; no capacitance that this current could charge too slowly
	total = TurnOffSwing(400, 10, s, level(0), Gate{Resistance: 1, On: 15}).Peak() / 1e9
	near(t, "turn-off, external", total-15/0.650, 8.50, 0.005)
}

// The same examples simulated, as bounds: a channel with a transconductance and a C_oss moves the node more slowly than the gate's charge alone would
// let it, and no faster; with a steep channel and little C_oss nearly as fast.
func TestPublishedEdgesSimulated(t *testing.T) {
	bridge := func(event Event, gateDrain, resistance, threshold float64) *Bridge {
		b := simple(event)
		b.Bus, b.Load, b.Supply, b.LowDrive, b.Floating = 400, 1, 15, 15, 15
		b.L1, b.L2, b.RingingResistance = 0.5e-9, 0.5e-9, 5
		b.High.Transfer, b.High.Output, b.Low.Output = level(gateDrain), level(gateDrain+1e-12), level(2e-12)
		b.High.GateResistance, b.High.Threshold, b.High.Transconductance, b.High.GateSource = resistance, threshold, 100, 1e-9
		return b
	}
	for _, c := range []struct {
		name                             string
		event                            Event
		gateDrain, resistance, threshold float64
		slope                            float64 // published [V/s]
	}{
		{"G01, 36 nC in its share of 500 ns", TurnOn, 36e-9 / 400, 101.01, 5, 400 / (500e-9 * 36 / (36 + 13.5))},
		{"G02, 1 V/ns through 105 ohm", TurnOn, 95e-12, 105.26, 5, 1e9},
		{"G03, 1 V/ns at turn-off, 8.5 ohm and a driver of 650 mA", TurnOff, 95e-12, 8.50 + 15/0.650, 3, 1e9},
	} {
		t.Run(c.name, func(t *testing.T) {
			got := course(t, bridge(c.event, c.gateDrain, c.resistance, c.threshold), Window{Limit: 5e-6}).Slew
			if !(got < 1.005*c.slope && got > 0.95*c.slope) {
				t.Errorf("%.4g V/s, want at most %.4g V/s and not much less", got, c.slope)
			}
		})
	}
}
