package quantity

import (
	"strconv"
	"strings"
	"unicode/utf8"
)

// Error is the refusal of a text: what was read, what was expected, and why
// the text is not that.
type Error struct {
	Read     string // the text, cut to maxText bytes
	Expected string // dimension and units with examples
	Reason   string // one clause
}

// Error words the refusal in one sentence.
func (e *Error) Error() string {
	return "read " + strconv.Quote(e.Read) + ", expected " + e.Expected + ": " + e.Reason
}

// Reasons that need no look at the text.
const (
	reasonTooLong = "it is longer than 64 bytes"
	reasonEmpty   = "it is empty"
	reasonRange   = "the number is too large or too small to be represented"
)

func fault(text string, d Dimension, reason string) *Error {
	expected := d.String()
	if accepts := d.Accepts(); accepts != "" {
		expected += " (" + accepts + ")"
	}
	return &Error{Read: shorten(text), Expected: expected, Reason: reason}
}

// shorten makes any text valid UTF-8 of at most maxText bytes, with an ellipsis
// where it was cut.
func shorten(text string) string {
	if len(text) > 2*maxText {
		text = text[:2*maxText] // bounds the work; the rest is cut below
	}
	text = strings.ToValidUTF8(text, "\ufffd")
	if len(text) <= maxText {
		return text
	}
	cut := maxText - len("…")
	for cut > 0 && !utf8.RuneStart(text[cut]) {
		cut--
	}
	return text[:cut] + "…"
}

// diagnose says why s, trimmed and not empty, is no value of the dimension.
func diagnose(s string, d Dimension) string {
	unsigned, _ := cutSign(s)
	lower := strings.ToLower(unsigned)
	switch {
	case strings.HasPrefix(lower, "nan"), strings.HasPrefix(lower, "inf"):
		return "it is not a finite number"
	case strings.HasPrefix(lower, "0x"):
		return "hexadecimal numbers are not read"
	case strings.Contains(s, ","):
		return "commas are not read; write a decimal point and no digit groups"
	case strings.Contains(s, "_"):
		return "underscores are not read"
	case d == Resistance && strings.HasPrefix(s, "L") && len(s) > 1 && digitsOnly(s[1:]):
		return s + " may mean 0." + s[1:] + " mΩ (L as the decimal point) or " + s[1:] + " mΩ; write the value in mΩ"
	}
	n, rest, ok := scanNumber(s)
	if !ok {
		return "it does not start with a number"
	}
	unitText := trim(rest)
	if unitText == "" {
		if n.zero {
			return "zero carries its unit too; write " + n.digits + " " + d.Unit()
		}
		return "it is a bare number; the unit is missing"
	}
	if strings.ContainsAny(unitText, "±+\u2212") || strings.HasSuffix(unitText, "%") && unitText != "%" {
		return "a tolerance is read behind a typical value only, with a blank before it"
	}
	return diagnoseUnit(unitText, d)
}

// diagnoseUnit says why the unit text is none of the dimension.
func diagnoseUnit(text string, d Dimension) string {
	def := d.definition()
	if d == TemperatureDifference && isCelsius(text) {
		return "a temperature difference is written in K"
	}
	if d == Temperature && text == "K" {
		return "a temperature is written in °C; K is for differences"
	}
	if reason := def.diagnosePrefix(text); reason != "" {
		return reason
	}
	if own, ok := def.foldCase(text); ok {
		reason := strconv.Quote(text) + " is not " + own + "; upper and lower case matter in units"
		if other, ok := unitOf(text); ok {
			reason += ", " + text + " is a unit of " + other.String()
		}
		return reason
	}
	if other, ok := unitOf(text); ok {
		return text + " is a unit of " + other.String()
	}
	return "the unit " + strconv.Quote(text) + " is not known"
}

func isCelsius(text string) bool {
	_, _, ok := Temperature.definition().lookup(text)
	return ok
}

// unitOf finds the dimension that takes the unit text.
func unitOf(text string) (Dimension, bool) {
	for _, d := range Dimensions() {
		if _, _, ok := d.definition().lookup(text); ok {
			return d, true
		}
	}
	return None, false
}

// prefixNames are the SI prefixes in words.
var prefixNames = [...]struct {
	exp  int
	name string
}{{-15, "femto"}, {-12, "pico"}, {-9, "nano"}, {-6, "micro"}, {-3, "milli"}, {3, "kilo"}, {6, "mega"}, {9, "giga"}, {12, "tera"}}

func prefixName(exp int) string {
	for _, p := range prefixNames {
		if p.exp == exp {
			return p.name
		}
	}
	return ""
}

// cutDenominator splits a compound unit in front of its slash.
func (def *definition) cutDenominator(text string) (head, tail string) {
	if slash := strings.IndexByte(text, '/'); slash >= 0 && def.per != perNothing {
		return text[:slash], text[slash:]
	}
	return text, ""
}

// diagnosePrefix explains a prefix that stands alone, is written in the wrong
// case, or is not used with the dimension: 1 M on a capacitor.
func (def *definition) diagnosePrefix(text string) string {
	head, tail := def.cutDenominator(text)
	for i := range def.units {
		u := &def.units[i]
		p, symbol := strings.CutSuffix(head, u.symbol)
		if u.fixed || p == "" || tail != "" && !symbol {
			continue
		}
		exp, known := prefixExp(p)
		switch right := rightCase(p); {
		case known && (exp < def.lo || exp > def.hi):
			return p + " is " + prefixName(exp) + ", which a " + def.name + " does not take" + def.smallPrefixes(p)
		case known && !symbol && def.per == perNothing:
			return p + " is a prefix without its unit; write " + p + u.symbol
		case !known && right != "":
			exp, _ = prefixExp(right)
			return strconv.Quote(p) + " is no SI prefix; " + prefixName(exp) + " is written " + right
		}
	}
	return ""
}

// smallPrefixes reminds of m and µ where M was read.
func (def *definition) smallPrefixes(p string) string {
	if p != "M" || def.lo > -6 {
		return ""
	}
	return "; m is milli, µ (or u) is micro"
}

// rightCase is the prefix that p becomes in the other case, or nothing.
func rightCase(p string) string {
	for _, q := range []string{strings.ToLower(p), strings.ToUpper(p)} {
		if _, ok := prefixExp(q); ok && q != p {
			return q
		}
	}
	return ""
}

// foldCase finds the dimension's unit that text spells in the wrong case.
func (def *definition) foldCase(text string) (own string, ok bool) {
	head, tail := def.cutDenominator(text)
	for i := range def.units {
		u := &def.units[i]
		at := len(head) - len(u.symbol)
		if u.symbol == "" || at < 0 || !strings.EqualFold(head[at:], u.symbol) || head[at:] == u.symbol {
			continue
		}
		if _, _, known := def.lookup(head[:at] + u.symbol + tail); known {
			return head[:at] + u.symbol + tail, true
		}
	}
	return "", false
}
