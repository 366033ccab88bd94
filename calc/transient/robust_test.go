package transient

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/recharge"
)

// randomBridge is a plausible half-bridge of any class, from a seed.
func randomBridge(seed uint64) *Bridge {
	r := rand.New(rand.NewPCG(seed, 1))
	span := func(low, high float64) float64 { return low * math.Pow(high/low, r.Float64()) } // even in the logarithm
	chance := func(p float64) bool { return r.Float64() < p }
	bus := span(12, 1000)
	load := span(0.05, 60)
	if chance(0.03) {
		load = 0
	}
	drive := 5.0
	if bus > 30 {
		drive = span(5, 20)
	}
	figure := span(0.3, 3)                        // of merit
	size := span(0.3, 3) * math.Max(load, 4) / 20 // parts are not made arbitrarily small
	junction := func(current, drop float64) recharge.Junction {
		slope := span(0.026, 0.055)
		series := 0.0
		if chance(0.7) {
			series = 0.3 * drop / current * r.Float64()
		}
		x := (drop - series*current) / slope
		if chance(0.1) { // a fixed drop
			slope, series = 1e-5, 0
			x = drop / slope
		}
		return recharge.Junction{Slope: slope, LogSaturation: math.Log(current) - x, Resistance: series}
	}
	cell := func() Cell {
		oss := figure * size * span(1e-9, 4e-9)
		gan := chance(0.2)
		threshold := span(0.8, 5)
		c := Cell{
			GateSource: figure * size * span(1e-9, 4e-9), Threshold: math.Min(threshold, 0.5*drive),
			Transconductance: span(1, 5) * math.Max(load, 1) / math.Max(drive-threshold, 1),
			OnResistance:     span(0.1, 2) / math.Max(load, 1), Unidirectional: bus > 200 && chance(0.2),
			GateResistance: span(1, 60), Reverse: junction(math.Max(load, 0.1), span(0.5, 2)),
		}
		steep := span(0.25, 0.7)
		share := span(0.02, 0.6)
		for _, v := range []float64{0, 0.01, 0.05, 0.2, 0.5, 1} {
			fall := math.Pow(1+v*bus, -steep)
			c.Output.Points = append(c.Output.Points, CurvePoint{v * bus, oss * fall})
			c.Transfer.Points = append(c.Transfer.Points, CurvePoint{v * bus, share * oss * fall * math.Pow(1+v*bus, -0.3)})
		}
		if chance(0.1) { // the curves contradict each other somewhere
			c.Transfer.Points[3].Capacitance = 1.2 * c.Output.Points[3].Capacitance
		}
		if chance(0.4) {
			c.OffBias = -span(1, 6)
		}
		if gan {
			c.Offset, c.FollowsGate = -c.OffBias, chance(0.5)
		} else if chance(0.7) {
			tau := span(5e-9, 500e-9)
			c.Recovery = Recovery{Tau: tau, Transit: tau * span(0.05, 2)}
		}
		if chance(0.4) {
			c.Forward = ForwardRecovery{Inductance: span(0.5e-9, 20e-9), Resistance: span(0.02, 2)}
			if chance(0.1) {
				c.Forward.Resistance = math.Inf(1)
			}
		}
		return c
	}
	b := &Bridge{
		Event: Event(r.IntN(4)), Bus: bus, Load: load, Supply: drive, LowDrive: drive, Floating: drive * (0.75 + 0.3*r.Float64()),
		L1: span(0.3e-9, 80e-9), L2: span(0.3e-9, 60e-9), R1: span(1e-4, 20e-3), R2: span(1e-4, 20e-3), PinCapacitance: span(5e-12, 200e-12),
		BootstrapCapacitance: span(20e-9, 5e-6), Element: recharge.Element{Junction: junction(0.1, span(0.3, 1)), Resistance: span(0.3, 50)},
		High: cell(), Low: cell(),
	}
	b.Element.Junction.Resistance = 0
	if !b.Event.high() {
		b.Load = -b.Load
	}
	if chance(0.5) {
		b.NodeResistor = span(0.5, 15)
	}
	if chance(0.98) {
		b.RingingResistance = span(2, 30) * math.Sqrt((b.L1+b.L2)/b.Low.Output.At(bus))
	}
	if chance(0.5) {
		b.HighCommonSource, b.LowCommonSource = b.L1*0.5*r.Float64(), b.L2*0.5*r.Float64()
	}
	if chance(0.2) {
		b.Clamped, b.Clamp = true, junction(1, 0.4)
	}
	if chance(0.15) {
		b.Element = recharge.Element{Switch: true, Resistance: span(5, 300)}
	}
	if b.Event.high() && chance(0.1) {
		b.Low.Diode = true
	}
	if chance(0.1) {
		b.Split = b.High.OffBias
	}
	return b
}

// TestRandomBridges simulates bridges of every class: no failure, no NaN, and no more than 0.5 % between the default tolerance and a tenth of it.
// Refused is what no current passes through before the command.
func TestRandomBridges(t *testing.T) {
	const count, limit = 300, 500e-9
	var s Simulator
	failed, refused, unsettled, steps, mostOf := 0, 0, 0, 0, 0
	for seed := range uint64(count) {
		b := randomBridge(seed)
		co, err := s.Run(b, Window{Limit: limit, Levels: []float64{-1, -5}})
		if err != nil {
			if isOutside(err) {
				refused++
				continue
			}
			failed++
			t.Errorf("seed %d: %v", seed, err)
			continue
		}
		steps += co.Steps
		mostOf = max(mostOf, co.Steps)
		tenth, err := s.Run(b, Window{Limit: limit, Tolerance: DefaultTolerance / 10})
		if err != nil {
			t.Errorf("seed %d at a tenth of the tolerance: %v", seed, err)
			continue
		}
		for k := range Floating {
			r, z := co.Ranges[k], tenth.Ranges[k]
			if scale := math.Max(z.Max, b.Bus); math.Abs(r.Max-z.Max) > 0.005*scale || math.Abs(r.Min-z.Min) > 0.005*math.Max(scale, -z.Min) {
				t.Errorf("seed %d, signal %d: %g to %g V, at a tenth of the tolerance %g to %g V", seed, k, r.Min, r.Max, z.Min, z.Max)
			}
		}
		if !co.Settled {
			unsettled++
		}
		sum := co.Gain + co.ElementCharge + co.NodeSlew + co.PinSlew + co.Slew + co.HighSlope + co.LowSlope + co.ChannelSlope + co.RingFrequency + co.RingDamping
		for _, r := range co.Ranges {
			sum += r.Min + r.Max + r.MinTime + r.MaxTime
			if !(r.Min <= r.Max) || r.MinTime < 0 || r.MaxTime > co.End {
				t.Errorf("seed %d: range %+v in %g s", seed, r, co.End)
			}
		}
		if math.IsNaN(sum) || math.IsInf(sum, 0) {
			t.Errorf("seed %d: a result is no number", seed)
		}
	}
	if refused > count/20 || unsettled > count/4 {
		t.Errorf("%d refused, %d unsettled", refused, unsettled)
	}
	t.Logf("%d failed, %d refused, %d unsettled, %d steps on average, %d at most", failed, refused, unsettled, steps/count, mostOf)
}

func isOutside(err error) bool { return errors.Is(err, ErrOutside) }
