package quantity

import (
	"strings"
	"unicode/utf8"
)

// nextToken cuts the first token off a marking; it is empty at the end.
// A number and a unit set off by a blank are one token ("100 nF", "10 %"), and
// so is a tolerance with its signs and slash ("+80/-20 %"). A hyphen may be a
// sign when fresh, at the start of the line, and behind a blank or another
// separator, but not directly behind a token.
func nextToken(s string, fresh bool) (token, rest string) {
	for s != "" {
		if n := blank(s); n > 0 {
			s, fresh = s[n:], true
			continue
		}
		if startsTolerance(s, fresh) {
			return cutToleranceToken(s)
		}
		if !isSeparator(s[0]) {
			break
		}
		fresh = s[0] != '-'
		s = s[1:]
	}
	n := plainLength(s)
	token, rest = s[:n], s[n:]
	if !joins(token) {
		return token, rest
	}
	joined := false
	for behind := trimLeft(rest); len(behind) < len(rest); behind = trimLeft(rest) {
		next := behind[:plainLength(behind)]
		if !continues(token, next, joined) {
			break
		}
		token, rest, joined = token+" "+next, behind[len(next):], true
	}
	return token, rest
}

func isSeparator(c byte) bool { return c == '/' || c == ',' || c == ';' || c == '-' }

// plainLength is the length of s up to a separator, a blank or a sign.
func plainLength(s string) int {
	for i := 0; i < len(s); i++ {
		if isSeparator(s[i]) || s[i] == '+' || blank(s[i:]) > 0 || strings.HasPrefix(s[i:], "±") {
			return i
		}
	}
	return len(s)
}

// startsTolerance: ± and + always, a hyphen only where it can be a sign.
func startsTolerance(s string, fresh bool) bool {
	if s[0] == '+' || strings.HasPrefix(s, "±") || strings.HasPrefix(s, "\u2212") {
		return true
	}
	return fresh && len(s) > 1 && s[0] == '-' && s[1] >= '0' && s[1] <= '9'
}

// cutToleranceToken takes signs, digits, blanks and slashes up to a % or to the
// end of the unit, and a second side behind it.
func cutToleranceToken(s string) (token, rest string) {
	i := toleranceSide(s)
	behind := trimLeft(strings.TrimPrefix(trimLeft(s[i:]), "/"))
	if behind != "" && (behind[0] == '+' || behind[0] == '-') && len(behind) > 1 && behind[1] >= '0' && behind[1] <= '9' {
		i = len(s) - len(behind)
		i += toleranceSide(s[i:])
	}
	return trim(s[:i]), s[i:]
}

func toleranceSide(s string) int {
	for i := 0; i < len(s); {
		_, size := utf8.DecodeRuneInString(s[i:])
		switch {
		case s[i] == '%':
			return i + 1
		case strings.ContainsAny(s[i:i+size], "0123456789.+-/±\u2212") || blank(s[i:]) > 0:
			i += size
		default:
			return i + plainLength(s[i:])
		}
	}
	return len(s)
}

// joins says that the token is a number to which a unit behind a blank may
// belong, and no case size.
func joins(token string) bool {
	n, rest, ok := scanNumber(token)
	if !ok || rest != "" || strings.Contains(caseSizes, " "+token+" ") {
		return false
	}
	return n.digits == "0" || n.digits[0] != '0' || strings.HasPrefix(n.digits, "0.")
}

// continues says that next belongs to the number in token: its unit, or DC
// behind the unit V. F behind a three-digit code is a tolerance letter.
func continues(token, next string, joined bool) bool {
	if joined {
		return strings.EqualFold(next, "DC") && strings.HasSuffix(token, "V")
	}
	switch next {
	case "%", "V", "kV", "VDC", "Vdc", "pF", "nF", "uF", "\u00b5F", "\u03bcF", "mF", "p", "n", "u", "\u00b5", "\u03bc":
		return true
	case "F":
		return !(len(token) == 3 && digitsOnly(token))
	}
	return false
}
