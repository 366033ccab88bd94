package quantity

import (
	"errors"
	"reflect"
	"strings"
	"testing"
)

// Three-digit codes and tolerance letters: IEC 60062, from memory (564 is
// 0.56 µF, 104 is 100 nF).
func TestParseMarking(t *testing.T) {
	full := Marking{Capacitance: 1e-6, ToleranceLow: -0.1, ToleranceHigh: 0.1, HasTolerance: true, Voltage: 25, HasVoltage: true, Dielectric: "X7R", CaseSize: "0603"}
	tests := []struct {
		text string
		want Marking
	}{
		{"1u/25V/X7R/0603/K", full},
		{"1u 25V X7R 0603 K", full},
		{"1u,25V,X7R,0603,K", full},
		{"1u, 25V, X7R, 0603, K", full},
		{"1u-25V-X7R-0603-K", full},
		{"1u - 25V - X7R - 0603 - 10%", full},
		{"K/0603/X7R/25V/1u", full},
		{"1uF/25 V/x7r/0603/±10 %", full},
		{"1 µF 25 V X7R 0603 10 %", full},
		{"1 \u03bcF 25 V DC X7R 0603 10 %", full},
		{"105K/25VDC/X7R/0603", full},
		{"1uK/25V/X7R/0603", full},
		{"104/50V/X7R/K", Marking{Capacitance: 100e-9, ToleranceLow: -0.1, ToleranceHigh: 0.1, HasTolerance: true, Voltage: 50, HasVoltage: true, Dielectric: "X7R"}},
		{"100nF 50V X7R 10% 0805", Marking{Capacitance: 100e-9, ToleranceLow: -0.1, ToleranceHigh: 0.1, HasTolerance: true, Voltage: 50, HasVoltage: true, Dielectric: "X7R", CaseSize: "0805"}},
		{"564K", Marking{Capacitance: 0.56e-6, ToleranceLow: -0.1, ToleranceHigh: 0.1, HasTolerance: true}},
		{"564", Marking{Capacitance: 0.56e-6}},
		{"107M", Marking{Capacitance: 100e-6, ToleranceLow: -0.2, ToleranceHigh: 0.2, HasTolerance: true}},
		{"104 F", Marking{Capacitance: 100e-9, ToleranceLow: -0.01, ToleranceHigh: 0.01, HasTolerance: true}},
		{"100 100V", Marking{Capacitance: 10e-12, Voltage: 100, HasVoltage: true}},
		{"100nJ", Marking{Capacitance: 100e-9, ToleranceLow: -0.05, ToleranceHigh: 0.05, HasTolerance: true}},
		{"2u2M", Marking{Capacitance: 2.2e-6, ToleranceLow: -0.2, ToleranceHigh: 0.2, HasTolerance: true}},
		{"100nF", Marking{Capacitance: 100e-9}},
		{"1F", Marking{Capacitance: 1}},
		{"1 F", Marking{Capacitance: 1}},
		{"10u/6V3/X5R", Marking{Capacitance: 10e-6, Voltage: 6.3, HasVoltage: true, Dielectric: "X5R"}},
		{"10u/6.3V", Marking{Capacitance: 10e-6, Voltage: 6.3, HasVoltage: true}},
		{"1n/1kV/NP0", Marking{Capacitance: 1e-9, Voltage: 1000, HasVoltage: true, Dielectric: "C0G"}},
		{"1n/COG", Marking{Capacitance: 1e-9, Dielectric: "C0G"}},
		{"22u 25V ALUMINUM", Marking{Capacitance: 22e-6, Voltage: 25, HasVoltage: true, Dielectric: "ALUMINIUM"}},
		{"4u7 tantalum", Marking{Capacitance: 4.7e-6, Dielectric: "TANTALUM"}},
		{"470n MKP", Marking{Capacitance: 470e-9, Dielectric: "FILM"}},
		{"100n Y5V +80/-20 %", Marking{Capacitance: 100e-9, ToleranceLow: -0.2, ToleranceHigh: 0.8, HasTolerance: true, Dielectric: "Y5V"}},
		{"100n/+80%/-20%/Y5V", Marking{Capacitance: 100e-9, ToleranceLow: -0.2, ToleranceHigh: 0.8, HasTolerance: true, Dielectric: "Y5V"}},
		{"100n -20/+80% Y5V", Marking{Capacitance: 100e-9, ToleranceLow: -0.2, ToleranceHigh: 0.8, HasTolerance: true, Dielectric: "Y5V"}},
		{"100nZ Z5U", Marking{Capacitance: 100e-9, ToleranceLow: -0.2, ToleranceHigh: 0.8, HasTolerance: true, Dielectric: "Z5U"}},
		{"100p ±5pF 50V", Marking{Capacitance: 100e-12, ToleranceLow: -0.05, ToleranceHigh: 0.05, HasTolerance: true, Voltage: 50, HasVoltage: true}},
		{"4p0C C0G", Marking{Capacitance: 4e-12, ToleranceLow: -0.0625, ToleranceHigh: 0.0625, HasTolerance: true, Dielectric: "C0G"}},
		{"8p0/K", Marking{Capacitance: 8e-12, ToleranceLow: -0.1, ToleranceHigh: 0.1, HasTolerance: true}},
	}
	for _, tt := range tests {
		got, err := ParseMarking(tt.text)
		if err != nil {
			t.Errorf("ParseMarking(%q): %v", tt.text, err)
			continue
		}
		if len(got.Readings) == 0 {
			t.Errorf("ParseMarking(%q) tells no readings", tt.text)
		}
		for _, r := range got.Readings {
			if r.Text == "" || r.Meaning == "" {
				t.Errorf("ParseMarking(%q): reading %+v", tt.text, r)
			}
		}
		got.Readings = nil
		if !close15(got.ToleranceLow, tt.want.ToleranceLow) || !close15(got.ToleranceHigh, tt.want.ToleranceHigh) {
			t.Errorf("ParseMarking(%q): tolerance %v, %v", tt.text, got.ToleranceLow, got.ToleranceHigh)
		}
		got.ToleranceLow, got.ToleranceHigh = tt.want.ToleranceLow, tt.want.ToleranceHigh
		if !reflect.DeepEqual(got, tt.want) {
			t.Errorf("ParseMarking(%q) = %+v, want %+v", tt.text, got, tt.want)
		}
	}
}

