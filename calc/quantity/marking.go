package quantity

import (
	"strconv"
	"strings"
)

// Marking is what the printed line of a capacitor says.
type Marking struct {
	Capacitance   float64 // nominal capacitance [F]
	ToleranceLow  float64 // smallest capacitance is Capacitance·(1 + ToleranceLow), <= 0 [1]
	ToleranceHigh float64 // largest capacitance is Capacitance·(1 + ToleranceHigh), >= 0 [1]
	HasTolerance  bool
	Voltage       float64 // rated voltage, DC [V]
	HasVoltage    bool
	Dielectric    string    // class code (X7R, C0G) or FILM, ALUMINIUM, TANTALUM; empty if not marked
	CaseSize      string    // EIA case size in inches (0603); empty if not marked
	Readings      []Reading // how each token was understood, in order
}

const markingExpected = "a capacitor marking: capacitance (1u, 100nF or the code 104) and, in any order, rated voltage (25V), " +
	"dielectric (X7R, C0G, FILM), case size (0603) and tolerance (K, ±10 %)"

// ParseMarking reads the printed line of a capacitor: "1u/25V/X7R/0603/K",
// "104/50V/X7R/K", "100nF 50V X7R 10% 0805", "564K". Tokens are separated by
// blanks, slashes, commas, semicolons or hyphens. A three-digit code is two
// digits and a power of ten in picofarads: 564 is 0.56 µF. A tolerance letter
// (IEC 60062, from memory) may follow a code directly; below 10 pF the letters
// B to G mean ±0.1, 0.25, 0.5, 1 and 2 pF. A token that is not understood or
// says something a second time is refused.
func ParseMarking(text string) (Marking, error) {
	if len(text) > maxText {
		return Marking{}, &Error{Read: shorten(text), Expected: markingExpected, Reason: reasonTooLong}
	}
	var p marker
	for rest, fresh := text, true; ; fresh = false {
		var token string
		if token, rest = nextToken(rest, fresh); token == "" {
			break
		}
		if reason := p.token(token); reason != "" {
			if startsWithNumber(strings.TrimPrefix(rest, ",")) && rest[0] == ',' {
				reason += "; a comma separates, write a decimal point"
			}
			return Marking{}, &Error{Read: shorten(token), Expected: markingExpected, Reason: reason + " (in " + strconv.Quote(shorten(text)) + ")"}
		}
	}
	if !p.hasCapacitance {
		return Marking{}, &Error{Read: shorten(text), Expected: markingExpected, Reason: "it gives no capacitance"}
	}
	if p.tolerance != "" {
		p.setTolerance()
	}
	if p.ToleranceLow <= -maxToleranceLow {
		return Marking{}, &Error{Read: shorten(p.tolerance), Expected: markingExpected,
			Reason: "the tolerance leaves nothing of " + Format(p.Capacitance, Capacitance)}
	}
	return p.Marking, nil
}

// marker collects a Marking token by token.
type marker struct {
	Marking
	hasCapacitance bool
	tolerance      string // letter or text
	dev            deviation
}

// caseSizes are the EIA chip sizes [0.01 in].
const caseSizes = " 008004 01005 0201 0202 0204 0302 0303 0306 0402 0404 0502 0504 0505 0508 0603 0612 0805 0907 1111 1206 1210 " +
	"1410 1505 1808 1812 1825 2010 2211 2220 2225 2512 2824 2825 3333 3530 3640 4540 6560 7565 "

// metricSizes are metric case codes that are no EIA code, and the EIA code of
// the same case.
var metricSizes = [...]struct{ metric, eia string }{
	{"1005", "0402"}, {"1608", "0603"}, {"2012", "0805"}, {"3216", "1206"}, {"3225", "1210"}, {"4520", "1808"}, {"4532", "1812"},
	{"5750", "2220"}, {"5763", "2225"},
}

// dielectrics are the words other than EIA class 2 codes. C0G is often written
// with the letter O, and NP0 is its older name.
var dielectrics = [...]struct{ word, class string }{
	{"C0G", "C0G"}, {"COG", "C0G"}, {"NP0", "C0G"}, {"NPO", "C0G"},
	{"FILM", "FILM"}, {"MKP", "FILM"}, {"MKT", "FILM"}, {"PP", "FILM"}, {"PET", "FILM"},
	{"ALUMINIUM", "ALUMINIUM"}, {"ALUMINUM", "ALUMINIUM"}, {"TANTALUM", "TANTALUM"}, {"TANT", "TANTALUM"},
}

// token understands one token or says why not.
func (p *marker) token(s string) (reason string) {
	if dev, ok := toleranceLetter(s); ok {
		return p.addTolerance(s, dev)
	}
	if strings.ContainsAny(s, "%±+") || strings.HasPrefix(s, "-") || strings.HasPrefix(s, "\u2212") {
		dev, reason := parseDeviation(s, Capacitance)
		if reason != "" {
			return reason
		}
		return p.addTolerance(s, dev)
	}
	if digitsOnly(s) && strings.Contains(caseSizes, " "+s+" ") {
		if p.CaseSize != "" {
			return "the case size " + p.CaseSize + " was already read"
		}
		p.CaseSize = s
		p.read(s, "case size "+s)
		return ""
	}
	for _, m := range metricSizes {
		if m.metric == s {
			return "it is a metric case code; write the EIA code " + m.eia
		}
	}
	if class, ok := dielectricClass(s); ok {
		if p.Dielectric != "" {
			return "the dielectric " + p.Dielectric + " was already read"
		}
		p.Dielectric = class
		p.read(s, "dielectric "+class)
		return ""
	}
	if v, ok := ratedVoltage(s); ok {
		return p.addVoltage(s, v)
	}
	return p.capacitance(s)
}

