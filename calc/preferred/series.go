package preferred

import (
	"math"
	"strconv"
)

// Series is an E series of IEC 60063; its number is how many values a decade
// has.
type Series int

// The series of IEC 60063.
const (
	E3   Series = 3
	E6   Series = 6
	E12  Series = 12
	E24  Series = 24
	E48  Series = 48
	E96  Series = 96
	E192 Series = 192
)

// tolerance is the relative difference within which two values are the same [1].
const tolerance = 1e-9

// All lists the series from the coarsest to the finest.
func All() []Series { return []Series{E3, E6, E12, E24, E48, E96, E192} }

// String is the name of the series: "E24".
func (s Series) String() string { return "E" + strconv.Itoa(int(s)) }

// Valid says that the series is one of IEC 60063.
func (s Series) Valid() bool {
	switch s {
	case E3, E6, E12, E24, E48, E96, E192:
		return true
	}
	return false
}

// Values are the values of the decade from 1 up to, not including, 10, in
// rising order [1]; none for a series that is not in IEC 60063.
func (s Series) Values() []float64 {
	if !s.Valid() {
		return nil
	}
	values := make([]float64, s)
	for i := range values {
		values[i] = s.at(i, 0)
	}
	return values
}

// digits are the two or three digits of value i of the decade, 0 <= i < s, and
// how many decimals they carry.
func (s Series) digits(i int) (n, decimals int) {
	if s <= E24 {
		i *= int(E24 / s)
		n = round(10, i, int(E24))
		switch {
		case n >= 26 && n <= 46: // 27 30 33 36 39 43 47
			return n + 1, 1
		case n == 83:
			return 82, 1
		}
		return n, 1
	}
	if n = round(100, i, int(s)); n == 919 {
		n = 920
	}
	return n, 2
}

// round is unit·10^(i/n) to the nearest whole number.
func round(unit float64, i, n int) int {
	return int(math.Round(unit * math.Pow(10, float64(i)/float64(n))))
}

// at is value i of the series in the given decade, where i may lie outside
// 0 <= i < s: the float64 nearest to the decimal value.
func (s Series) at(i, decade int) float64 {
	n := int(s)
	for ; i < 0; i += n {
		decade--
	}
	for ; i >= n; i -= n {
		decade++
	}
	digits, decimals := s.digits(i)
	v, err := strconv.ParseFloat(strconv.Itoa(digits)+"e"+strconv.Itoa(decade-decimals), 64)
	if err != nil || v == 0 {
		return math.NaN()
	}
	return v
}

// below finds the largest value of the series that is at most v, within the
// tolerance, as index and decade.
func (s Series) below(v float64) (i, decade int, ok bool) {
	if !s.Valid() || !(v > 0) || math.IsInf(v, 1) {
		return 0, 0, false
	}
	position := math.Log10(v)
	decade = int(math.Floor(position))
	i = int(float64(s) * (position - float64(decade)))
	// The geometric position is off by rounding only: by at most one value.
	for i += 2; s.at(i, decade) > v*(1+tolerance) || math.IsNaN(s.at(i, decade)); i-- {
		if i < -int(s) {
			return 0, 0, false
		}
	}
	return i, decade, true
}

// AtLeast is the smallest value of the series that is not below v, in any unit.
// It is NaN when v is not a positive finite number, when the series is not
// valid, or when no float64 holds the result.
func AtLeast(v float64, s Series) float64 {
	i, decade, ok := s.below(v)
	if !ok {
		return math.NaN()
	}
	if same(s.at(i, decade), v) {
		return s.at(i, decade)
	}
	return s.at(i+1, decade)
}

// AtMost is the largest value of the series that is not above v, in any unit;
// NaN as in AtLeast.
func AtMost(v float64, s Series) float64 {
	i, decade, ok := s.below(v)
	if !ok {
		return math.NaN()
	}
	return s.at(i, decade)
}

// Nearest is the value of the series whose ratio to v is closest to one, the
// lower of two equally close; NaN as in AtLeast.
func Nearest(v float64, s Series) float64 {
	low, high := AtMost(v, s), AtLeast(v, s)
	if high/v < v/low {
		return high
	}
	return low
}

// same says that two positive values agree within the tolerance.
func same(a, b float64) bool { return math.Abs(a-b) <= tolerance*b }
