package recharge

import (
	"fmt"
	"math"
	"testing"
)

// sweep calls f over the whole range in which the law must hold; load 0 and I_S that underflows included.
func sweep(f func(name string, e Element, iv Interval, c, v0 float64)) {
	for _, slope := range []float64{0, 1e-5, 29e-6, 1e-3, 0.026, 0.045, 0.1} {
		for _, r := range []float64{0, 1e-3, 0.1, 3.3, 1000} {
			for _, c := range []float64{1e-9, 220e-9, 1e-3} {
				for _, t := range []float64{1e-9, 30e-9, 2e-6, 1e-3, 100} {
					for _, drive := range []float64{-1200, -40, 0, 3, 12, 30} {
						for _, load := range []float64{0, 1e-9, 1e-4, 0.02} {
							for _, v0 := range []float64{0, 2.9, 11.3, 20} {
								e := Element{Junction: Junction{Slope: slope, LogSaturation: -0.6 / math.Max(slope, 1e-5)}, Resistance: r}
								iv := Interval{Duration: t, Drive: drive, Conducts: true, Load: load}
								name := fmt.Sprintf("nVT %g R %g C %g t %g E %g I %g v0 %g", slope, r, c, t, drive, load, v0)
								f(name, e, iv, c, v0)
							}
						}
					}
				}
			}
		}
	}
}

// Everywhere: finite, slope in [0, 1], between v0 and equilibrium, and two halves of an interval make the whole one.
func TestAdvanceOverTheWholeRange(t *testing.T) {
	points, failed := 0, 0
	sweep(func(name string, e Element, iv Interval, c, v0 float64) {
		points++
		if failed > 20 {
			return
		}
		bad := func(format string, args ...any) {
			failed++
			t.Errorf("%s: %s", name, fmt.Sprintf(format, args...))
		}
		v1, d := e.Advance(v0, iv, c)
		if math.IsNaN(v1) || math.IsInf(v1, 0) || !(d >= 0 && d <= 1) {
			bad("v1 %v, slope %v", v1, d)
			return
		}
		scale := 1e-12 * (math.Abs(iv.Drive) + math.Abs(v0) + math.Abs(v1) + 1)
		rest := e.Settled(iv.Drive, iv.Load)
		if v1 < math.Min(v0, rest)-scale || v1 > math.Max(v0, rest)+scale {
			bad("v1 %v outside %v and equilibrium %v", v1, v0, rest)
		}
		half := iv
		half.Duration /= 2
		m, d1 := e.Advance(v0, half, c)
		again, d2 := e.Advance(m, half, c)
		if !(math.Abs(again-v1) <= scale) {
			bad("two halves %.15g, whole %.15g", again, v1)
		}
		// s0 carries the rounding of v over n·V_T
		grain := 1e-15 * (math.Abs(iv.Drive) + math.Abs(v0) + math.Abs(v1) + 1) / math.Max(e.Slope, idealSlope)
		if !(math.Abs(d1*d2-d) <= (1e-9+10*grain)*(1-math.Log(math.Max(d, 1e-300)))*d+1e-12) {
			bad("slopes %g·%g, whole %g", d1, d2, d)
		}
		if i := e.Current(iv.Drive - v0); math.IsNaN(i) || math.IsInf(i, -1) {
			bad("current %v", i)
		}
	})
	t.Logf("%d points", points)
}

// The derivative against a central difference.
func TestAdvanceDerivative(t *testing.T) {
	for _, e := range []Element{
		{Junction: linked(0.045, 0.85), Resistance: 2.2},
		{Junction: linked(0.03, 0.35), Resistance: 40},
		{Junction: linked(0.045, 0.85)},
		{Resistance: 15, Switch: true},
	} {
		for _, g := range []float64{0, 1e-4} {
			for _, drive := range []float64{-5, 9, 12, 14} {
				for _, duration := range []float64{50e-9, 2e-6, 40e-6} {
					for v0 := 4.0; v0 < 16; v0 += 0.7 {
						iv := Interval{Duration: duration, Drive: drive, Conducts: true, Load: 3e-4, Conductance: g}
						const c, h = 330e-9, 1e-5
						_, d := e.Advance(v0, iv, c)
						up, _ := e.Advance(v0+h, iv, c)
						down, _ := e.Advance(v0-h, iv, c)
						near(t, fmt.Sprintf("slope %+v %+v from %g", e, iv, v0), d, (up-down)/(2*h), 3e-7)
						if up < down-1e-12 {
							t.Errorf("not increasing: %+v from %g", iv, v0)
						}
					}
				}
			}
		}
	}
}

