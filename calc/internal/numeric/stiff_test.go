package numeric

import (
	"errors"
	"math"
	"testing"
)

// model is a Problem from two functions.
type model struct {
	rates    func(y, dy []float64) bool
	jacobian func(y, j []float64) bool
}

func (m model) Rates(y, dy []float64) bool   { return m.rates(y, dy) }
func (m model) Jacobian(y, j []float64) bool { return m.jacobian(y, j) }

// scalar is y' = f(y) of one state with the domain y > floor.
func scalar(floor float64, f, df func(float64) float64) model {
	return model{
		func(y, dy []float64) bool { dy[0] = f(y[0]); return !(y[0] <= floor) },
		func(y, j []float64) bool { j[0] = df(y[0]); return !(y[0] <= floor) },
	}
}

func begin(t testing.TB, p Problem, y0 []float64, rtol float64, atol ...float64) *Stiff {
	t.Helper()
	s := NewStiff(len(y0))
	if err := s.Start(p, y0, 0, rtol, atol); err != nil {
		t.Fatal(err)
	}
	return s
}

func goOn(t testing.TB, s *Stiff, end float64) {
	t.Helper()
	for s.To < end {
		if err := s.Step(end); err != nil {
			t.Fatalf("at %v: %v", s.To, err)
		}
	}
}

// Robertson's kinetics, Hairer and Wanner, "Solving ODEs II", eq. IV.1.4. Reference at t = 40: problem D2 of the test package for
// stiff methods of Enright and Pryce (ACM Transactions on Mathematical Software 13(1), 1987, algorithm 648; the title from
// memory), whose states 2 and 3 are 1e4 and 1e2 times these; Hairer and Wanner's 0.7158270687, 9.185534764e-6, 0.2841637457,
// from memory, agree.
func TestRobertson(t *testing.T) {
	p := model{
		func(y, dy []float64) bool {
			r1, r2, r3 := 0.04*y[0], 1e4*y[1]*y[2], 3e7*y[1]*y[1]
			dy[0], dy[1], dy[2] = r2-r1, r1-r2-r3, r3
			return true
		},
		func(y, j []float64) bool {
			copy(j, []float64{-0.04, 1e4 * y[2], 1e4 * y[1], 0.04, -1e4*y[2] - 6e7*y[1], -1e4 * y[1], 0, 6e7 * y[1], 0})
			return true
		},
	}
	for _, c := range []struct {
		tol, end float64
		most     int // steps
		want     [3]float64
	}{
		{1e-4, 40, 60, [3]float64{0.7158270687194, 9.185534764557e-6, 0.2841637457458}},
		{1e-6, 40, 140, [3]float64{0.7158270687194, 9.185534764557e-6, 0.2841637457458}},
		{1e-8, 40, 1000, [3]float64{0.7158270687194, 9.185534764557e-6, 0.2841637457458}},
		// Test Set for IVP Solvers, University of Bari, problem ROBER
		{1e-6, 1e11, 650, [3]float64{0.2083340149701255e-7, 0.8333360770334713e-13, 0.9999999791665050}},
	} {
		s := begin(t, p, []float64{1, 0, 0}, c.tol, c.tol*1e-6, c.tol*1e-10, c.tol)
		goOn(t, s, c.end)
		for i, want := range c.want {
			if e := math.Abs(s.Y1[i]/want - 1); e > 2*c.tol {
				t.Errorf("tolerance %g, t = %g: y%d = %.12g, off by %.2g", c.tol, c.end, i+1, s.Y1[i], e)
			}
		}
		if s.Accepted > c.most || s.Rejected > s.Accepted/5 {
			t.Errorf("tolerance %g, t = %g: %d steps and %d in vain", c.tol, c.end, s.Accepted, s.Rejected)
		}
	}
}

