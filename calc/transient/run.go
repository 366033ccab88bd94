package transient

import (
	"fmt"
	"math"

	"floatrail/calc/internal/numeric"
)

// Window is how an event is watched.
type Window struct {
	Limit       float64     // latest end [s]
	Whole       bool        // go on to Limit, also after the event has settled
	Tolerance   float64     // relative tolerance of the integrator; 0: DefaultTolerance [1]
	Levels      []float64   // voltages for which the times below are wanted [V]
	Waveforms   []Signal    // wanted
	Interrupted func() bool // polled now and then; true ends the run with ErrInterrupted. May be nil
}

// DefaultTolerance is the relative tolerance of a simulation, at which its peaks are within 0.5 % of the solution. [1]
const DefaultTolerance = 5e-4

const (
	mostSteps = 50000 // of a run
	pollEvery = 16    // steps
)

// Simulator simulates events. The zero value is ready; its memory is used again by every run, a result depends on its own run alone. Not for
// two goroutines at once.
type Simulator struct {
	circuit         circuit
	stiff           [most + 1]*numeric.Stiff // by the number of states
	y0, atol, sizes [most]float64
	rtol, bus       float64
	span            span
	watch           watch
	calm            calm
	spans           []span // for the waveforms
	points          points
	seen            func(*span) // tests look on
}

// Run simulates the event. Errors: ErrOutside with what is missing or does not fit, ErrUnsolved, ErrInterrupted.
func (s *Simulator) Run(b *Bridge, w Window) (*Course, error) {
	if err := b.check(); err != nil {
		return nil, err
	}
	if !(w.Limit > 0) || math.IsInf(w.Limit, 1) {
		return nil, outside("the window of %g s has no end", w.Limit)
	}
	rtol := w.Tolerance
	if rtol == 0 {
		rtol = DefaultTolerance
	}
	c := &s.circuit
	c.prepare(b)
	y := s.y0[:c.n]
	if err := c.start(b, y); err != nil {
		return nil, err
	}
	s.bus, s.rtol = b.Bus, rtol
	s.setSizes(b)
	s.tolerate(y, rtol, s.atol[:c.n])
	if s.stiff[c.n] == nil {
		s.stiff[c.n] = numeric.NewStiff(c.n)
	}
	stiff := s.stiff[c.n]
	if err := stiff.Start(c, y, 0, 0, s.atol[:c.n]); err != nil {
		return nil, fmt.Errorf("%w: %w", ErrUnsolved, err)
	}
	course := &Course{}
	s.spans = s.spans[:0]
	s.watch.begin(b, c, course, y, w.Levels)
	s.calm.begin(b, c, course.Ranges[Node].Min)
	if err := s.march(stiff, &w, course); err != nil {
		return nil, err
	}
	at := &s.span
	course.End = at.at(1)
	at.states(1, s.watch.y[:])
	s.watch.end(s.watch.y[:])
	course.Steps, course.Rejected, course.Evaluations = stiff.Accepted, stiff.Rejected, stiff.Evaluations
	for _, signal := range w.Waveforms {
		if signal < 0 || signal >= signals {
			return nil, outside("there is no waveform %d", signal)
		}
		course.Waveforms = append(course.Waveforms, s.waveform(signal))
	}
	return course, nil
}

// march steps to the end of the window.
func (s *Simulator) march(stiff *numeric.Stiff, w *Window, course *Course) error {
	at := &s.span
	at.n = s.circuit.n
	for stiff.To < w.Limit && (w.Whole || !course.Settled) {
		if w.Interrupted != nil && stiff.Accepted%pollEvery == 0 && w.Interrupted() {
			return ErrInterrupted
		}
		s.tolerate(stiff.Y1, s.rtol, stiff.Tolerances())
		if err := stiff.Step(w.Limit); err != nil {
			return fmt.Errorf("%w %.4g s after the command: %w", ErrUnsolved, stiff.To, err)
		}
		if stiff.Accepted > mostSteps {
			return fmt.Errorf("%w: more than %d steps in %.4g s, it keeps oscillating", ErrUnsolved, mostSteps, stiff.To)
		}
		at.from, at.length = stiff.From, stiff.To-stiff.From
		for i := range at.n {
			at.state[i] = stiff.Dense(i)
		}
		node := s.circuit.node.of(&at.state)
		s.watch.pieces[Node].set(&node)
		if theta, ok := s.calm.over(at, &s.watch.pieces[Node]); ok {
			course.Settled = true
			if theta < 1 && !w.Whole {
				at.cut(theta)
				node = s.circuit.node.of(&at.state)
				s.watch.pieces[Node].set(&node)
			}
		}
		s.watch.update(at)
		if len(w.Waveforms) > 0 {
			s.spans = append(s.spans, *at)
		}
		if s.seen != nil {
			s.seen(at)
		}
	}
	return nil
}

// setSizes puts the size of each state below which its own digits do not matter. For the pin that is 2 V: the undershoot is judged by the volt,
// not by the bus.
func (s *Simulator) setSizes(b *Bridge) {
	const bus, pin, gain, small = 0.1, 2.0, 0.01, 0.01 // of V_BUS; [V]; [V]; of the current that V_BUS makes ring
	c, a := &s.circuit, &s.sizes
	capacitance := math.Max(b.High.Output.At(b.Bus), b.Low.Output.At(b.Bus))
	current := math.Max(math.Abs(b.Load), small*b.Bus*math.Sqrt(capacitance/(b.L1+b.L2)))
	drive := math.Max(math.Max(math.Abs(b.Floating), math.Abs(b.LowDrive)), 1)
	a[stateI1], a[stateI2] = current, current
	a[stateVd1], a[stateVd2], a[statePin] = bus*b.Bus, bus*b.Bus, math.Min(bus*b.Bus, pin)
	a[stateVg1], a[stateVg2] = drive, drive
	a[stateGain] = gain
	for _, d := range [2]*device{&c.high, &c.low} {
		if d.charge >= 0 {
			a[d.charge] = current * math.Min(d.reverse.lifetime, d.reverse.transit)
		}
		if d.inductance >= 0 {
			a[d.inductance] = current
		}
	}
}

// tolerate puts the tolerances at the states y: rtol of what is left of each state, beyond its size. While the node is low,
// the high side's voltage counts by what it lacks to V_BUS: what is wrong with it is wrong with the undershoot.
func (s *Simulator) tolerate(y []float64, rtol float64, atol []float64) {
	for i, v := range y {
		v = math.Abs(v)
		if i == stateVd1 {
			v = math.Min(v, math.Abs(s.bus-v))
		}
		atol[i] = rtol * (s.sizes[i] + v)
	}
	// While a diode or an ohmic channel conducts, a step sees it as a line, along which a current that is missing is no more than a voltage of
	// i·n·V_T/i_D or i·R_on: without a tolerance of that size the end of the diode's charge, or of the channel, would be stepped over.
	const knee = 100
	for _, d := range [2]*device{&s.circuit.high, &s.circuit.low} {
		vd, sat := y[d.drain], d.gfs*(y[d.gate]-d.threshold)
		if vd < 0 {
			atol[d.drain] = math.Min(atol[d.drain], knee*rtol*d.reverse.slope)
		} else if !d.diode && sat > 0 && vd < d.onResistance*sat {
			atol[d.drain] = math.Min(atol[d.drain], knee*rtol*d.onResistance*s.sizes[stateI1])
		}
	}
}