func (p *marker) read(text, meaning string) {
	p.Readings = append(p.Readings, Reading{Text: text, Meaning: meaning})
}

// addTolerance notes a tolerance; it is worked out when the capacitance is
// known, which decides what a letter means.
func (p *marker) addTolerance(s string, dev deviation) string {
	if p.tolerance != "" {
		return "the tolerance " + p.tolerance + " was already read"
	}
	p.tolerance, p.dev = s, dev
	p.read(s, "")
	return ""
}

// smallTolerances are the tolerance letters below 10 pF (IEC 60062, from
// memory) [F].
var smallTolerances = [...]struct {
	letter string
	abs    float64
}{{"B", 0.1e-12}, {"C", 0.25e-12}, {"D", 0.5e-12}, {"F", 1e-12}, {"G", 2e-12}}

// smallCapacitance is where the tolerance letters change their meaning [F].
const smallCapacitance = 10e-12

// setTolerance turns the noted tolerance into ratios and completes its Reading.
func (p *marker) setTolerance() {
	if p.Capacitance < smallCapacitance {
		for _, t := range smallTolerances {
			if t.letter == p.tolerance {
				p.dev = deviation{low: t.abs, high: t.abs}
			}
		}
	}
	meaning := p.dev.meaning()
	for i := range p.Readings {
		if r := &p.Readings[i]; r.Meaning == "" {
			r.Meaning = meaning
		}
	}
	if !p.dev.relative {
		p.dev.low /= p.Capacitance
		p.dev.high /= p.Capacitance
	}
	p.HasTolerance, p.ToleranceLow, p.ToleranceHigh = true, -p.dev.low, p.dev.high
}

// meaning writes a capacitance tolerance out: "±10 %", "+80/-20 %", "±0.5 pF".
func (dev deviation) meaning() string {
	write := func(x float64) string { return Format(x, Capacitance) }
	if dev.relative {
		write = func(x float64) string { return Format(100*x, Ratio) + " %" }
	}
	if dev.low == dev.high {
		return "±" + write(dev.low)
	}
	return "+" + write(dev.high) + " -" + write(dev.low)
}

// dielectricClass knows the EIA-198 class 2 codes (low temperature X Y Z; high
// temperature 2 4 to 9; change A to F, P, R to V) and the words above.
func dielectricClass(s string) (string, bool) {
	s = strings.ToUpper(s)
	for _, d := range dielectrics {
		if d.word == s {
			return d.class, true
		}
	}
	if len(s) == 3 && strings.IndexByte("XYZ", s[0]) >= 0 && strings.IndexByte("2456789", s[1]) >= 0 &&
		strings.IndexByte("ABCDEFPRSTUV", s[2]) >= 0 {
		return s, true
	}
	return "", false
}

// ratedVoltage reads 25V, 6.3 V, 6V3, 1kV and the same with DC behind.
func ratedVoltage(s string) (float64, bool) {
	if upper := strings.ToUpper(s); strings.HasSuffix(upper, "DC") {
		s = trim(s[:len(s)-len("DC")])
	}
	if !strings.Contains(s, "V") {
		return 0, false
	}
	if code, ok := scanLetterCode(s, voltageLetters[:]); ok {
		v, ok := code.value(code.text())
		return v, ok
	}
	v, _, reason := parse(s, Voltage)
	return v, reason == ""
}

func (p *marker) addVoltage(s string, v float64) string {
	switch {
	case p.HasVoltage:
		return "the rated voltage " + Format(p.Voltage, Voltage) + " was already read"
	case v <= 0:
		return "a rated voltage must be above zero"
	}
	p.Voltage, p.HasVoltage = v, true
	p.read(s, "rated voltage "+Format(v, Voltage))
	return ""
}

// capacitance reads what is left: a capacitance, with a tolerance letter
// directly behind a code.
func (p *marker) capacitance(s string) (reason string) {
	value, letter := s, ""
	c, meaning, reason := capacitanceToken(value)
	if reason != "" && len(s) > 1 {
		if _, ok := toleranceLetter(s[len(s)-1:]); ok {
			value, letter = trim(s[:len(s)-1]), s[len(s)-1:]
			var again string
			if c, meaning, again = capacitanceToken(value); again == "" {
				reason = ""
			}
		}
	}
	switch {
	case reason != "" && !startsWithNumber(s):
		return "it is not understood"
	case reason != "":
		return reason
	case p.hasCapacitance:
		return "the capacitance " + Format(p.Capacitance, Capacitance) + " was already read"
	case c <= 0:
		return "a capacitance must be above zero"
	}
	p.Capacitance, p.hasCapacitance = c, true
	p.read(value, meaning)
	if letter == "" {
		return ""
	}
	dev, _ := toleranceLetter(letter)
	return p.addTolerance(letter, dev)
}

func startsWithNumber(s string) bool {
	_, _, ok := scanNumber(s)
	return ok
}

// capacitanceToken reads a three-digit code or a capacitance with its unit.
func capacitanceToken(s string) (c float64, meaning, reason string) {
	if len(s) == 3 && digitsOnly(s) {
		switch {
		case s[0] == '0':
			return 0, "", "a three-digit code does not start with 0"
		case s[2] > '7':
			return 0, "", "the last digit of a three-digit code is read from 0 to 7 only; makers differ on 8 and 9"
		}
		n, _, _ := scanNumber(s[:2])
		c, _ = n.value(int(s[2]-'0')-12, 0)
		return c, Format(c, Capacitance), ""
	}
	c, reading, reason := parse(s, Capacitance)
	switch {
	case reason != "":
		return 0, "", reason
	case reading != nil:
		return c, reading.Meaning, ""
	}
	return c, Format(c, Capacitance), ""
}
