package transient

import (
	"errors"
	"fmt"
	"math"

	"floatrail/calc/internal/numeric"
)

// Recovery is the lumped-charge diode of Lauritzen and Ma, "A simple diode model with reverse recovery", IEEE Transactions on Power
// Electronics 6(2), 1991 (from memory), eq. (13)-(14). The zero value does not recover.
type Recovery struct {
	Tau     float64 // τ, lifetime of the carriers [s]
	Transit float64 // T_M, time of diffusion from the junction into the middle [s]
	TauRR   float64 // τ_rr, 1/τ_rr = 1/τ + 1/T_M, time constant of the reverse current's decay [s]
}

// decayTime is the time from the peak of the reverse current to where the straight line through 90 % and 25 % of it reaches zero, the end
// of t_rr (IEC 60747-2, from memory), in units of τ_rr: ln(1/0.9) + 0.9/(0.9 - 0.25)·ln(0.9/0.25) [1].
const decayTime = 1.878961224759146

// FitRecovery returns the diode that meets a reverse recovery test, eq. (15)-(16): from testCurrent [A] the current falls at testSlope
// [A/s], charge is Q_rr [C] and time t_rr [s]. No charge: no recovery. An error where no diode meets the test.
func FitRecovery(testCurrent, testSlope, charge, time float64) (Recovery, error) {
	switch {
	case charge == 0:
		return Recovery{}, nil
	case !(charge > 0):
		return Recovery{}, fmt.Errorf("recoveryCharge %.6g C must not be negative", charge)
	case !(testCurrent > 0) || !(testSlope > 0) || !(time > 0):
		return Recovery{}, errors.New("recoveryTestCurrent, recoveryTestSlope and recoveryTime must be positive")
	}
	most := testSlope * time * time / 2
	if charge > most*(1+1e-12) { // rounding
		return Recovery{}, fmt.Errorf("recoveryCharge %.6g C is more than recoveryTestSlope·recoveryTime²/2 = %.6g C, which a reverse current that "+
			"rises at that slope for all of that time carries", charge, most)
	}
	// (16) in y = I_RM/(a·t_rr): (1/k - 1/2)·y² - y/k + Q_rr/(a·t_rr²) = 0, the smaller root
	const inverse, square = 1 / decayTime, 1/decayTime - 0.5
	share := charge / (testSlope * time * time)
	y := 2 * share / (inverse + math.Sqrt(inverse*inverse-4*square*share))
	y = math.Min(y, 1)
	tauRR := time * (1 - y) / decayTime
	// (14) in τ, increasing from below I_RM at τ_rr; at last it holds up to the second order of 1/τ
	reverse := y * time // I_RM/a
	storage := testCurrent/testSlope + reverse
	last := (storage*storage/2 + tauRR*storage) * testSlope / testCurrent
	tau, ok := numeric.Root(func(tau float64) float64 {
		return (tau-tauRR)*-math.Expm1(-storage/tau) - reverse
	}, tauRR, math.Max(last, 2*tauRR)*(1+1e-12), 0)
	if !ok {
		return Recovery{}, errors.New("no diode meets recoveryTestCurrent, recoveryTestSlope, recoveryCharge and recoveryTime")
	}
	return Recovery{Tau: tau, Transit: tau * tauRR / (tau - tauRR), TauRR: tauRR}, nil
}

// Peak returns I_RM [A] when the current falls from i [A] at slope [A/s], eq. (14).
func (r Recovery) Peak(i, slope float64) float64 {
	if anyNaN(r.Tau, r.TauRR, i, slope) {
		return math.NaN()
	}
	scale, limit := slope*r.Tau, slope*(r.Tau-r.TauRR)
	if !(limit > 0) || !(i > 0) {
		return 0
	}
	// x - limit·(1 - exp(-(i + x)/scale)) is convex and positive at the limit: Newton's method comes down on the root
	x := limit
	for range 100 {
		left := math.Exp(-(i + x) / scale)
		step := (x + limit*math.Expm1(-(i+x)/scale)) / (1 - limit/scale*left)
		x -= step
		if !(step > 1e-13*x) {
			break
		}
	}
	return math.Max(x, 0)
}

// Charge returns Q_rr = I_RM²/(2·a) + I_RM·τ_rr [C] when the current falls from i [A] at the slope a [A/s].
func (r Recovery) Charge(i, slope float64) float64 {
	peak := r.Peak(i, slope)
	if peak == 0 {
		return 0
	}
	return peak * (peak/(2*slope) + r.TauRR)
}
