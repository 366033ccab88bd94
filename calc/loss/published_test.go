package loss_test

import (
	"testing"

	"floatrail/calc/loss"
)

// Texas Instruments UCC27523 family data sheet, SLUSAQ3: 10 nF, 12 V, 300 kHz: 0.432 W and 36 mA; two gates of 60 nC: 0.432 W.
func TestPublishedGate(t *testing.T) {
	near(t, "10 nF", loss.Gate(10e-9*12, 12, 300e3), 0.432, 1e-12)
	near(t, "supply current", loss.Gate(10e-9*12, 12, 300e3)/12, 36e-3, 1e-13)
	near(t, "2 × 60 nC", 2*loss.Gate(60e-9, 12, 300e3), 0.432, 1e-12)
	// National LM5104 eq. 12 (equation read, numbers derived): 2·f·C·V², 1 nF, 12 V, 100 kHz: 28.8 mW
	near(t, "two channels", 2*loss.Gate(1e-9*12, 12, 100e3), 28.8e-3, 1e-14)
}

// Texas Instruments SLUSAQ3F (2013): P = 0.5·Q·V·f·[R_off/(R_off + R_g) + R_on/(R_on + R_g)], whose limit for R_g -> 0 is Q·V·f; without the
// 0.5, as SLUSAQ3E (2012) has it, the driver would take twice what there is.
func TestPublishedDriverGate(t *testing.T) {
	const q, v, f, on, off = 60e-9, 12.0, 300e3, 5.0, 0.6
	whole := loss.Gate(q, v, f)
	near(t, "4.6 ohm", loss.DriverGate(q, v, f, on, off, 4.6, 4.6), 0.5*q*v*f*(0.6/5.2+5/9.6), 1e-15)
	near(t, "each direction its own", loss.DriverGate(q, v, f, on, off, 15, 2.4), whole*0.5*(0.25+0.2), 1e-15)
	for _, c := range []struct{ rg, within float64 }{{0, 0}, {1e-6, 2e-6}, {1e-3, 2e-3}} {
		near(t, "R_g to 0", loss.DriverGate(q, v, f, on, off, c.rg, c.rg), whole, c.within*whole)
	}
	near(t, "all outside", loss.DriverGate(q, v, f, on, off, 1e9, 1e9), 0, 1e-8)
	near(t, "driver without resistance", loss.DriverGate(q, v, f, 0, 0, 5, 5), 0, 0)
	near(t, "no resistance at all", loss.DriverGate(q, v, f, 0, 0, 0, 0), whole, 0)
}

// Infineon 2ED2109S06F data sheet: 200 K/W from 25 to 150 °C: 0.625 W.
func TestPublishedPower(t *testing.T) {
	near(t, "junction", loss.Junction(25, 200, 0.625), 150, 1e-12)
}

// Leakage doubles about every 10 K (from memory): ×1024 from 25 to 125 °C.
func TestPublishedLeakage(t *testing.T) {
	near(t, "hot", loss.Hot(1e-6, 125-25), 1024e-6, 1e-15)
}
