package quantity

import (
	"errors"
	"math"
	"strings"
	"testing"
)

func TestParse(t *testing.T) {
	tests := []struct {
		text string
		d    Dimension
		want float64 // exact: the constant and the text are the same decimal
	}{
		// The spellings of design section 3.2.
		{"63 nC", Charge, 63e-9},
		{"0.22uF", Capacitance, 0.22e-6},
		{"0.22 \u00b5F", Capacitance, 0.22e-6},
		{"0.22 \u03bcF", Capacitance, 0.22e-6},
		{"4.7 kOhm", Resistance, 4.7e3},
		{"4.7kohm", Resistance, 4.7e3},
		{"4.7 k\u03a9", Resistance, 4.7e3},
		{"4.7 k\u2126", Resistance, 4.7e3},
		{"2.2 Ω", Resistance, 2.2},
		{"500 uOhm", Resistance, 500e-6},
		{"1 MΩ", Resistance, 1e6},
		{"1 mΩ", Resistance, 1e-3},
		{"1 TΩ", Resistance, 1e12},
		{"50 V/ns", VoltageSlew, 50e9},
		{"50 V/us", VoltageSlew, 50e6},
		{"5 kV/\u00b5s", VoltageSlew, 5e9},
		{"3 V/s", VoltageSlew, 3},
		{"7 V/ms", VoltageSlew, 7e3},
		{"1 V/ps", VoltageSlew, 1e12},
		{"-5 V", Voltage, -5},
		{"\u22125 V", Voltage, -5},
		{"+5V", Voltage, 5},
		{"-0 V", Voltage, 0},
		{".5 V", Voltage, 0.5},
		{"350 mV", Voltage, 0.35},
		{"85 degC", Temperature, 85},
		{"-40 °C", Temperature, -40},
		{"25 \u2103", Temperature, 25},
		{"15 K", TemperatureDifference, 15},
		{"12 A/us", CurrentSlew, 12e6},
		{"1 A/ns", CurrentSlew, 1e9},
		{"60 K/W", ThermalResistance, 60},
		{"60 °C/W", ThermalResistance, 60},
		{"-7 mV/K", VoltagePerTemperature, -7e-3},
		{"-2 mV/°C", VoltagePerTemperature, -2e-3},
		{"800 uV/K", VoltagePerTemperature, 800e-6},
		{"2 h", Time, 7200},
		{"5 min", Time, 300},
		{"10.64 ms", Time, 10.64e-3},
		{"25ns", Time, 25e-9},
		{"180 deg", Angle, math.Pi},
		{"1.5 rad", Angle, 1.5},
		{"0.45", Ratio, 0.45},
		{"45 %", Ratio, 0.45},
		{"45%", Ratio, 0.45},
		{"1e-3", Ratio, 1e-3},
		{"20 kHz", Frequency, 20e3},
		{"1 MHz", Frequency, 1e6},
		{"1 mHz", Frequency, 1e-3},
		{"250 mW", Power, 0.25},
		{"7.2 uJ", Energy, 7.2e-6},
		{"40 S", Conductance, 40},
		{"4.7 uH", Inductance, 4.7e-6},
		{"2.3 A", Current, 2.3},
		{"12", Count, 12},
		{"0", Count, 0},
		// Numbers.
		{"1e-9 F", Capacitance, 1e-9},
		{"1E+3nF", Capacitance, 1e-6},
		{"1e-9F", Capacitance, 1e-9},
		{"  8.97\u00a0V ", Voltage, 8.97},
		{"8.97\u202fV", Voltage, 8.97},
		{"8.97\u2009V", Voltage, 8.97},
		{"3.14159265358979323846 V", Voltage, math.Pi},
		{"0.000000000000000000000000063 V", Voltage, 63e-27},
		{"123456789012345678901234567890 nV", Voltage, 123456789012345678901234567890e-9},
		{"9007199254740993 V", Voltage, 9007199254740992}, // half way, to even
	}
	for _, tt := range tests {
		got, reading, err := Parse(tt.text, tt.d)
		if err != nil || got != tt.want || reading != nil || math.Signbit(got) != math.Signbit(tt.want) {
			t.Errorf("Parse(%q, %v) = %v, %v, %v; want %v", tt.text, tt.d, got, reading, err, tt.want)
		}
	}
}

