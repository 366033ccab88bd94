package transient

import (
	"math"
	"testing"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/recharge"
)

// simple is a half-bridge of constant capacitances without resistances, recovery or a bootstrap element that matters.
func simple(event Event) *Bridge {
	cell := Cell{
		GateSource: 1e-9, Transfer: level(10e-12), Output: level(100e-12), Transconductance: 50, Threshold: 3, OnResistance: 10e-3, GateResistance: 10,
		Reverse: recharge.Junction{Slope: 0.03, LogSaturation: -25},
	}
	b := &Bridge{
		Event: event, Bus: 100, Load: 10, Supply: 10, LowDrive: 10, Floating: 10, L1: 10e-9, L2: 10e-9, PinCapacitance: 1e-14, BootstrapCapacitance: 1e-6,
		Element: recharge.Element{Junction: recharge.Junction{Slope: 0.04, LogSaturation: -30}, Resistance: 1e3}, High: cell, Low: cell,
	}
	if !event.high() {
		b.Load = -b.Load
	}
	return b
}

func course(t *testing.T, b *Bridge, w Window) *Course {
	t.Helper()
	var s Simulator
	co, err := s.Run(b, w)
	if err != nil {
		t.Fatal(err)
	}
	return co
}

// Slowly commutated, the node lies V_F + L2·di/dt below COM, with (2)'s slope of a channel whose gate discharges: i falls as (i + g_fs·(V_th -
// V_off))·e^(-t/τ), so that the slope is steepest where the fall begins, i.e. where the node arrives.
func TestUndershootOfALinearInductor(t *testing.T) {
	b := simple(TurnOff)
	b.Bus, b.PinCapacitance, b.High.Output, b.Low.Output, b.Low.Transfer = 20, 1e-15, level(2e-15), level(2e-15), level(1e-16)
	b.High.GateResistance, b.RingingResistance = 60, 200
	b.Low.Reverse = recharge.Junction{Slope: 1e-6, LogSaturation: math.Log(10) - 0.8/1e-6} // 0.8 V at any current
	b.High.Transfer, b.High.GateSource = level(1e-16), 1e-9
	co := course(t, b, Window{Limit: 1e-6})
	s := &Switch{Threshold: 3, Transconductance: 50, InputCapacitance: 1e-9, Transfer: b.High.Transfer}
	slope := CurrentFall(10, s, Gate{Resistance: 60, On: 10, Off: 0})
	same(t, "undershoot of the simulated slope", co.Ranges[Node].Min, -0.8-b.L2*co.LowSlope, 0.001)
	same(t, "slope", co.LowSlope, slope, 0.02)
	if !co.Settled {
		t.Error("not settled")
	}
}

// A switch that turns on at once into a diode without charge leaves the loop a series circuit L, C, R: the blocking voltage overshoots by
// e^(-ζ·π/sqrt(1 - ζ²)) of its step and rings with f = sqrt(1 - ζ²)/(2π·sqrt(L·C)). R beside L (R_p = q·sqrt(L/C)) damps by 1/(2q).
func TestRingingOfASeriesCircuit(t *testing.T) {
	for _, r := range []struct{ series, beside float64 }{{1, 0}, {4, 0}, {0, 10}, {0, 4}} {
		b := simple(TurnOn)
		b.High.GateResistance, b.High.GateSource, b.High.Transfer, b.High.Output = 0.01, 1e-12, level(1e-17), level(1e-15)
		b.High.Transconductance, b.High.OnResistance = 1e4, 1e-6
		b.Low.Output, b.Low.Transfer, b.Low.GateResistance = level(100e-12), level(1e-16), 1
		b.R1, b.R2 = r.series/2, r.series/2
		if r.beside == 0 {
			b.Load = 0.01 // the drop of R
		}
		l, c := b.L1+b.L2, 100e-12
		zeta := r.series / 2 * math.Sqrt(c/l)
		if r.beside > 0 {
			b.RingingResistance = r.beside * math.Sqrt(l/c)
			zeta = 1 / (2 * r.beside)
		}
		co := course(t, b, Window{Limit: 100e-9, Whole: true, Tolerance: 1e-5})
		damped := math.Sqrt(1 - zeta*zeta)
		step := b.Bus - co.Ranges[LowDrain].Min
		same(t, "overshoot", co.Ranges[LowDrain].Max-b.Bus, step*math.Exp(-zeta*math.Pi/damped), 0.005)
		same(t, "frequency", co.RingFrequency, damped/(2*math.Pi*math.Sqrt(l*c)), 0.003)
		same(t, "damping", co.RingDamping, zeta, 0.01)
	}
}

