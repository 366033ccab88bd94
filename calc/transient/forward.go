package transient

import (
	"errors"
	"fmt"
	"math"
)

// ForwardRecovery is what a diode drops above its static law when its current rises fast: an inductance beside a resistance, in series
// with the diode. The zero value is a diode without it.
type ForwardRecovery struct {
	Inductance float64 // L_fr [H]
	Resistance float64 // R_fr beside it, +Inf where the test does not show it [ohm]
}

// aboveStatic is the fraction of V_F by which the voltage still exceeds V_F at the end of the forward recovery time: t_fr ends at 110 %
// of V_F (IEC 60747-2, from memory) [1].
const aboveStatic = 0.1

// FitForwardRecovery returns the network that meets a forward recovery test, eq. (12): the current rises at testSlope [A/s] to
// testCurrent [A] and stays, the voltage peaks at peak = V_FP, static drop included [V], and has come down to 110 % of the static drop
// static = V_F at the test current [V] at the time t_fr after the current began [s].
//
// With V_FP <= V_F there is nothing to fit. With V_FP <= 1.1·V_F the test shows no t_fr: then the excess belongs to the inductance alone,
// which is the most that other slopes can make of it (R_fr = +Inf), and time is not used.
func FitForwardRecovery(testCurrent, testSlope, peak, static, time float64) (ForwardRecovery, error) {
	excess, least := peak-static, aboveStatic*static
	switch {
	case !(testCurrent > 0) || !(testSlope > 0):
		return ForwardRecovery{}, errors.New("forwardRecoveryTestCurrent and forwardRecoveryTestSlope must be positive")
	case anyNaN(excess):
		return ForwardRecovery{}, errors.New("peakForwardRecovery and the static drop at forwardRecoveryTestCurrent must be numbers")
	case excess <= 0:
		return ForwardRecovery{}, nil
	case excess <= least:
		return ForwardRecovery{Inductance: excess / testSlope, Resistance: math.Inf(1)}, nil
	case !(static > 0):
		return ForwardRecovery{}, fmt.Errorf("the static drop at forwardRecoveryTestCurrent is %.6g V: forwardRecoveryTime has no level to end at", static)
	}
	rise := testCurrent / testSlope
	if !(time > rise) {
		return ForwardRecovery{}, fmt.Errorf("forwardRecoveryTime %.6g s must be longer than the rise of the current in the test, "+
			"forwardRecoveryTestCurrent/forwardRecoveryTestSlope = %.6g s, as peakForwardRecovery exceeds 110 %% of the static drop", time, rise)
	}
	tau := (time - rise) / math.Log(excess/least)
	l := excess / (testSlope * -math.Expm1(-rise/tau))
	return ForwardRecovery{Inductance: l, Resistance: l / tau}, nil
}

// Peak returns what the voltage exceeds the static law by [V], at most, when the current rises at slope [A/s] from 0 to current [A]:
// L_fr·s·(1 - exp(-i/(s·τ_fr))), τ_fr = L_fr/R_fr. It tends to R_fr·i for fast edges and to L_fr·s for slow ones.
func (f ForwardRecovery) Peak(slope, current float64) float64 {
	if anyNaN(f.Inductance, f.Resistance, slope, current) {
		return math.NaN()
	}
	if f.Inductance == 0 || slope == 0 || current == 0 {
		return 0
	}
	x := current * f.Resistance / (slope * f.Inductance)
	if x < 1e-8 {
		return f.Resistance * current * (1 - x/2)
	}
	return f.Inductance * slope * -math.Expm1(-x)
}
