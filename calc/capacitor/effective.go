package capacitor

import (
	"math"
	"slices"
)

// BiasPoint is one point of the curve of capacitance over DC voltage.
type BiasPoint struct {
	Voltage   float64 // DC voltage across the capacitor [V]
	Remaining float64 // capacitance there over that at 0 V [1]
}

// BiasRemaining returns the fraction of the capacitance that remains at voltage
// v [V]. The curve is ordered by rising voltage; between its points it is
// linear, and (0 V, 1) stands in front of it when it does not start at 0 V. The
// sign of v does not matter: the dielectric has no polarity.
//
// beyond reports that v lies above the last point. There the last segment
// continues downward if it falls and stays level if it does not, floored at 0:
// measured curves flatten with voltage, so the straight continuation does not
// overstate what remains. It is therefore a value for the smallest capacitance
// only. An empty curve or an unknown v gives NaN.
func BiasRemaining(curve []BiasPoint, v float64) (remaining float64, beyond bool) {
	v = math.Abs(v)
	if len(curve) == 0 || math.IsNaN(v) {
		return math.NaN(), false
	}
	before, after := BiasPoint{Voltage: 0, Remaining: 1}, curve[0]
	rest := curve[1:]
	if after.Voltage <= 0 { // the curve brings its own point at 0 V
		before = after
	}
	for v > after.Voltage && len(rest) > 0 {
		before, after, rest = after, rest[0], rest[1:]
	}
	span := after.Voltage - before.Voltage
	slope := 0.0
	if span > 0 {
		slope = (after.Remaining - before.Remaining) / span
	}
	if v > after.Voltage {
		return math.Max(0, after.Remaining+math.Min(0, slope)*(v-after.Voltage)), true
	}
	return after.Remaining + slope*(v-after.Voltage), false
}

// Ageing returns the fraction that remains of a class 2 ceramic's capacitance
// after a service time [s] since its last heat treatment, for a loss per decade
// of time [1]:
//
//	1 - k·log10(t/1 h)
//
// It is 1 during the first hour, to which the nominal value refers, and never
// below 0. Source: the ageing law of ceramic makers [holy-stone].
func Ageing(perDecade, serviceTime float64) float64 {
	const hour = 3600 // [s]
	if serviceTime <= hour || perDecade == 0 {
		return 1
	}
	return math.Max(0, 1-perDecade*math.Log10(serviceTime/hour))
}

// The names of the factors of a Derating, in its order.
const (
	FactorTolerance   = "tolerance"
	FactorTemperature = "temperature"
	FactorBias        = "bias voltage"
	FactorAgeing      = "ageing"
)

// Factor is one multiplier of the nominal capacitance.
type Factor struct {
	Name  string  // one of the Factor constants
	Value float64 // multiplier [1]
}

// Derating is the list of multipliers that lead from the nominal to the
// effective capacitance.
type Derating []Factor

// NewDerating lists the factors, always all four in the same order. tolerance
// and temperatureChange are signed relative changes [1], bias and ageing
// remaining fractions [1].
func NewDerating(tolerance, temperatureChange, bias, ageing float64) Derating {
	return Derating{
		{FactorTolerance, 1 + tolerance},
		{FactorTemperature, 1 + temperatureChange},
		{FactorBias, bias},
		{FactorAgeing, ageing},
	}
}

// Product returns the product of the factors [1].
func (d Derating) Product() float64 {
	product := 1.0
	for _, f := range d {
		product *= f.Value
	}
	return product
}

// Ranked returns the factors by effect, the one that takes most first; equal
// ones keep their order, unknown ones (NaN) come first. d is not changed.
func (d Derating) Ranked() Derating {
	ranked := slices.Clone(d)
	slices.SortStableFunc(ranked, func(a, b Factor) int {
		switch {
		case math.IsNaN(a.Value) && math.IsNaN(b.Value):
			return 0
		case math.IsNaN(a.Value) || a.Value < b.Value:
			return -1
		case math.IsNaN(b.Value) || a.Value > b.Value:
			return 1
		}
		return 0
	})
	return ranked
}

// Effective returns the effective capacitance [F]: the nominal capacitance [F]
// times every factor of NewDerating, which describes the arguments.
func Effective(nominal, tolerance, temperatureChange, bias, ageing float64) float64 {
	return nominal * NewDerating(tolerance, temperatureChange, bias, ageing).Product()
}
