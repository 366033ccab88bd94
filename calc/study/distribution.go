package study

import (
	"math"

	"floatrail/calc/stage"
)

// Distribution is how an input is drawn between its ends.
type Distribution uint8

// Distributions.
const (
	// Uniform is even between min and max.
	Uniform Distribution = iota
	// Normal is a normal distribution about typ, truncated at min and max, which lie three standard deviations away, each on its side: the two-piece
	// normal distribution (Fechner 1897; Wallis, Statistical Science 29(1), 2014, from memory). Its density is continuous, its mode is typ, which is
	// its mean where the ends lie equally far.
	Normal
)

// String gives the contract's name of the distribution.
func (d Distribution) String() string { return [...]string{"UNIFORM", "NORMAL"}[d] }

// reach is the distance from typ to an end of a truncated normal distribution [standard deviation].
const reach = 3

// within is the part of a normal distribution that lies within reach on both sides.
var within = math.Erf(reach / math.Sqrt2)

// At is the quantile of a range at u, strictly between 0 and 1; NaN where an end that matters is not known.
func (d Distribution) At(t stage.Triple, u float64) float64 {
	if d == Uniform {
		return t.Min + u*(t.Max-t.Min)
	}
	below, above := t.Typ-t.Min, t.Max-t.Typ
	left := below / (below + above) // part of the distribution below typ
	if below+above == 0 {
		return t.Typ
	}
	if u < left {
		return math.Max(t.Min, t.Typ-below*fold(1-u/left))
	}
	return math.Min(t.Max, t.Typ+above*fold((u-left)/(1-left)))
}

// fold is the quantile of the absolute value of a truncated standard normal variable, as a share of its reach [1].
func fold(u float64) float64 { return math.Sqrt2 / reach * math.Erfinv(u*within) }