// Van der Pol's oscillator, ε = 1e-6, from (2, 0) to t = 2: two fast passages of 1e-6 of the time. Reference: Test Set for IVP
// Solvers, University of Bari, problem VDPOL, computed there with RADAU to 1e-18.
func TestVanDerPol(t *testing.T) {
	const eps = 1e-6
	p := model{
		func(y, dy []float64) bool {
			dy[0], dy[1] = y[1], ((1-y[0]*y[0])*y[1]-y[0])/eps
			return true
		},
		func(y, j []float64) bool {
			j[0], j[1], j[2], j[3] = 0, 1, (-2*y[0]*y[1]-1)/eps, (1-y[0]*y[0])/eps
			return true
		},
	}
	for tol, most := range map[float64]int{1e-4: 450, 1e-6: 1600, 1e-8: 8000} {
		s := begin(t, p, []float64{2, 0}, tol, tol, tol)
		goOn(t, s, 2)
		e := math.Max(math.Abs(s.Y1[0]-1.706167732170483), math.Abs(s.Y1[1]+0.8928097010247975))
		if e > 2*tol || s.Accepted > most {
			t.Errorf("tolerance %g: off by %.2g after %d steps, %d in vain", tol, e, s.Accepted, s.Rejected)
		}
	}
}

// resonance is a step of 1 V on a series R-L-C: v' = i/C, i' = (1 - v - R·i)/L.
func resonance(r, l, c float64) model {
	return model{
		func(y, dy []float64) bool { dy[0], dy[1] = y[1]/c, (1-y[0]-r*y[1])/l; return true },
		func(_, j []float64) bool { j[0], j[1], j[2], j[3] = 0, 1/c, -1/l, -r/l; return true },
	}
}

// Ringing at 100 MHz, Q = 10: v = 1 - exp(-ζ·ω0·t)·(cos ωt + ζ·ω0/ω·sin ωt), peaks 1 ± exp(-k·π·ζ/sqrt(1 - ζ²)) at k·π/ω.
func TestRinging(t *testing.T) {
	const q, w0, l = 10, 2 * math.Pi * 100e6, 10e-9
	const zeta = 0.5 / q
	damped := w0 * math.Sqrt(1-zeta*zeta)
	for _, tol := range []float64{1e-3, 1e-4, 1e-5, 1e-6} {
		s := begin(t, resonance(w0*l/q, l, 1/(w0*w0*l)), []float64{0, 0}, tol, tol, tol/(w0*l))
		half, crossings := 1, 0
		first, last, peak, place := 0.0, 0.0, 0.0, 0.0 // peak: farthest from 1 V since the last crossing
		follow := func(p Point) {
			if d := p.Value - 1; d*float64(2*(half%2)-1) > peak {
				peak, place = math.Abs(d), s.From+p.Theta*(s.To-s.From)
			}
		}
		for s.To < 65e-9 {
			if err := s.Step(65e-9); err != nil {
				t.Fatal(err)
			}
			p := s.Dense(0)
			low, high := p.Extremes()
			theta, ok := p.Crossing(1, 0, 1, 0)
			if !ok {
				follow(low)
				follow(high)
				continue
			}
			last = s.From + theta*(s.To-s.From)
			if crossings++; crossings == 1 {
				first = last
				follow(high)
				continue
			}
			ends, begins := low, high
			if half%2 == 1 {
				ends, begins = high, low
			}
			follow(ends)
			if want := math.Exp(-float64(half) * math.Pi * zeta / math.Sqrt(1-zeta*zeta)); math.Abs(peak-want) > 6*tol {
				t.Errorf("tolerance %g: peak %d %.6f, want %.6f", tol, half, peak, want)
			}
			// where the slope vanishes an error e of v' moves the peak by e/v”
			if e := math.Abs(place*damped - float64(half)*math.Pi); e > 300*tol {
				t.Errorf("tolerance %g: peak %d at phase %.5f, off by %.2g", tol, half, place*damped, e)
			}
			half, peak = half+1, 0
			follow(begins)
		}
		if half != 13 { // 12 peaks, the last at 60.08 ns
			t.Errorf("tolerance %g: %d peaks", tol, half-1)
		}
		if f := float64(crossings-1) / 2 / (last - first); math.Abs(f/(damped/2/math.Pi)-1) > 6*tol {
			t.Errorf("tolerance %g: %d crossings at %.8g Hz, want %.8g", tol, crossings, f, damped/2/math.Pi)
		}
		goOn(t, s, 100e-9)
		phase := damped * 100e-9
		want := 1 - math.Exp(-zeta*w0*100e-9)*(math.Cos(phase)+zeta*w0/damped*math.Sin(phase))
		if e := math.Abs(s.Y1[0] - want); e > 8*tol {
			t.Errorf("tolerance %g: %.8f at the end, want %.8f", tol, s.Y1[0], want)
		}
	}
}

