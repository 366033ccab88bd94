package modulation

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/recharge"
)

// randomCase is a leg with parts between those of a signal converter and of a traction inverter, and one of the modes with at most some periods.
func randomCase(g *rand.Rand, most int) (p *Plan, text string) {
	span := func(low, high float64) float64 { return low * math.Pow(high/low, g.Float64()) }
	sometimes := func(share, low, high float64) float64 {
		if g.Float64() < share {
			return span(low, high)
		}
		return 0
	}
	frequency := span(2e3, 1e6)
	period := 1 / frequency
	slope := (1 + g.Float64()) * 0.0257
	e := recharge.Element{Junction: recharge.Junction{Slope: slope, LogSaturation: -span(0.3, 1) / slope}, Resistance: span(0.1, 300)}
	if g.IntN(5) == 0 {
		e = recharge.Element{Resistance: span(1, 300), Switch: true}
	}
	capacitance := span(2e-8, 2e-5)
	supply := span(5, 20)
	charge := capacitance * span(1e-4, 0.3) * supply / 10
	on, reverse, saturation := span(1e-4, 3e-2), span(0.6, 3), sometimes(0.4, 0.8, 2)
	l := &Leg{
		Element: e, Capacitance: capacitance, Supply: supply, Bus: span(24, 800), Period: period, DeadTime: sometimes(0.8, 1e-4, 0.2) * period,
		Shortest: sometimes(0.8, 1e-4, 0.1) * period, Load: span(1e-6, 1e-3), PullDown: sometimes(0.3, 1e-6, 1e-4), NodeCharge: sometimes(0.7, 1e-9, 1e-6),
		Ripple: sometimes(0.3, 0.1, 50), LowTime: math.Inf(1), DiodeLow: g.IntN(8) == 0, Charge: charge, Least: charge * g.Float64(),
		ChargePerVolt: sometimes(0.3, 1e-3, 0.1) * capacitance, Junction: sometimes(0.3, 1e-4, 3e-2) * charge, RecoverySpec: sometimes(0.4, 0.01, 1) * charge,
		RecoveryTau: span(1e-8, 3e-7),
		Nodes: nodeFuncs{freewheeling: func(i float64) float64 {
			if i > 0 {
				return -reverse - 2*on*i
			}
			return 0
		},
			lowOn: func(i float64) float64 {
				switch {
				case saturation == 0:
					return -i * on
				case i > 0:
					return -reverse - 2*on*i
				}
				return saturation - on*i
			}},
	}
	current := span(0.01, 100)
	if g.IntN(4) == 0 {
		current = -current
	}
	n := int(span(12, float64(most)))
	text = fmt.Sprintf("N %d %+v", n, *l)
	switch g.IntN(4) {
	case 0:
		m := SixStep{Electrical: frequency / float64(n), Duty: g.Float64(), Current: current, High: g.IntN(2) == 0}
		m.Low = !m.High || g.IntN(2) == 0
		return l.SixStep(m), fmt.Sprintf("%+v %s", m, text)
	case 1:
		m := Burst{Duty: g.Float64(), Current: current, Active: float64(n) * period, Idle: span(1e-4, 1e3) * float64(n) * period, IdleNode: supply * (1.5*g.Float64() - 0.2)}
		return l.Burst(m), fmt.Sprintf("%+v %s", m, text)
	}
	m := Sinusoidal{Index: 1.6 * g.Float64(), Fundamental: frequency / float64(n), Displacement: 2 * math.Pi * (g.Float64() - 0.5), Current: current,
		ZeroSequence: ZeroSequence(g.IntN(6))}
	return l.Sinusoidal(m), fmt.Sprintf("%+v %s", m, text)
}

// TestStepsAgainstEveryPeriod solves random legs in steps of many periods and with every period by itself: voltages within 1 mV, the charge, which is
// compared with ratings that have a guard of 10 %, within 1 %. The two differ in nothing else.
func TestStepsAgainstEveryPeriod(t *testing.T) {
	g := rand.New(rand.NewPCG(11, 13))
	worst, most := 0.0, 0
	for k := range 300 {
		p, text := randomCase(g, 4000)
		start := p.leg.Supply * g.Float64()
		got, want := p.steady(start, defaultTolerance, false, nil), p.steady(start, defaultTolerance, true, nil)
		if !got.Converged || !want.Converged || got.Collapses != want.Collapses || (got.OnLow.Period < 0) != (want.OnLow.Period < 0) {
			t.Errorf("%d: converged %t and %t, collapses %t and %t, with forward current at %v and %v: %s", k, got.Converged, want.Converged, got.Collapses,
				want.Collapses, got.OnLow, want.OnLow, text)
			continue
		}
		most = max(most, got.Passes)
		if got.Collapses {
			continue
		}
		off := math.Max(math.Abs(got.Low.Value-want.Low.Value), math.Abs(got.High.Value-want.High.Value))
		off = math.Max(off, math.Abs(got.Start-want.Start))
		if want.OnLow.Period >= 0 {
			off = math.Max(off, math.Abs(got.OnLow.Value-want.OnLow.Value))
		}
		worst = math.Max(worst, off)
		if !(off <= 1e-3) || !(math.Abs(got.Droop-want.Droop) <= 3e-3) || !(math.Abs(got.Charge/want.Charge-1) <= 1e-2) {
			t.Errorf("%d: lowest %v and %v, highest %v and %v, with forward current %v and %v, start %g and %g, droop %g and %g, charge %g and %g: %s", k,
				got.Low, want.Low, got.High, want.High, got.OnLow, want.OnLow, got.Start, want.Start, got.Droop, want.Droop, got.Charge, want.Charge, text)
		}
	}
	t.Logf("worst %.2g V, at most %d passes", worst, most)
}

// TestNoHang solves random plans of up to 200,000 periods: each converges, in fewer passes than a fundamental of 16,000 periods has.
func TestNoHang(t *testing.T) {
	g := rand.New(rand.NewPCG(17, 19))
	most, which := 0, ""
	for range 500 {
		p, text := randomCase(g, 200_000)
		s := p.Steady(p.leg.Supply * g.Float64())
		if s.Passes > most {
			most, which = s.Passes, text
		}
		if !s.Converged || !s.Collapses && !(s.Low.Value <= s.High.Value) {
			t.Errorf("%+v: %s", s.Low, text)
		}
	}
	if most > 16_000 {
		t.Errorf("%d passes: %s", most, which)
	}
	t.Logf("at most %d passes: %s", most, which)
}