func TestParseMarkingReadings(t *testing.T) {
	tests := []struct {
		text string
		want []Reading
	}{
		{"1u/25V/X7R/0603/K", []Reading{{"1u", "1 µF"}, {"25V", "rated voltage 25 V"}, {"X7R", "dielectric X7R"}, {"0603", "case size 0603"}, {"K", "±10 %"}}},
		{"564K NPO", []Reading{{"564", "560 nF"}, {"K", "±10 %"}, {"NPO", "dielectric C0G"}}},
		{"Z 104", []Reading{{"Z", "+80 % -20 %"}, {"104", "100 nF"}}},
		{"D 4p7", []Reading{{"D", "±500 fF"}, {"4p7", "4.7 pF"}}},
		{"B 4n7", []Reading{{"B", "±0.1 %"}, {"4n7", "4.7 nF"}}},
	}
	for _, tt := range tests {
		got, err := ParseMarking(tt.text)
		if err != nil || !reflect.DeepEqual(got.Readings, tt.want) {
			t.Errorf("ParseMarking(%q): readings %+v, %v; want %+v", tt.text, got.Readings, err, tt.want)
		}
	}
}

func TestParseMarkingRefuses(t *testing.T) {
	tests := []struct{ text, read, reason string }{
		{"", "", "no capacitance"},
		{" / , ", " / , ", "no capacitance"},
		{"25V/X7R/0603/K", "25V/X7R/0603/K", "no capacitance"},
		{"1u/FOO", "FOO", "not understood"},
		{"1u/25V/16V", "16V", "rated voltage 25 V was already read"},
		{"1u/25V/25V", "25V", "already read"},
		{"1u/2u2", "2u2", "capacitance 1 µF was already read"},
		{"1u/105", "105", "already read"},
		{"1u/603", "603", "already read"},
		{"1u/X7R/C0G", "C0G", "dielectric X7R was already read"},
		{"1u/0603/0805", "0805", "case size 0603 was already read"},
		{"564K 10%", "10%", "tolerance K was already read"},
		{"K 564M", "564M", "tolerance K was already read"},
		{"1u/1608", "1608", "write the EIA code 0603"},
		{"1M/25V", "1M", "M is mega"},
		{"1u/k", "k", "not understood"},
		{"1u/25", "25", "bare number"},
		{"1u/250VAC", "250VAC", "not known"},
		{"1u/0V", "0V", "above zero"},
		{"0u", "0u", "above zero"},
		{"1u/-25V", "-25V", "one side only"},
		{"-1u", "-1u", "one side only"},
		{"1u/+20%", "+20%", "one side only"},
		{"1u/±100%", "±100%", "below 100 %"},
		{"1p0G", "G", "leaves nothing of 1 pF"},
		{"109", "109", "makers differ"},
		{"012", "012", "does not start with 0"},
		{"1u/X1R", "X1R", "not understood"},
		{"1u/X7G", "X7G", "not understood"},
		{"1u/W5R", "W5R", "not understood"},
		{"1,5u", "1", "a comma separates, write a decimal point"},
		{"0603 V", "V", "not understood"},
		{"1u\n25V", "1u\n25V", "not known"},
		{strings.Repeat("1u ", 30), "", "longer than 64 bytes"},
	}
	for _, tt := range tests {
		got, err := ParseMarking(tt.text)
		var e *Error
		if !errors.As(err, &e) || !reflect.DeepEqual(got, Marking{}) {
			t.Errorf("ParseMarking(%q) = %+v, %v; want an *Error", tt.text, got, err)
			continue
		}
		if !strings.Contains(e.Reason, tt.reason) || tt.read != "" && e.Read != tt.read || e.Expected != markingExpected {
			t.Errorf("ParseMarking(%q): read %q, reason %q; want %q, %q", tt.text, e.Read, e.Reason, tt.read, tt.reason)
		}
	}
}

// EIA-198 class 2 codes (Texas Instruments SLAA701B, table 1-16): three letters
// of low temperature, seven digits of high temperature, twelve of change.
func TestEveryClass2Code(t *testing.T) {
	n := 0
	for _, a := range "XYZ" {
		for _, b := range "2456789" {
			for _, c := range "ABCDEFPRSTUV" {
				code := string([]rune{a, b, c})
				m, err := ParseMarking("1u/" + code)
				if err != nil || m.Dielectric != code {
					t.Errorf("%s: %+v, %v", code, m, err)
				}
				n++
			}
		}
	}
	if n != 252 {
		t.Errorf("%d codes", n)
	}
}