// An inductance and a capacitance with log C linear in log(1 + v), C = c0·(1 + v)^-m, constant for v < 0: a kink twice a
// period. Energy is conserved: E = L·i²/2 + ∫C·v dv, and its share of the capacitance has a closed form for v >= 0 and is
// c0·v²/2 below, so the peaks are known whatever the solution between them.
func TestNonlinearResonance(t *testing.T) {
	const l, c0, m, v0 = 16e-9, 2e-9, 0.6, 400.0
	p := model{
		func(y, dy []float64) bool {
			c := c0 * math.Pow(1+math.Max(y[0], 0), -m)
			dy[0], dy[1] = y[1]/c, -y[0]/l
			return true
		},
		func(y, j []float64) bool {
			v := math.Max(y[0], 0)
			c := c0 * math.Pow(1+v, -m)
			j[0], j[1], j[2], j[3] = 0, 1/c, -1/l, 0
			if y[0] > 0 {
				j[0] = y[1] / c * m / (1 + v)
			}
			return true
		},
	}
	energy := c0 * (((math.Pow(1+v0, 2-m) - 1) / (2 - m)) - (math.Pow(1+v0, 1-m)-1)/(1-m))
	for _, tol := range []float64{1e-3, 1e-4, 1e-5, 1e-6} {
		s := begin(t, p, []float64{v0, 0}, tol, tol, tol)
		lowest, highest, current := v0, 0.0, 0.0
		for s.To < 100e-9 {
			if err := s.Step(100e-9); err != nil {
				t.Fatal(err)
			}
			low, high := s.Dense(0).Extremes()
			lowest = math.Min(lowest, low.Value)
			if s.From > 30e-9 {
				highest = math.Max(highest, high.Value)
			}
			low, _ = s.Dense(1).Extremes()
			current = math.Max(current, -low.Value)
		}
		for name, v := range map[string][2]float64{
			"lowest voltage":  {lowest, -math.Sqrt(2 * energy / c0)},
			"voltage again":   {highest, v0},
			"highest current": {current, math.Sqrt(2 * energy / l)},
		} {
			if e := math.Abs(v[0]/v[1] - 1); e > 10*tol {
				t.Errorf("tolerance %g: %s %.7g, want %.7g, off by %.2g", tol, name, v[0], v[1], e)
			}
		}
		if s.Rejected > s.Accepted {
			t.Errorf("tolerance %g: %d steps, %d in vain", tol, s.Accepted, s.Rejected)
		}
	}
}

// A diode discharges a capacitance: v' = -(I_S/C)·(exp(v/n) - 1) from 40·n, so a time constant of 1e-17 of the last one:
// v = -n·ln(1 - (1 - exp(-v0/n))·exp(-t·I_S/(n·C))).
func TestDiodeDischarge(t *testing.T) {
	const n, rate = 0.045, 1e-3 // V, n·I_S/(n·C) V/s
	p := scalar(math.Inf(-1), func(v float64) float64 { return -rate * math.Expm1(v/n) }, func(v float64) float64 { return -rate / n * math.Exp(v/n) })
	for tol, most := range map[float64]int{1e-3: 150, 1e-5: 350, 1e-7: 950} {
		s := begin(t, p, []float64{40 * n}, tol, tol*1e-3)
		for s.To < 100 {
			if err := s.Step(100); err != nil {
				t.Fatal(err)
			}
			exact := func(t float64) float64 { return -n * math.Log(math.Exp(-40)*math.Exp(-t*rate/n)-math.Expm1(-t*rate/n)) }
			for _, theta := range []float64{0.5, 1} {
				want := exact(s.From + theta*(s.To-s.From))
				if e := math.Abs(s.Dense(0).At(theta)-want) / (want + 1e-3); e > 5*tol {
					t.Fatalf("tolerance %g: %.9g at %g, want %.9g", tol, s.Dense(0).At(theta), s.To, want)
				}
			}
		}
		if s.Accepted > most {
			t.Errorf("tolerance %g: %d steps", tol, s.Accepted)
		}
	}
}

