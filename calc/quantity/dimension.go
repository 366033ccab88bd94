package quantity

import (
	"math"
	"strconv"
	"strings"
)

// Dimension is the kind of a value. It decides which units a text may carry
// and how a number is printed.
type Dimension uint8

// The dimensions. Values are kept in the unit that Unit names: SI units
// throughout, but degrees Celsius for temperatures.
const (
	None                  Dimension = iota // no value: a label
	Voltage                                // [V]
	Current                                // [A]
	Resistance                             // [Ω]
	Capacitance                            // [F]
	Inductance                             // [H]
	Charge                                 // [C]
	Time                                   // [s]
	Frequency                              // [Hz]
	Temperature                            // [°C]
	TemperatureDifference                  // [K]
	Ratio                                  // [1]
	Power                                  // [W]
	Energy                                 // [J]
	Conductance                            // [S]
	VoltageSlew                            // [V/s]
	CurrentSlew                            // [A/s]
	ThermalResistance                      // [K/W]
	Angle                                  // [rad]
	VoltagePerTemperature                  // [V/K]
	Count                                  // a whole number from 0 up [1]
	dimensions                             // number of dimensions
)

// unit is one spelling of a unit.
type unit struct {
	symbol string
	exp    int     // power of ten between this unit and the SI unit
	factor float64 // further factor that is no power of ten, 0 for none
	fixed  bool    // takes no prefix
}

// denominator is what a compound unit is divided by.
type denominator uint8

const (
	perNothing denominator = iota
	perTime                // V/ns, A/µs
	perKelvin              // mV/K
	perWatt                // K/W
)

// definition is all that is known of one dimension. lo and hi bound the powers
// of ten of the prefixes, both read and written.
type definition struct {
	name     string
	si       string   // SI unit as printed
	accepts  string   // units in words, for messages and documentation
	examples []string // texts that parse
	units    []unit
	per      denominator
	lo, hi   int
	letters  []letter
}

// definitions is indexed by Dimension and never written.
var definitions = [dimensions]definition{
	None: {name: "label", si: "", accepts: "no value"},
	Voltage: {name: "voltage", si: "V", accepts: "V with an SI prefix", examples: []string{"18 V", "350 mV"},
		units: []unit{{symbol: "V"}}, lo: -9, hi: 6},
	Current: {name: "current", si: "A", accepts: "A with an SI prefix", examples: []string{"2.3 A", "150 µA"},
		units: []unit{{symbol: "A"}}, lo: -15, hi: 6},
	Resistance: {name: "resistance", si: "Ω", accepts: "Ω or ohm with an SI prefix, or a letter code", examples: []string{"2.2 Ω", "4.7 kOhm", "4k7", "0R"},
		units: []unit{{symbol: "Ω"}, {symbol: "\u2126"}, {symbol: "ohm"}, {symbol: "Ohm"}}, lo: -6, hi: 12, letters: resistanceLetters[:]},
	Capacitance: {name: "capacitance", si: "F", accepts: "F with a prefix from f to m, or a letter code", examples: []string{"220 nF", "0.22 uF", "2u2"},
		units: []unit{{symbol: "F"}}, lo: -15, hi: 0, letters: capacitanceLetters[:]},
	Inductance: {name: "inductance", si: "H", accepts: "H with a prefix from f to m, or a letter code", examples: []string{"10 nH", "4.7 uH", "4u7"},
		units: []unit{{symbol: "H"}}, lo: -15, hi: 0, letters: inductanceLetters[:]},
	Charge: {name: "charge", si: "C", accepts: "C with a prefix from f to m", examples: []string{"63 nC", "1.2 µC"},
		units: []unit{{symbol: "C"}}, lo: -15, hi: 0},
	Time: {name: "time", si: "s", accepts: "s with a prefix from f to m, min or h", examples: []string{"25 ns", "10.64 ms", "5 min", "20000 h"},
		units: []unit{{symbol: "s"}, {symbol: "min", factor: 60, fixed: true}, {symbol: "h", factor: 3600, fixed: true}}, lo: -15, hi: 0},
	Frequency: {name: "frequency", si: "Hz", accepts: "Hz with an SI prefix", examples: []string{"20 kHz", "1 MHz"},
		units: []unit{{symbol: "Hz"}}, lo: -3, hi: 12},
	Temperature: {name: "temperature", si: "°C", accepts: "°C or degC", examples: []string{"85 °C", "-40 degC"},
		units: []unit{{symbol: "°C", fixed: true}, {symbol: "degC", fixed: true}, {symbol: "\u2103", fixed: true}}},
	TemperatureDifference: {name: "temperature difference", si: "K", accepts: "K", examples: []string{"15 K"},
		units: []unit{{symbol: "K", fixed: true}}},
	Ratio: {name: "ratio", si: "1", accepts: "a plain number or %", examples: []string{"0.45", "45 %"},
		units: []unit{{symbol: "", fixed: true}, {symbol: "%", exp: -2, fixed: true}}},
	Power: {name: "power", si: "W", accepts: "W with an SI prefix", examples: []string{"250 mW", "1.5 W"},
		units: []unit{{symbol: "W"}}, lo: -12, hi: 9},
	Energy: {name: "energy", si: "J", accepts: "J with an SI prefix", examples: []string{"7.2 µJ", "2.5 mJ"},
		units: []unit{{symbol: "J"}}, lo: -15, hi: 9},
	Conductance: {name: "conductance", si: "S", accepts: "S with a prefix from p to k", examples: []string{"40 S", "250 mS"},
		units: []unit{{symbol: "S"}}, lo: -12, hi: 3},
	VoltageSlew: {name: "voltage slew", si: "V/s", accepts: "V (or mV, kV) per s, ms, µs, ns or ps", examples: []string{"50 V/ns", "5 kV/us"},
		units: []unit{{symbol: "V"}}, per: perTime, lo: -3, hi: 3},
	CurrentSlew: {name: "current slew", si: "A/s", accepts: "A (or mA, kA) per s, ms, µs, ns or ps", examples: []string{"12 A/us", "1 A/ns"},
		units: []unit{{symbol: "A"}}, per: perTime, lo: -3, hi: 3},
	ThermalResistance: {name: "thermal resistance", si: "K/W", accepts: "K/W or °C/W", examples: []string{"60 K/W", "200 °C/W"},
		units: []unit{{symbol: "K", fixed: true}, {symbol: "°C", fixed: true}, {symbol: "degC", fixed: true}}, per: perWatt},
	Angle: {name: "angle", si: "rad", accepts: "deg, ° or rad", examples: []string{"30 deg", "30°", "0.5236 rad"},
		units: []unit{{symbol: "deg", factor: math.Pi / 180, fixed: true}, {symbol: "°", factor: math.Pi / 180, fixed: true}, {symbol: "rad", fixed: true}}},
	VoltagePerTemperature: {name: "voltage per temperature", si: "V/K", accepts: "V/K with a prefix from µ up", examples: []string{"-7 mV/K", "-2 mV/°C"},
		units: []unit{{symbol: "V"}}, per: perKelvin, lo: -6, hi: 0},
	Count: {name: "count", si: "1", accepts: "a whole number without a unit", examples: []string{"3"}},
}