// Without current in the channel the gate discharges with R_g·(C_gs + C_gd).
func TestGateTimeConstant(t *testing.T) {
	b := simple(TurnOff)
	b.Load, b.High.OffBias = 0, -2
	co := course(t, b, Window{Limit: 50e-9, Whole: true})
	same(t, "time to V_th", co.ChannelTime, 10*(1e-9+10e-12)*math.Log((10.+2)/(3+2)), 0.002)
	if co.Settled {
		t.Error("an event without current is never over")
	}
}

// While C_gd takes the gate current the gate stays at its plateau: (3) and (4) for constant capacitances, and the trade's R_g·Q_gd/(V - V_pl) as the
// lower limit of the time.
func TestPlateau(t *testing.T) {
	for _, event := range []Event{TurnOn, SinkingTurnOn, TurnOff, SinkingTurnOff} {
		b := simple(event)
		b.L1, b.L2 = 0.1e-9, 0.1e-9
		b.RingingResistance = 5
		active := &b.High
		if !event.high() {
			active = &b.Low
		}
		active.GateResistance, active.Transfer = 30, level(50e-12)
		s := &Switch{Threshold: 3, Transconductance: 50, InputCapacitance: 1.05e-9, Transfer: active.Transfer, Output: active.Output}
		g := Gate{Resistance: 30, On: 10, Off: 0}
		w := TurnOnSwing(100, 10, s, level(100e-12), g)
		if event.off() {
			w = TurnOffSwing(100, 10, s, level(100e-12), g)
		}
		co := course(t, b, Window{Limit: 1e-6})
		same(t, "slew", co.Slew, w.Mean(), 0.03)
		pl := s.Plateau(10)
		force := 10 - pl
		if event.off() {
			force = pl
		}
		if least := 0.8 * 30 * 50e-12 * 100 / force; 80/co.Slew < least {
			t.Errorf("event %d: 10 to 90 %% in %g s, faster than the gate's charge lets it, %g s", event, 80/co.Slew, least)
		}
	}
}

// A gate that nothing holds takes the capacitive divider's share of the step.
func TestMillerStep(t *testing.T) {
	for _, event := range []Event{TurnOn, SinkingTurnOn} {
		b := simple(event)
		b.L1, b.L2 = 0.1e-9, 0.1e-9
		b.RingingResistance = 2
		passive, gate := &b.Low, LowGate
		if !event.high() {
			passive, gate = &b.High, HighGate
		}
		passive.GateResistance, passive.GateSource = 1e9, 1e-9
		passive.Transfer = level(20e-12)
		passive.Threshold = 50 // stays off
		passive.OnResistance = 1
		co := course(t, b, Window{Limit: 1e-6})
		share := 20e-12 / (1e-9 + 20e-12)
		last := co.Last.LowGate
		drop := co.Last.LowDrain - co.Ranges[LowDrain].Min
		if event == SinkingTurnOn {
			last, drop = co.Last.HighGate, co.Last.HighDrain-co.Ranges[HighDrain].Min
		}
		same(t, "lift", last, share*drop, 0.005)
		if co.Ranges[gate].Max < last {
			t.Error("maximum below the end")
		}
	}
}