func TestEnds(t *testing.T) {
	s := begin(t, resonance(0.1, 1, 1), []float64{0, 0}, 1e-6, 1e-6, 1e-6)
	if s.From != 0 || s.To != 0 || s.Dense(0) != (Polynomial{}) {
		t.Error("a start is no step")
	}
	y0, y1 := &s.Y0[0], &s.Y1[0]
	before := [2]float64{}
	for k := 1; s.To < 10; k++ {
		end := math.Min(10, 0.3*float64(k))
		for s.To < end {
			copy(before[:], s.Y1)
			from := s.To
			if err := s.Step(end); err != nil {
				t.Fatal(err)
			}
			if s.From != from || s.To > end || s.Y0[0] != before[0] || s.Y0[1] != before[1] || y0 != &s.Y0[0] || y1 != &s.Y1[0] {
				t.Fatal("a step does not begin where the last one ended")
			}
			for i := range 2 {
				p := s.Dense(i)
				if p.At(0) != s.Y0[i] || math.Abs(p.At(1)-s.Y1[i]) > 1e-15 {
					t.Fatalf("dense output from %v to %v, states %v and %v", p.At(0), p.At(1), s.Y0[i], s.Y1[i])
				}
			}
		}
	}
	if s.To != 10 {
		t.Errorf("ended at %v", s.To)
	}
	for _, end := range []float64{10, 9, math.NaN(), math.Inf(1)} {
		if err := s.Step(end); !errors.Is(err, ErrInput) {
			t.Errorf("end %v: %v", end, err)
		}
	}
	// an end close by does not shorten the steps behind it
	free := begin(t, resonance(0.1, 1, 1), []float64{0, 0}, 1e-6, 1e-6, 1e-6)
	goOn(t, free, 50)
	cut := begin(t, resonance(0.1, 1, 1), []float64{0, 0}, 1e-6, 1e-6, 1e-6)
	for k := 1; k <= 20; k++ {
		goOn(t, cut, 2.5*float64(k))
		goOn(t, cut, 2.5*float64(k)*(1+1e-9))
	}
	if cut.Accepted > free.Accepted+60 {
		t.Errorf("%d steps with 40 ends, %d with one", cut.Accepted, free.Accepted)
	}
}

func TestInput(t *testing.T) {
	s, p, one := NewStiff(1), scalar(0, math.Sqrt, math.Sqrt), []float64{1}
	if err := s.Step(1); !errors.Is(err, ErrInput) {
		t.Errorf("before Start: %v", err)
	}
	for name, err := range map[string]error{
		"no problem":         s.Start(nil, one, 0, 1e-3, one),
		"states":             s.Start(p, []float64{1, 1}, 0, 1e-3, one),
		"tolerances":         s.Start(p, one, 0, 1e-3, nil),
		"zero atol":          s.Start(p, one, 0, 1e-3, []float64{0}),
		"NaN atol":           s.Start(p, one, 0, 1e-3, []float64{math.NaN()}),
		"negative rtol":      s.Start(p, one, 0, -1e-3, one),
		"NaN rtol":           s.Start(p, one, 0, math.NaN(), one),
		"negative step":      s.Start(p, one, -1, 1e-3, one),
		"infinite step":      s.Start(p, one, math.Inf(1), 1e-3, one),
		"step after a fault": s.Step(1),
	} {
		if !errors.Is(err, ErrInput) {
			t.Errorf("%s: %v", name, err)
		}
	}
	if err := s.Start(p, []float64{math.NaN()}, 0, 1e-3, one); !errors.Is(err, ErrNumber) {
		t.Errorf("NaN state: %v", err)
	}
	if err := s.Start(p, []float64{-1}, 0, 1e-3, one); !errors.Is(err, ErrDomain) {
		t.Errorf("start outside the domain: %v", err)
	}
}