// TimeTo undoes Advance, to what the rounding of v allows: dt = dv·C/(i - I).
func TestTimeToUndoesAdvance(t *testing.T) {
	compared := 0
	sweep(func(name string, e Element, iv Interval, c, v0 float64) {
		v1, _ := e.Advance(v0, iv, c)
		pull := math.Abs(e.Current(iv.Drive-v1) - iv.Load)
		pull = math.Min(pull, math.Abs(e.Current(iv.Drive-v0)-iv.Load))
		volts := math.Abs(iv.Drive) + math.Abs(v0) + math.Abs(v1) + 0.6
		loose := 3e-15 * volts * c / pull
		// what the last digit of v is worth as a current
		grain := 1e-15 * volts / (e.Resistance + math.Max(e.Slope, idealSlope)/(pull+iv.Load+math.Exp(e.LogSaturation)))
		if !(loose < 1e-3*iv.Duration) || pull < 1e4*grain {
			return // at equilibrium, or too short to tell
		}
		compared++
		got := e.TimeTo(c, iv.Drive, iv.Load, v0, v1)
		if !(math.Abs(got-iv.Duration) <= (1e-10+10*grain/pull)*iv.Duration+loose) {
			t.Errorf("%s: to %v in %.12g s", name, v1, got)
		}
	})
	if compared < 5000 {
		t.Errorf("only %d compared", compared)
	}
	t.Logf("%d compared", compared)
}

func TestTimeToEnds(t *testing.T) {
	e := Element{Junction: linked(0.045, 0.8), Resistance: 10}
	rest := e.Settled(12, 1e-3)
	for name, c := range map[string]struct{ v0, target, want float64 }{
		"there":              {9, 9, 0},
		"at equilibrium":     {9, rest, math.Inf(1)},
		"beyond equilibrium": {9, 11.99, math.Inf(1)},
		"the other way":      {9, 8, math.Inf(1)},
		"NaN":                {nan, 8, nan},
	} {
		got := e.TimeTo(1e-6, 12, 1e-3, c.v0, c.target)
		if got != c.want && !(math.IsNaN(got) && math.IsNaN(c.want)) {
			t.Errorf("%s: %v, want %v", name, got, c.want)
		}
	}
	if got := e.TimeTo(1e-6, 12, 1e-3, 14, rest+0.5); !(got > 0 && got < 1) {
		t.Errorf("discharge towards equilibrium: %v", got)
	}
}

// R·C limits: with a drop that does not depend on current the law is the exponential of R·C.
func TestAdvanceTendsToExponential(t *testing.T) {
	for _, r := range []float64{0.5, 10, 220} {
		for _, c := range []float64{47e-9, 1e-6, 100e-6} {
			for _, x := range []float64{0.01, 0.3, 1, 5} {
				diode, _ := fixedDrop(t, 0.4, r).Advance(3, conducting(x*r*c, 12), c)
				ideal, _ := Element{Resistance: r}.Advance(3, conducting(x*r*c, 12), c)
				resistor, _ := Element{Resistance: r, Switch: true}.Advance(3, conducting(x*r*c, 12), c)
				near(t, "switch", resistor, 12-9*math.Exp(-x), 1e-12)
				near(t, "ideal diode", ideal, 12-9*math.Exp(-x), 1e-6)
				// 0.4 V holds at 32 mA; ten times less current drops 67 µV less
				near(t, "fixed drop", diode, 11.6-8.6*math.Exp(-x), 3e-4)
			}
		}
	}
}

