package recharge

import (
	"fmt"
	"math"
	"testing"

	"floatrail/calc/internal/numeric"
)

// The map is increasing with the analytic derivative of a central difference, and has slope 1 at most at the fixed point.
func TestMapIncreasesWithItsDerivative(t *testing.T) {
	for _, r := range readReference(t) {
		p := r.period()
		if r.Element.Slope > 0 && r.Element.Slope < 1e-4 {
			continue // a central difference cannot resolve tens of µV
		}
		last := math.Inf(-1)
		for v := 0.05; v < 20; v += 0.37 {
			const h = 1e-5
			at, d := p.Map(v)
			if at < last-1e-12 {
				t.Errorf("%s: falls at %g V", r.Name, v)
			}
			last = at
			up, dUp := p.Map(v + h)
			down, dDown := p.Map(v - h)
			// within the variation of the slope across the difference
			near(t, fmt.Sprintf("%s: slope at %g V", r.Name, v), d, (up-down)/(2*h), 1e-6+math.Abs(dUp-dDown))
			if r.RecoverySpec == 0 && !(d >= 0 && d <= 1) {
				t.Errorf("%s: slope %g at %g V", r.Name, d, v)
			}
		}
		if s := p.SteadyState(); !s.Collapses {
			if _, d := p.Map(s.BeforeEdge); !(d < 1) {
				t.Errorf("%s: slope %g at the fixed point", r.Name, d)
			}
		}
	}
}

// Fixed point and charge balance: what the element carries, by quadrature of its current along the exact law, is what
// edges and loads draw.
func TestSteadyStateBalancesCharge(t *testing.T) {
	for _, r := range readReference(t) {
		p := r.period()
		s := p.SteadyState()
		if s.Collapses {
			continue
		}
		again, _ := p.Map(s.BeforeEdge)
		near(t, r.Name+": fixed point", again, s.BeforeEdge, 1e-10*s.Charge/p.Capacitance+1e-14*s.BeforeEdge)
		after := (p.Capacitance*s.BeforeEdge - p.Charge - s.Recovery) / (p.Capacitance + p.ChargePerVolt)
		near(t, r.Name+": edge", s.AfterEdge, after, 1e-13)
		carried, drawn, v := 0.0, p.Charge+p.ChargePerVolt*after+s.Recovery-p.Return, after
		for k, iv := range append([]Interval{p.On}, p.Off...) {
			i, volts := along(p.Element, v, iv, p.Capacitance)
			carried += i
			drawn += iv.Load*iv.Duration + iv.Conductance*volts
			v, _ = p.Element.Advance(v, iv, p.Capacitance)
			if k == 0 {
				v += p.Return / p.Capacitance
			}
		}
		near(t, r.Name+": charge carried", carried/s.Charge, 1, 1e-9)
		near(t, r.Name+": charge drawn", drawn/s.Charge, 1, 1e-9)
	}
}

// along integrates the element's current [C] and V_BS [V s] over an interval, in the logarithm of time.
func along(e Element, v0 float64, iv Interval, c float64) (charge, volts float64) {
	return numeric.Integrate(func(z float64) (float64, float64) {
		part := iv
		part.Duration *= math.Exp(-z)
		v, _ := e.Advance(v0, part, c)
		i := 0.0
		if iv.Conducts {
			i = e.Current(iv.Drive - v)
		}
		return i * part.Duration, v * part.Duration
	}, 0, 40, 1e-11)
}