// The degree is no decimal factor: two roundings.
func TestParseDegrees(t *testing.T) {
	for _, text := range []string{"30°", "30 °", "30 deg", "30deg"} {
		if got, _, err := Parse(text, Angle); err != nil || !close15(got, math.Pi/6) {
			t.Errorf("Parse(%q) = %v, %v; want %v", text, got, err, math.Pi/6)
		}
	}
}

// Letter codes of IEC 60062, from memory.
func TestParseLetterCodes(t *testing.T) {
	tests := []struct {
		text    string
		d       Dimension
		want    float64
		meaning string
	}{
		{"4k7", Resistance, 4.7e3, "4.7 kΩ"},
		{"4K7", Resistance, 4.7e3, "4.7 kΩ"},
		{"2R2", Resistance, 2.2, "2.2 Ω"},
		{"R47", Resistance, 0.47, "0.47 Ω"},
		{"R005", Resistance, 0.005, "0.005 Ω"},
		{"0R", Resistance, 0, "0 Ω"},
		{"100R", Resistance, 100, "100 Ω"},
		{"100 R", Resistance, 100, "100 Ω"},
		{"1M", Resistance, 1e6, "1 MΩ"},
		{"1 M", Resistance, 1e6, "1 MΩ"},
		{"4.7k", Resistance, 4.7e3, "4.7 kΩ"},
		{"10G", Resistance, 10e9, "10 GΩ"},
		{"1T0", Resistance, 1e12, "1.0 TΩ"},
		{"50L", Resistance, 50e-3, "50 mΩ"},
		{"4L7", Resistance, 4.7e-3, "4.7 mΩ"},
		{"100n", Capacitance, 100e-9, "100 nF"},
		{"2u2", Capacitance, 2.2e-6, "2.2 µF"},
		{"2\u00b52", Capacitance, 2.2e-6, "2.2 µF"},
		{"2\u03bc2", Capacitance, 2.2e-6, "2.2 µF"},
		{"p33", Capacitance, 0.33e-12, "0.33 pF"},
		{"4n7", Capacitance, 4.7e-9, "4.7 nF"},
		{"1m0", Capacitance, 1e-3, "1.0 mF"},
		{"4F7", Capacitance, 4.7, "4.7 F"},
		{"4u7", Inductance, 4.7e-6, "4.7 µH"},
		{"10n", Inductance, 10e-9, "10 nH"},
		{"1m5", Inductance, 1.5e-3, "1.5 mH"},
	}
	for _, tt := range tests {
		got, reading, err := Parse(tt.text, tt.d)
		if err != nil || got != tt.want || reading == nil || *reading != (Reading{tt.text, tt.meaning}) {
			t.Errorf("Parse(%q, %v) = %v, %v, %v; want %v read as %q", tt.text, tt.d, got, reading, err, tt.want, tt.meaning)
			continue
		}
		spelled, again, err := Parse(reading.Meaning, tt.d)
		if err != nil || again != nil || spelled != got {
			t.Errorf("the meaning %q of %q parses to %v, %v, %v", reading.Meaning, tt.text, spelled, again, err)
		}
	}
}

