package modulation

import "math"

// ZeroSequence is what the modulator adds to the three references alike.
type ZeroSequence uint8

// Zero sequences.
const (
	None          ZeroSequence = iota
	ThirdHarmonic              // sin 3θ/6 of the index
	MinMax                     // the mean of the largest and the smallest reference to 0: symmetrical space vector
	Clamp60                    // the reference of largest magnitude to its rail, centred on the peak of the phase
	Clamp120High               // the largest reference to the upper rail
	Clamp120Low                // the smallest reference to the lower rail
)

// tie is how far the magnitudes of two references differ where one of them counts as the larger [1].
const tie = 1e-9

// atRail is the distance to 0 or 1 within which a duty counts as there [1].
const atRail = 1e-12

// Duty is the duty of the leg at the angle θ of its reference m·sin θ, m over half the DC-link voltage: d = 1/2 + (m·sin θ + z)/2, clipped to
// [0, 1]. θ is given by its sine and cosine. Over-modulated, the zero sequences are those of the references before they are clipped.
func (z ZeroSequence) Duty(m, sin, cos float64) float64 {
	a := m * sin
	d := 0.0
	switch z {
	case ThirdHarmonic:
		d = m * sin * (3 - 4*sin*sin) / 6
	case MinMax, Clamp60, Clamp120High, Clamp120Low:
		b, c := m*(-0.5*sin-math.Sqrt(3)/2*cos), m*(-0.5*sin+math.Sqrt(3)/2*cos)
		top, bottom := max(a, b, c), min(a, b, c)
		switch {
		case z == MinMax:
			d = -(top + bottom) / 2
		case z == Clamp120High, z == Clamp60 && top > -bottom+tie:
			d = 1 - top
		default:
			d = -1 - bottom
		}
	}
	d = 0.5 + (a+d)/2
	switch {
	case d > 1-atRail:
		return 1
	case d < atRail:
		return 0
	}
	return d
}

// kink tells whether the duty changes its law at the angle of k times 30°.
func (z ZeroSequence) kink(k int) bool {
	switch z {
	case MinMax:
		return k%2 == 1
	case Clamp60:
		return k%2 == 0
	case Clamp120High:
		return k%4 == 1
	case Clamp120Low:
		return k%4 == 3
	}
	return false
}
