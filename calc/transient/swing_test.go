package transient

import (
	"math"
	"testing"
)

// With level capacitances the law is one number.
func TestSwingOfLevelCapacitances(t *testing.T) {
	s, g := example()
	s.Transfer, s.Output = level(20e-12), level(150e-12)
	other := level(250e-12)
	// V_pl = 4.5 V at 20 A; R_g·C_gd + C_Σ/g_fs = 240 ps·S + 20 ps·S
	on, off := TurnOnSwing(400, 20, s, other, g), TurnOffSwing(400, 20, s, other, g)
	for k := range Steps {
		same(t, "on", on.Slew[k], 7.5/260e-12, 1e-12)
		same(t, "off", off.Slew[k], 5.5/260e-12, 1e-12)
	}
	same(t, "time", on.Time(), 400*260e-12/7.5, 1e-12)
	same(t, "mean", on.Mean(), on.Peak(), 1e-12)
	same(t, "end", off.End(), off.Peak(), 1e-12)
	// 1 A charges 400 pF at 2.5 V/ns: slower than the gate would allow (V_pl 3.55 V, 17.5 V/ns)
	light := TurnOffSwing(400, 1, s, other, g)
	same(t, "light", light.Peak(), 2.5e9, 1e-12)
	// where they cross the channel just carries nothing
	if i := 20 - 400e-12*off.Peak(); i < 0 {
		t.Errorf("channel current %v A", i)
	}
}

// The equations behind the swing, gate and channel solved together for the slew, with the capacitances of one voltage.
func slewAt(v, bus, i float64, s *Switch, passive Curve, g Gate, on bool) float64 {
	drive, sign := g.On, 1.0
	if !on {
		drive, sign = g.Off, -1
	}
	cgd, sum := s.Transfer.At(v), s.Output.At(v)+passive.At(bus-v)
	low, high := 0.0, 1e15
	for range 200 {
		r := (low + high) / 2
		channel := i + sign*sum*r
		vgs := s.Threshold + channel/s.Transconductance
		if !on && channel < 0 || sign*(drive-vgs)/g.Resistance < cgd*r {
			high = r
		} else {
			low = r
		}
	}
	return low
}

// Every step against the equations, integrated over time inside the step: dt = dv/r. Also how far the slew at a voltage departs from
// the mean of its step.
func TestSwingAgainstTheEquations(t *testing.T) {
	s, g := example()
	const bus = 400.0
	worst := 0.0
	for _, i := range []float64{0.5, 3, 20, 60} {
		for _, on := range []bool{true, false} {
			w := TurnOffSwing(bus, i, s, s.Output, g)
			if on {
				w = TurnOnSwing(bus, i, s, s.Output, g)
			}
			peak, sum, mixed := 0.0, 0.0, 0
			for k := range Steps {
				j := k
				if on {
					j = Steps - 1 - k
				}
				time, breaks := 0.0, []float64{bus * float64(j) / Steps}
				for _, p := range [...]float64{1, 10, 25, 100, 300, 375, 390, 399} {
					if p > breaks[0] && p < bus*float64(j+1)/Steps {
						breaks = append(breaks, p)
					}
				}
				breaks = append(breaks, bus*float64(j+1)/Steps)
				for m := 1; m < len(breaks); m++ {
					const n = 200
					h := (breaks[m] - breaks[m-1]) / n
					for q := range n {
						r := slewAt(breaks[m-1]+(float64(q)+0.5)*h, bus, i, s, s.Output, g, on)
						time += h / r
						peak = math.Max(peak, r)
					}
				}
				sum += time
				// the midpoint rule leaves 2e-4
				if off := w.Slew[k]*time/(bus/Steps) - 1; !(math.Abs(off) < 2e-4) {
					mixed++
					if on || off < 0 || off > 0.05 {
						t.Errorf("i %v, step %d: off by %v", i, k, off)
					}
				}
			}
			// in one step of a turn-off the limits of (4) may change places
			if mixed > 1 {
				t.Errorf("i %v: %d steps inexact", i, mixed)
			}
			same(t, "time", w.Time(), sum, 1e-2)
			worst = math.Max(worst, peak/w.Peak()-1)
		}
	}
	t.Logf("the steepest slew at a voltage exceeds the steepest of a step by %.2g", worst)
	if worst > 0.01 {
		t.Errorf("the steepest slew at a voltage exceeds the steepest of a step by %v", worst)
	}
}

