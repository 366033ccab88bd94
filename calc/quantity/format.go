package quantity

import (
	"math"
	"strconv"
)

// significant is the number of digits printed.
const significant = 4

// Format writes v, given in the dimension's plain unit, with an SI prefix and
// at most four significant digits: "8.97 V", "63 nC", "0.45", "85 °C",
// "50 V/ns", "30°". Times from 10000 s are written in hours, angles in
// degrees. Outside the prefixes of the dimension the value is written with an
// exponent: "1e-18 F". Parse reads every finite result back.
func Format(v float64, d Dimension) string {
	def := d.definition()
	var buf [40]byte
	if !finite(v) {
		return string(appendUnit(strconv.AppendFloat(buf[:0], v, 'g', -1, 64), def.si))
	}
	if d == Count && v == math.Trunc(v) && math.Abs(v) <= maxCount {
		return strconv.FormatInt(int64(v), 10)
	}
	switch {
	case d == Angle:
		if degrees := v * (180 / math.Pi); finite(degrees) {
			return string(appendScaled(buf[:0], degrees, def, "°"))
		}
	case d == Time && math.Abs(v) >= 9999.5:
		return string(appendScaled(buf[:0], v/3600, def, "h"))
	}
	return string(appendScaled(buf[:0], v, def, ""))
}

// appendScaled writes v with the prefix that leaves one to three digits before
// the point; a fixed unit, if not empty, replaces prefix and unit.
func appendScaled(buf []byte, v float64, def *definition, fixed string) []byte {
	digits, exp, negative := decimal(v)
	if negative {
		buf = append(buf, '-')
	}
	lo, hi := def.printed()
	if fixed != "" {
		lo, hi = 0, 0
	}
	scale := min(max(3*floorDiv(exp, 3), lo), hi)
	text := fixed
	if fixed == "" {
		text = def.unitAt(scale)
	}
	switch at := exp - scale; {
	case at >= 0 && at <= 5, lo == 0 && at < 0 && at >= -4:
		buf = appendPlain(buf, digits, at)
	default:
		buf = appendPlain(buf, digits, 0)
		buf = append(buf, 'e')
		buf = strconv.AppendInt(buf, int64(exp), 10)
		if fixed == "" {
			text = def.si
		}
	}
	return appendUnit(buf, text)
}

// printed bounds the powers of ten that unitAt has a unit for.
func (def *definition) printed() (lo, hi int) {
	if def.per == perTime {
		return 0, 9
	}
	return def.lo, def.hi
}

// unitAt is the unit that stands for 10^scale SI units: mV, kΩ, V/µs.
func (def *definition) unitAt(scale int) string {
	if scale == 0 {
		return def.si
	}
	if def.per == perTime {
		return def.units[0].symbol + "/" + prefix(-scale) + "s"
	}
	return prefix(scale) + def.si
}

// decimal rounds v to its significant digits, without trailing zeros, and the
// power of ten of the first one. Zero has no sign.
func decimal(v float64) (digits []byte, exp int, negative bool) {
	if v == 0 {
		return []byte{'0'}, 0, false
	}
	text := strconv.AppendFloat(make([]byte, 0, 16), math.Abs(v), 'e', significant-1, 64)
	digits = append(digits, text[0])
	digits = append(digits, text[2:1+significant]...) // behind the point
	for len(digits) > 1 && digits[len(digits)-1] == '0' {
		digits = digits[:len(digits)-1]
	}
	for _, c := range text[3+significant:] { // behind e and the sign
		exp = exp*10 + int(c-'0')
	}
	if text[2+significant] == '-' {
		exp = -exp
	}
	return digits, exp, v < 0
}

// appendPlain writes digits so that the first stands for 10^at.
func appendPlain(buf, digits []byte, at int) []byte {
	if at < 0 {
		buf = append(buf, '0', '.')
		for ; at < -1; at++ {
			buf = append(buf, '0')
		}
		return append(buf, digits...)
	}
	for i, c := range digits {
		if i == at+1 {
			buf = append(buf, '.')
		}
		buf = append(buf, c)
	}
	for i := len(digits); i <= at; i++ {
		buf = append(buf, '0')
	}
	return buf
}

// appendUnit writes the unit behind a number: none for ratios, degrees of an
// angle without a blank.
func appendUnit(buf []byte, text string) []byte {
	switch text {
	case "", "1":
		return buf
	case "°":
		return append(buf, text...)
	}
	return append(append(buf, ' '), text...)
}

func floorDiv(a, b int) int {
	q := a / b
	if a%b < 0 {
		q--
	}
	return q
}
