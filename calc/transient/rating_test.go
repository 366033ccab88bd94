package transient

import (
	"math"
	"testing"

	"floatrail/calc/recharge"
)

func TestPermitted(t *testing.T) {
	rows := []Row{{-5, inf}, {-12, 100e-9}, {-20, 20e-9}}
	for _, c := range []struct{ width, want float64 }{
		{0, -20}, {20e-9, -20}, {20.001e-9, -12}, {30e-9, -12}, {100e-9, -12}, {101e-9, -5}, {1, -5}, {inf, -5},
	} {
		if level, ok := Permitted(rows, c.width); !ok || level != c.want {
			t.Errorf("%v s: %v, %v; want %v", c.width, level, ok, c.want)
		}
	}
	for _, c := range []struct {
		rows  []Row
		width float64
	}{{nil, 1e-9}, {rows[1:], 101e-9}, {rows, nan}, {[]Row{{-5, nan}}, 1e-9}} {
		if level, ok := Permitted(c.rows, c.width); ok || level == level {
			t.Errorf("%v s of %v: %v, %v", c.width, c.rows, level, ok)
		}
	}
}

func TestClampedPin(t *testing.T) {
	clamp := recharge.Junction{Slope: 0.04, LogSaturation: -25, Resistance: 0.05}
	for _, node := range []float64{-40, -12, -3, -0.8, -0.3, 0} {
		for _, rvs := range []float64{0.5, 4.7, 22} {
			pin := ClampedPin(node, clamp, rvs)
			i := (pin - node) / rvs
			// Kirchhoff: the diode drops what the pin lacks
			near(t, "pin", -pin, clamp.Voltage(i), 1e-9)
			if pin < node || pin > 0 {
				t.Errorf("node %v V: pin %v V", node, pin)
			}
		}
		same(t, "without resistor", ClampedPin(node, clamp, 0), node, 0)
	}
	// a node above COM: the clamp blocks, its leakage through R_VS apart
	near(t, "blocked", ClampedPin(400, clamp, 10), 400, 10*math.Exp(-25)*1.001)
	// an ideal clamp holds COM
	near(t, "ideal", ClampedPin(-15, recharge.Junction{}, 10), 0, 1e-6)
	for _, v := range []float64{ClampedPin(nan, clamp, 10), ClampedPin(-5, clamp, nan), ClampedPin(-5, recharge.Junction{Slope: nan}, 10)} {
		if v == v {
			t.Errorf("NaN gives %v", v)
		}
	}
}
