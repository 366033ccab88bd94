package quantity

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

func TestFormat(t *testing.T) {
	tests := []struct {
		v    float64
		d    Dimension
		want string
	}{
		{8.97, Voltage, "8.97 V"},
		{8.9734, Voltage, "8.973 V"},
		{63e-9, Charge, "63 nC"},
		{0.45, Ratio, "0.45"},
		{0.000123, Ratio, "0.000123"},
		{0.0000123, Ratio, "1.23e-5"},
		{12346, Ratio, "12350"},
		{1, Ratio, "1"},
		{85, Temperature, "85 °C"},
		{-40, Temperature, "-40 °C"},
		{0.05, Temperature, "0.05 °C"},
		{15, TemperatureDifference, "15 K"},
		{50e9, VoltageSlew, "50 V/ns"},
		{1.2e6, VoltageSlew, "1.2 V/µs"},
		{3e3, VoltageSlew, "3 V/ms"},
		{0.5, VoltageSlew, "0.5 V/s"},
		{5e12, VoltageSlew, "5000 V/ns"},
		{12e6, CurrentSlew, "12 A/µs"},
		{1e9, CurrentSlew, "1 A/ns"},
		{4.7e3, Resistance, "4.7 kΩ"},
		{0.05, Resistance, "50 mΩ"},
		{220e-9, Capacitance, "220 nF"},
		{1e-6, Capacitance, "1 µF"},
		{1e-18, Capacitance, "1e-18 F"},
		{1500, Capacitance, "1500 F"},
		{1.5e9, Capacitance, "1.5e9 F"},
		{999.96, Voltage, "1 kV"},
		{999.94, Voltage, "999.9 V"},
		{0.99996, Voltage, "1 V"},
		{-5, Voltage, "-5 V"},
		{0, Voltage, "0 V"},
		{math.Copysign(0, -1), Voltage, "0 V"},
		{0, VoltageSlew, "0 V/s"},
		{0, Angle, "0°"},
		{0, Ratio, "0"},
		{10.64e-3, Time, "10.64 ms"},
		{300, Time, "300 s"},
		{9999, Time, "9999 s"},
		{36000, Time, "10 h"},
		{20000 * 3600, Time, "20000 h"},
		{math.Pi / 6, Angle, "30°"},
		{60, ThermalResistance, "60 K/W"},
		{-7e-3, VoltagePerTemperature, "-7 mV/K"},
		{20e3, Frequency, "20 kHz"},
		{0.25, Power, "250 mW"},
		{7.2e-6, Energy, "7.2 µJ"},
		{40, Conductance, "40 S"},
		{3, Count, "3"},
		{123456789, Count, "123456789"},
		{2.5, Count, "2.5"},
		{math.NaN(), Voltage, "NaN V"},
		{math.Inf(-1), Ratio, "-Inf"},
		{math.MaxFloat64, Angle, "1.798e308 rad"},
		{5e-324, Voltage, "4.941e-324 V"},
	}
	for _, tt := range tests {
		if got := Format(tt.v, tt.d); got != tt.want {
			t.Errorf("Format(%v, %v) = %q, want %q", tt.v, tt.d, got, tt.want)
		}
	}
}

// roundTrip checks that v survives Format and Parse to four significant
// digits: half a unit of the fourth is at most 5e-4 of the value.
func roundTrip(t *testing.T, v float64, d Dimension) {
	t.Helper()
	text := Format(v, d)
	if strings.HasPrefix(text, "-0 ") || len(text) > maxText {
		t.Fatalf("Format(%v, %v) = %q", v, d, text)
	}
	got, reading, err := Parse(text, d)
	if err != nil || reading != nil {
		t.Fatalf("Format(%v, %v) = %q, which parses with %v, %v", v, d, text, reading, err)
	}
	if math.Abs(got-v) > 5.0001e-4*math.Abs(v) {
		t.Fatalf("Format(%v, %v) = %q, which parses to %v", v, d, text, got)
	}
	if again := Format(got, d); again != text {
		t.Fatalf("Format(%v, %v) = %q, but after parsing %q", v, d, text, again)
	}
}

func TestRoundTrip(t *testing.T) {
	r := rand.New(rand.NewPCG(32, 62))
	for _, d := range Dimensions() {
		roundTrip(t, 0, d)
		for range 5000 {
			if d == Count {
				roundTrip(t, float64(r.IntN(maxCount+1)), d)
				continue
			}
			v := math.Pow(10, 40*r.Float64()-20)
			if r.IntN(2) == 0 {
				v = -v
			}
			roundTrip(t, v, d)
		}
		if d == Count {
			continue
		}
		for exp := -300; exp <= 300; exp++ { // decade boundaries and their neighbours
			v := math.Pow(10, float64(exp))
			for _, x := range []float64{v, math.Nextafter(v, 0), math.Nextafter(v, 2*v), 0.99995 * v, 0.99994 * v} {
				roundTrip(t, x, d)
			}
		}
	}
}

func BenchmarkFormat(b *testing.B) {
	b.ReportAllocs()
	n := 0
	for b.Loop() {
		n += len(Format(8.9734e-9, Charge))
	}
	sink = float64(n)
}
