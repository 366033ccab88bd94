package transient

import (
	"math"
	"testing"
)

func TestCurveAt(t *testing.T) {
	c := Curve{Points: []CurvePoint{{3, 8e-12}, {15, 2e-12}, {63, 1e-12}}}
	for _, k := range []struct{ v, want float64 }{
		{-50, 8e-12}, {0, 8e-12}, {3, 8e-12}, {15, 2e-12}, {63, 1e-12}, {1000, 1e-12}, {inf, 1e-12},
		{7, 4e-12}, // 1 + v = 8 is the geometric mean of 4 and 16
		{31, 2e-12 / math.Sqrt2},
	} {
		same(t, "level", c.At(k.v), k.want, 1e-15)
		scaled := Curve{Points: c.Points, Scale: 1.3}
		same(t, "scaled", scaled.At(k.v), 1.3*k.want, 1e-15)
	}
}

// The charge against the integral of At by Simpson's rule, panel by panel between the points.
func TestCurveChargeIsTheIntegral(t *testing.T) {
	for name, c := range map[string]Curve{
		"falling":      {Points: []CurvePoint{{1, 900e-12}, {10, 250e-12}, {25, 60e-12}, {100, 12e-12}}},
		"exponent -1":  {Points: []CurvePoint{{0, 100e-12}, {9, 10e-12}, {99, 1e-12}}},
		"nearly -1":    {Points: []CurvePoint{{0, 100e-12}, {9, 10e-12 * (1 + 1e-9)}, {99, 1e-12}}, Scale: 2},
		"rising":       {Points: []CurvePoint{{5, 10e-12}, {50, 20e-12}}},
		"level":        level(33e-12),
		"with a step":  {Points: []CurvePoint{{5, 10e-12}, {50, 20e-12}, {50, 4e-12}, {80, 3e-12}}},
		"part level":   {Points: []CurvePoint{{2, 5e-12}, {20, 5e-12}, {90, 1e-12}}},
		"scaled":       {Points: []CurvePoint{{0, 1e-12}, {7, 3e-12}}, Scale: 0.4},
		"first at 0 V": {Points: []CurvePoint{{0, 9e-10}, {1e-3, 1e-10}, {400, 1e-12}}},
	} {
		for _, end := range []float64{0.3, 1, 7, 60, 130} {
			edges := []float64{0}
			for _, p := range c.Points {
				if p.Voltage > 0 && p.Voltage < end {
					edges = append(edges, p.Voltage)
				}
			}
			edges = append(edges, end)
			sum := 0.0
			for k := 1; k < len(edges); k++ {
				// in l = ln(1 + v): dv = (1 + v) dl; ends taken from inside
				a, b := math.Log1p(edges[k-1]), math.Log1p(edges[k])
				const n = 400
				h := (b - a) / n
				for j := 0; j <= n; j++ {
					weight := 2.0 + 2*float64(j&1)
					if j == 0 || j == n {
						weight = 1
					}
					v := math.Expm1(a + h*math.Min(math.Max(float64(j), 1e-9), n-1e-9))
					sum += weight * h / 3 * c.At(v) * (1 + v)
				}
			}
			same(t, name, c.Charge(end), sum, 1e-7)
		}
		same(t, name+" below 0", c.Charge(-3), -3*c.At(0), 1e-15)
	}
}

func TestCurveNearExponentMinusOne(t *testing.T) {
	want := 100e-12 * math.Log(100)
	for _, e := range []float64{0, 1e-15, -1e-12, 1e-9, -1e-7} {
		c := Curve{Points: []CurvePoint{{0, 100e-12}, {99, 1e-12 * (1 + e)}}}
		same(t, "logarithm", c.Charge(99), want, 1e-14+math.Abs(e))
	}
}

// Texas Instruments SLUP169, from memory: with C proportional to v^-1/2 the average up to V_off is 2·C_spec·sqrt(V_spec/V_off): 340 pF
// and 720 pF at 25 V, 380 V off, give 174 pF and 369 pF.
func TestPublishedAverageCapacitance(t *testing.T) {
	for _, c := range []struct{ spec, published float64 }{{340e-12, 174e-12}, {720e-12, 369e-12}} {
		// its law through points 1 % apart from 1 µV: level below, which loses half of sqrt(1 µV/380 V) = 2.6e-5 of the charge; between
		// points the power law in 1 + v departs from the chord in ln v by less than (ln 1.01)²/8·(1/8) = 1.5e-6
		fine := Curve{}
		for v := 1e-6; v < 380*1.01; v *= 1.01 {
			fine.Points = append(fine.Points, CurvePoint{v, c.spec * math.Sqrt(25/v)})
		}
		average := fine.Charge(380) / 380
		near(t, "average, as printed", average, c.published, 0.5e-12)
		same(t, "average", average, 2*c.spec*math.Sqrt(25.0/380), 3e-5)
		// two points on the same exponent: the law is in 1 + v, so the average differs by the ratio of the integrals
		coarse := Curve{Points: []CurvePoint{{0, c.spec * math.Sqrt(26)}, {380, c.spec * math.Sqrt(26.0/381)}}}
		ratio := math.Sqrt(26.0/25) * (math.Sqrt(381) - 1) / math.Sqrt(380)
		same(t, "average of two points", coarse.Charge(380)/380, 2*c.spec*math.Sqrt(25.0/380)*ratio, 1e-13)
	}
}

func TestCurveRefuses(t *testing.T) {
	empty, bad := Curve{}, Curve{Points: []CurvePoint{{0, 1e-12}, {10, nan}}}
	for what, got := range map[string]float64{
		"no points": empty.At(3), "no points, charge": empty.Charge(3), "NaN voltage": level(1e-12).At(nan),
		"NaN voltage, charge": level(1e-12).Charge(nan), "NaN capacitance": bad.At(5), "NaN capacitance, charge": bad.Charge(5),
		"NaN scale": Curve{Points: bad.Points, Scale: nan}.At(0), "NaN scale, charge": Curve{Points: bad.Points, Scale: nan}.Charge(0),
	} {
		if got == got {
			t.Errorf("%s: %v", what, got)
		}
	}
}
