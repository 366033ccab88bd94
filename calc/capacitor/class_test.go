package capacitor_test

import (
	"testing"

	"floatrail/calc/capacitor"
	"floatrail/calc/source"
)

// EIA-198 class 2 code as printed by Texas Instruments SLAA701B, table 1-16, and
// Holy Stone: every letter and digit in every combination.
func TestEveryClassTwoCode(t *testing.T) {
	lows := []struct {
		letter string
		limit  float64 // [degC]
	}{{"X", -55}, {"Y", -30}, {"Z", 10}}
	highs := []struct {
		digit string
		limit float64 // [degC]
	}{{"2", 45}, {"4", 65}, {"5", 85}, {"6", 105}, {"7", 125}, {"8", 150}, {"9", 200}}
	changes := []struct {
		letter   string
		down, up float64 // [%]
	}{
		{"A", 1.0, 1.0}, {"B", 1.5, 1.5}, {"C", 2.2, 2.2}, {"D", 3.3, 3.3}, {"E", 4.7, 4.7}, {"F", 7.5, 7.5},
		{"P", 10, 10}, {"R", 15, 15}, {"S", 22, 22}, {"T", 33, 22}, {"U", 56, 22}, {"V", 82, 22},
	}
	for _, low := range lows {
		for _, high := range highs {
			for _, change := range changes {
				code := low.letter + high.digit + change.letter
				c, ok := capacitor.ParseClass(code)
				if !ok {
					t.Errorf("%s not read", code)
					continue
				}
				if c.Code != code || c.Kind != capacitor.ClassTwo || c.TemperatureLow != low.limit || c.TemperatureHigh != high.limit {
					t.Errorf("%s read as %+v", code, c)
				}
				near(t, code+" lower change", c.ChangeLow, -change.down/100, 1e-15)
				near(t, code+" upper change", c.ChangeHigh, change.up/100, 1e-15)
			}
		}
	}
}

func TestNamedClasses(t *testing.T) {
	for _, c := range []struct {
		code, canonical string
		kind            capacitor.Kind
		low, high       float64 // [degC]
		down, up        float64 // [1]
	}{
		{"C0G", "C0G", capacitor.ClassOne, -55, 125, -0.003, 0.003}, // ±30 ppm/K over 100 K
		{"COG", "C0G", capacitor.ClassOne, -55, 125, -0.003, 0.003},
		{"NP0", "NP0", capacitor.ClassOne, -55, 125, -0.003, 0.003},
		{"npo", "NP0", capacitor.ClassOne, -55, 125, -0.003, 0.003},
		{" x7r ", "X7R", capacitor.ClassTwo, -55, 125, -0.15, 0.15},
		{"FILM", "FILM", capacitor.Film, -55, 105, -0.06, 0.06},
		{"ALUMINIUM", "ALUMINIUM", capacitor.Aluminium, -40, 85, -0.30, 0.15},
		{"Aluminum", "ALUMINIUM", capacitor.Aluminium, -40, 85, -0.30, 0.15},
		{"tantalum", "TANTALUM", capacitor.Tantalum, -55, 125, -0.10, 0.12},
	} {
		got, ok := capacitor.ParseClass(c.code)
		if !ok || got.Code != c.canonical || got.Kind != c.kind || got.TemperatureLow != c.low || got.TemperatureHigh != c.high {
			t.Errorf("%q read as %+v, %v", c.code, got, ok)
		}
		near(t, c.code+" lower change", got.ChangeLow, c.down, 1e-15)
		near(t, c.code+" upper change", got.ChangeHigh, c.up, 1e-15)
		if _, ok := source.Lookup(got.Source); !ok {
			t.Errorf("%q cites %q, which the bibliography lacks", c.code, got.Source)
		}
	}
}

// Ageing per decade hour as ceramic makers print it: X7R and X5R 2.5 to 3 %, Y5V
// 7 %, C0G none (Holy Stone).
func TestClassAgeing(t *testing.T) {
	for _, c := range []struct {
		code      string
		low, high float64 // [1]
	}{
		{"X7R", 0.025, 0.03}, {"X5R", 0.025, 0.03}, {"Y5V", 0.07, 0.07}, {"C0G", 0, 0},
		{"X7F", 0.025, 0.03}, {"X6S", 0.025, 0.07}, {"X7T", 0.025, 0.07}, {"Z5U", 0.025, 0.07}, {"FILM", 0, 0},
	} {
		got, ok := capacitor.ParseClass(c.code)
		if !ok || got.AgeingLow != c.low || got.AgeingHigh != c.high {
			t.Errorf("%s: ageing %g to %g, want %g to %g", c.code, got.AgeingLow, got.AgeingHigh, c.low, c.high)
		}
	}
}

func TestUnknownClasses(t *testing.T) {
	for _, code := range []string{
		"", "X", "X7", "X7RR", "W7R", "X1R", "X3R", "X0R", "X7G", "X7Z", "X7", "7XR", "R7X", "COK", "CERAMIC", "X7Ω", "ß7R", "X 7R",
	} {
		if got, ok := capacitor.ParseClass(code); ok || got != (capacitor.Class{}) {
			t.Errorf("%q read as %+v", code, got)
		}
	}
}

func TestClassCovers(t *testing.T) {
	x5r, _ := capacitor.ParseClass("X5R")
	for _, c := range []struct {
		low, high float64 // [degC]
		want      bool
	}{
		{-40, 85, true}, {-55, 85, true}, {-55.1, 25, false}, {25, 85.1, false}, {60, 20, false},
		{unknown, 25, false}, {25, unknown, false},
	} {
		if got := x5r.Covers(c.low, c.high); got != c.want {
			t.Errorf("X5R covers %g to %g °C: %v, want %v", c.low, c.high, got, c.want)
		}
	}
}

func FuzzParseClass(f *testing.F) {
	for _, seed := range []string{"X7R", "C0G", "y5v", "FILM", "aluminum", "X7", "\xff7R"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, code string) {
		c, ok := capacitor.ParseClass(code)
		if !ok {
			if c != (capacitor.Class{}) {
				t.Errorf("%q refused but returned %+v", code, c)
			}
			return
		}
		if c.Kind == capacitor.Unspecified || !(c.TemperatureLow < c.TemperatureHigh) || c.ChangeLow > 0 || c.ChangeHigh < 0 ||
			c.ChangeLow <= -1 || c.AgeingLow > c.AgeingHigh {
			t.Errorf("%q read as %+v", code, c)
		}
		if again, ok := capacitor.ParseClass(c.Code); !ok || again != c {
			t.Errorf("%q reads as %q, which reads as %+v", code, c.Code, again)
		}
	})
}
