package quantity

import (
	"errors"
	"math"
	"strings"
	"testing"
)

func close15(a, b float64) bool { return math.Abs(a-b) <= 1e-15*math.Max(math.Abs(a), math.Abs(b)) }

func TestParseTyp(t *testing.T) {
	tests := []struct {
		text             string
		d                Dimension
		low, value, high float64
		has              bool
	}{
		{"220 nF", Capacitance, 220e-9, 220e-9, 220e-9, false},
		{"220 nF ±10 %", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220 nF ±10%", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220nF±10%", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220 nF 10%", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220 nF 10 %", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220 nF +/-10 %", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220 nF +-10 %", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"220 nF ± 2.5 %", Capacitance, 214.5e-9, 220e-9, 225.5e-9, true},
		{"220 nF +80/-20 %", Capacitance, 176e-9, 220e-9, 396e-9, true},
		{"220 nF +80%/-20%", Capacitance, 176e-9, 220e-9, 396e-9, true},
		{"220 nF +80% -20%", Capacitance, 176e-9, 220e-9, 396e-9, true},
		{"220 nF -20/+80 %", Capacitance, 176e-9, 220e-9, 396e-9, true},
		{"220 nF \u221220/+80 %", Capacitance, 176e-9, 220e-9, 396e-9, true},
		{"220 nF +0/-20 %", Capacitance, 176e-9, 220e-9, 220e-9, true},
		{"220 nF ±0 %", Capacitance, 220e-9, 220e-9, 220e-9, true},
		{"2.2e-7 F 10%", Capacitance, 198e-9, 220e-9, 242e-9, true},
		{"4k7 ±5 %", Resistance, 4465, 4700, 4935, true},
		{"R47 5%", Resistance, 0.4465, 0.47, 0.4935, true},
		{"10 pF ±0.5 pF", Capacitance, 9.5e-12, 10e-12, 10.5e-12, true},
		{"15 V ±300 mV", Voltage, 14.7, 15, 15.3, true},
		{"15 V +0.5/-0.3 V", Voltage, 14.7, 15, 15.5, true},
		{"-5 V ±10 %", Voltage, -5.5, -5, -4.5, true},
		{"-5 V 10%", Voltage, -5.5, -5, -4.5, true},
		{"25 °C ±2 K", Temperature, 23, 25, 27, true},
		{"0.45", Ratio, 0.45, 0.45, 0.45, false},
		{"45 %", Ratio, 0.45, 0.45, 0.45, false},
		{"45%", Ratio, 0.45, 0.45, 0.45, false},
		{"0.5 ±10 %", Ratio, 0.45, 0.5, 0.55, true},
		{"0.5 10 %", Ratio, 0.45, 0.5, 0.55, true},
		{"0.5 ±0.05", Ratio, 0.45, 0.5, 0.55, true},
		{"3", Count, 3, 3, 3, false},
	}
	for _, tt := range tests {
		got, _, err := ParseTyp(tt.text, tt.d)
		if err != nil || got.Value != tt.value || got.HasTolerance != tt.has || !close15(got.Low, tt.low) || !close15(got.High, tt.high) {
			t.Errorf("ParseTyp(%q, %v) = %+v, %v; want %v %v %v", tt.text, tt.d, got, err, tt.low, tt.value, tt.high)
		}
	}
}

func TestParseTypReading(t *testing.T) {
	_, reading, err := ParseTyp("4k7 ±5 %", Resistance)
	if err != nil || reading == nil || *reading != (Reading{"4k7", "4.7 kΩ"}) {
		t.Errorf("reading %v, %v", reading, err)
	}
}

func TestParseTypRefuses(t *testing.T) {
	tests := []struct {
		text   string
		d      Dimension
		reason string
	}{
		{"220 nF +20 %", Capacitance, "one side only"},
		{"220 nF -20 %", Capacitance, "one side only"},
		{"220 nF +80/+20 %", Capacitance, "not understood"},
		{"220 nF +80/-0.5 nF", Capacitance, ""},
		{"220 nF +80 %/-20 nF", Capacitance, "same unit"},
		{"220 nF ±", Capacitance, "not understood"},
		{"220 nF ±10", Capacitance, "not understood"},
		{"220 nF ±-10 %", Capacitance, "not understood"},
		{"220 nF ±10 V", Capacitance, "not understood"},
		{"220 nF ±10 % K", Capacitance, "not understood"},
		{"220 nF ±100 %", Capacitance, "below 100 %"},
		{"220 nF +1001/-20 %", Capacitance, "1000 %"},
		{"220 nF10%", Capacitance, "blank before it"},
		{"220 10%", Capacitance, "bare number"},
		{"±10 %", Capacitance, "does not start with a number"},
		{"10 %", Capacitance, "% is a unit of ratio"},
		{"25 °C ±10 %", Temperature, "no meaning"},
		{"45 % ±10 %", Ratio, "ambiguous"},
		{"45 % 10 %", Ratio, "ambiguous"},
		{"-5 V +10/-5 %", Voltage, "negative value are ambiguous"},
		{"1.7e308 V 900 %", Voltage, "below 100 %"},
		{"1.7e308 V +90/-10 %", Voltage, "too large"},
		{"4k7J", Resistance, "not known"},
		{"", Capacitance, "empty"},
		{strings.Repeat(" ", 60) + "1 nF 10 %", Capacitance, "longer than 64 bytes"},
	}
	for _, tt := range tests {
		got, reading, err := ParseTyp(tt.text, tt.d)
		var e *Error
		if tt.reason == "" { // accepted: both sides take the last unit
			if err != nil || !close15(got.Low, 219.5e-9) || !close15(got.High, 300e-9) {
				t.Errorf("ParseTyp(%q) = %+v, %v", tt.text, got, err)
			}
			continue
		}
		if !errors.As(err, &e) || !strings.Contains(e.Reason, tt.reason) || got != (Spread{}) || reading != nil {
			t.Errorf("ParseTyp(%q, %v) = %+v, %v, %v; want %q", tt.text, tt.d, got, reading, err, tt.reason)
			continue
		}
		if e.Read != shorten(tt.text) {
			t.Errorf("ParseTyp(%q): read %q", tt.text, e.Read)
		}
	}
}

// Tolerance letters of IEC 60062, from memory.
func TestParseTolerance(t *testing.T) {
	tests := []struct {
		text      string
		low, high float64
	}{
		{"B", -0.001, 0.001}, {"C", -0.0025, 0.0025}, {"D", -0.005, 0.005}, {"F", -0.01, 0.01}, {"G", -0.02, 0.02},
		{"J", -0.05, 0.05}, {"K", -0.10, 0.10}, {"M", -0.20, 0.20}, {"Z", -0.20, 0.80},
		{"10%", -0.10, 0.10}, {"±10 %", -0.10, 0.10}, {"+80/-20 %", -0.20, 0.80}, {" 5 % ", -0.05, 0.05},
	}
	for _, tt := range tests {
		if low, high, ok := ParseTolerance(tt.text); !ok || low != tt.low || high != tt.high {
			t.Errorf("ParseTolerance(%q) = %v, %v, %v; want %v, %v", tt.text, low, high, ok, tt.low, tt.high)
		}
	}
	for _, text := range []string{"", "k", "A", "KK", "10", "±0.5 pF", "100 %", "+10 %", "NaN %", strings.Repeat("0", 64) + "1%"} {
		if low, high, ok := ParseTolerance(text); ok || low != 0 || high != 0 {
			t.Errorf("ParseTolerance(%q) = %v, %v, %v; want it refused", text, low, high, ok)
		}
	}
}