func TestParseRefuses(t *testing.T) {
	tests := []struct {
		text   string
		d      Dimension
		reason string // part of the reason
	}{
		{"", Voltage, "empty"},
		{"   ", Voltage, "empty"},
		{"5", Voltage, "bare number"},
		{"0", Voltage, "zero carries its unit too; write 0 V"},
		{"0", Resistance, "zero carries its unit too"},
		{"100", Capacitance, "bare number"},
		{"1 M", Capacitance, "M is mega, which a capacitance does not take; m is milli, µ (or u) is micro"},
		{"1M", Capacitance, "M is mega"},
		{"1 MF", Capacitance, "M is mega"},
		{"1 kF", Capacitance, "k is kilo, which a capacitance does not take"},
		{"1 MC", Charge, "m is milli"},
		{"1 Ms", Time, "M is mega"},
		{"1 F/s", Voltage, "not known"},
		{"5 v", Voltage, `"v" is not V; upper and lower case`},
		{"5 mv", Voltage, `is not mV`},
		{"5 S", Time, `"S" is not s; upper and lower case matter in units, S is a unit of conductance`},
		{"5 HZ", Frequency, "is not Hz"},
		{"5 OHM", Resistance, "is not ohm"},
		{"50 v/ns", VoltageSlew, "is not V/ns"},
		{"10 KHz", Frequency, `"K" is no SI prefix; kilo is written k`},
		{"10 KOhm", Resistance, "kilo is written k"},
		{"10 NF", Capacitance, "nano is written n"},
		{"10 UF", Capacitance, "micro is written u"},
		{"100N", Capacitance, "nano is written n"},
		{"10 k", Voltage, "k is a prefix without its unit; write kV"},
		{"5 m", Resistance, "m is a prefix without its unit; write mΩ"},
		{"63 nH", Charge, "nH is a unit of inductance"},
		{"63 nC", Capacitance, "nC is a unit of charge"},
		{"5 V", Current, "V is a unit of voltage"},
		{"5 V/ns", Voltage, "V/ns is a unit of voltage slew"},
		{"5 V", VoltageSlew, "V is a unit of voltage"},
		{"45 %", Voltage, "% is a unit of ratio"},
		{"10 °C", TemperatureDifference, "a temperature difference is written in K"},
		{"300 K", Temperature, "a temperature is written in °C"},
		{"0.5 V", Ratio, "V is a unit of voltage"},
		{"5 furlongs", Voltage, `the unit "furlongs" is not known`},
		{"5 V V", Voltage, "not known"},
		{"5 V;", Voltage, "not known"},
		{"1.2.3 V", Voltage, "not known"},
		{"5. V", Voltage, "does not start with a number"},
		{". V", Voltage, "does not start with a number"},
		{"V", Voltage, "does not start with a number"},
		{"- 5 V", Voltage, "does not start with a number"},
		{"--5 V", Voltage, "does not start with a number"},
		{"5\nV", Voltage, "not known"},
		{"4,7 kΩ", Resistance, "decimal point"},
		{"4,7", Ratio, "decimal point"},
		{"1_000 V", Voltage, "underscores"},
		{"0x10 V", Voltage, "hexadecimal"},
		{"NaN", Ratio, "finite"},
		{"nan V", Voltage, "finite"},
		{"Inf V", Voltage, "finite"},
		{"-inf", Ratio, "finite"},
		{"Infinity V", Voltage, "finite"},
		{"1e400 V", Voltage, "too large or too small"},
		{"1e99999999999999999999 V", Voltage, "too large or too small"},
		{"1e-400 V", Voltage, "too large or too small"},
		{"1e308 kV", Voltage, "too large or too small"},
		{"1e306 h", Time, "too large or too small"},
		{"5 V ±10 %", Voltage, "typical value only"},
		{"220 nF 10%", Capacitance, "typical value only"},
		{"45 % ±1 %", Ratio, "typical value only"},
		{"-4k7", Resistance, "not known"},
		{"4k7k", Resistance, "not known"},
		{"1e3k", Resistance, "prefix without its unit"},
		{"4.7k7", Resistance, "not known"},
		{"4R7", Capacitance, "not known"},
		{"4k7", Voltage, "not known"},
		{"L50", Resistance, "L50 may mean 0.50 mΩ (L as the decimal point) or 50 mΩ; write the value in mΩ"},
		{"R", Resistance, "does not start with a number"},
		{strings.Repeat("0", 64) + "V", Voltage, "longer than 64 bytes"},
		{"1.5", Count, "whole number"},
		{"-1", Count, "whole number"},
		{"1e3", Count, "whole number"},
		{"99999999999999999999", Count, "too large"},
		{"5 V", None, "takes no value"},
		{"5 V", Dimension(200), "takes no value"},
		{"\xff\xfe", Voltage, "does not start with a number"},
		{"5 \xff", Voltage, "not known"},
	}
	for _, tt := range tests {
		v, reading, err := Parse(tt.text, tt.d)
		var e *Error
		if !errors.As(err, &e) {
			t.Errorf("Parse(%q, %v) = %v, %v, %v; want an *Error", tt.text, tt.d, v, reading, err)
			continue
		}
		if v != 0 || reading != nil {
			t.Errorf("Parse(%q, %v) answers %v, %v beside the error", tt.text, tt.d, v, reading)
		}
		if !strings.Contains(e.Reason, tt.reason) {
			t.Errorf("Parse(%q, %v): reason %q, want %q in it", tt.text, tt.d, e.Reason, tt.reason)
		}
		if !strings.HasPrefix(e.Expected, tt.d.String()) || len(e.Read) > maxText {
			t.Errorf("Parse(%q, %v): read %q, expected %q", tt.text, tt.d, e.Read, e.Expected)
		}
	}
}