// The fitted diode of a data-sheet test, in the test's circuit made of the bridge itself: V_BUS across L1 + L2 lets the current fall at the test's
// slope. I_RM, Q_rr, and t_rr through 90 and 25 %.
func TestRecoveryTestSimulated(t *testing.T) {
	for _, test := range []struct{ current, slope, charge, time float64 }{
		{20, 1e8, 22e-9, 28e-9}, {30, 1e8, 60e-9, 46e-9}, {20, 1e8, 0.85e-6, 145e-9}, {20, 5e8, 0.55e-6, 95e-9}, {20, 2e9, 155e-9, 23e-9},
	} {
		fit, err := FitRecovery(test.current, test.slope, test.charge, test.time)
		if err != nil {
			t.Fatal(err)
		}
		b := simple(TurnOn)
		b.Load, b.Bus = test.current, 400
		total := b.Bus / test.slope
		b.L1, b.L2 = total/2, total/2
		b.High.GateResistance, b.High.GateSource, b.High.Transfer, b.High.Output = 0.1, 1e-13, level(1e-17), level(1e-15)
		b.High.Transconductance, b.High.OnResistance, b.High.Threshold = 1e3, 1e-6, 1
		b.Low.Recovery, b.Low.Output, b.Low.Transfer = fit, level(1e-15), level(1e-17)
		b.RingingResistance = 3e5
		var s Simulator
		peak, charge, crossed := 0.0, 0.0, math.Inf(1)
		var times, currents []float64
		s.seen = func(at *span) {
			for k := range 40 {
				theta := (float64(k) + 0.5) / 40
				i := at.state[stateI2].At(theta)
				if i < 0 {
					crossed = math.Min(crossed, at.at(theta))
					charge -= i * at.length / 40
					times, currents = append(times, at.at(theta)), append(currents, -i)
					peak = math.Max(peak, -i)
				}
			}
		}
		if _, err := s.Run(b, Window{Limit: test.current/test.slope + 8*test.time, Whole: true, Tolerance: 1e-5}); err != nil {
			t.Fatal(err)
		}
		var at90, at25 float64
		for k := range times {
			if currents[k] > 0.9*peak {
				at90 = times[k]
			}
			if currents[k] > 0.25*peak {
				at25 = times[k]
			}
		}
		same(t, "I_RM", peak, fit.Peak(test.current, test.slope), 0.02)
		same(t, "Q_rr", charge, test.charge, 0.02)
		same(t, "t_rr", at25+(at25-at90)*0.25/0.65-crossed, test.time, 0.02)
	}
}

// driven is a diode whose current is forced: a ramp that stops. State: the current of L_fr.
type driven struct {
	path  *path
	slope float64
	end   float64
}

func (d *driven) current(t float64) float64 { return math.Min(d.slope*t, d.end) }

func (d *driven) Rates(y, dy []float64) bool {
	dy[0] = d.path.resistance / d.path.inductance * (d.current(y[1]) - y[0])
	dy[1] = 1
	return true
}

func (d *driven) Jacobian(y, j []float64) bool {
	rate := d.path.resistance / d.path.inductance
	j[0], j[1], j[2], j[3] = -rate, 0, 0, 0
	if y[1] < d.end/d.slope {
		j[1] = rate * d.slope
	}
	return true
}

// The forward recovery test: its peak and its time, with the voltage found from the law of the reverse path itself.
func TestForwardRecoveryTestSimulated(t *testing.T) {
	for _, test := range []struct{ current, slope, peak, time, drop float64 }{
		{20, 1e9, 1.9, 36e-9, 0.82}, {30, 1e9, 2.6, 60e-9, 0.88}, {20, 5e8, 5.5, 150e-9, 0.95}, {20, 5e8, 9, 190e-9, 1.55}, {20, 2e9, 5.5, 24e-9, 3.9},
	} {
		fit, err := FitForwardRecovery(test.current, test.slope, test.peak, test.drop, test.time)
		if err != nil {
			t.Fatal(err)
		}
		slope := 0.035
		p := newPath(recharge.Junction{Slope: slope, LogSaturation: math.Log(test.current) - test.drop/slope}, test.current)
		p.recover(Recovery{}, fit)
		d := &driven{&p, test.slope, test.current}
		s := numeric.NewStiff(2)
		if err := s.Start(d, []float64{0, 0}, 0, 1e-8, []float64{1e-9, 1e-15}); err != nil {
			t.Fatal(err)
		}
		voltage := func(i, inner float64) float64 {
			v, ok := numeric.Root(func(v float64) float64 {
				x, _ := p.current(v, 0, inner)
				return x - i
			}, -100, 100, 1e-9)
			if !ok {
				t.Fatal("no voltage")
			}
			return v
		}
		peak, last, rise := 0.0, 0.0, test.current/test.slope
		for _, end := range []float64{rise, 3 * test.time} {
			for s.To < end {
				if err := s.Step(end); err != nil {
					t.Fatal(err)
				}
				for k := range 20 {
					theta := float64(k+1) / 20
					at := s.From + theta*(s.To-s.From)
					v := voltage(d.current(at), s.Dense(0).At(theta))
					peak = math.Max(peak, v)
					if at > rise && v > 1.1*test.drop {
						last = at
					}
				}
			}
		}
		same(t, "V_FP", peak, test.peak, 0.02)
		same(t, "t_fr", last, test.time, 0.02)
	}
}
