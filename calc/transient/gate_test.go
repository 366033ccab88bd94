package transient

import (
	"math"
	"testing"
)

func TestCurrentSlopes(t *testing.T) {
	s, g := example()
	// V_pl = 3.5 + 20/20 = 4.5 V; L_cs + R_g·C_iss/g_fs = 1 nH + 12·2 nF/20 = 2.2 nH
	near(t, "plateau", s.Plateau(20), 4.5, 1e-14)
	same(t, "fall", CurrentFall(20, s, g), 5.5/2.2e-9, 1e-14)
	same(t, "rise", CurrentRise(20, s, g), 7.5/2.2e-9, 1e-14)
	same(t, "start of the rise", CurrentRise(0, s, g), 8.5/2.2e-9, 1e-14)
}

// The slope of the current against the gate loop integrated: R_g·C_iss·dv/dt + L_cs·g·dv/dt = V - v.
func TestCurrentSlopesAgainstIntegration(t *testing.T) {
	s, g := example()
	tau := g.Resistance*s.InputCapacitance + s.CommonSource*s.Transconductance
	for _, on := range []bool{false, true} {
		v0, drive, want := s.Plateau(20), g.Off, -CurrentFall(20, s, g)
		if on {
			v0, drive, want = s.Threshold, g.On, CurrentRise(0, s, g)
		}
		const dt = 1e-12
		y := []float64{v0}
		march(y, dt, 10, func(_ float64, y, dy []float64) { dy[0] = (drive - y[0]) / tau }, nil)
		same(t, "slope", s.Transconductance*(y[0]-v0)/dt, want, 2*dt/tau)
	}
}

// Turn-off delay and fall against the gate integrated with level capacitances, the node moving at the plateau.
func TestTurnOffTime(t *testing.T) {
	s, g := example()
	s.Transfer = level(50e-12)
	s.CommonSource = 5e-9
	const i, bus = 20.0, 400.0
	phase, at := 0, 0.0
	charge := 0.0
	y := []float64{g.On}
	march(y, 300e-9, 3000000, func(_ float64, y, dy []float64) {
		ciss := s.InputCapacitance
		switch phase {
		case 1:
			dy[0] = 0
			return
		case 2:
			ciss += s.CommonSource * s.Transconductance / g.Resistance
		}
		dy[0] = (g.Off - y[0]) / (g.Resistance * ciss)
	}, func(now float64, y []float64) {
		switch {
		case phase == 0 && y[0] <= s.Plateau(i):
			phase = 1
		case phase == 1:
			if charge += (y[0] - g.Off) / g.Resistance * 1e-13; charge >= 50e-12*bus {
				phase = 2
			}
		case phase == 2 && y[0] <= s.Threshold:
			phase, at = 3, now
		}
	})
	got := TurnOffTime(i, s, g, bus, 0)
	near(t, "time", got, at, 1e-12)
	// plateau time R·Q_GD/(V_pl - V_off) alone: what more charge adds
	s.Transfer = level(100e-12)
	s.InputCapacitance += 50e-12 // same C_gs
	more := TurnOffTime(i, s, g, bus, 1) - 1
	s.Transfer, s.InputCapacitance = level(50e-12), s.InputCapacitance-50e-12
	less := TurnOffTime(i, s, g, bus, 1) - 1
	near(t, "plateau time", more-less, 12*50e-12*bus/5.5+12*50e-12*math.Log(13/5.5), 1e-15)
	// a known fall counts when longer
	near(t, "known fall", TurnOffTime(i, s, g, bus, 1e-6)-got, 1e-6-(12*2e-9+20*5e-9)*math.Log(5.5/4.5), 1e-18)
	same(t, "short known fall", TurnOffTime(i, s, g, bus, 1e-12), got, 1e-15)
	// low voltage: C_rss is larger, so the delay is
	s, _ = example()
	steep := TurnOffTime(i, s, g, 0, 1) - 1
	near(t, "delay", steep, 12*(2e-9-12e-12+900e-12)*math.Log(13/5.5), 1e-15)
}