// The count of periods is the march of the map.
func TestPeriodsUntil(t *testing.T) {
	p := Period{
		Element: fixedDrop(t, 1, 400), Capacitance: 1e-6, Charge: 70e-9,
		On: conducting(20e-6, 14-400), Off: []Interval{conducting(1e-6, 14)}, Start: 13, Lockout: 8.9,
	}
	s := p.SteadyState()
	if !s.Collapses || !math.IsNaN(s.Low) {
		t.Fatalf("%+v", s)
	}
	v, n := 13.0, 0
	for {
		n++
		if v-0.07 < 8.9 {
			break
		}
		v = 13 - (13-(v-0.07))*math.Exp(-1e-6/(400*1e-6))
	}
	if d := s.PeriodsToLockout - n; d < -1 || d > 1 { // the drop is fixed to 0.2 mV only
		t.Errorf("%d periods, exponential of R·C says %d", s.PeriodsToLockout, n)
	}
	if got := p.PeriodsUntil(13, 8.9, s.PeriodsToLockout-1); got != -1 {
		t.Errorf("within fewer periods: %d", got)
	}
	p.Element = fixedDrop(t, 1, 10)
	if s = p.SteadyState(); s.Collapses || s.PeriodsToLockout != 0 || p.PeriodsUntil(13, 8.9, 1e9) != -1 {
		t.Errorf("holds: %+v", s)
	}
	// a positive steady state below lockout is quoted, and counted
	p.Element = fixedDrop(t, 1, 150)
	if s = p.SteadyState(); s.Collapses || !(s.Low > 0 && s.Low < 8.9) || s.PeriodsToLockout < 2 {
		t.Errorf("below lockout: %+v", s)
	}
	// no recharge: the loads alone count
	p.Off = []Interval{{Duration: 1e-6, Drive: 14, Load: 1e-3}}
	if s = p.SteadyState(); !s.Collapses || s.PeriodsToLockout != int(math.Ceil((13-8.9)/0.071)) {
		t.Errorf("no recharge: %+v", s)
	}
}

// Recovery follows its formula for a common t_on, shrinks to the last interval when the others block, and never exceeds Q_spec.
func TestRecovery(t *testing.T) {
	const tau, off = 30e-9, 20e-9
	p := Period{
		Element: fixedDrop(t, 0.5, 5), Capacitance: 1e-6,
		Off:          []Interval{conducting(off, 14), conducting(off, 12), conducting(off, 12)},
		RecoverySpec: 15e-9, RecoveryTau: tau,
	}
	w := p.Element.law()
	q, _ := p.recovered(&w, 11)
	near(t, "one current throughout", q, tau*p.Element.Current(1)*(1-math.Exp(-3*off/tau)), 1e-20)
	p.Off[1].Drive = 11.2
	q, _ = p.recovered(&w, 11)
	near(t, "blocked before the last", q, tau*p.Element.Current(1)*(1-math.Exp(-off/tau)), 1e-20)
	p.Off[2].Drive = 10
	if q, _ = p.recovered(&w, 11); q != 0 {
		t.Errorf("blocked at the edge: %g", q)
	}
	p.Off[2].Drive, p.Off[1].Drive = 40, 40
	if q, _ = p.recovered(&w, 11); q != p.RecoverySpec {
		t.Errorf("not limited: %g", q)
	}
	p.Off[2].Drive, p.Off[1].Drive = 12.5, 12
	last := math.Inf(1)
	for v := 8.0; v < 13; v += 1e-3 {
		q, falls := p.recovered(&w, v)
		if q > last || falls < 0 {
			t.Fatalf("rises at %g V", v)
		}
		last = q
	}
}

// Worse inputs never raise the lowest V_BS.
func TestWorseInputsNeverHelp(t *testing.T) {
	for name, worsen := range map[string]func(*Period){
		"charge":      func(p *Period) { p.Charge *= 1.3 },
		"resistance":  func(p *Period) { p.Element.Resistance *= 1.5 },
		"drop":        func(p *Period) { p.Element.LogSaturation -= 0.1 / p.Element.Slope },
		"load":        func(p *Period) { p.On.Load *= 3 },
		"R_GS":        func(p *Period) { p.On.Conductance *= 3 },
		"on-time":     func(p *Period) { p.On.Duration *= 3 },
		"window":      func(p *Period) { p.Off[1].Duration *= 0.3 },
		"node":        func(p *Period) { p.Off[1].Drive -= 0.5 },
		"capacitance": func(p *Period) { p.Capacitance *= 0.5 },
		"recovery":    func(p *Period) { p.RecoverySpec, p.RecoveryTau = 2*p.RecoverySpec, 2*p.RecoveryTau },
	} {
		good := benchPeriod(t)
		worse := good
		worse.Off = append([]Interval(nil), good.Off...)
		worsen(&worse)
		if a, b := good.SteadyState(), worse.SteadyState(); !(b.Low < a.Low) {
			t.Errorf("%s: %g V, worsened %g V", name, a.Low, b.Low)
		}
	}
}

