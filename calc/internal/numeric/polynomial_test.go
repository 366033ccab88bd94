package numeric

import (
	"math"
	"testing"
)

func TestPolynomialAlgebra(t *testing.T) {
	p, q := Polynomial{1, -2, 3, 5}, Polynomial{0.5, 4, -1, 2}
	for _, x := range []float64{0, 0.25, 0.5, 1} {
		sum := p.Scaled(2).Plus(q.Scaled(-3))
		if got, want := sum.At(x), 2*p.At(x)-3*q.At(x); math.Abs(got-want) > 1e-14 {
			t.Errorf("2p - 3q at %v: %v, want %v", x, got, want)
		}
		if got, want := p.Derivative().At(x), -2+6*x+15*x*x; math.Abs(got-want) > 1e-14 {
			t.Errorf("p' at %v: %v, want %v", x, got, want)
		}
	}
}

func TestStationary(t *testing.T) {
	for name, c := range map[string]struct {
		p    Polynomial
		want []float64
	}{
		"constant":                  {Polynomial{3}, nil},
		"line":                      {Polynomial{3, -1}, nil},
		"parabola":                  {Polynomial{0, -1, 1}, []float64{0.5}},
		"parabola that turns at 0":  {Polynomial{2, 0, 1}, nil},
		"parabola that turns at 1":  {Polynomial{2, -2, 1}, nil},
		"cubic":                     {Polynomial{0, 3. / 16 * 3, -1.5, 1}, []float64{0.25, 0.75}},
		"cubic, one turn outside":   {Polynomial{0, -1.5, 0.5 * 2.5, 1. / 3}, []float64{0.5}}, // p' = (x - 1/2)(x + 3)
		"saddle":                    {Polynomial{1, 0.75, -1.5, 1}, nil},                      // p' = 3(x - 1/2)²
		"no real turn":              {Polynomial{1, 1, -1.5, 1}, nil},
		"turns at both ends":        {Polynomial{0, 0, 3, -2}, nil},
		"leading coefficient fades": {Polynomial{0, -1, 1, 1e-300}, []float64{0.5}},
		"large scale":               {Polynomial{0, -1e150, 1e150, 0}, []float64{0.5}},
		"cubic, falling":            {Polynomial{0, -3. / 16 * 3, 1.5, -1}, []float64{0.25, 0.75}},
		"NaN":                       {Polynomial{0, math.NaN(), 1, 1}, nil},
	} {
		at, n := c.p.Stationary()
		if n != len(c.want) {
			t.Errorf("%s: %v, want %v", name, at[:n], c.want)
			continue
		}
		for k, want := range c.want {
			if math.Abs(at[k]-want) > 1e-15 {
				t.Errorf("%s: %.17g, want %v", name, at[k], want)
			}
		}
	}
}

// Against 2,000 points of each of 500 polynomials.
func TestExtremes(t *testing.T) {
	var q quasi
	for range 500 {
		p := Polynomial{q.next(), 3 * q.next(), 6 * q.next(), 4 * q.next()}
		low, high := p.Extremes()
		least, most := math.Inf(1), math.Inf(-1)
		for k := range 2001 {
			v := p.At(float64(k) / 2000)
			least, most = math.Min(least, v), math.Max(most, v)
		}
		// |p”| <= 36, half a distance of points is 1/4000
		if low.Value > least+1e-15 || low.Value < least-36./2/4000/4000 || high.Value < most-1e-15 || high.Value > most+36./2/4000/4000 {
			t.Errorf("%v: %v to %v, sampled %v to %v", p, low, high, least, most)
		}
		if p.At(low.Theta) != low.Value || p.At(high.Theta) != high.Value {
			t.Errorf("%v: values %v, %v are not those of their places", p, low, high)
		}
	}
	if low, high := (Polynomial{7}).Extremes(); low != (Point{0, 7}) || high != (Point{0, 7}) {
		t.Errorf("constant: %v, %v", low, high)
	}
	if low, high := (Polynomial{7, -2}).Extremes(); low != (Point{1, 5}) || high != (Point{0, 7}) {
		t.Errorf("line: %v, %v", low, high)
	}
}

