package study

import (
	"math"
	"testing"

	"floatrail/calc/stage"
)

const (
	sampled = 100_000
	seed    = 7
)

// moments of a distribution over a range as it is drawn.
func moments(d Distribution, r stage.Triple) (mean, variance, kurtosis float64) {
	s := newStream("driver.uvloFalling", "V_UV-")
	n := float64(sampled)
	for i := range uint32(sampled) {
		mean += d.At(r, s.at(seed, i)) / n
	}
	fourth := 0.0
	for i := range uint32(sampled) {
		x := d.At(r, s.at(seed, i)) - mean
		variance += x * x / n
		fourth += x * x * x * x / n
	}
	return mean, variance, fourth/(variance*variance) - 3
}

// TestUniformMoments: mean (a + b)/2, variance (b - a)²/12, excess kurtosis -6/5. What a sample of this size may differ by is four standard errors:
// sqrt(1/12 n) of the mean, sqrt(1/180 n) of the variance, both of a range of 1.
func TestUniformMoments(t *testing.T) {
	mean, variance, kurtosis := moments(Uniform, stage.Triple{Min: 2, Typ: 2.1, Max: 3})
	n := float64(sampled)
	if math.Abs(mean-2.5) > 4*math.Sqrt(1/(12*n)) || math.Abs(variance-1.0/12) > 4*math.Sqrt(1/(180*n)) || math.Abs(kurtosis+1.2) > 0.02 {
		t.Errorf("mean %g, variance %g, kurtosis %g, want 2.5, 1/12, -1.2", mean, variance, kurtosis)
	}
}

// TestNormalMoments: variance 1 - 2·a·φ(a)/(2·Φ(a) - 1) of a standard normal distribution truncated at ±a, and SciPy's moments.
func TestNormalMoments(t *testing.T) {
	ref := readReference(t).Normal
	density := math.Exp(-0.5*reach*reach) / math.Sqrt(2*math.Pi)
	closed := 1 - 2*reach*density/math.Erf(reach/math.Sqrt2)
	if math.Abs(closed-ref.Variance) > 1e-9 {
		t.Errorf("closed form of the variance %.12g, SciPy %.12g", closed, ref.Variance)
	}
	mean, variance, kurtosis := moments(Normal, standard)
	n := float64(sampled)
	if math.Abs(mean) > 4/math.Sqrt(n) || math.Abs(variance-closed) > 4*math.Sqrt(2/n) || math.Abs(kurtosis-ref.Kurtosis) > 0.05 {
		t.Errorf("mean %g, variance %g, kurtosis %g, want 0, %g, %g", mean, variance, kurtosis, closed, ref.Kurtosis)
	}
}

// TestDistributionFunctions compares the empirical distribution with the closed form: the largest difference (Kolmogorov-Smirnov) exceeds
// 1.95/sqrt(n) once in a thousand samples.
func TestDistributionFunctions(t *testing.T) {
	uneven := stage.Triple{Min: 0, Typ: 1, Max: 4}
	phi := func(x float64) float64 { return math.Erf(x/math.Sqrt2) / math.Erf(reach/math.Sqrt2) } // of |x| of a truncated normal variable
	for _, c := range []struct {
		name string
		d    Distribution
		r    stage.Triple
		cdf  func(x float64) float64
	}{
		{"uniform", Uniform, uneven, func(x float64) float64 { return x / 4 }},
		{"normal", Normal, standard, func(x float64) float64 { return 0.5 + phi(x)/2 }},
		{"normal, uneven", Normal, uneven, func(x float64) float64 { // weights of both halves as their widths
			if x < 1 {
				return 0.25 * (1 - phi(reach*(1-x)))
			}
			return 0.25 + 0.75*phi(reach*(x-1)/3)
		}},
		{"normal, typ at max", Normal, stage.Triple{Min: 0, Typ: 1, Max: 1}, func(x float64) float64 { return 1 - phi(reach*(1-x)) }},
	} {
		s := newStream("bootstrap.resistor.resistance", "R_B")
		const bins = 200
		var below [bins + 1]int
		for i := range uint32(sampled) {
			x := c.d.At(c.r, s.at(seed, i))
			if !(x >= c.r.Min && x <= c.r.Max) {
				t.Fatalf("%s: %g outside its ends", c.name, x)
			}
			below[min(bins, int(math.Ceil((x-c.r.Min)/(c.r.Max-c.r.Min)*bins)))]++
		}
		sum, worst := 0, 0.0
		for k := range bins + 1 {
			sum += below[k]
			x := c.r.Min + float64(k)/bins*(c.r.Max-c.r.Min)
			worst = math.Max(worst, math.Abs(float64(sum)/sampled-c.cdf(x)))
		}
		if worst > 1.95/math.Sqrt(sampled) {
			t.Errorf("%s: the distribution differs by %g", c.name, worst)
		}
	}
}

// TestEndsAndUnknown: a range without width is its value, ends are never passed, and what is not known stays so.
func TestEndsAndUnknown(t *testing.T) {
	nan := math.NaN()
	for _, d := range []Distribution{Uniform, Normal} {
		if got := d.At(stage.Triple{Min: 3, Typ: 3, Max: 3}, 0.3); got != 3 {
			t.Errorf("%s of an exact value: %g", d, got)
		}
		for _, u := range []float64{0x1p-53, 1 - 0x1p-53} {
			if got := d.At(stage.Triple{Min: 0.1, Typ: 0.2, Max: 0.3}, u); !(got >= 0.1 && got <= 0.3) {
				t.Errorf("%s at %g: %g is outside its ends", d, u, got)
			}
		}
		for _, r := range []stage.Triple{{Min: nan, Typ: 1, Max: 2}, {Min: 0, Typ: 1, Max: nan}, stage.Missing()} {
			if got := d.At(r, 0.5); got == got {
				t.Errorf("%s of %v: %g, want nothing", d, r, got)
			}
		}
	}
}

// TestStreamsAreApart: two inputs, two seeds and two draws have different numbers, which do not go together: the correlation of n independent
// pairs has the standard error 1/sqrt(n).
func TestStreamsAreApart(t *testing.T) {
	a, b := newStream("driver.uvloFalling", "V_UV-"), newStream("driver.uvloRising", "V_UV+")
	if a == b || a == newStream("driver.uvloFalling", "") {
		t.Error("streams of two inputs are one")
	}
	pairs := map[string]func(i uint32) (float64, float64){
		"inputs": func(i uint32) (float64, float64) { return a.at(seed, i), b.at(seed, i) },
		"seeds":  func(i uint32) (float64, float64) { return a.at(seed, i), a.at(seed+1, i) },
		"draws":  func(i uint32) (float64, float64) { return a.at(seed, i), a.at(seed, i+1) },
	}
	for name, pair := range pairs {
		sum := 0.0
		for i := range uint32(sampled) {
			x, y := pair(i)
			sum += (x - 0.5) * (y - 0.5) * 12
		}
		if rho := sum / sampled; math.Abs(rho) > 4/math.Sqrt(sampled) {
			t.Errorf("%s: correlation %g", name, rho)
		}
	}
}