// FuzzSteadyState: any finite, plausible period is answered, without NaN in a converged answer, and consistently.
func FuzzSteadyState(f *testing.F) {
	f.Add(uint8(0), 0.04, 0.8, 2.2, 470e-9, 5e-6, 100e-9, 5e-6, -388.0, 12.0, 2.0, 2.5e-4, 1e-4, 60e-9, 4e-9, 1e-9, 10e-9)
	f.Add(uint8(1), 29e-6, 0.4, 10.0, 100e-9, 0.46e-6, 20e-9, 0.46e-6, -43.0, 5.25, 2.2, 0.0, 0.0, 6e-9, 0.0, 0.0, 0.0)
	f.Add(uint8(2), 0.0, 0.0, 22.0, 1e-6, 20e-6, 0.0, 1e-6, -400.0, 15.0, 0.0, 1e-3, 0.0, 70e-9, 0.0, 0.0, 0.0)
	f.Add(uint8(1), 0.05, 0.9, 0.0, 1e-9, 10.0, 1e-9, 100.0, 3.0, 12.0, 0.7, 1e-6, 1e-3, 0.0, 0.0, 0.0, 1e-9)
	f.Add(uint8(1), 0.05, 0.9, 400.0, 1e-3, 1e-9, 1e-9, 1e-9, 11.0, -3.0, 0.7, 0.0, 1e-6, 1e-6, 1e-8, 1e-9, 1e-7)
	f.Fuzz(func(t *testing.T, kind uint8, slope, drop, r, c, on, dead, low, blocked, drive, dip, load, g, q, perVolt, back, recovery float64) {
		for _, x := range []*float64{&slope, &drop, &r, &c, &on, &dead, &low, &blocked, &drive, &dip, &load, &g, &q, &perVolt, &back, &recovery} {
			if math.IsNaN(*x) || math.IsInf(*x, 0) {
				*x = 1
			}
		}
		within := func(x, a, b float64) float64 { return math.Min(math.Max(math.Abs(x), a), b) }
		slope, drop, r = within(slope, 0, 0.1), within(drop, 0, 2), within(r, 0, 1e3)
		e := Element{Junction: linked(math.Max(slope, 1e-5), drop), Resistance: r, Switch: kind%3 == 2}
		if slope == 0 {
			e.Slope = 0
		}
		if e.Switch {
			e.Resistance = within(r, 1e-3, 1e3)
		}
		drive = math.Min(math.Max(drive, -30), 30)
		iv := Interval{Load: within(load, 0, 0.1), Conducts: true}
		part := func(duration, drive float64) Interval {
			out := iv
			out.Duration, out.Drive = duration, drive
			return out
		}
		dead, low = within(dead, 0, 1), within(low, 0, 100)
		p := Period{
			Element: e, Capacitance: within(c, 1e-9, 1e-3), On: part(within(on, 0, 100), math.Min(math.Max(blocked, -1200), 30)),
			Off:    []Interval{part(dead, drive+within(dip, 0, 10)), part(low, drive), part(dead, drive+within(dip, 0, 10))},
			Charge: within(q, 0, 1e-3), ChargePerVolt: within(perVolt, 0, 1e-4), RecoverySpec: within(recovery, 0, 1e-5), RecoveryTau: 2e-8,
			Start: 12, Lockout: 8,
		}
		p.On.Conducts = !e.Switch
		p.On.Conductance = within(g, 0, 0.1)
		p.Return = math.Min(within(back, 0, 1e-6), p.Charge)
		s := p.SteadyState()
		switch {
		case s.Collapses:
			if v, _ := p.Map(0); !(v <= 0) {
				t.Errorf("collapses, yet Map(0) = %g: %+v", v, p)
			}
		case s.Converged:
			for _, x := range []float64{s.Low, s.High, s.AfterEdge, s.BeforeEdge, s.Deficit, s.Recovery, s.Charge, s.TimeConducting} {
				if math.IsNaN(x) || math.IsInf(x, 0) {
					t.Fatalf("%+v\n%+v", s, p)
				}
			}
			if v, _ := p.Map(s.BeforeEdge); !(math.Abs(v-s.BeforeEdge) <= 1e-9*(1+s.High)) {
				t.Errorf("not a fixed point: %g -> %g\n%+v\n%+v", s.BeforeEdge, v, s, p)
			}
			if s.Low > s.BeforeEdge || s.High < s.BeforeEdge-1e-9*(1+s.High) || s.BeforeEdge < 0 {
				t.Errorf("order: %+v\n%+v", s, p)
			}
		default:
			t.Errorf("no answer: %+v\n%+v", s, p)
		}
	})
}