func TestFailures(t *testing.T) {
	nan := math.NaN()
	zero, minus := func(float64) float64 { return 0 }, func(float64) float64 { return -1 }
	late := func(from, v float64) func(float64) float64 {
		return func(y float64) float64 {
			if y > from {
				return v
			}
			return 1
		}
	}
	for name, c := range map[string]struct {
		p        model
		y0, stop float64 // time it must stop at [s]
		want     error
	}{
		"leaves the domain":   {scalar(0.1, minus, zero), 1, 0.9, ErrDomain},
		"root of the domain":  {scalar(0, func(y float64) float64 { return -1 / y }, func(y float64) float64 { return 1 / y / y }), 1, 0.5, nil},
		"NaN from a state on": {scalar(0, late(1.9, nan), zero), 1, 0.9, ErrNumber},
		"Inf from a state on": {scalar(0, late(1.9, math.Inf(1)), zero), 1, 0.9, ErrNumber},
		"NaN in the Jacobian": {scalar(0, late(9, nan), late(2, nan)), 1, 1, ErrNumber},
		"pole":                {scalar(0, func(y float64) float64 { return y * y }, func(y float64) float64 { return 2 * y }), 1, 1, nil},
		"Jacobian's domain":   {model{func(_, dy []float64) bool { dy[0] = 1; return true }, func(y, j []float64) bool { j[0] = 0; return y[0] < 1.5 }}, 1, 0.5, ErrDomain},
	} {
		s, err, calls := begin(t, c.p, []float64{c.y0}, 1e-6, 1e-6), error(nil), 0
		for ; err == nil && s.To < 3 && calls < 20000; calls++ {
			err = s.Step(s.To + 0.25)
		}
		if err == nil || c.want != nil && !errors.Is(err, c.want) || errors.Is(err, ErrInput) {
			t.Errorf("%s: %v at %v", name, err, s.To)
		}
		if name == "Jacobian's domain" || name == "NaN in the Jacobian" {
			// seen at the next accepted step only
			if s.To < c.stop {
				t.Errorf("%s: stopped at %v", name, s.To)
			}
		} else if math.Abs(s.To-c.stop) > 1e-5 {
			t.Errorf("%s: stopped at %v, want %v", name, s.To, c.stop)
		}
		if s.Evaluations > 20000 {
			t.Errorf("%s: %d evaluations", name, s.Evaluations)
		}
		y := s.Y1[0]
		if again := s.Step(9); again == nil || s.Y1[0] != y {
			t.Errorf("%s: another step %v", name, again)
		}
	}
}

// Nothing but the start itself is within the domain: the step is halved a limited number of times, also at t = 0, where every
// step lies above the last digits of time.
func TestHopelessStart(t *testing.T) {
	p := model{
		func(y, dy []float64) bool { dy[0] = 1; return y[0] == 0 },
		func(_, j []float64) bool { j[0] = 0; return true },
	}
	s := begin(t, p, []float64{0}, 1e-6, 1e-6)
	if err := s.Step(1); !errors.Is(err, ErrDomain) || s.To != 0 || s.Evaluations > 200 {
		t.Errorf("%v at %v after %d evaluations", err, s.To, s.Evaluations)
	}
}

// The rates at the end of a step are not those of a stage: a step that ends outside the domain is made again.
func TestEndOutsideDomain(t *testing.T) {
	calls := 0
	p := model{
		func(y, dy []float64) bool { calls++; dy[0] = -y[0]; return calls != 1+stages },
		func(_, j []float64) bool { j[0] = -1; return true },
	}
	s := NewStiff(1)
	if err := s.Start(p, []float64{1}, 1e-2, 1e-3, []float64{1e-3}); err != nil {
		t.Fatal(err)
	}
	if err := s.Step(1); err != nil || s.Rejected != 1 || s.To != 0.5e-2 || s.Evaluations != 1+2*stages || calls != s.Evaluations {
		t.Errorf("%v, %d in vain, to %v, %d evaluations of %d calls", err, s.Rejected, s.To, s.Evaluations, calls)
	}
}

// The second derivative of e^(k·t) is beyond the largest double.
func TestFirstStepOfLargeRates(t *testing.T) {
	p := scalar(0, func(y float64) float64 { return 1e200 * y }, func(float64) float64 { return 1e200 })
	s := begin(t, p, []float64{1}, 1e-6, 1e-6)
	goOn(t, s, 1e-200)
	if math.Abs(s.Y1[0]/math.E-1) > 1e-5 {
		t.Errorf("%v, want e", s.Y1[0])
	}
}

