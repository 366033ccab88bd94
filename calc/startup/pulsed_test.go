package startup_test

import (
	"math"
	"testing"

	"floatrail/calc/recharge"
	"floatrail/calc/startup"
)

// Up to 64 pulses the count is that of the law itself, each pulse exactly; beyond, the average is measured against it.
func TestPulsesAgainstMarch(t *testing.T) {
	worst := 0.0
	for _, e := range []recharge.Element{silicon(5), silicon(0.5), fixedDrop(0.5, 5), {Resistance: 5, Switch: true}} {
		for _, width := range []float64{0.2e-6, 1e-6, 5e-6, 20e-6, 100e-6, 500e-6} { // R·C is 50 µs
			for _, delta := range []float64{0.02, 0.2, 0.8, 1} {
				for _, share := range []float64{0.2, 0.7, 0.99, 0.9999} { // of the way to where the pulses end
					c := startup.Charge{Element: e, Capacitance: 10e-6, Supply: 15, Load: 5e-3}
					period := width / delta
					target := share * c.PulsedSettled(width, period)
					want, n, _ := march(c, width, period, target, 100_000)
					got, pulses := c.PulsedTime(width, period, target)
					if n <= 64 && (pulses != n || math.Abs(got-want) > 1e-12*want) {
						t.Errorf("%+v %g %g %g: %g s in %d, want %g s in %d", e, width, delta, share, got, pulses, want, n)
					}
					// a time that falls on the edge of a pulse may fall on that of the next instead, a pause later
					off := math.Abs(got-want) / want
					worst = math.Max(worst, off)
					if !(off < 2e-5) || math.Abs(float64(pulses-n)) > 1+1e-5*float64(n) {
						t.Errorf("%+v %g %g %g: %g s in %d, want %g s in %d: %.2g", e, width, delta, share, got, pulses, want, n, off)
					}
				}
			}
		}
	}
	t.Logf("largest relative difference %.2g", worst)
}

// eq. (1) of the package comment: with the law at I_0/δ, V_BS at the end of pulse k lies between the average after k pulses and that plus D.
// The average thus never needs fewer pulses, and to a target lower by D never more.
func TestAverageBoundsThePulses(t *testing.T) {
	apart := 0.0
	for _, width := range []float64{0.5e-6, 5e-6, 50e-6, 200e-6} {
		for _, delta := range []float64{0.05, 0.3, 0.9} {
			c := startup.Charge{Element: silicon(5), Capacitance: 10e-6, Supply: 15, Load: 4e-3}
			period := width / delta
			average := c
			average.Load = c.Load / delta
			drop := c.Load * (period - width) / c.Capacitance
			_, _, ends := march(c, width, period, math.Inf(1), 200)
			for k, end := range ends {
				u := average.Reached(float64(k+1) * width)
				apart = math.Max(apart, (end-u)/drop)
				if !(end >= u-1e-12 && end <= u+drop+1e-12) {
					t.Fatalf("w %g s, δ %g, pulse %d: %g V, average %g V, D %g V", width, delta, k+1, end, u, drop)
				}
			}
			for _, target := range []float64{4, 9, 12} {
				_, n := c.PulsedTime(width, period, target)
				most, least := math.Ceil(average.Time(target)/width), math.Ceil(average.Time(target-drop)/width)
				if !(float64(n) <= most && float64(n) >= least) {
					t.Errorf("w %g s, δ %g, to %g V: %d pulses, average %g, less D %g", width, delta, target, n, most, least)
				}
			}
		}
	}
	if apart < 0.5 {
		t.Errorf("the average lags by %g·D only: too gentle a test", apart)
	}
}

// Long pulses fill the capacitor each time, which an average load of I_0/δ denies.
func TestLongPulsesArriveWhereTheAverageDoesNot(t *testing.T) {
	c := startup.Charge{Element: silicon(10), Capacitance: 1e-6, Supply: 15, Load: 1e-3}
	const width, period, target = 100e-6, 5e-3, 13.9 // 10 R·C; δ = 0.02
	average := c
	average.Load = c.Load * period / width // 50 mA
	if got := average.Time(target); !math.IsInf(got, 1) {
		t.Fatalf("the average arrives after %g s", got)
	}
	time, n := c.PulsedTime(width, period, target)
	if n != 1 || !(time < width) || time != c.Time(target) {
		t.Errorf("%g s and %d pulses, want %g s in the first", time, n, c.Time(target))
	}
}

// Arrival is decided by the exact steady state, on both sides of it, for few long and for many short pulses.
func TestPulsesArriveUpToTheirSteadyState(t *testing.T) {
	for _, width := range []float64{0.1e-6, 1e-6, 10e-6, 300e-6} {
		for _, delta := range []float64{0.02, 0.5} {
			c := startup.Charge{Element: silicon(5), Capacitance: 10e-6, Supply: 15, Load: 2e-3}
			period := width / delta
			low, high := c.PulsedSteady(width, period)
			near(t, "drop of the pause", high-low, math.Min(c.Load*(period-width)/c.Capacitance, high), 1e-9)
			if got := c.PulsedSettled(width, period); got != high {
				t.Errorf("settles at %g V, steady state ends at %g V", got, high)
			}
			if time, n := c.PulsedTime(width, period, high+1e-7); !math.IsInf(time, 1) || n != 0 {
				t.Errorf("w %g s, δ %g: arrives beyond its end after %g s, %d pulses", width, delta, time, n)
			}
			if time, n := c.PulsedTime(width, period, high-1e-5); !(time < 1) || n < 1 {
				t.Errorf("w %g s, δ %g: 10 µV below its end: %g s, %d pulses", width, delta, time, n)
			}
			near(t, "long after", c.PulsedReached(width, period, math.Round(0.5/period)*period), low, 1e-6)
			near(t, "for ever", c.PulsedReached(width, period, math.Inf(1)), low, 0)
		}
	}
	// short pulses: where the element carries I_0/δ
	c := typical()
	near(t, "short pulses", c.PulsedSettled(1e-9, 10e-9), c.Element.Settled(15, c.Load*10), 1e-6)
}

