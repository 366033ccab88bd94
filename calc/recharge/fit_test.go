package recharge

import (
	"math"
	"testing"
)

// sample takes points from a law.
func sample(j Junction, currents ...float64) (points []DiodePoint) {
	for _, i := range currents {
		points = append(points, DiodePoint{i, j.Voltage(i)})
	}
	return points
}

// kT/q of checks.md at 25 °C, from the exact constants of the SI [V].
const vt25 = 25.693e-3

func TestFitThroughPoints(t *testing.T) {
	for name, c := range map[string]struct {
		points []DiodePoint
		series float64
		slope  float64 // [V], NaN: not checked
		r      float64 // [ohm], NaN: not checked
	}{
		"one point takes n = 1.5":              {[]DiodePoint{{0.5, 0.9}}, nan, 1.5 * vt25, 0},
		"one point, known resistance":          {[]DiodePoint{{0.5, 0.9}}, 0.2, 1.5 * vt25, 0.2},
		"silicon, two points":                  {[]DiodePoint{{0.01, 0.60}, {0.1, 0.70}}, nan, 0.1 / math.Ln10, 0},
		"n would be 8.5: the rest becomes r_D": {[]DiodePoint{{0.01, 0.5}, {1, 1.5}}, nan, 2 * vt25, nan},
		"known resistance explains the slope":  {[]DiodePoint{{0.01, 0.602}, {1, 0.952}}, 0.2, (0.752 - 0.6) / math.Log(100), 0.2},
		"germanium, I_S counts":                {[]DiodePoint{{0.001, 0.08}, {0.1, 0.25}}, nan, nan, 0},
		"near-equal, a fixed drop":             {[]DiodePoint{{0.001, 0.3999}, {1, 0.4001}}, nan, 2e-4 / math.Log(1000), 0},
		"nearer still":                         {[]DiodePoint{{0.001, 0.399999}, {1, 0.400001}}, nan, 2e-6 / math.Log(1000), 0},
	} {
		j, err := FitJunction(c.points, c.series, 25)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		for _, p := range c.points {
			near(t, name, j.Voltage(p.Current), p.Voltage, 1e-10)
		}
		if c.slope == c.slope {
			near(t, name+": slope", j.Slope/c.slope, 1, 3e-5)
		}
		if c.r == c.r {
			near(t, name+": resistance", j.Resistance, c.r, 1e-12)
		}
		if !(j.Slope > 0 && j.Slope <= 2*vt25*1.0001) || !(j.Resistance >= 0) {
			t.Errorf("%s: %+v", name, j)
		}
	}
}

func TestFixedDropIsFixed(t *testing.T) {
	e := fixedDrop(t, 0.4, 0)
	for _, i := range []float64{1e-4, 1e-3, 0.03, 1, 10} {
		near(t, "drop", e.Drop(i), 0.4, 2.1e-4)
	}
	if !(e.Slope > 20e-6 && e.Slope < 40e-6) {
		t.Errorf("slope %g V", e.Slope)
	}
	if got := e.Current(0.39); got > 1e-100 {
		t.Errorf("conducts %g A at 0.39 V", got)
	}
}

// More points than parameters: the law they were taken from comes back; its limits hold where they were not.
func TestFitLeastSquares(t *testing.T) {
	for name, j := range map[string]Junction{
		"silicon":          {Slope: 0.045, LogSaturation: -17, Resistance: 0.12},
		"schottky":         {Slope: 0.027, LogSaturation: -10, Resistance: 0.05},
		"without series":   {Slope: 0.04, LogSaturation: -20},
		"at the limit":     {Slope: 2 * thermalVoltagePerKelvin * 298.15, LogSaturation: -15, Resistance: 0.3},
		"sharp with drop":  {Slope: 50e-6, LogSaturation: -8000, Resistance: 0.1},
		"leaky, I_S large": {Slope: 0.026, LogSaturation: -7.5, Resistance: 0.2},
	} {
		got, err := FitJunction(sample(j, 1e-3, 5e-3, 0.02, 0.1, 0.4, 1, 2), nan, 25)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		near(t, name+": slope", got.Slope/j.Slope, 1, 1e-6)
		near(t, name+": ln I_S", got.LogSaturation/j.LogSaturation, 1, 1e-6)
		near(t, name+": resistance", got.Resistance, j.Resistance, 1e-8)
		known, err := FitJunction(sample(j, 1e-3, 5e-3, 0.02, 0.1, 0.4, 1, 2), j.Resistance, 25)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		near(t, name+": known resistance", known.Resistance, j.Resistance, 1e-8)
	}
	// n = 4 over the whole range is not a junction: limit and r_D, and no other pair in the box fits better
	points := sample(Junction{Slope: 4 * vt25, LogSaturation: -7}, 0.01, 0.05, 0.2, 0.6, 1)
	got, err := FitJunction(points, nan, 25)
	if err != nil {
		t.Fatal(err)
	}
	cost := func(j Junction) (sum float64) {
		for _, p := range points {
			d := j.Voltage(p.Current) - p.Voltage
			sum += d * d
		}
		return sum
	}
	if limit := 2 * thermalVoltagePerKelvin * 298.15; math.Abs(got.Slope-limit) > 1e-12 || !(got.Resistance > 0) {
		t.Errorf("beyond the limit: %+v", got)
	}
	for _, d := range []float64{-1e-3, 1e-3} {
		for _, other := range []Junction{
			{got.Slope, got.LogSaturation + d, got.Resistance}, {got.Slope, got.LogSaturation, got.Resistance * (1 + d)},
			{got.Slope * (1 - math.Abs(d)), got.LogSaturation, got.Resistance},
		} {
			if cost(other) < cost(got)*(1-1e-4) {
				t.Errorf("%+v fits better than %+v", other, got)
			}
		}
	}
}

