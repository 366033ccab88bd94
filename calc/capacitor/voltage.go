package capacitor

import "math"

// VoltagePolicy is the fraction of the rated voltage up to which a capacitor is
// used, by family.
type VoltagePolicy struct {
	Ceramic   float64 // class 1 and class 2 [1]
	Film      float64 // film [1]
	Aluminium float64 // aluminium electrolytic [1]
	Tantalum  float64 // tantalum [1]
}

// DefaultVoltagePolicy returns 60 % for ceramics, 80 % for film and aluminium and
// 50 % for tantalum ([nasa-eee-inst-002], from memory; ceramics also
// [src-derating]).
func DefaultVoltagePolicy() VoltagePolicy {
	return VoltagePolicy{Ceramic: 0.60, Film: 0.80, Aluminium: 0.80, Tantalum: 0.50}
}

// Fraction returns the policy's fraction for a kind [1], NaN for Unspecified.
func (p VoltagePolicy) Fraction(kind Kind) float64 {
	switch kind {
	case ClassOne, ClassTwo:
		return p.Ceramic
	case Film:
		return p.Film
	case Aluminium:
		return p.Aluminium
	case Tantalum:
		return p.Tantalum
	}
	return math.NaN()
}

// DeratedVoltage returns the highest voltage [V] that the policy allows across a
// capacitor of the kind with the rated voltage [V]. It is NaN for a kind that is
// not specified.
func DeratedVoltage(rated float64, kind Kind, policy VoltagePolicy) float64 {
	return rated * policy.Fraction(kind)
}