func TestPulsesThatPausesUndo(t *testing.T) {
	c := startup.Charge{Element: silicon(10), Capacitance: 0.1e-6, Supply: 15, Load: 5e-3}
	const width, period = 0.5e-6, 1e-3 // a pause takes 50 V
	first := c.Reached(width)
	low, high := c.PulsedSteady(width, period)
	near(t, "low", low, 0, 0)
	near(t, "high", high, first, 1e-12)
	if time, n := c.PulsedTime(width, period, first*1.01); !math.IsInf(time, 1) || n != 0 {
		t.Errorf("%g s, %d pulses", time, n)
	}
	near(t, "at the end of a pause", c.PulsedReached(width, period, 0.999e-3), 0, 0)
	near(t, "in a later pulse", c.PulsedReached(width, period, 7*period+width), first, 1e-9)
	// an initial voltage may reach in the first pulse what later ones do not
	c.Initial = first
	if time, n := c.PulsedTime(width, period, first*1.2); n != 1 || !(time < width) {
		t.Errorf("%g s, %d pulses", time, n)
	}
}

// From above their steady state, or where they cannot hold V_BS at all, the pulses let it fall: against one pulse after another.
func TestPulsesThatLoseVoltage(t *testing.T) {
	for _, k := range []struct{ load, width, period float64 }{
		{0.5e-3, 1e-6, 20e-6},    // settles near 13 V
		{20e-3, 0.1e-6, 10e-6},   // 2 A of mean demand in the pulse, settles near 4 V
		{40e-3, 0.1e-6, 10e-6},   // more than the pulses bring at any voltage
		{40e-3, 0.01e-6, 0.1e-6}, // 0.4 A, settles near 12 V
		{1e-3, 0, 10e-6},         // no pulse at all
	} {
		c := startup.Charge{Element: silicon(5), Capacitance: 10e-6, Supply: 15, Load: k.load, Initial: 14.5}
		v, on := c.Initial, recharge.Interval{Duration: k.width, Drive: 15, Conducts: true, Load: k.load}
		for n := 1; n <= 3000; n++ {
			v, _ = c.Element.Advance(v, on, c.Capacitance)
			v = math.Max(v-k.load*(k.period-k.width)/c.Capacitance, 0)
			if n%50 == 0 {
				near(t, "reached", c.PulsedReached(k.width, k.period, (float64(n)-1e-9)*k.period), v, 1e-5)
			}
		}
	}
}

func TestPulsesWithoutPause(t *testing.T) {
	c := typical()
	for _, width := range []float64{10e-6, 30e-6} { // as long as the period, and longer
		time, n := c.PulsedTime(width, 10e-6, 12)
		near(t, "time", time, c.Time(12), 1e-12)
		near(t, "pulses", float64(n), math.Ceil(c.Time(12)/10e-6), 0)
		near(t, "reached", c.PulsedReached(width, 10e-6, 1e-3), c.Reached(1e-3), 1e-9)
		near(t, "settled", c.PulsedSettled(width, 10e-6), c.Settled(), 0)
	}
	if time, n := c.PulsedTime(0, 10e-6, 12); !math.IsInf(time, 1) || n != 0 {
		t.Errorf("no pulse: %g s, %d", time, n)
	}
	near(t, "no pulse", c.PulsedSettled(0, 10e-6), 0, 0)
}

// V_BS at the time of arrival is the target, whatever part of it was averaged.
func TestPulsedThereAndBack(t *testing.T) {
	c := typical()
	for _, width := range []float64{0.05e-6, 0.5e-6, 5e-6, 50e-6} {
		for _, target := range []float64{5, 11, 13.5} {
			time, n := c.PulsedTime(width, 4*width, target)
			near(t, "reached", c.PulsedReached(width, 4*width, time), target, 1e-6)
			if n < 1 || !(time <= float64(n-1)*4*width+width) {
				t.Errorf("%d pulses, %g s", n, time)
			}
		}
	}
}

// More load, more capacitance and less supply never shorten the charge.
func TestPulsedTimeIsMonotone(t *testing.T) {
	worse := map[string]func(*startup.Charge, float64){
		"load":        func(c *startup.Charge, x float64) { c.Load *= 1 + x },
		"capacitance": func(c *startup.Charge, x float64) { c.Capacitance *= 1 + x },
		"supply":      func(c *startup.Charge, x float64) { c.Supply -= x },
		"resistance":  func(c *startup.Charge, x float64) { c.Element.Resistance *= 1 + x },
	}
	for what, change := range worse {
		for _, width := range []float64{0.3e-6, 3e-6, 30e-6} {
			last := 0.0
			for k := range 200 { // across the change from counting to averaging
				c := typical()
				change(&c, float64(k)*0.005)
				got, _ := c.PulsedTime(width, 5*width, 11)
				if got < last*(1-1e-9) {
					t.Fatalf("%s, w %g s, step %d: %g s after %g s", what, width, k, got, last)
				}
				last = got
			}
		}
	}
}

func BenchmarkPulsedTime(b *testing.B) {
	c := typical()
	for b.Loop() {
		c.PulsedTime(0.5e-6, 10e-6, 12)
	}
}