func TestNoMemoryOfFormerRuns(t *testing.T) {
	first := func(s *Stiff) (v [8]float64) {
		if err := s.Start(resonance(0.1, 1, 1), []float64{0, 0}, 0.1, 1e-5, []float64{1e-5, 1e-5}); err != nil {
			t.Fatal(err)
		}
		if s.Dense(0) != (Polynomial{}) || s.Dense(1) != (Polynomial{}) {
			t.Error("a step of the former run is left")
		}
		goOn(t, s, 20)
		p := s.Dense(1)
		return [8]float64{s.Y1[0], s.Y1[1], s.From, p[2], p[3], float64(s.Accepted), float64(s.Rejected), float64(s.Evaluations)}
	}
	s := NewStiff(2)
	fresh := first(s)
	if again := first(s); again != fresh {
		t.Errorf("repeated: %v, want %v", again, fresh)
	}
	if err := s.Start(resonance(-1, 1e-9, 1e-9), []float64{1, 5}, 1e-10, 1e-9, []float64{1, 1e-9}); err != nil {
		t.Fatal(err)
	}
	for range 30 {
		if err := s.Step(1); err != nil {
			t.Fatal(err)
		}
	}
	if again := first(s); again != fresh {
		t.Errorf("after another run: %v, want %v", again, fresh)
	}
	narrow := model{
		func(y, dy []float64) bool { dy[0], dy[1] = 1, 1; return y[0] < 0.5 },
		func(_, j []float64) bool { clear(j); return true },
	}
	if err := s.Start(narrow, []float64{0, 0}, 0, 1e-9, []float64{1, 1}); err != nil {
		t.Fatal(err)
	}
	var err error
	for k := 0; err == nil && k < 1000; k++ {
		err = s.Step(1)
	}
	if !errors.Is(err, ErrDomain) {
		t.Errorf("end of the domain: %v", err)
	}
	if again := first(s); again != fresh {
		t.Errorf("after a failure: %v, want %v", again, fresh)
	}
}

// In other units of the states and of time, powers of 2, every figure is the same to the last bit.
func TestUnitsCancel(t *testing.T) {
	run := func(time, volt, ampere float64) (v [5]float64) {
		p := resonance(0.1, 1, 1)
		scaled := model{
			func(y, dy []float64) bool {
				p.rates([]float64{y[0] / volt, y[1] / ampere}, dy)
				dy[0], dy[1] = dy[0]*volt/time, dy[1]*ampere/time
				return true
			},
			func(y, j []float64) bool {
				p.jacobian(y, j)
				j[0], j[1], j[2], j[3] = j[0]/time, j[1]*volt/ampere/time, j[2]*ampere/volt/time, j[3]/time
				return true
			},
		}
		s := begin(t, scaled, []float64{0.5 * volt, 3 * ampere}, 1e-4, 1e-4*volt, 1e-4*ampere)
		goOn(t, s, 4096*time) // to steps so long that pivots leave the diagonal
		return [5]float64{s.Y1[0] / volt, s.Y1[1] / ampere, s.From / time, float64(s.Accepted), float64(s.Rejected)}
	}
	want := run(1, 1, 1)
	for _, c := range [][3]float64{{1, 0x1p40, 1}, {1, 1, 0x1p-60}, {0x1p-30, 1, 1}, {0x1p-33, 0x1p20, 0x1p-35}} {
		if got := run(c[0], c[1], c[2]); got != want {
			t.Errorf("units %v: %v, want %v", c, got, want)
		}
	}
}

func TestNoAllocation(t *testing.T) {
	s := NewStiff(12)
	var p Problem = newDense12()
	y, a := make([]float64, 12), make([]float64, 12)
	for i := range y {
		y[i], a[i] = 1, 1e-6
	}
	sum := 0.0
	allocations := testing.AllocsPerRun(20, func() {
		if err := s.Start(p, y, 0, 1e-6, a); err != nil {
			t.Fatal(err)
		}
		for s.To < 1 {
			if err := s.Step(1); err != nil {
				t.Fatal(err)
			}
			total := Polynomial{}
			for i := range 12 {
				total = total.Plus(s.Dense(i).Scaled(0.5))
			}
			low, high := total.Extremes()
			theta, _ := total.Crossing((low.Value+high.Value)/2, 0, 1, -1)
			sum += low.Value + high.Value + theta
		}
	})
	if allocations != 0 || sum != sum || s.Accepted < 5 {
		t.Errorf("%v allocations in %d steps", allocations, s.Accepted)
	}
}
