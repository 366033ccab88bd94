package numeric

import (
	"math"
	"math/big"
	"testing"
)

// e^l + l = y, the residual evaluated against 200-bit arithmetic through l = ln(y - l) or l = y - e^l is dominated by the
// double exponential, so the check is made backwards: choose l, form y exactly, solve.
func TestLogLambertInverts(t *testing.T) {
	worst := 0.0
	for l := -700.0; l <= 13.8; l += 0.0137 {
		e := math.Exp(l)
		y, _ := new(big.Float).SetPrec(200).Add(big.NewFloat(e), big.NewFloat(l)).Float64()
		got, w := LogLambertPair(y)
		// dl = dy/(1 + e^l): y is rounded to a double once, l and e^l once each
		bound := (math.Abs(y)+e)*0x1p-52/(1+e) + 2*math.Abs(l)*0x1p-52 + 0x1p-52
		if d := math.Abs(got - l); !(d <= bound) {
			t.Fatalf("l = %v: got %v, off by %g > %g", l, got, d, bound)
		} else {
			worst = math.Max(worst, d)
		}
		if d := math.Abs(w-e) / e; !(d <= bound+0x1p-51) {
			t.Fatalf("l = %v: e^l off by %g", l, d)
		}
	}
	t.Logf("largest absolute error of l %.2g", worst)
}

func TestLogLambertValues(t *testing.T) {
	for _, c := range []struct{ y, l float64 }{
		{1, 0},                                   // e^0 + 0
		{0, -0.56714329040978387300},             // -omega constant, NIST DLMF 4.13
		{math.E + 1, 1},                          // e^1 + 1
		{-1e6, -1e6},                             // e^l underflows
		{1e6, 13.815496742372096879},             // 60-digit iteration of l = ln(y - l), Python decimal
		{-40, -40 - math.Exp(-40)},               // asymptote
		{-1e9, -1e9}, {1e300, 690.7755278982137}, // ln y
	} {
		if got := LogLambert(c.y); math.Abs(got-c.l) > 4e-16*math.Max(1, math.Abs(c.l)) {
			t.Errorf("LogLambert(%v) = %.17g, want %.17g", c.y, got, c.l)
		}
	}
	if got := LogLambert(math.NaN()); got == got {
		t.Errorf("NaN gave %v", got)
	}
	if got := LogLambert(math.Inf(1)); !math.IsInf(got, 1) {
		t.Errorf("+Inf gave %v", got)
	}
	if got := LogLambert(math.Inf(-1)); !math.IsInf(got, -1) {
		t.Errorf("-Inf gave %v", got)
	}
}

func TestRoot(t *testing.T) {
	for name, c := range map[string]struct {
		f       func(float64) float64
		a, b, x float64
	}{
		"cosine":       {func(x float64) float64 { return math.Cos(x) - x }, 0, 1, 0.73908513321516064166}, // Dottie number
		"cubic":        {func(x float64) float64 { return x*x*x - 2 }, 2, -1, math.Cbrt(2)},
		"steep":        {func(x float64) float64 { return math.Exp(20*x) - 1e6 }, -5, 5, math.Log(1e6) / 20},
		"flat":         {func(x float64) float64 { return math.Pow(x-0.3, 9) }, 0, 1, 0.3},
		"step":         {func(x float64) float64 { return math.Copysign(1, x-math.Sqrt2) }, 0, 1000, math.Sqrt2},
		"infinite end": {func(x float64) float64 { return math.Log(x) + 1 }, 0, 9, math.Exp(-1)},
		"root at end":  {func(x float64) float64 { return x - 4 }, 4, 9, 4},
	} {
		calls := 0
		x, ok := Root(func(x float64) float64 { calls++; return c.f(x) }, c.a, c.b, 1e-12)
		if !ok || math.Abs(x-c.x) > 2e-12 {
			t.Errorf("%s: %v, %v; want %v", name, x, ok, c.x)
		}
		if limit := int(math.Log2(math.Abs(c.b-c.a)/2e-12)) + 5; calls > limit {
			t.Errorf("%s: %d evaluations, bisection bound %d", name, calls, limit)
		}
	}
	smooth := 0
	if _, ok := Root(func(x float64) float64 { smooth++; return math.Cos(x) - x }, 0, 1, 1e-12); !ok || smooth > 14 {
		t.Errorf("smooth function took %d evaluations", smooth)
	}
}

func TestRootRefuses(t *testing.T) {
	nan := math.NaN()
	for name, c := range map[string]struct {
		f         func(float64) float64
		a, b, tol float64
	}{
		"no change of sign": {func(x float64) float64 { return 1 + x*x }, -1, 1, 1e-9},
		"NaN function":      {func(float64) float64 { return nan }, -1, 1, 1e-9},
		"NaN inside":        {func(x float64) float64 { return x / math.Max(0, math.Abs(x)-0.9) * math.Max(0, math.Abs(x)-0.9) }, -1, 1, 1e-9},
		"NaN end":           {func(x float64) float64 { return x }, nan, 1, 1e-9},
		"NaN tolerance":     {func(x float64) float64 { return x }, -1, 1, nan},
		"infinite bracket":  {func(x float64) float64 { return x }, math.Inf(-1), 1, 1e-9},
	} {
		if x, ok := Root(c.f, c.a, c.b, c.tol); ok {
			t.Errorf("%s: accepted, x = %v", name, x)
		}
	}
	if x, ok := Root(func(x float64) float64 { return x - 3 }, 0, 10, 0); !ok || math.Abs(x-3) > 1e-14 {
		t.Errorf("zero tolerance: %v, %v", x, ok)
	}
}

func TestIntegrate(t *testing.T) {
	p, q := Integrate(func(x float64) (float64, float64) { return math.Exp(x), 1 / (1 + x*x) }, -30, 1, 1e-13)
	if want := math.E - math.Exp(-30); math.Abs(p-want) > 1e-12 {
		t.Errorf("exponential: %.16g, want %.16g", p, want)
	}
	if want := math.Pi/4 + math.Atan(30); math.Abs(q-want) > 1e-12 {
		t.Errorf("arctangent: %.16g, want %.16g", q, want)
	}
	step := func(x float64) (float64, float64) { return 1 / (1 + math.Exp(-400*(x-0.3))), 1 }
	want := (math.Log1p(math.Exp(400*0.7)) - math.Log1p(math.Exp(-400*0.3))) / 400
	if p, _ = Integrate(step, 0, 1, 1e-13); math.Abs(p-want) > 1e-12 {
		t.Errorf("step: %.16g, want %.16g", p, want)
	}
	if p, _ = Integrate(func(float64) (float64, float64) { return math.NaN(), 1 }, 0, 1, 1e-9); p == p {
		t.Errorf("NaN gave %v", p)
	}
}

func BenchmarkLogLambert(b *testing.B) {
	sum, y := 0.0, -20.0
	for b.Loop() {
		sum += LogLambert(y)
		if y += 0.7; y > 100 {
			y = -20
		}
	}
	if sum == 0 {
		b.Fatal("no work")
	}
}