func TestFitRefuses(t *testing.T) {
	for name, c := range map[string]struct {
		points       []DiodePoint
		series, temp float64
	}{
		"no points":                    {nil, nan, 25},
		"NaN":                          {[]DiodePoint{{nan, 0.5}}, nan, 25},
		"zero current":                 {[]DiodePoint{{0, 0.5}}, nan, 25},
		"negative voltage":             {[]DiodePoint{{1, -0.5}}, nan, 25},
		"not in order":                 {[]DiodePoint{{1, 0.9}, {0.1, 0.7}}, nan, 25},
		"falling":                      {[]DiodePoint{{0.1, 0.9}, {1, 0.8}}, nan, 25},
		"faster than a resistor":       {[]DiodePoint{{0.1, 0.05}, {1, 0.8}}, nan, 25},
		"series resistance takes all":  {[]DiodePoint{{1, 0.5}}, 0.6, 25},
		"series resistance turns it":   {[]DiodePoint{{0.1, 0.7}, {1, 0.9}}, 0.3, 25},
		"negative series resistance":   {[]DiodePoint{{1, 0.5}}, -1, 25},
		"below absolute zero":          {[]DiodePoint{{1, 0.5}}, nan, -300},
		"infinite voltage":             {[]DiodePoint{{1, math.Inf(1)}}, nan, 25},
		"third point faster than line": {[]DiodePoint{{0.1, 0.7}, {1, 0.9}, {1.1, 1.2}}, nan, 25},
	} {
		if j, err := FitJunction(c.points, c.series, c.temp); err == nil {
			t.Errorf("%s: accepted as %+v", name, j)
		}
	}
	if _, err := FitJunction([]DiodePoint{{1, 0.5}}, nan, nan); err != nil {
		t.Errorf("temperature left out: %v", err)
	}
}

func TestAtTemperature(t *testing.T) {
	points := []DiodePoint{{0.01, 0.6}, {1, 0.95}}
	j, err := FitJunction(points, nan, 25)
	if err != nil {
		t.Fatal(err)
	}
	for _, hot := range []float64{-40, 25, 125} {
		moved := j.AtTemperature(hot, 25, points[1])
		near(t, "upper point", moved.Voltage(1), 0.95-2e-3*(hot-25), 1e-10)
		near(t, "slope", moved.Slope/j.Slope, (hot+273.15)/298.15, 1e-12)
		if moved.Resistance != j.Resistance {
			t.Errorf("r_D moved to %g", moved.Resistance)
		}
		back := moved.AtTemperature(25, hot, points[1])
		near(t, "there and back", back.LogSaturation, j.LogSaturation, 1e-9)
	}
	// a low drop must not turn negative
	low := linked(0.028, 0.22)
	moved := low.AtTemperature(175, 25, DiodePoint{1, 0.22})
	if v := moved.Voltage(1); !(v > 0 && v < 0.05) {
		t.Errorf("0.22 V at 25 °C is %g V at 175 °C", v)
	}
	sharp := fixedDrop(t, 0.4, 0).Junction
	near(t, "fixed drop hot", sharp.AtTemperature(125, 25, DiodePoint{1, 0.4001}).Voltage(0.1), 0.2, 3e-4)
}
