package numeric

import (
	"math"
	"testing"
)

func TestLambertNear(t *testing.T) {
	worst := 0.0
	for y := -800.0; y < 1e6; y += 0.01 * (1 + math.Abs(y)/20) {
		_, want := LogLambertPair(y)
		if want > 0 {
			worst = math.Max(worst, math.Abs(LambertNear(y)/want-1))
		}
	}
	if !(worst < 3e-9) {
		t.Errorf("w deviates by %.3g", worst)
	}
}
