package modulation

import (
	"math"
	"testing"
)

var all = []ZeroSequence{None, ThirdHarmonic, MinMax, Clamp60, Clamp120High, Clamp120Low}

func dutyAt(z ZeroSequence, m, degrees float64) float64 {
	sin, cos := math.Sincos(degrees * math.Pi / 180)
	return z.Duty(m, sin, cos)
}

// TestLineVoltage: a zero sequence adds the same to all three legs, so that the difference of two duties is that of the references: m·√3/2 in
// amplitude over the DC link (a fact of three-phase systems).
func TestLineVoltage(t *testing.T) {
	for _, z := range all {
		for _, m := range []float64{0, 0.1, 0.7, 1} {
			for a := 0.5; a < 360; a += 3.7 {
				got := dutyAt(z, m, a) - dutyAt(z, m, a-120)
				want := m / 2 * (math.Sin(a*math.Pi/180) - math.Sin((a-120)*math.Pi/180))
				if math.Abs(got-want) > 1e-9 {
					t.Fatalf("sequence %d, m %g at %g°: %g, want %g", z, m, a, got, want)
				}
			}
		}
	}
}

// TestLinearRange: without a zero sequence the duty leaves [0, 1] beyond m = 1, with the third harmonic of a sixth and with the symmetrical space
// vector beyond 2/√3 = 1.1547 (common practice).
func TestLinearRange(t *testing.T) {
	clipped := func(z ZeroSequence, m float64) bool {
		for a := 0.0; a < 360; a += 0.25 {
			if d := dutyAt(z, m, a); d == 0 || d == 1 {
				return true
			}
		}
		return false
	}
	for _, c := range []struct {
		z      ZeroSequence
		linear float64
	}{{None, 1}, {ThirdHarmonic, 2 / math.Sqrt(3)}, {MinMax, 2 / math.Sqrt(3)}} {
		if clipped(c.z, c.linear*0.9999) || !clipped(c.z, c.linear*1.0001) {
			t.Errorf("sequence %d: the linear range does not end at %g", c.z, c.linear)
		}
	}
}

// TestClamps: a clamp of 60° holds each rail for a sixth, centred on the phase's own peaks; one of 120° holds its rail for a third and never the other
// one [design 4.4].
func TestClamps(t *testing.T) {
	for _, c := range []struct {
		z                 ZeroSequence
		high, low         float64 // degrees at each rail
		highFrom, lowFrom float64 // where they begin; NaN: never
	}{
		{Clamp60, 60, 60, 60, 240}, {Clamp120High, 120, 0, 30, math.NaN()}, {Clamp120Low, 0, 120, math.NaN(), 210},
	} {
		var high, low float64
		const step = 0.1
		for a := step / 2; a < 360; a += step {
			switch dutyAt(c.z, 0.6, a) {
			case 1:
				high += step
				if !(a > c.highFrom && a < c.highFrom+c.high) {
					t.Fatalf("sequence %d is at the upper rail at %g°", c.z, a)
				}
			case 0:
				low += step
				if !(a > c.lowFrom && a < c.lowFrom+c.low) {
					t.Fatalf("sequence %d is at the lower rail at %g°", c.z, a)
				}
			}
		}
		if math.Abs(high-c.high) > 2*step || math.Abs(low-c.low) > 2*step {
			t.Errorf("sequence %d: %g° at the upper rail and %g° at the lower one, want %g and %g", c.z, high, low, c.high, c.low)
		}
	}
}

// TestManyPeriods: 200,000 periods take no more evaluations than a few thousand, and agree with every period by itself.
func TestManyPeriods(t *testing.T) {
	for _, c := range references(t) {
		if c.Name != "min-max" && c.Name != "clamp 60" && c.Name != "motoring" {
			continue
		}
		c.Periods = 200_000
		if c.Name == "clamp 60" {
			c.Load /= 100 // which is held for 3.3 s
		}
		p := c.plan()
		got, want := p.Steady(math.NaN()), p.steady(math.NaN(), 0, true, nil)
		if math.Abs(got.Low.Value-want.Low.Value) > 0.3e-3 || math.Abs(got.High.Value-want.High.Value) > 0.3e-3 || got.Passes > 4000 || p.Periods() != 200_000 {
			t.Errorf("%s: %g to %g V in %d evaluations, want %g to %g", c.Name, got.Low.Value, got.High.Value, got.Passes, want.Low.Value, want.High.Value)
		}
	}
}

// TestDirections: more load, more charge, more resistance and less supply lower V_BS; a larger capacitance lifts its lowest value.
func TestDirections(t *testing.T) {
	for _, c := range references(t) {
		if c.Kind != "sinusoidal" || c.Expected.Collapses {
			continue
		}
		base := c.plan().Steady(math.NaN())
		for _, k := range []struct {
			name  string
			worse func(*referenceCase)
		}{
			{"load", func(c *referenceCase) { c.Load *= 1.2 }}, {"charge", func(c *referenceCase) { c.Charge *= 1.2 }},
			{"resistance", func(c *referenceCase) { c.Element.Resistance *= 1.2 }}, {"supply", func(c *referenceCase) { c.Supply *= 0.97 }},
			{"capacitance", func(c *referenceCase) { c.Capacitance /= 1.5 }},
		} {
			if k.name == "resistance" && c.Element.Switch { // through which V_BS flows back as the node stands high
				continue
			}
			w := c
			k.worse(&w)
			if s := w.plan().Steady(math.NaN()); s.Low.Value > base.Low.Value+0.2e-3 {
				t.Errorf("%s: more adverse %s lifts the lowest V_BS from %g to %g V", c.Name, k.name, base.Low.Value, s.Low.Value)
			}
		}
	}
}

// TestSimilarPlans: a plan that takes over the steps of a similar one has the same solution, in fewer evaluations over all.
func TestSimilarPlans(t *testing.T) {
	own, taken := 0, 0
	for _, c := range references(t) {
		if c.Kind == "" || c.plan() == nil {
			continue
		}
		first := c.plan().Steady(math.NaN())
		c.Supply += 0.5
		c.Load *= 1.3
		c.Capacitance *= 0.8
		p := c.plan()
		a, b := p.Steady(first.Start), p.SteadyLike(&first)
		own, taken = own+a.Passes, taken+b.Passes
		if b.Collapses != a.Collapses || !b.Converged || math.Abs(a.Low.Value-b.Low.Value) > 0.3e-3 || math.Abs(a.High.Value-b.High.Value) > 0.3e-3 {
			t.Errorf("%s: %g to %g V with the steps of another plan, %g to %g V with its own", c.Name, b.Low.Value, b.High.Value, a.Low.Value, a.High.Value)
		}
	}
	if float64(taken) > 0.85*float64(own) {
		t.Errorf("%d evaluations with the steps of another plan, %d with their own", taken, own)
	}
}