// Without resistance and load, e^(v/(n·V_T)) grows linearly with time: v1 = v0 + n·V_T·ln(1 + i0·t/(C·n·V_T)), I_S dropped.
func TestAdvanceWithoutResistance(t *testing.T) {
	const slope, c, t1 = 0.05, 1e-6, 3e-6
	for _, r := range []float64{0, 1e-9} {
		e := Element{Junction: linked(slope, 1), Resistance: r}
		i0 := e.Current(12 - 11)
		got, _ := e.Advance(11, conducting(t1, 12), c)
		near(t, "pure diode", got, 11+slope*math.Log1p(i0*t1/(c*slope)), 1e-7)
	}
}

// The on-time without conduction: hold law with the diode's saturation current added to the load.
func TestAdvanceBlocked(t *testing.T) {
	e := Element{Junction: linked(0.05, 0.8), Resistance: 10}
	is := math.Exp(e.LogSaturation)
	iv := Interval{Duration: 1e-3, Drive: -800, Conducts: true, Load: 2e-4, Conductance: 1e-4}
	v1, d := e.Advance(12, iv, 2.2e-6)
	near(t, "blocked", v1, Hold(12, 2e-4+is, 1e-4, 2.2e-6, 1e-3), 1e-14)
	near(t, "slope", d, math.Exp(-1e-4*1e-3/2.2e-6), 1e-15)
	near(t, "current", e.Current(-800)/is, -1, 1e-15)
	iv.Conducts = false
	v1, _ = e.Advance(12, iv, 2.2e-6)
	near(t, "disconnected", v1, Hold(12, 2e-4, 1e-4, 2.2e-6, 1e-3), 1e-14)
}

// With a conductance: as it vanishes the quadrature must meet the closed form, halves the whole, equilibrium balance.
func TestAdvanceWithConductance(t *testing.T) {
	for _, e := range []Element{
		{Junction: linked(0.045, 0.85), Resistance: 2.2}, {Junction: linked(0.03, 0.35), Resistance: 470},
		fixedDrop(t, 0.4, 22), {Junction: linked(0.05, 0.9)},
	} {
		for v0 := 0.0; v0 < 20; v0 += 1.7 {
			for _, duration := range []float64{1e-7, 5e-6, 1e-3, 1} {
				const c = 470e-9
				iv := Interval{Duration: duration, Drive: 11, Conducts: true, Load: 3e-4}
				closed, d := e.Advance(v0, iv, c)
				iv.Conductance = 1e-13
				tiny, dTiny := e.Advance(v0, iv, c)
				near(t, fmt.Sprintf("G -> 0 %+v from %g for %g", e, v0, duration), tiny, closed, 1e-9+1e-13*20*duration/c)
				near(t, "slope", dTiny, d, 1e-6)
				iv.Conductance = 1e-3
				whole, _ := e.Advance(v0, iv, c)
				iv.Duration /= 2
				half, _ := e.Advance(v0, iv, c)
				half, _ = e.Advance(half, iv, c)
				near(t, fmt.Sprintf("halves %+v from %g for %g", e, v0, duration), half, whole, 1e-10)
				if duration == 1 {
					near(t, "balance at equilibrium", e.Current(11-whole), 3e-4+1e-3*whole, 1e-9)
				}
			}
		}
	}
}

// Energy by quadrature of i²·R over the exact law, and ½·C·V² without a diode.
func TestResistorEnergy(t *testing.T) {
	e := Element{Junction: linked(0.05, 0.9), Resistance: 12}
	const c, drive = 1e-6, 15.0
	sum, steps := 0.0, 200000
	end := 60 * e.Resistance * c // beyond that the tail of the diode carries nothing
	for k := range steps {
		// Simpson's rule in the square root of time; the current falls smoothly from its start
		mid := (float64(k) + 0.5) / float64(steps)
		v, _ := e.Advance(2, conducting(end*mid*mid, drive), c)
		i := e.Current(drive - v)
		sum += 10 * i * i * 2 * mid * end / float64(steps)
	}
	near(t, "10 of 12 ohm", e.ResistorEnergy(c, drive, 2, 10)/sum, 1, 1e-6)
	half := c * (drive - 2) * (drive - 2) / 2
	near(t, "switch", Element{Resistance: 12, Switch: true}.ResistorEnergy(c, drive, 2, 12), half, 1e-18)
	near(t, "ideal diode", Element{Resistance: 12}.ResistorEnergy(c, drive, 2, 12), half, 2e-11)
	if got := e.ResistorEnergy(c, drive, 15, 10); !(math.Abs(got) < 1e-40) {
		t.Errorf("at equilibrium: %v", got)
	}
}