// Turn-off time against gate, channel and both capacitances marched together, the drain held at the bus once it is there.
func TestTurnOffTimeAgainstTheCircuit(t *testing.T) {
	const bus = 400.0
	for _, curved := range []bool{false, true} {
		for _, i := range []float64{0.5, 3, 10, 20, 50} {
			s, g := example()
			s.CommonSource = 0
			if !curved {
				s.Transfer, s.Output = level(20e-12), level(150e-12)
			}
			cgs, off, arrived := s.gateSource(), 0.0, false
			march([]float64{g.On, 0}, 100e-9, 100000, func(_ float64, y, dy []float64) {
				cgd := s.Transfer.At(y[1])
				gate, channel := (g.Off-y[0])/g.Resistance, s.Transconductance*math.Max(y[0]-s.Threshold, 0)
				if arrived || y[1] <= 0 && channel >= i {
					dy[0], dy[1] = gate/(cgs+cgd), 0
					return
				}
				all := s.Output.At(y[1]) + s.Output.At(bus-y[1])
				drain := i - channel*math.Min(1, math.Max(y[1], 0)) // ohmic below 1 V
				det := (cgs+cgd)*all - cgd*cgd
				dy[0] = (gate*all + drain*cgd) / det
				dy[1] = (drain*(cgs+cgd) + gate*cgd) / det
			}, func(now float64, y []float64) {
				arrived = arrived || y[1] >= bus
				if off == 0 && y[0] <= s.Threshold {
					off = now
				}
			})
			got := TurnOffTime(i, s, g, bus, 0)
			limit := got + g.Resistance*s.Transfer.Charge(bus)*(1/(s.Threshold-g.Off)-1/(s.Plateau(i)-g.Off))
			t.Logf("curved %v, %v A: circuit %.4g s, closed form %.4g s, limit %.4g s", curved, i, off, got, limit)
			if !(off > 0 && got > 0.97*off && off < limit) {
				t.Errorf("curved %v, %v A: circuit %v, closed form %v, limit %v", curved, i, off, got, limit)
			}
		}
	}
}

func TestGateDamping(t *testing.T) {
	// R = 2·sqrt(L/C) is critical: s² + (R/L)·s + 1/(L·C) has a double root
	near(t, "critical", GateDamping(2*math.Sqrt(10e-9/1e-9), 10e-9, 1e-9), 1, 1e-15)
	near(t, "half", GateDamping(math.Sqrt(10e-9/1e-9), 10e-9, 1e-9), 0.5, 1e-15)
}

func TestGateRefuses(t *testing.T) {
	s, g := example()
	weak := Gate{Resistance: 12, On: 4, Off: -1}
	never := Gate{Resistance: 12, On: 12, Off: 5}
	unsure := Gate{Resistance: 12, On: 12, Off: 4}
	for what, got := range map[string]float64{
		"rise that the drive cannot reach": CurrentRise(20, s, weak), "fall that never starts": CurrentFall(20, s, never),
		"time of a switch that is not on": TurnOffTime(20, s, weak, 400, 0), "time without an end": TurnOffTime(20, s, unsure, 400, 0),
		"time, no curve": TurnOffTime(20, &Switch{Threshold: 3, Transconductance: 9, InputCapacitance: 1e-9}, g, 400, 0),
		"NaN current":    CurrentFall(nan, s, g), "NaN fall": TurnOffTime(20, s, g, 400, nan), "NaN bus": TurnOffTime(20, s, g, nan, 0),
		"NaN rise": CurrentRise(nan, s, g), "NaN damping": GateDamping(nan, 1, 1),
	} {
		if got == got {
			t.Errorf("%s: %v", what, got)
		}
	}
	// what a function does not use may be missing
	bare := &Switch{Threshold: 3.5, Transconductance: 20, InputCapacitance: 2e-9, CommonSource: 1e-9, InputCapacitanceVoltage: nan}
	same(t, "bare fall", CurrentFall(20, bare, Gate{Resistance: 12, On: nan, Off: -1}), 2.5e9, 1e-14)
	same(t, "bare rise", CurrentRise(20, bare, Gate{Resistance: 12, On: 12, Off: nan}), 7.5/2.2e-9, 1e-14)
}
