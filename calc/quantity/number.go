package quantity

import (
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// number is a decimal number as written, not yet converted.
type number struct {
	digits   string // mantissa as written, without sign
	mantissa uint64 // its digits as a whole number, if they fit
	exp      int    // power of ten of the mantissa's last digit
	inexact  bool   // the mantissa has more digits than fit
	negative bool
	zero     bool // all digits are zero
}

// maxDigits bounds the digits whose whole number certainly fits into 64 bits.
const maxDigits = 18

// scanNumber reads the number at the start of s and returns the rest.
func scanNumber(s string) (n number, rest string, ok bool) {
	s, n.negative = cutSign(s)
	i, count, point, after := 0, 0, -1, 0
	n.zero = true
	for ; i < len(s); i++ {
		c := s[i]
		if c == '.' && point < 0 {
			point = i
			continue
		}
		if c < '0' || c > '9' {
			break
		}
		if c != '0' {
			n.zero = false
		}
		count++
		if point >= 0 {
			after++
		}
		if count <= maxDigits {
			n.mantissa = n.mantissa*10 + uint64(c-'0')
		}
	}
	if count == 0 || point == i-1 { // no digit, or a point without one after it
		return number{}, s, false
	}
	n.digits, n.inexact, n.exp = s[:i], count > maxDigits, -after
	e, used := scanExponent(s[i:])
	n.exp += e
	return n, s[i+used:], true
}

// cutSign takes a leading sign: +, - or U+2212.
func cutSign(s string) (rest string, negative bool) {
	switch {
	case strings.HasPrefix(s, "-"):
		return s[1:], true
	case strings.HasPrefix(s, "+"):
		return s[1:], false
	case strings.HasPrefix(s, "\u2212"):
		return s[len("\u2212"):], true
	}
	return s, false
}

// maxExp is beyond the exponent of any finite value.
const maxExp = 9999

// scanExponent reads e-9 or E+3, at most maxExp; used is 0 where there is
// none.
func scanExponent(s string) (exp, used int) {
	if len(s) < 2 || s[0]|0x20 != 'e' {
		return 0, 0
	}
	tail, negative := cutSign(s[1:])
	i := 0
	for i < len(tail) && tail[i] >= '0' && tail[i] <= '9' {
		exp = min(exp*10+int(tail[i]-'0'), maxExp)
		i++
	}
	if i == 0 {
		return 0, 0
	}
	if negative {
		exp = -exp
	}
	return exp, len(s) - len(tail) + i
}

// powers are the powers of ten that a float64 holds exactly.
var powers = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
	1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// value is the float64 nearest to n·10^exp, times factor unless that is 0. It
// is not finite when the number is too large, and ok is false when it is not
// finite or when digits other than zero vanish.
func (n *number) value(exp int, factor float64) (v float64, ok bool) {
	if n.zero {
		return 0, true
	}
	e := n.exp + exp
	switch {
	case !n.inexact && n.mantissa < 1<<53 && e >= 0 && e < len(powers):
		v = float64(n.mantissa) * powers[e] // one rounding
	case !n.inexact && n.mantissa < 1<<53 && e < 0 && -e < len(powers):
		v = float64(n.mantissa) / powers[-e] // one rounding
	default:
		v = n.slow(exp)
	}
	if factor != 0 {
		v *= factor
	}
	if n.negative {
		v = -v
	}
	return v, v != 0 && !math.IsInf(v, 0)
}

// slow converts what does not fit the exact powers. Out of range strconv
// answers infinity or zero, both of which value refuses.
func (n *number) slow(exp int) float64 {
	after := 0
	if point := strings.IndexByte(n.digits, '.'); point >= 0 {
		after = len(n.digits) - point - 1
	}
	v, err := strconv.ParseFloat(n.digits+"e"+strconv.Itoa(n.exp+after+exp), 64)
	if err != nil {
		return math.Inf(1)
	}
	return v
}

// blank is the length of the blank that s starts with, or 0: a space, a tab, a
// no-break space (U+00A0, U+202F) or a thin space (U+2009).
func blank(s string) int {
	if s == "" {
		return 0
	}
	if s[0] < utf8.RuneSelf {
		if s[0] == ' ' || s[0] == '\t' {
			return 1
		}
		return 0
	}
	switch r, size := utf8.DecodeRuneInString(s); r {
	case '\u00a0', '\u202f', '\u2009':
		return size
	}
	return 0
}

// trimLeft drops leading blanks.
func trimLeft(s string) string {
	for n := blank(s); n > 0; n = blank(s) {
		s = s[n:]
	}
	return s
}

// trim drops blanks at both ends.
func trim(s string) string {
	s = trimLeft(s)
	for s != "" {
		_, size := utf8.DecodeLastRuneInString(s)
		if blank(s[len(s)-size:]) == 0 {
			break
		}
		s = s[:len(s)-size]
	}
	return s
}