func TestHold(t *testing.T) {
	near(t, "constant current", Hold(12, 1e-3, 0, 1e-6, 2e-3), 10, 1e-14)
	near(t, "tiny conductance", Hold(12, 1e-3, 1e-16, 1e-6, 2e-3), 10, 1e-11)
	near(t, "conductance alone", Hold(12, 0, 1e-3, 1e-6, 1e-3), 12*math.Exp(-1), 1e-13)
	for _, g := range []float64{0, 1e-13, 1e-9, 1e-6, 1e-3} {
		for _, current := range []float64{1e-9, 1e-4} {
			time := HoldTime(12, current, g, 1e-6, 9)
			near(t, fmt.Sprintf("round trip %g S %g A", g, current), Hold(12, current, g, 1e-6, time), 9, 1e-11)
		}
	}
	if got := HoldTime(12, 0, 0, 1e-6, 9); !math.IsInf(got, 1) {
		t.Errorf("no load: %v", got)
	}
	if got := HoldTime(9, 1, 1, 1e-6, 9); got != 0 {
		t.Errorf("at the level: %v", got)
	}
	if got := HoldTime(9, 0, 1e-3, 1e-6, -1); !math.IsInf(got, 1) {
		t.Errorf("below zero through a resistor: %v", got)
	}
}

// Current and Drop are inverse, through the region where i and I_S compare.
func TestCurrentInvertsDrop(t *testing.T) {
	for _, e := range []Element{
		{Junction: linked(0.05, 0.9), Resistance: 2}, {Junction: linked(0.026, 0.3), Resistance: 0.1},
		fixedDrop(t, 0.4, 5), {Resistance: 7, Switch: true}, {Junction: linked(0.05, 0.9)},
	} {
		for _, i := range []float64{1e-12, 1e-9, 1e-6, 1e-3, 0.1, 4} {
			near(t, fmt.Sprintf("%+v at %g A", e, i), e.Current(e.Drop(i))/i, 1, 1e-10+2e-15/math.Max(e.Slope, 1e-5)+1e-14*math.Exp(e.LogSaturation)/i)
		}
		if got := e.Current(0); got != 0 {
			t.Errorf("%+v: %g A at 0 V", e, got)
		}
	}
}

// NaN anywhere comes back as NaN and at once.
func TestNaN(t *testing.T) {
	good := benchPeriod(t)
	for name, spoil := range map[string]func(*Period){
		"slope":       func(p *Period) { p.Element.Slope = nan },
		"saturation":  func(p *Period) { p.Element.LogSaturation = nan },
		"resistance":  func(p *Period) { p.Element.Resistance = nan },
		"capacitance": func(p *Period) { p.Capacitance = nan },
		"charge":      func(p *Period) { p.Charge = nan },
		"return":      func(p *Period) { p.Return = nan },
		"load":        func(p *Period) { p.Off[1].Load = nan },
		"drive":       func(p *Period) { p.Off[1].Drive = nan },
		"duration":    func(p *Period) { p.Off[1].Duration = nan },
		"conductance": func(p *Period) { p.On.Conductance = nan },
	} {
		p := good
		p.Off = append([]Interval(nil), good.Off...)
		spoil(&p)
		if s := p.SteadyState(); s.Converged || !math.IsNaN(s.Low) || s.Iterations > 10 {
			t.Errorf("%s: %+v", name, s)
		}
		if v, _ := p.Map(11); !math.IsNaN(v) {
			t.Errorf("%s: map %v", name, v)
		}
	}
	if n := good.PeriodsUntil(nan, 9, 1000); n != -1 {
		t.Errorf("NaN start: %d", n)
	}
}
