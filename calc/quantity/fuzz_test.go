package quantity

import (
	"errors"
	"math"
	"testing"
	"unicode/utf8"
)

// FuzzParse: no text panics; what is accepted is finite, survives Format and
// lies inside its own tolerance; what is refused says why in valid UTF-8.
func FuzzParse(f *testing.F) {
	for _, text := range []string{"63 nC", "4k7", "R47", "-5 V", "50 V/ns", "85 degC", "45 %", "220 nF ±10 %", "220 nF +80/-20 %", "1 M", "1e-9 F",
		"0x1p3 V", "NaN", "4,7 kΩ", "2\u00b52", "\xff", "10 pF ±0.5 pF", "1e-320 V", "30°", "20000 h", "L50", "3"} {
		for _, d := range []Dimension{Voltage, Resistance, Capacitance, Ratio, Time, Angle, VoltageSlew, Count} {
			f.Add(text, uint8(d))
		}
	}
	f.Fuzz(func(t *testing.T, text string, n uint8) {
		d := Dimension(n)
		v, _, err := Parse(text, d)
		checkFault(t, err)
		spread, _, typErr := ParseTyp(text, d)
		checkFault(t, typErr)
		if typErr == nil && !(spread.Low <= spread.Value && spread.Value <= spread.High && finite(spread.Low) && finite(spread.High)) {
			t.Fatalf("ParseTyp(%q, %v) = %+v", text, d, spread)
		}
		if err != nil {
			return
		}
		if !finite(v) || v == 0 && math.Signbit(v) {
			t.Fatalf("Parse(%q, %v) = %v", text, d, v)
		}
		if typErr != nil || spread.Value != v || spread.HasTolerance {
			t.Fatalf("Parse(%q, %v) = %v, but ParseTyp %+v, %v", text, d, v, spread, typErr)
		}
		if m := math.Abs(v); v == 0 || m > 1e-300 && m < 1e300 { // where four digits exist in every unit
			roundTrip(t, v, d)
		}
	})
}

// FuzzParseMarking: no text panics; an accepted marking is sound and explained.
func FuzzParseMarking(f *testing.F) {
	for _, text := range []string{"1u/25V/X7R/0603/K", "104/50V/X7R/K", "100nF 50V X7R 10% 0805", "564K", "100n +80/-20 % Y5V", "1 F", "4p0C", "6V3 10u", "--", "+", "±", "\xff", "1M"} {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		m, err := ParseMarking(text)
		checkFault(t, err)
		if err != nil {
			return
		}
		if !(m.Capacitance > 0) || !finite(m.Capacitance) || m.HasVoltage != (m.Voltage > 0) || !finite(m.Voltage) {
			t.Fatalf("ParseMarking(%q) = %+v", text, m)
		}
		if m.ToleranceLow <= -1 || m.ToleranceLow > 0 || m.ToleranceHigh < 0 || !finite(m.ToleranceHigh) {
			t.Fatalf("ParseMarking(%q) = %+v", text, m)
		}
		if !m.HasTolerance && (m.ToleranceLow != 0 || m.ToleranceHigh != 0) {
			t.Fatalf("ParseMarking(%q) = %+v", text, m)
		}
		for _, r := range m.Readings {
			if r.Text == "" || r.Meaning == "" {
				t.Fatalf("ParseMarking(%q): readings %+v", text, m.Readings)
			}
		}
	})
}

func checkFault(t *testing.T, err error) {
	t.Helper()
	if err == nil {
		return
	}
	var e *Error
	if !errors.As(err, &e) || e.Reason == "" || e.Expected == "" || len(e.Read) > maxText || !utf8.ValidString(e.Error()) || !utf8.ValidString(e.Read) {
		t.Fatalf("error %#v", err)
	}
}
