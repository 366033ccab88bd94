package recharge

import (
	"math"
	"testing"
)

var nan = math.NaN()

// near fails the test unless got is within tolerance of want.
func near(tb testing.TB, what string, got, want, tolerance float64) {
	tb.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		tb.Errorf("%s: %.10g, want %.10g within %.2g", what, got, want, tolerance)
	}
}

// fixedDrop is a diode given as two near-equal points: drop [V] at any current, in series with r [ohm].
func fixedDrop(tb testing.TB, drop, r float64) Element {
	tb.Helper()
	j, err := FitJunction([]DiodePoint{{1e-3, drop - 1e-4}, {1, drop + 1e-4}}, nan, 25)
	if err != nil {
		tb.Fatal(err)
	}
	return Element{Junction: j, Resistance: r + j.Resistance}
}

// conducting is an interval of length t [s] at the drive e [V] with an element that may conduct and no load.
func conducting(t, e float64) Interval { return Interval{Duration: t, Drive: e, Conducts: true} }

// linked returns the junction of n·V_T = slope [V] that drops v [V] at 1 A.
func linked(slope, v float64) Junction { return Junction{Slope: slope, LogSaturation: -v / slope} }
