package quantity

import "strings"

// letter is one code letter: it stands for the decimal point and multiplies.
type letter struct {
	text   string
	exp    int    // power of ten
	prefix string // SI prefix of the meaning
	noLead bool   // refused as the first character
}

// Code letters of IEC 60062 (from memory), k in both cases and µ in its three
// spellings. L as the first character is refused: by the rule of the code L50
// is 0.50 mΩ, but it is also taken for 50 mΩ; 4L7 and 50L leave no doubt.
var (
	resistanceLetters = [...]letter{
		{text: "R"},
		{text: "k", exp: 3, prefix: "k"},
		{text: "K", exp: 3, prefix: "k"},
		{text: "M", exp: 6, prefix: "M"},
		{text: "G", exp: 9, prefix: "G"},
		{text: "T", exp: 12, prefix: "T"},
		{text: "L", exp: -3, prefix: "m", noLead: true},
	}
	capacitanceLetters = [...]letter{
		{text: "n", exp: -9, prefix: "n"},
		{text: "u", exp: -6, prefix: "µ"},
		{text: "\u00b5", exp: -6, prefix: "µ"},
		{text: "\u03bc", exp: -6, prefix: "µ"},
		{text: "p", exp: -12, prefix: "p"},
		{text: "m", exp: -3, prefix: "m"},
		{text: "F"},
	}
	inductanceLetters = [...]letter{
		{text: "n", exp: -9, prefix: "n"},
		{text: "u", exp: -6, prefix: "µ"},
		{text: "\u00b5", exp: -6, prefix: "µ"},
		{text: "\u03bc", exp: -6, prefix: "µ"},
		{text: "m", exp: -3, prefix: "m"},
	}
	voltageLetters = [...]letter{{text: "V"}} // 6V3 on a capacitor
)

// letterCode is a value written in a code: "4k7" is 4, k, 7.
type letterCode struct {
	before, after string // digits; before may have a point when after is empty
	letter        *letter
}

// scanLetterCode takes the whole of s for a code: 4k7, R47, 100n, and with the
// letter last also "4.7k" and "100 R". A code has no sign.
func scanLetterCode(s string, letters []letter) (letterCode, bool) {
	for i := range letters {
		l := &letters[i]
		before, after, found := strings.Cut(s, l.text)
		if !found {
			continue
		}
		code := letterCode{before: before, after: after, letter: l}
		switch {
		case after != "":
			return code, digitsOnly(before) && digitsOnly(after) && (before != "" || !l.noLead)
		default:
			code.before = trim(before)
			whole, fraction, point := strings.Cut(code.before, ".")
			return code, whole != "" && digitsOnly(whole) && digitsOnly(fraction) && (!point || fraction != "")
		}
	}
	return letterCode{}, false
}

func digitsOnly(s string) bool {
	for i := 0; i < len(s); i++ {
		if s[i] < '0' || s[i] > '9' {
			return false
		}
	}
	return true
}

// text is the code's number with a decimal point.
func (c letterCode) text() string {
	switch {
	case c.after == "":
		return c.before
	case c.before == "":
		return "0." + c.after
	}
	return c.before + "." + c.after
}

// value converts the code's number, given as its text, to the SI unit.
func (c letterCode) value(decimal string) (float64, bool) {
	n, _, ok := scanNumber(decimal)
	if !ok {
		return 0, false
	}
	return n.value(c.letter.exp, 0)
}

// toleranceLetters of IEC 60062 (from memory) [1].
var toleranceLetters = [...]struct {
	text      string
	low, high float64
}{
	{"B", 0.001, 0.001}, {"C", 0.0025, 0.0025}, {"D", 0.005, 0.005}, {"F", 0.01, 0.01}, {"G", 0.02, 0.02},
	{"J", 0.05, 0.05}, {"K", 0.10, 0.10}, {"M", 0.20, 0.20}, {"Z", 0.20, 0.80},
}

func toleranceLetter(s string) (deviation, bool) {
	for _, t := range toleranceLetters {
		if t.text == s {
			return deviation{low: t.low, high: t.high, relative: true}, true
		}
	}
	return deviation{}, false
}