func TestCrossing(t *testing.T) {
	wave := Polynomial{0, 9. / 16, -1.5, 1}     // 0 at 0, turns at 1/4 (1/16) and 3/4 (0), 1/16 at 1
	peak := Polynomial{0, 1, -1}                // 1/4 at 1/2
	saddle := Polynomial{-0.125, 0.75, -1.5, 1} // (x - 1/2)³
	negative := Polynomial{0.125, -0.75, 1.5, -1}
	for name, c := range map[string]struct {
		p           Polynomial
		level, a, b float64
		direction   int
		want        float64 // NaN: nowhere
	}{
		"constant at the level":        {Polynomial{2}, 2, 0, 1, 0, math.NaN()},
		"constant beside the level":    {Polynomial{2}, 1, 0, 1, 0, math.NaN()},
		"line rises":                   {Polynomial{-1, 4}, 0, 0, 1, 1, 0.25},
		"line does not fall":           {Polynomial{-1, 4}, 0, 0, 1, -1, math.NaN()},
		"line, either":                 {Polynomial{-1, 4}, 0, 0, 1, 0, 0.25},
		"line ends at the level":       {Polynomial{-4, 4}, 0, 0, 1, 1, 1},
		"line begins at the level":     {Polynomial{0, 4}, 0, 0, 1, 0, math.NaN()},
		"before the interval":          {Polynomial{-1, 4}, 0, 0.3, 1, 0, math.NaN()},
		"after the interval":           {Polynomial{-1, 4}, 0, 0, 0.2, 0, math.NaN()},
		"peak, up":                     {peak, 0.1875, 0, 1, 1, 0.25},
		"peak, down":                   {peak, 0.1875, 0, 1, -1, 0.75},
		"peak, down, from within":      {peak, 0.1875, 0.4, 1, 0, 0.75},
		"peak touched":                 {peak, 0.25, 0, 1, 1, 0.5},
		"peak touched, not from above": {peak, 0.25, 0, 1, -1, math.NaN()},
		"above the peak":               {peak, 0.2500000001, 0, 1, 0, math.NaN()},
		"peak, back to where it began": {peak, 0, 0, 1, 0, 1},
		"triple root":                  {saddle, 0, 0, 1, 1, 0.5},
		"triple root, other sign":      {negative, 0, 0, 1, -1, 0.5},
		"wave, first":                  {wave, 0.03125, 0, 1, 0, 0.0669872981077807},  // 1/2 - sqrt(3)/4, rounded
		"wave, second":                 {wave, 0.03125, 0.1, 1, 0, 0.5},               // level and wave are symmetric about 1/2
		"wave, third":                  {wave, 0.03125, 0.1, 1, 1, 0.933012701892219}, // 1/2 + sqrt(3)/4, rounded
		"wave, third from behind":      {wave, 0.03125, 0.6, 1, 0, 0.933012701892219},
		"peak, before it":              {peak, 0.1875, 0, 0.2, 0, math.NaN()},
		"wave, to the bottom":          {wave, 0, 0.1, 1, 0, 0.75},
		"NaN":                          {Polynomial{math.NaN(), 1}, 0, 0, 1, 0, math.NaN()},
		"steep in one corner":          {Polynomial{-1, 1e9, 0, 1}, 0, 0, 1, 1, 1e-9},
	} {
		got, ok := c.p.Crossing(c.level, c.a, c.b, c.direction)
		if ok != (c.want == c.want) || ok && math.Abs(got-c.want) > 2e-15 && name[:6] != "triple" {
			t.Errorf("%s: %.17g, %v; want %v", name, got, ok, c.want)
		}
		if ok && c.p.At(got) != c.level {
			// to rounding of p or of theta
			slack := 4*0x1p-53*(math.Abs(c.p[0])+math.Abs(c.p[1])+math.Abs(c.p[2])+math.Abs(c.p[3])) + math.Abs(c.p.Derivative().At(got))*0x1p-52*got
			if d := math.Abs(c.p.At(got) - c.level); d > slack {
				t.Errorf("%s: p is %g off the level", name, d)
			}
		}
	}
}

// Every crossing that 400 points show is found, in order, and nothing is found that is none.
func TestCrossingFindsAll(t *testing.T) {
	var q quasi
	for range 300 {
		p := Polynomial{q.next(), 3 * q.next(), 6 * q.next(), 4 * q.next()}
		from := 0.0
		for k := range 400 {
			a, b := float64(k)/400, float64(k+1)/400
			if (p.At(a) > 0) == (p.At(b) > 0) {
				continue
			}
			way := 1
			if p.At(b) <= 0 {
				way = -1
			}
			x, ok := p.Crossing(0, from, 1, 0)
			y, same := p.Crossing(0, from, 1, way)
			if !ok || !same || x != y || x < a || x > b {
				t.Fatalf("%v: crossing between %v and %v, found %v %v, %v %v", p, a, b, x, ok, y, same)
			}
			if from = b; p.At(from) == 0 {
				t.Fatal("the sample falls on a root")
			}
		}
		// what is left are pairs of roots between two points
		for range 3 {
			x, ok := p.Crossing(0, from, 1, 0)
			if !ok {
				break
			}
			if math.Abs(p.At(x)) > 1e-14 {
				t.Errorf("%v: no root at %v", p, x)
			}
			from = x
		}
	}
}

func BenchmarkExtremes(b *testing.B) {
	p, sum := Polynomial{0, 9. / 16, -1.5, 1}, 0.0
	for b.Loop() {
		low, high := p.Extremes()
		sum += high.Value - low.Value
	}
	if sum == 0 {
		b.Fatal("no work")
	}
}

func BenchmarkCrossing(b *testing.B) {
	p := Polynomial{0, 9. / 16, -1.5, 1}
	for b.Loop() {
		if _, ok := p.Crossing(0.02, 0, 1, 0); !ok {
			b.Fatal("not found")
		}
	}
}
