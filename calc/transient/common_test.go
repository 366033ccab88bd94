package transient

import (
	"math"
	"testing"
)

var (
	nan = math.NaN()
	inf = math.Inf(1)
)

// near fails the test unless got is within tolerance of want.
func near(tb testing.TB, what string, got, want, tolerance float64) {
	tb.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		tb.Errorf("%s: %.10g, want %.10g within %.2g", what, got, want, tolerance)
	}
}

// same fails the test unless got equals want to the relative tolerance.
func same(tb testing.TB, what string, got, want, tolerance float64) {
	tb.Helper()
	if got == want {
		return
	}
	near(tb, what, got, want, tolerance*math.Abs(want))
}

// level is a capacitance c [F] that does not depend on the voltage.
func level(c float64) Curve { return Curve{Points: []CurvePoint{{0, c}}} }

// example is a silicon switch of a 400 V half bridge.
func example() (*Switch, Gate) {
	return &Switch{
		Threshold: 3.5, Transconductance: 20, InputCapacitance: 2e-9, InputCapacitanceVoltage: 100, CommonSource: 1e-9,
		Transfer: Curve{Points: []CurvePoint{{1, 900e-12}, {10, 250e-12}, {25, 60e-12}, {100, 12e-12}, {400, 6e-12}}},
		Output:   Curve{Points: []CurvePoint{{1, 4e-9}, {10, 1.6e-9}, {25, 600e-12}, {100, 200e-12}, {400, 110e-12}}},
	}, Gate{Resistance: 12, On: 12, Off: -1}
}

// march integrates the state y from 0 to end by n steps of the classical Runge-Kutta method, calling seen after every step.
func march(y []float64, end float64, n int, rate func(t float64, y, dy []float64), seen func(t float64, y []float64)) {
	h := end / float64(n)
	var k [4][]float64
	for i := range k {
		k[i] = make([]float64, len(y))
	}
	at := make([]float64, len(y))
	for step := range n {
		t := float64(step) * h
		for i, c := range [4]float64{0, 0.5, 0.5, 1} {
			for j := range y {
				at[j] = y[j]
				if i > 0 {
					at[j] += c * h * k[i-1][j]
				}
			}
			rate(t+c*h, at, k[i])
		}
		for j := range y {
			y[j] += h / 6 * (k[0][j] + 2*k[1][j] + 2*k[2][j] + k[3][j])
		}
		if seen != nil {
			seen(t+h, y)
		}
	}
}
