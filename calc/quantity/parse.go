package quantity

import "strings"

// maxText bounds the length of a text [bytes].
const maxText = 64

// maxCount bounds a Count, far above any number of parts [1].
const maxCount = 1_000_000_000

// Reading tells how a letter code or a three-digit code was understood.
type Reading struct {
	Text    string // as written: "4k7"
	Meaning string // as understood: "4.7 kΩ"
}

// Parse reads a single value with its unit into the dimension's plain unit. A
// tolerance is refused. The Reading is non-nil only when a letter code was
// interpreted; the error is always an *Error.
func Parse(text string, d Dimension) (float64, *Reading, error) {
	v, reading, reason := parse(text, d)
	if reason != "" {
		return 0, nil, fault(text, d, reason)
	}
	return v, reading, nil
}

// parse is Parse with the reason of a refusal in place of an error.
func parse(text string, d Dimension) (v float64, reading *Reading, reason string) {
	if len(text) > maxText {
		return 0, nil, reasonTooLong
	}
	s := trim(text)
	def := d.definition()
	switch {
	case s == "":
		return 0, nil, reasonEmpty
	case d == Count:
		return parseCount(s)
	case len(def.units) == 0:
		return 0, nil, "this field takes no value"
	}
	n, rest, ok := scanNumber(s)
	if ok {
		if exp, factor, known := def.lookup(trimLeft(rest)); known {
			if v, ok = n.value(exp, factor); !ok {
				return 0, nil, reasonRange
			}
			return v, nil, ""
		}
	}
	if code, isCode := scanLetterCode(s, def.letters); isCode {
		decimal := code.text()
		if v, ok = code.value(decimal); !ok {
			return 0, nil, reasonRange
		}
		return v, &Reading{Text: s, Meaning: decimal + " " + code.letter.prefix + def.si}, ""
	}
	return 0, nil, diagnose(s, d)
}

// parseCount reads a whole number without sign, point or exponent.
func parseCount(s string) (float64, *Reading, string) {
	v := 0
	for i := 0; i < len(s); i++ {
		if s[i] < '0' || s[i] > '9' {
			return 0, nil, "it is not a whole number of plain digits"
		}
		if v = v*10 + int(s[i]-'0'); v > maxCount {
			return 0, nil, reasonRange
		}
	}
	return float64(v), nil, ""
}

// Spread is a typical value with the range that its tolerance spans. Without a
// tolerance all three are equal.
type Spread struct {
	Low          float64 // in the dimension's unit
	Value        float64 // in the dimension's unit
	High         float64 // in the dimension's unit
	HasTolerance bool
}

// ParseTyp reads a value that a tolerance may follow: "220 nF ±10 %", "220 nF
// 10%", "220 nF +80/-20 %", "10 pF ±0.5 pF". A percentage is relative to the
// magnitude of the value. Refused are a percentage on a temperature in °C, on
// a value that is itself written in % (relative or in points?), a one-sided
// tolerance, two unequal percentages on a negative value, and a percentage of
// 100 or more downwards.
func ParseTyp(text string, d Dimension) (Spread, *Reading, error) {
	if len(text) > maxText {
		return Spread{}, nil, fault(text, d, reasonTooLong)
	}
	s := trim(text)
	head, tail := cutTolerance(s)
	v, reading, reason := parse(head, d)
	if reason != "" {
		return Spread{}, nil, fault(text, d, reason)
	}
	if tail == "" {
		return Spread{Low: v, Value: v, High: v}, reading, nil
	}
	dev, reason := parseDeviation(tail, d)
	if reason == "" {
		reason = dev.misfit(v, head, d)
	}
	if reason != "" {
		return Spread{}, nil, fault(text, d, reason)
	}
	spread := dev.around(v)
	if !finite(spread.Low) || !finite(spread.High) {
		return Spread{}, nil, fault(text, d, reasonRange)
	}
	return spread, reading, nil
}

// misfit says why the deviation cannot stand after the value v that head is
// the text of, or nothing.
func (dev deviation) misfit(v float64, head string, d Dimension) string {
	switch {
	case !dev.relative:
		return ""
	case d == Temperature:
		return "a percentage of a temperature in °C has no meaning; give the tolerance in K"
	case d == Ratio && strings.HasSuffix(head, "%"):
		return "a tolerance in % on a value in % is ambiguous; write the value as a plain number, or min and max"
	case v < 0 && dev.low != dev.high:
		return "two unequal percentages on a negative value are ambiguous; give min and max"
	}
	return ""
}
