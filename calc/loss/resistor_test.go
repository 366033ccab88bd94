package loss_test

import (
	"math"
	"testing"

	"floatrail/calc/loss"
	"floatrail/calc/recharge"
)

// Against Simpson's rule over the current of the exact law.
func TestResistorEnergy(t *testing.T) {
	const slope = 0.0385 // n = 1.5 at 25 °C [V]
	junction := recharge.Junction{Slope: slope, LogSaturation: -0.8 / slope}
	for _, e := range []recharge.Element{{Junction: junction, Resistance: 5}, {Resistance: 5, Switch: true}} {
		for _, load := range []float64{0, 1e-3, 0.2} {
			for _, v0 := range []float64{5, 11, 11.9} {
				const c, drive, duration, n = 1e-6, 12.0, 3e-6, 2000
				part := func(t float64) recharge.Interval {
					return recharge.Interval{Duration: t, Drive: drive, Conducts: true, Load: load}
				}
				sum := 0.0
				for k := range n + 1 {
					v, _ := e.Advance(v0, part(duration*float64(k)/n), c)
					weight := float64(2 + 2*(k%2))
					if k == 0 || k == n {
						weight = 1
					}
					i := e.Current(drive - v)
					sum += weight * i * i
				}
				want := 2.0 * sum * duration / n / 3 // 2 ohm of the 5
				near(t, "energy", loss.ResistorEnergy(e, part(duration), c, v0, 2), want, 1e-9*want+1e-18)
			}
		}
	}
}

func TestResistorEnergyEnds(t *testing.T) {
	e := recharge.Element{Resistance: 10, Switch: true}
	iv := recharge.Interval{Duration: 1, Drive: 12, Conducts: true}
	near(t, "to equilibrium", loss.ResistorEnergy(e, iv, 1e-6, 0, 10), 72e-6, 1e-15)
	iv.Load = 2e-3 // settled: I²·R·t
	near(t, "settled", loss.ResistorEnergy(e, iv, 1e-6, 12-0.02, 10), 4e-5, 1e-12)
	iv.Conducts = false
	near(t, "disconnected", loss.ResistorEnergy(e, iv, 1e-6, 0, 10), 0, 0)
	iv.Conducts, iv.Conductance = true, 1e-4
	for what, got := range map[string]float64{
		"conductance": loss.ResistorEnergy(e, iv, 1e-6, 0, 10),
		"start":       loss.ResistorEnergy(e, recharge.Interval{Duration: 1, Drive: 12, Conducts: true}, 1e-6, math.NaN(), 10),
		"duration":    loss.ResistorEnergy(e, recharge.Interval{Duration: nan, Drive: 12}, 1e-6, 0, 10),
	} {
		if got == got {
			t.Errorf("%s: %g J", what, got)
		}
	}
}
