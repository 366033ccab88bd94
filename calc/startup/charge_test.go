package startup_test

import (
	"math"
	"testing"

	"floatrail/calc/recharge"
	"floatrail/calc/startup"
)

func TestSwitchIsAnExponential(t *testing.T) {
	c := startup.Charge{Element: recharge.Element{Resistance: 10, Switch: true}, Capacitance: 1e-6, Supply: 12, Node: 0.2, Load: 1e-3, Initial: 1}
	rest := 12 - 0.2 - 10*1e-3
	near(t, "settled", c.Settled(), rest, 1e-12)
	near(t, "time", c.Time(10), 10e-6*math.Log((rest-1)/(rest-10)), 1e-18)
	near(t, "reached", c.Reached(15e-6), rest+(1-rest)*math.Exp(-1.5), 1e-12)
	near(t, "reached at the end", c.Reached(math.Inf(1)), rest, 1e-12)
	near(t, "peak", c.PeakCurrent(), 1.08, 1e-12)
}

func TestTimeEnds(t *testing.T) {
	c := typical()
	if got := c.Time(c.Settled() + 1e-6); !math.IsInf(got, 1) {
		t.Errorf("beyond equilibrium: %g s", got)
	}
	c.Initial = 9
	for _, target := range []float64{9, 8.7} {
		time, n := c.PulsedTime(10e-6, 50e-6, target)
		if got := c.Time(target); got != 0 || time != 0 || n != 0 {
			t.Errorf("target %g V from 9 V: %g s, pulsed %g s and %d", target, got, time, n)
		}
	}
	c.Initial = 0
	near(t, "there and back", c.Reached(c.Time(11)), 11, 1e-11)
}

// On a node that stands at a pre-bias only V_DD - V_prebias less the drop is left, and nothing once that is all.
func TestPrebias(t *testing.T) {
	c := startup.Charge{Element: fixedDrop(0.6, 3), Capacitance: 1e-6, Supply: 12, Load: 0.2e-3}
	for _, k := range []struct{ node, want float64 }{{0, 11.3994}, {4, 7.3994}, {11.3, 0.0994}, {11.5, 0}, {48, 0}} {
		c.Node = k.node
		near(t, "settled", c.Settled(), k.want, 2e-4)
		near(t, "and in time", c.Reached(0.5), k.want, 2e-4)
	}
	if c.PeakCurrent() != 0 {
		t.Errorf("peak current %g A into a blocking diode", c.PeakCurrent())
	}
}

func TestNaN(t *testing.T) {
	type variant struct {
		what string
		c    startup.Charge
	}
	vary := func(what string, change func(*startup.Charge)) variant {
		c := typical()
		change(&c)
		return variant{what, c}
	}
	for _, k := range []variant{
		vary("resistance", func(c *startup.Charge) { c.Element.Resistance = nan }),
		vary("junction", func(c *startup.Charge) { c.Element.LogSaturation = nan }),
		vary("capacitance", func(c *startup.Charge) { c.Capacitance = nan }),
		vary("no capacitance", func(c *startup.Charge) { c.Capacitance = 0 }),
		vary("supply", func(c *startup.Charge) { c.Supply = nan }),
		vary("node", func(c *startup.Charge) { c.Node = nan }),
		vary("load", func(c *startup.Charge) { c.Load = nan }),
		vary("negative load", func(c *startup.Charge) { c.Load = -1e-3 }),
		vary("initial", func(c *startup.Charge) { c.Initial = nan }),
	} {
		pulsed, n := k.c.PulsedTime(1e-6, 5e-6, 10)
		low, high := k.c.PulsedSteady(1e-6, 5e-6)
		for what, got := range map[string]float64{
			"time": k.c.Time(10), "reached": k.c.Reached(1e-4), "pulsed time": pulsed, "pulsed reached": k.c.PulsedReached(1e-6, 5e-6, 1e-4),
			"long pulsed reached": k.c.PulsedReached(1e-6, 5e-6, 1e-2), "low": low, "high": high,
		} {
			if got == got || n != 0 {
				t.Errorf("%s: %s %g, %d pulses", k.what, what, got, n)
			}
		}
		if got := k.c.Slew(); k.what != "load" && k.what != "negative load" && got == got {
			t.Errorf("%s: slew %g", k.what, got)
		}
	}
	c := typical()
	for _, p := range [][3]float64{{nan, 1e-5, 10}, {1e-6, nan, 10}, {1e-6, 0, 10}, {1e-6, 1e-5, nan}} {
		if got, n := c.PulsedTime(p[0], p[1], p[2]); got == got || n != 0 {
			t.Errorf("%v: %g s, %d pulses", p, got, n)
		}
	}
	if got := c.Time(nan); got == got {
		t.Errorf("target NaN: %g", got)
	}
	if got := c.Reached(nan); got == got {
		t.Errorf("time NaN: %g", got)
	}
}
