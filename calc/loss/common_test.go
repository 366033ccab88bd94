package loss_test

import (
	"math"
	"testing"
)

var nan = math.NaN()

// near fails the test unless got is within tolerance of want.
func near(tb testing.TB, what string, got, want, tolerance float64) {
	tb.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		tb.Errorf("%s: %.12g, want %.12g within %.2g", what, got, want, tolerance)
	}
}
