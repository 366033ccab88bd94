package transient

import (
	"math"
	"testing"
)

func TestLiftOfLevelCapacitance(t *testing.T) {
	s := &Switch{InputCapacitance: 2e-9, InputCapacitanceVoltage: 100, Transfer: level(30e-12)}
	const bus, slew = 400.0, 50e9
	for _, r := range []float64{1e-9, 0.3, 3, 12, 100, 1e4, 1e8} {
		want := r * 30e-12 * slew * -math.Expm1(-bus/slew/(r*2e-9))
		same(t, "lift", Lift(s, r, UniformSwing(bus, slew)), want, 1e-12)
		same(t, "pull", Pull(s, r, UniformSwing(bus, slew)), want, 1e-12)
	}
	divider := bus * 30e-12 / 2e-9
	same(t, "held by nothing", Lift(s, inf, UniformSwing(bus, slew)), divider, 1e-14)
	same(t, "at once", Lift(s, 12, UniformSwing(bus, inf)), divider, 1e-14)
	same(t, "held by a short", Lift(s, 0, UniformSwing(bus, slew)), 0, 0)
	same(t, "no swing", Lift(s, 12, UniformSwing(bus, 0)), 0, 0)
}

// A capacitance that varies: against the law integrated with the means of the same parts, and with the curve itself. Of the parts the
// lowest step has six, equal in ln(1 + v).
func TestLiftAgainstIntegration(t *testing.T) {
	s, g := example()
	const bus, dv = 400.0, 400.0 / Steps
	on, off := TurnOnSwing(bus, 20, s, s.Output, g), TurnOffSwing(bus, 20, s, s.Output, g)
	cgs := s.InputCapacitance - s.Transfer.At(100)
	edges := []float64{0}
	for k := 1; k < 6; k++ {
		edges = append(edges, math.Pow(1+dv, float64(k)/6)-1)
	}
	for k := 1; k <= Steps; k++ {
		edges = append(edges, dv*float64(k))
	}
	for _, r := range []float64{0.5, 3, 12, 60} {
		for _, rising := range []bool{true, false} {
			w, got := off, Pull(s, r, off)
			if rising {
				w, got = on, Lift(s, r, on)
			}
			var peaks [2]float64
			for kind := range peaks {
				u := []float64{0}
				for n := 1; n < len(edges); n++ {
					from, to := edges[n-1], edges[n]
					if !rising {
						from, to = edges[len(edges)-n], edges[len(edges)-n-1]
					}
					step := int(math.Min(from, to)/dv + 1e-9)
					if !rising {
						step = Steps - 1 - step
					}
					slew := w.Slew[step]
					mean := (s.Transfer.Charge(to) - s.Transfer.Charge(from)) / (to - from)
					march(u, math.Abs(to-from)/slew, 1500, func(now float64, y, dy []float64) {
						c := mean
						if kind == 1 {
							c = s.Transfer.At(from + math.Copysign(now*slew, to-from))
						}
						dy[0] = (c*slew - y[0]/r) / (cgs + c)
					}, func(_ float64, y []float64) { peaks[kind] = math.Max(peaks[kind], y[0]) })
				}
			}
			same(t, "parts", got, peaks[0], 1e-9)
			t.Logf("R %v, rising %v: %.4g V, with the curve itself %.4g V", r, rising, got, peaks[1])
			same(t, "curve", got, peaks[1], 0.015)
		}
	}
	// without a resistor: the capacitive divider, the integral of C_gd/(C_gs + C_gd), less than Q_gd/C_gs
	free := Lift(s, inf, on)
	if most := s.Transfer.Charge(bus) / cgs; !(free < most && free > 0.8*most) {
		t.Errorf("free gate %v V, charge alone %v V", free, most)
	}
	same(t, "free both ways", Pull(s, inf, on), free, 1e-13)
}

func TestLiftRises(t *testing.T) {
	s, g := example()
	w := TurnOnSwing(400, 20, s, s.Output, g)
	before := 0.0
	for r := 0.1; r < 1e4; r *= 1.3 {
		if v := Lift(s, r, w); !(v > before) {
			t.Fatalf("R %v: %v V after %v V", r, v, before)
		} else {
			before = v
		}
	}
	before = 0
	for slew := 1e8; slew < 1e13; slew *= 1.5 {
		if v := Lift(s, 5, UniformSwing(400, slew)); !(v > before) {
			t.Fatalf("slew %v: %v V after %v V", slew, v, before)
		} else {
			before = v
		}
	}
}

func TestLiftRefuses(t *testing.T) {
	s, _ := example()
	bare := &Switch{InputCapacitance: 1e-9, InputCapacitanceVoltage: 25}
	lost := &Switch{InputCapacitance: nan, InputCapacitanceVoltage: 25, Transfer: level(1e-12)}
	part := UniformSwing(400, 1e9)
	part.Slew[7] = nan
	for name, v := range map[string]float64{
		"no curve": Lift(bare, 5, UniformSwing(400, 1e9)), "NaN capacitance": Pull(lost, 5, UniformSwing(400, 1e9)),
		"NaN slew": Lift(s, 5, part), "NaN slew, short": Lift(s, 0, part), "NaN bus": Lift(s, 5, UniformSwing(nan, 1e9)),
		"NaN resistance": Pull(s, nan, UniformSwing(400, 1e9)),
	} {
		if v == v {
			t.Errorf("%s: %v", name, v)
		}
	}
}