// The law leaves out C_gs·dv_gs/dt. Against the circuit with it, the gate capacitance small and then real, level capacitances.
func TestSwingAgainstTheCircuit(t *testing.T) {
	s, g := example()
	s.Transfer, s.Output = level(20e-12), level(150e-12)
	const bus, i = 400.0, 20.0
	want := TurnOffSwing(bus, i, s, level(250e-12), g)
	for _, c := range []struct{ cgs, tolerance float64 }{{20e-12, 2e-3}, {2e-9, 0.2}} {
		cgd, cds := 20e-12, 130e-12+250e-12
		det := (c.cgs+cgd)*(cds+cgd) - cgd*cgd
		begin, end, last := 0.0, 0.0, 0.0
		march([]float64{s.Plateau(i), 0}, 40e-9, 400000, func(_ float64, y, dy []float64) {
			gate := (g.Off - y[0]) / g.Resistance
			drain := i - math.Max(s.Transconductance*(y[0]-s.Threshold), 0)
			dy[0] = (gate*(cds+cgd) + drain*cgd) / det
			dy[1] = (drain*(c.cgs+cgd) + gate*cgd) / det
		}, func(now float64, y []float64) {
			if y[1] < bus/10 {
				begin = now
			}
			if y[1] < bus*9/10 {
				end = now
			}
			last = y[1]
		})
		if last < bus {
			t.Fatalf("arrived at %v V only", last)
		}
		slew := 0.8 * bus / (end - begin)
		t.Logf("C_gs %.3g F: circuit %.4g V/s, law %.4g V/s", c.cgs, slew, want.Mean())
		same(t, "10-90 %", want.Mean(), slew, c.tolerance)
	}
}

func TestSwingFigures(t *testing.T) {
	w := Swing{Bus: 160}
	for k := range Steps {
		w.Slew[k] = 1e9 * float64(k+1)
	}
	time, inner := 0.0, 0.0
	for k := range Steps {
		dt := 10 / (1e9 * float64(k+1))
		time += dt
		switch k {
		case 0, 15:
		case 1, 14:
			inner += 0.4 * dt // 16 V and 144 V lie 0.6 of a step inside
		default:
			inner += dt
		}
	}
	same(t, "peak", w.Peak(), 16e9, 0)
	same(t, "end", w.End(), 16e9, 0)
	same(t, "time", w.Time(), time, 1e-14)
	same(t, "mean", w.Mean(), 128/inner, 1e-14)
	u := UniformSwing(400, 50e9)
	same(t, "uniform time", u.Time(), 8e-9, 1e-14)
	same(t, "uniform mean", u.Mean(), 50e9, 1e-14)
	same(t, "uniform peak", u.Peak(), 50e9, 0)
}

func TestSwingRefuses(t *testing.T) {
	s, g := example()
	for name, w := range map[string]Swing{
		"cannot carry":     TurnOnSwing(400, 20, s, s.Output, Gate{Resistance: 12, On: 4.4, Off: 0}),
		"never off":        TurnOffSwing(400, 20, s, s.Output, Gate{Resistance: 12, On: 12, Off: 4.6}),
		"negative on":      TurnOnSwing(400, -1, s, s.Output, g),
		"negative off":     TurnOffSwing(400, -1, s, s.Output, g),
		"no curve":         TurnOnSwing(400, 20, s, Curve{}, g),
		"NaN bus":          TurnOnSwing(nan, 20, s, s.Output, g),
		"NaN current":      TurnOffSwing(400, nan, s, s.Output, g),
		"NaN gate":         TurnOffSwing(400, 20, s, s.Output, Gate{Resistance: nan, On: 12}),
		"NaN slew":         UniformSwing(400, nan),
		"NaN bus, uniform": UniformSwing(nan, 1e9),
	} {
		if v := w.Time(); v == v {
			t.Errorf("%s: time %v", name, v)
		}
		if v := w.Peak(); v == v && name != "NaN bus, uniform" {
			t.Errorf("%s: peak %v", name, v)
		}
		if v := w.Mean(); v == v && name != "NaN bus, uniform" {
			t.Errorf("%s: mean %v", name, v)
		}
	}
	still := TurnOffSwing(400, 0, s, s.Output, g)
	if still.Peak() != 0 || still.Mean() != 0 || !math.IsInf(still.Time(), 1) {
		t.Errorf("no current: %v, %v, %v", still.Peak(), still.Mean(), still.Time())
	}
	// unused data may be missing
	s.InputCapacitance, s.CommonSource, s.InputCapacitanceVoltage = nan, nan, nan
	if v := TurnOnSwing(400, 20, s, s.Output, g).Peak(); !(v > 0) {
		t.Errorf("bare: %v", v)
	}
}
