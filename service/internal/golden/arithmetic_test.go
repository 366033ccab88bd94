package golden

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"
)

// This file evaluates the arithmetic of hand sheets: numbers with units, names of earlier results, + - * / ^, brackets and a few functions.

// units are those of sheets, without and with a prefix.
var (
	baseUnits = []string{"V", "A", "F", "C", "s", "Hz", "ohm", "W", "J", "K", "H", "S"}
	prefixes  = map[string]float64{"": 1, "f": 1e-15, "p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "k": 1e3, "M": 1e6}
)

// scale is the factor of a unit to its SI base unit.
func scale(unit string) (float64, bool) {
	switch unit {
	case "":
		return 1, true
	case "%":
		return 0.01, true
	case "h":
		return 3600, true
	case "deg":
		return math.Pi / 180, true
	}
	for _, base := range baseUnits {
		if prefix, ok := strings.CutSuffix(unit, base); ok {
			if f, ok := prefixes[prefix]; ok {
				return f, true
			}
		}
	}
	return 0, false
}

var functions = map[string]func(float64) float64{"ln": math.Log, "exp": math.Exp, "sqrt": math.Sqrt, "log10": math.Log10, "sin": math.Sin, "cos": math.Cos}

// parser reads one expression; the first error stays.
type parser struct {
	rest  string
	names map[string]float64
	err   error
}

// evaluate gives the value of an expression.
func evaluate(expression string, names map[string]float64) (float64, error) {
	p := parser{rest: expression, names: names}
	v := p.sum()
	if p.blank(); p.err == nil && p.rest != "" {
		p.err = fmt.Errorf("read %q, expected an operator or the end", p.rest)
	}
	if p.err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
		p.err = errors.New("the value is not finite")
	}
	if p.err != nil {
		return math.NaN(), fmt.Errorf("%s: %w", expression, p.err)
	}
	return v, nil
}

func (p *parser) blank() { p.rest = strings.TrimLeft(p.rest, " ") }

// take removes one of the characters from the front.
func (p *parser) take(characters string) byte {
	p.blank()
	if p.rest == "" || !strings.ContainsRune(characters, rune(p.rest[0])) {
		return 0
	}
	c := p.rest[0]
	p.rest = p.rest[1:]
	return c
}

func (p *parser) sum() float64 {
	v := p.product()
	for p.err == nil {
		switch p.take("+-") {
		case '+':
			v += p.product()
		case '-':
			v -= p.product()
		default:
			return v
		}
	}
	return v
}

func (p *parser) product() float64 {
	v := p.signed()
	for p.err == nil {
		switch p.take("*/") {
		case '*':
			v *= p.signed()
		case '/':
			v /= p.signed()
		default:
			return v
		}
	}
	return v
}

func (p *parser) signed() float64 {
	if p.take("-") != 0 {
		return -p.signed()
	}
	v := p.primary()
	if p.take("^") != 0 {
		return math.Pow(v, p.signed())
	}
	return v
}

