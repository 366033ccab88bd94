package startup_test

import (
	"math"
	"testing"

	"floatrail/calc/recharge"
	"floatrail/calc/startup"
)

var nan = math.NaN()

// near fails the test unless got is within tolerance of want.
func near(tb testing.TB, what string, got, want, tolerance float64) {
	tb.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		tb.Errorf("%s: %.12g, want %.12g within %.2g", what, got, want, tolerance)
	}
}

// fixedDrop drops almost the same voltage [V] at any current, in series with r [ohm].
func fixedDrop(drop, r float64) recharge.Element {
	const slope = 1e-5 // [V]
	return recharge.Element{Junction: recharge.Junction{Slope: slope, LogSaturation: -drop / slope}, Resistance: r}
}

// silicon drops 0.8 V at 1 A in its junction, in series with r [ohm].
func silicon(r float64) recharge.Element {
	const slope = 0.0385 // n = 1.5 at 25 °C [V]
	return recharge.Element{Junction: recharge.Junction{Slope: slope, LogSaturation: -0.8 / slope}, Resistance: r}
}

// typical is 10 µF through 5 ohm and a silicon diode from 15 V with 0.5 mA of load.
func typical() startup.Charge {
	return startup.Charge{Element: silicon(5), Capacitance: 10e-6, Supply: 15, Load: 0.5e-3}
}

// march fires pulses one by one until one reaches the target, at most most of them; V_BS does not fall below 0.
func march(c startup.Charge, width, period, target float64, most int) (time float64, n int, ends []float64) {
	v := c.Initial
	for n < most {
		on := recharge.Interval{Duration: width, Drive: c.Supply - c.Node, Conducts: true, Load: c.Load}
		end, _ := c.Element.Advance(v, on, c.Capacitance)
		ends = append(ends, end)
		n++
		if end >= target {
			return float64(n-1)*period + c.Element.TimeTo(c.Capacitance, on.Drive, c.Load, v, target), n, ends
		}
		v = math.Max(end-c.Load*(period-width)/c.Capacitance, 0)
	}
	return math.Inf(1), 0, ends
}