// definition answers for any d, so that a value outside the list is a label.
func (d Dimension) definition() *definition {
	if d >= dimensions {
		d = None
	}
	return &definitions[d]
}

// Dimensions lists every dimension that carries a value, in fixed order.
func Dimensions() []Dimension {
	all := make([]Dimension, 0, dimensions-1)
	for d := None + 1; d < dimensions; d++ {
		all = append(all, d)
	}
	return all
}

// String names the dimension: "voltage", "thermal resistance".
func (d Dimension) String() string {
	if d >= dimensions {
		return "Dimension(" + strconv.Itoa(int(d)) + ")"
	}
	return definitions[d].name
}

// Unit is the unit of the plain number as printed: "V", "Ω", "V/s", "°C", and
// "1" for ratios and counts.
func (d Dimension) Unit() string { return d.definition().si }

// Examples are texts that Parse accepts for the dimension.
func (d Dimension) Examples() []string { return append([]string(nil), d.definition().examples...) }

// Accepts says in one line which units the dimension takes, with examples.
func (d Dimension) Accepts() string {
	def := d.definition()
	switch n := len(def.examples); n {
	case 0:
		return def.accepts
	case 1:
		return def.accepts + ", such as " + def.examples[0]
	default:
		return def.accepts + ", such as " + strings.Join(def.examples[:n-1], ", ") + " or " + def.examples[n-1]
	}
}

// prefixExp is the power of ten of an SI prefix.
func prefixExp(p string) (exp int, ok bool) {
	switch p {
	case "f":
		return -15, true
	case "p":
		return -12, true
	case "n":
		return -9, true
	case "u", "\u00b5", "\u03bc":
		return -6, true
	case "m":
		return -3, true
	case "k":
		return 3, true
	case "M":
		return 6, true
	case "G":
		return 9, true
	case "T":
		return 12, true
	}
	return 0, false
}

// prefix is the SI prefix of a power of ten that is a multiple of three.
func prefix(exp int) string {
	switch exp {
	case -15:
		return "f"
	case -12:
		return "p"
	case -9:
		return "n"
	case -6:
		return "µ"
	case -3:
		return "m"
	case 3:
		return "k"
	case 6:
		return "M"
	case 9:
		return "G"
	case 12:
		return "T"
	}
	return ""
}

// lookup resolves the unit text of a dimension to its power of ten and its
// further factor (0 for none).
func (def *definition) lookup(text string) (exp int, factor float64, ok bool) {
	if def.per != perNothing {
		slash := strings.IndexByte(text, '/')
		if slash < 0 {
			return 0, 0, false
		}
		if exp, ok = def.per.lookup(text[slash+1:]); !ok {
			return 0, 0, false
		}
		text = text[:slash]
	}
	for i := range def.units {
		u := &def.units[i]
		if text == u.symbol {
			return exp + u.exp, u.factor, true
		}
	}
	for i := range def.units {
		u := &def.units[i]
		if u.fixed || !strings.HasSuffix(text, u.symbol) {
			continue
		}
		if p, isPrefix := prefixExp(text[:len(text)-len(u.symbol)]); isPrefix && p >= def.lo && p <= def.hi {
			return exp + u.exp + p, u.factor, true
		}
	}
	return 0, 0, false
}

// lookup is the power of ten that dividing by the text brings.
func (per denominator) lookup(text string) (exp int, ok bool) {
	switch per {
	case perTime:
		if text == "s" {
			return 0, true
		}
		if p, isPrefix := prefixExp(strings.TrimSuffix(text, "s")); isPrefix && strings.HasSuffix(text, "s") && p >= -12 && p < 0 {
			return -p, true
		}
	case perKelvin:
		return 0, text == "K" || text == "°C" || text == "degC"
	case perWatt:
		return 0, text == "W"
	}
	return 0, false
}
