package recharge

import (
	"math"

	"floatrail/calc/internal/numeric"
)

// Element is what lies between V_DD and the floating rail: a diode in series with resistors, or an integrated switch.
type Element struct {
	Junction
	Resistance float64 // total in series, R_B + r_D + R_supply + R_VS; of a switch its own and R_B's [ohm]
	Switch     bool    // integrated switch: the resistance alone, conducting both ways
}

// law is an Element made ready: what its equations need, computed once.
type law struct {
	slope  float64 // n·V_T [V]
	logIS  float64 // ln(I_S/1 A) [1]
	is     float64 // I_S [A]
	r      float64 // R [ohm]
	logRn  float64 // ln(R/(n·V_T)), ln of [1/A]
	linear bool    // switch

	interval int         // number of the interval whose A of eq. (3) is kept for the next pass; 0: none is
	before   [14]float64 // A in the pass before, by interval; 0: not known [1]
}

func (e Element) law() law {
	w := law{r: e.Resistance, linear: e.Switch}
	if !e.Switch {
		w.slope, w.logIS = e.Junction.law()
		w.is = math.Exp(w.logIS)
		w.logRn = math.Log(w.r / w.slope)
	}
	return w
}

// saturated returns ln s and s = i + I_S [A] for a voltage drive [V] across the element, eq. (2).
func (w *law) saturated(drive float64) (logS, s float64) {
	if w.r == 0 {
		logS = w.logIS + drive/w.slope
		return logS, math.Exp(logS)
	}
	l, x := numeric.LogLambertPair((drive+w.is*w.r)/w.slope + w.logIS + w.logRn)
	return l - w.logRn, x * w.slope / w.r
}

// current returns i [A] and -di/dv [S] for a voltage drive [V] across the element.
func (w *law) current(drive float64) (i, g float64) {
	if w.linear {
		return drive / w.r, 1 / w.r
	}
	logS, s := w.saturated(drive)
	i = s - w.is
	if d := logS - w.logIS; d < 1 {
		i = w.is * math.Expm1(d)
	}
	return i, 1 / (w.r + w.slope/s)
}

// voltage returns v = E - R·i - n·V_T·ln(1 + i/I_S) [V] for ln s and s [A] at the drive E [V].
func (w *law) voltage(drive, logS, s float64) float64 {
	return drive - w.r*(s-w.is) - w.slope*(logS-w.logIS)
}

// settled returns the voltage [V] at which the element carries just the load [A], +Inf below -I_S.
func (w *law) settled(drive, load float64) float64 {
	if w.linear {
		return drive - w.r*load
	}
	return drive - w.r*load - Junction{Slope: w.slope, LogSaturation: w.logIS}.junctionVoltage(load)
}

// Current returns the current [A] for a voltage drive = E - v across the element [V], eq. (1); blocked it tends to -I_S.
func (e Element) Current(drive float64) float64 {
	w := e.law()
	i, _ := w.current(drive)
	return i
}

// Conductance returns how much the current rises with the voltage drive = E - v across the element [S]: 1/(R + n·V_T/(i + I_S)).
func (e Element) Conductance(drive float64) float64 {
	w := e.law()
	_, g := w.current(drive)
	return g
}

// Drop returns the voltage across the whole element [V] at the current i [A], eq. (1).
func (e Element) Drop(i float64) float64 {
	w := e.law()
	return -w.settled(0, i)
}

// Settled returns the V_BS [V] at which the element carries just the load [A] at the drive E [V].
func (e Element) Settled(drive, load float64) float64 {
	w := e.law()
	return w.settled(drive, load)
}

// TimeTo returns the time [s] in which the capacitor c [F] goes from v0 to target [V] at the drive E [V] under a constant load [A],
// eq. (3); 0 when it is there, +Inf when target is at or beyond equilibrium or lies the other way.
func (e Element) TimeTo(c, drive, load, v0, target float64) float64 {
	w := e.law()
	rest := w.settled(drive, load)
	switch {
	case c != c || drive != drive || load != load || v0 != v0 || target != target || rest != rest:
		return math.NaN()
	case target == v0:
		return 0
	case v0 < target && !(target < rest), v0 > target && !(target > rest):
		return math.Inf(1)
	case w.linear:
		return w.r * c * math.Log1p((v0-target)/(target-rest))
	}
	k := load + w.is
	logS0, s0 := w.saturated(drive - v0)
	logS1, s1 := w.saturated(drive - target)
	if s1 < 1e-16*k { // both ends block
		return c * (v0 - target) / k
	}
	if math.IsInf(s0, 1) { // R = 0: (s0 - s1)/s0 is 1
		return c * w.slope / (s1 - k) * log1pRatio(k/(s1-k))
	}
	q := (s0 - s1) / (s1 - k) // e^A - 1
	if !(q > 0) {
		return math.Inf(1) // target is equilibrium to the last digit
	}
	var a float64 // matters with a resistance only, without one q may be beyond any number
	if w.r > 0 {
		a = math.Log1p(q)
	}
	if s0 < 1e-290 {
		return c * (w.r*a + w.slope/k*(math.Log1p(q)+logS1-logS0))
	}
	u := (s0 - s1) / s0 / (s1 - k)
	return c * (w.r*a + w.slope*u*log1pRatio(k*u))
}

// log1pRatio returns ln(1 + x)/x, 1 at 0.
func log1pRatio(x float64) float64 {
	if math.Abs(x) < 1e-3 {
		return 1 - x*(1./2-x*(1./3-x*(1./4-x*(1./5-x/6))))
	}
	return math.Log1p(x) / x
}

// ResistorEnergy returns the energy [J] that a resistance [ohm], part of the element's, takes while the capacitor c [F] goes from
// v0 [V] to equilibrium without load at the drive E [V]: with dt = C·dv/i and dv = -(R + n·V_T/(i + I_S))·di
//
//	∫i²·R_x dt = R_x·C·[R·i0²/2 + n·V_T·(i0 - I_S·ln(1 + i0/I_S))]
//
// For n·V_T -> 0 and the whole resistance it is C·(E - v0)²/2.
func (e Element) ResistorEnergy(c, drive, v0, resistance float64) float64 {
	w := e.law()
	i, _ := w.current(drive - v0)
	half := w.r * i * i / 2
	if w.linear {
		return resistance * c * half
	}
	logS, _ := w.saturated(drive - v0)
	z := logS - w.logIS // i = I_S·expm1(z)
	diode := i - w.is*z
	if math.Abs(z) < 1e-4 {
		diode = w.is * z * z * (0.5 + z/6)
	}
	return resistance * c * (half + w.slope*diode)
}