func letter(c byte) bool { return c == '_' || c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' }
func digit(c byte) bool  { return c >= '0' && c <= '9' }

// front removes the longest front of characters that belong.
func (p *parser) front(belongs func(i int, c byte) bool) string {
	n := 0
	for n < len(p.rest) && belongs(n, p.rest[n]) {
		n++
	}
	s := p.rest[:n]
	p.rest = p.rest[n:]
	return s
}

func (p *parser) primary() float64 {
	p.blank()
	switch {
	case p.err != nil:
		return 0
	case p.take("(") != 0:
		v := p.sum()
		if p.take(")") == 0 && p.err == nil {
			p.err = fmt.Errorf("read %q, expected )", p.rest)
		}
		return v
	case p.rest != "" && digit(p.rest[0]):
		return p.number()
	case p.rest != "" && letter(p.rest[0]):
		name := p.front(func(_ int, c byte) bool { return letter(c) || digit(c) })
		if f, ok := functions[name]; ok && strings.HasPrefix(p.rest, "(") {
			return f(p.primary())
		}
		v, ok := p.names[name]
		if !ok {
			p.err = fmt.Errorf("%s is not known before this line", name)
		}
		return v
	}
	p.err = fmt.Errorf("read %q, expected a number, a name or (", p.rest)
	return 0
}

// number reads a number and the unit behind it.
func (p *parser) number() float64 {
	whole := p.rest
	s := p.front(func(i int, c byte) bool {
		exponent := i > 0 && (c == 'e' || c == 'E') && i+1 < len(whole) && (digit(whole[i+1]) || whole[i+1] == '-')
		return digit(c) || c == '.' || exponent || c == '-' && i > 0 && (whole[i-1] == 'e' || whole[i-1] == 'E')
	})
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		p.err = err
		return 0
	}
	p.blank()
	unit := p.front(func(_ int, c byte) bool { return letter(c) || c == '%' })
	f, ok := scale(unit)
	if !ok {
		p.err = fmt.Errorf("%s is not a unit", unit)
	}
	return v * f
}

// printed reads a result as it is printed: its value and half a unit of its last digit.
func printed(s string) (value, half float64, err error) {
	number, unit, _ := strings.Cut(s, " ")
	f, ok := scale(unit)
	if !ok {
		return 0, 0, fmt.Errorf("%s: %s is not a unit", s, unit)
	}
	v, err := strconv.ParseFloat(number, 64)
	if err != nil {
		return 0, 0, err
	}
	decimals := 0
	if _, fraction, ok := strings.Cut(number, "."); ok {
		decimals = len(fraction)
	}
	return v * f, math.Pow(10, -float64(decimals)) / 2 * f, nil
}

func TestArithmetic(t *testing.T) {
	names := map[string]float64{"C_eff": 2e-7, "i": 0.5, "m": 0.04}
	for _, c := range []struct {
		expression string
		want       float64
	}{
		{"1 + 2 * 3", 7}, {"(1 + 2) * 3", 9}, {"2 - 3 - 4", -5}, {"8 / 4 / 2", 1}, {"-2^2", -4}, {"2^-1", 0.5}, {"2 * -3", -6},
		{"470 nF * 90 %", 4.23e-7}, {"1 h / 1 s", 3600}, {"5 mohm", 5e-3}, {"1.5e-3 V", 1.5e-3}, {"0.25nC", 2.5e-10}, {"3 MHz", 3e6}, {"2 m", 2},
		{"C_eff * 2", 4e-7}, {"m * ln(i / 1 A)", 0.04 * math.Log(0.5)}, {"exp(-(1 + 1))", math.Exp(-2)}, {"sqrt(9) + log10(1000)", 6},
		{"sin(30 deg) + cos(-60 deg)", 1},
	} {
		got, err := evaluate(c.expression, names)
		if c.expression == "2 m" {
			if err == nil {
				t.Error("a prefix alone was taken for a unit")
			}
			continue
		}
		if err != nil || math.Abs(got-c.want) > 1e-12*math.Abs(c.want) {
			t.Errorf("%s = %g (%v), want %g", c.expression, got, err, c.want)
		}
	}
	for _, bad := range []string{"", "1 +", "(1", "1)", "x", "1 2", "1 furlong", "ln 2", "1/0", "ln(0)", "1.2.3", "2 V V"} {
		if v, err := evaluate(bad, names); err == nil {
			t.Errorf("%q = %g, want an error", bad, v)
		}
	}
	for s, want := range map[string][2]float64{"8.63 V": {8.63, 5e-3}, "272.5 nF": {2.725e-7, 5e-11}, "-1.2 V": {-1.2, 0.05}, "4": {4, 0.5}} {
		v, half, err := printed(s)
		if err != nil || math.Abs(v-want[0]) > 1e-12 || math.Abs(half/want[1]-1) > 1e-9 {
			t.Errorf("%s: %g ± %g (%v)", s, v, half, err)
		}
	}
}