func TestErrorSentence(t *testing.T) {
	_, _, err := Parse("1 M", Capacitance)
	want := `read "1 M", expected capacitance (F with a prefix from f to m, or a letter code, such as 220 nF, 0.22 uF or 2u2): ` +
		`M is mega, which a capacitance does not take; m is milli, µ (or u) is micro`
	if err == nil || err.Error() != want {
		t.Errorf("got  %v\nwant %v", err, want)
	}
}

func TestErrorTextIsBounded(t *testing.T) {
	_, _, err := Parse(strings.Repeat("µ", 100), Voltage)
	var e *Error
	if !errors.As(err, &e) || len(e.Read) > maxText || !strings.HasSuffix(e.Read, "µ…") {
		t.Errorf("read %q", e.Read)
	}
}

func TestDimensions(t *testing.T) {
	if got := len(Dimensions()); got != 20 {
		t.Errorf("%d dimensions, want 20", got)
	}
	for _, d := range Dimensions() {
		if d.String() == "" || d.Unit() == "" || d.Accepts() == "" || len(d.Examples()) == 0 {
			t.Errorf("dimension %d lacks a name, unit or examples", d)
		}
		for _, text := range d.Examples() {
			if _, _, err := Parse(text, d); err != nil {
				t.Errorf("example of %v: %v", d, err)
			}
			if !strings.Contains(d.Accepts(), text) {
				t.Errorf("Accepts of %v does not show %q", d, text)
			}
		}
		if d == Ratio || d == Count {
			continue
		}
		if v, _, err := Parse("1 "+d.Unit(), d); err != nil || v != 1 {
			t.Errorf("1 %s = %v, %v; want 1", d.Unit(), v, err)
		}
	}
	if got := Dimension(200).String(); got != "Dimension(200)" {
		t.Errorf("String of an unknown dimension = %q", got)
	}
	if got, want := Voltage.Accepts(), "V with an SI prefix, such as 18 V or 350 mV"; got != want {
		t.Errorf("Accepts = %q, want %q", got, want)
	}
}

var sink float64

func BenchmarkParse(b *testing.B) {
	for _, bb := range []struct {
		text string
		d    Dimension
	}{{"63 nC", Charge}, {"0.22 µF", Capacitance}, {"50 V/ns", VoltageSlew}, {"85 degC", Temperature}, {"0.45", Ratio}, {"4.7 kOhm", Resistance}, {"4k7", Resistance}} {
		b.Run(bb.text, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sink, _, _ = Parse(bb.text, bb.d)
			}
		})
	}
}

func BenchmarkParseTyp(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		s, _, _ := ParseTyp("220 nF ±10 %", Capacitance)
		sink = s.Low
	}
}
