package quantity

import (
	"math"
	"strings"
)

// deviation is a tolerance: how far below and above the value.
type deviation struct {
	low, high float64 // magnitudes, in the unit of the value or as a ratio
	relative  bool    // ratio of the value's magnitude
}

// around spans the deviation about v.
func (dev deviation) around(v float64) Spread {
	scale := 1.0
	if dev.relative {
		scale = math.Abs(v)
	}
	return Spread{Low: v - dev.low*scale, Value: v, High: v + dev.high*scale, HasTolerance: true}
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

// cutTolerance splits a typ text into the value and the tolerance after it.
func cutTolerance(s string) (head, tail string) {
	_, rest, ok := scanNumber(s)
	if !ok {
		rest = s
	}
	at := len(s) - len(rest)
	if i := strings.IndexAny(rest, "±+-\u2212"); i >= 0 {
		if at+i == 0 {
			return s, ""
		}
		return trim(s[:at+i]), s[at+i:]
	}
	if !strings.HasSuffix(rest, "%") {
		return s, ""
	}
	// A plain percentage: the last number, set off by a blank.
	body := trim(s[:len(s)-1])
	i := len(body)
	for i > at && (body[i-1] == '.' || body[i-1] >= '0' && body[i-1] <= '9') {
		i--
	}
	head = trim(body[:i])
	if i == len(body) || head == "" || len(head) == i {
		return s, ""
	}
	return head, s[i:]
}

// Limits of a relative tolerance: at -100 % nothing is left of the value, and
// more than +1000 % is no tolerance.
const (
	maxToleranceLow  = 1.0
	maxToleranceHigh = 10.0
)

const reasonTolerance = "the tolerance is not understood; write ±10 %, 10 % or +80/-20 %"

// parseDeviation reads what follows a value: "±10 %", "10%", "+80/-20 %",
// "±0.5 pF".
func parseDeviation(tail string, d Dimension) (dev deviation, reason string) {
	symmetric := true
	switch {
	case strings.HasPrefix(tail, "±"):
		tail = tail[len("±"):]
	case strings.HasPrefix(tail, "+/-"):
		tail = tail[len("+/-"):]
	case strings.HasPrefix(tail, "+-"):
		tail = tail[len("+-"):]
	case tail != "" && tail[0] >= '0' && tail[0] <= '9':
	default:
		symmetric = false
	}
	if !symmetric {
		return parseTwoSided(tail, d)
	}
	tail = trimLeft(tail)
	if rest, _ := cutSign(tail); len(rest) != len(tail) {
		return deviation{}, reasonTolerance
	}
	n, rest, ok := scanNumber(tail)
	if !ok {
		return deviation{}, reasonTolerance
	}
	x, relative, reason := deviationValue(&n, trim(rest), d)
	if reason != "" {
		return deviation{}, reason
	}
	dev = deviation{low: x, high: x, relative: relative}
	return dev, dev.excess()
}

// parseTwoSided reads "+80/-20 %", "-20 %/+80 %", "+80% -20%": two signed
// numbers of opposite sign; the first may leave its unit to the second.
func parseTwoSided(tail string, d Dimension) (dev deviation, reason string) {
	first, rest, ok := scanNumber(tail)
	if !ok {
		return deviation{}, reasonTolerance
	}
	i := strings.IndexAny(rest, "+-\u2212")
	if i < 0 {
		return deviation{}, "the tolerance has one side only; write ±, or both sides such as +80/-20 %"
	}
	second, unitText, ok := scanNumber(rest[i:])
	if !ok || first.negative == second.negative {
		return deviation{}, reasonTolerance
	}
	unitText = trim(unitText)
	firstUnit := trim(strings.TrimSuffix(trim(rest[:i]), "/"))
	if firstUnit == "" {
		firstUnit = unitText
	}
	if firstUnit != unitText {
		return deviation{}, "both sides of the tolerance must have the same unit"
	}
	low, high := &first, &second
	if second.negative {
		low, high = high, low
	}
	low.negative = false
	a, relative, reason := deviationValue(low, unitText, d)
	if reason != "" {
		return deviation{}, reason
	}
	b, _, reason := deviationValue(high, unitText, d)
	if reason != "" {
		return deviation{}, reason
	}
	dev = deviation{low: a, high: b, relative: relative}
	return dev, dev.excess()
}

// deviationValue converts one side: % is relative, a unit of the dimension (K
// for a temperature) absolute.
func deviationValue(n *number, unitText string, d Dimension) (x float64, relative bool, reason string) {
	if unitText == "%" {
		x, ok := n.value(-2, 0)
		if !ok {
			return 0, false, reasonRange
		}
		return x, true, ""
	}
	def := d.definition()
	if d == Temperature {
		def = TemperatureDifference.definition()
	}
	exp, factor, ok := def.lookup(unitText)
	if !ok {
		return 0, false, reasonTolerance
	}
	if x, ok = n.value(exp, factor); !ok {
		return 0, false, reasonRange
	}
	return x, false, ""
}

// excess says that a relative deviation is too wide, or nothing.
func (dev deviation) excess() string {
	if dev.relative && (dev.low >= maxToleranceLow || dev.high > maxToleranceHigh) {
		return "a tolerance must stay below 100 % downwards and 1000 % upwards"
	}
	return ""
}

// ParseTolerance reads an IEC 60062 tolerance letter or a percentage ("K",
// "10 %", "±10%", "+80/-20 %") into relative deviations: the value v lies
// between v·(1 + low) and v·(1 + high), low <= 0 <= high [1]. Below 10 pF the
// letters B to G of a capacitor mean picofarads; ParseMarking knows that.
func ParseTolerance(letterOrText string) (low, high float64, ok bool) {
	s := trim(letterOrText)
	if len(s) > maxText || s == "" {
		return 0, 0, false
	}
	if dev, isLetter := toleranceLetter(s); isLetter {
		return -dev.low, dev.high, true
	}
	dev, reason := parseDeviation(s, None)
	if reason != "" || !dev.relative {
		return 0, 0, false
	}
	return -dev.low, dev.high, true
}
