package numeric

import (
	"errors"
	"math"
)

// Problem is an autonomous initial value problem y' = f(y).
type Problem interface {
	// Rates puts f(y) into dy. False: y lies outside the domain of the model.
	Rates(y, dy []float64) bool
	// Jacobian puts ∂f_i/∂y_k into j[i*n+k], all of them. False: outside the domain.
	Jacobian(y, j []float64) bool
}

// What ends an integration.
var (
	ErrInput    = errors.New("numeric: sizes, states, tolerances or times that cannot be integrated with")
	ErrDomain   = errors.New("numeric: the solution leaves the domain of the model")
	ErrStep     = errors.New("numeric: the step size falls below the last digits of time")
	ErrNumber   = errors.New("numeric: a rate or a state is no finite number")
	ErrSingular = errors.New("numeric: the matrix of the step is singular")
)

// Stiff integrates a Problem step by step. All memory is made by NewStiff. One Jacobian and one factorisation a step, no
// iteration; the method is the Rosenbrock-Wanner method RODAS of table.
//
// The error of a step is the largest component of |error estimate|/(atol + rtol·max(|y0|, |y1|)), not the mean square: states
// at rest beside one that rings must not loosen the tolerance of that one. A state's unit cancels everywhere, in the choice of
// pivots too. A kink of the rates costs shorter steps, no accuracy; what happens in a range of states so narrow that no stage
// falls into it is not seen.
type Stiff struct {
	From, To float64   // ends of the last accepted step [s]
	Y0, Y1   []float64 // states there; the same memory from step to step

	Accepted, Rejected, Evaluations int // steps, tries that were given up, calls of Rates; since Start

	n       int
	problem Problem
	rtol    float64
	atol    []float64
	rates   []float64 // f at Y1
	j, w    []float64 // Jacobian at Y1; factors of the step's matrix
	hasJ    bool
	pivot   []int
	scale   []float64 // 1/(atol + rtol·|y|) at Y1
	rows    []float64 // scale in the order of the pivots
	u       []float64 // increments of the stages, stage by stage
	y, dy   []float64 // argument and rates of a stage
	next    float64   // step size to try [s], 0: not chosen yet
	errOld  float64   // error of the last step that the controller saw, 0: none
}

const (
	safety     = 0.9
	leastRatio = 0.2 // of a step size to the one before
	mostRatio  = 6.0
	mostTries  = 120 // halvings beyond any span of times
)

// NewStiff makes an integrator for n states.
func NewStiff(n int) *Stiff {
	memory := make([]float64, (8+stages)*n+2*n*n)
	take := func(k int) []float64 {
		part := memory[:k:k]
		memory = memory[k:]
		return part
	}
	s := &Stiff{n: n, pivot: make([]int, n)}
	s.Y0, s.Y1, s.atol, s.rates, s.scale, s.rows, s.y, s.dy = take(n), take(n), take(n), take(n), take(n), take(n), take(n), take(n)
	s.u, s.j, s.w = take(stages*n), take(n*n), take(n*n)
	return s
}

// Start begins at t = 0 at y0. step: first step size to try [s], 0: chosen from the rates. rtol: relative tolerance; atol:
// absolute one per state, in its unit. Errors: ErrInput, ErrDomain and ErrNumber for y0. Nothing of a former run is left.
func (s *Stiff) Start(p Problem, y0 []float64, step, rtol float64, atol []float64) error {
	s.problem = nil
	if p == nil || len(y0) != s.n || len(atol) != s.n || !(step >= 0) || math.IsInf(step, 1) || !(rtol >= 0 && rtol < 1) {
		return ErrInput
	}
	for _, a := range atol {
		if !(a > 0) || math.IsInf(a, 1) {
			return ErrInput
		}
	}
	s.From, s.To, s.Accepted, s.Rejected, s.Evaluations = 0, 0, 0, 0, 0
	s.rtol, s.next, s.errOld, s.hasJ = rtol, step, 0, false
	copy(s.atol, atol)
	copy(s.Y0, y0)
	copy(s.Y1, y0)
	clear(s.u)
	if !finite(y0) {
		return ErrNumber
	}
	s.Evaluations++
	if !p.Rates(s.Y1, s.rates) {
		return ErrDomain
	}
	if !finite(s.rates) {
		return ErrNumber
	}
	s.problem = p
	return nil
}

// Step makes one accepted step, not beyond end [s]. Errors: ErrDomain, ErrStep (step size below the last digits of time),
// ErrNumber (NaN or Inf), ErrSingular, all of them after the step has been shortened in vain; ErrInput without a good Start or
// where end does not lie beyond To. After an error From, To, Y0 and Y1 still stand at the last accepted step, Dense does not.
func (s *Stiff) Step(end float64) error {
	if s.problem == nil || !(end > s.To) || math.IsInf(end, 1) {
		return ErrInput
	}
	if err := s.prepare(end - s.To); err != nil {
		return err
	}
	cause, given := ErrStep, false
	for range mostTries {
		h, to := s.next, end
		last := s.To+h*(1+0x1p-40) >= end
		if !last {
			to = s.To + h
			if h < 0x1p-50*s.To {
				break
			}
		}
		h = to - s.To
		size, why := s.attempt(h)
		if why == nil && size <= 1 {
			why = s.arrive()
		}
		switch {
		case why != nil:
			cause = why
			s.next = h / 2
		case size <= 1:
			s.control(h, size, given, last)
			s.From, s.To, s.hasJ = s.To, to, false
			copy(s.Y0, s.Y1)
			copy(s.Y1, s.y)
			s.rates, s.dy = s.dy, s.rates
			s.Accepted++
			return nil
		default:
			cause = ErrStep
			s.next = h * math.Max(leastRatio, safety*math.Pow(size, -1.0/errorOrder))
		}
		given = true
		s.Rejected++
	}
	return cause
}

// prepare brings the Jacobian and the weights to Y1 and chooses a first step size no longer than span [s].
func (s *Stiff) prepare(span float64) error {
	if s.hasJ {
		return nil
	}
	if !s.problem.Jacobian(s.Y1, s.j) {
		return ErrDomain
	}
	if !finite(s.j) {
		return ErrNumber
	}
	for i, y := range s.Y1 {
		s.scale[i] = 1 / (s.atol[i] + s.rtol*math.Abs(y))
	}
	s.hasJ = true
	if s.next == 0 {
		s.next = s.first(span)
	}
	return nil
}

// first is the step size [s] at which the second-order term h²/2·y” of the solution, y” = J·f, has the size of the
// tolerance: short for the order of the method, which grows it within few steps.
func (s *Stiff) first(span float64) float64 {
	bend := 0.0
	for i := range s.n {
		sum := 0.0
		for k, r := range s.rates {
			sum += s.j[i*s.n+k] * r
		}
		bend = math.Max(bend, math.Abs(sum)*s.scale[i])
	}
	h := math.Min(span, math.Sqrt(2/bend))
	if !(h > 0) { // the product overflows
		h = 0x1p-40 * span
	}
	return h
}

// attempt makes one step of size h [s] from Y1 and leaves the new states in y, the increments in u. It returns the error of
// the step in units of the tolerance.
func (s *Stiff) attempt(h float64) (size float64, why error) {
	n := s.n
	for i, v := range s.j {
		s.w[i] = -v
	}
	for i := range n {
		s.w[i*n+i] += 1 / (gamma * h)
	}
	copy(s.rows, s.scale)
	if !factor(s.w, n, s.pivot, s.rows) {
		return 0, ErrSingular
	}
	for i := range stages {
		u := s.u[i*n : i*n+n]
		if i == 0 {
			copy(u, s.rates)
		} else {
			mix(s.y, u, s.Y1, s.u, table.a[i][:i], table.c[i][:i], 1/h)
			s.Evaluations++
			if !s.problem.Rates(s.y, s.dy) {
				return 0, ErrDomain
			}
			for k, r := range s.dy {
				u[k] += r
			}
		}
		substitute(s.w, n, s.pivot, u)
	}
	last := s.u[(stages-1)*n : stages*n]
	check := 0.0
	for i, e := range last {
		y := s.y[i] + e
		s.y[i] = y
		size = math.Max(size, math.Abs(e)/(s.atol[i]+s.rtol*math.Max(math.Abs(y), math.Abs(s.Y1[i]))))
		check += (y - y) + (e - e)
	}
	if check != 0 {
		return 0, ErrNumber
	}
	return size, nil
}

// arrive puts the rates at the new states y into dy.
func (s *Stiff) arrive() error {
	s.Evaluations++
	if !s.problem.Rates(s.y, s.dy) {
		return ErrDomain
	}
	if !finite(s.dy) {
		return ErrNumber
	}
	return nil
}

// control chooses the size of the step after one of size h with that error: the proportional and integral controller of
// Gustafsson, "Control theoretic techniques for stepsize selection in explicit Runge-Kutta methods", ACM Transactions on
// Mathematical Software 17(4), 1991, with an integral gain of 0.5/errorOrder and a proportional one of 0.3/errorOrder. His 0.3
// and 0.4, from memory, lag where a transient dies and the steps grow all the time, and gain nothing where it rings. No growth
// right after a try was given up. A step that end cut short says little: the size chosen before it stays.
func (s *Stiff) control(h, size float64, given, last bool) {
	size = math.Max(size, 1e-6)
	var ratio float64
	if s.errOld == 0 {
		ratio = safety * math.Pow(size, -1.0/errorOrder)
	} else {
		ratio = safety * math.Pow(size, -0.8/errorOrder) * math.Pow(s.errOld, 0.3/errorOrder)
	}
	ratio = math.Min(mostRatio, math.Max(leastRatio, ratio))
	if given {
		ratio = math.Min(ratio, 1)
	}
	if last && s.next > h {
		s.next = math.Max(s.next, h*ratio)
		return
	}
	s.next, s.errOld = h*ratio, math.Max(size, 0.01)
}

// Dense is state i over the last step as a polynomial in theta = (t-From)/(To-From), eq. (3): of order 3, its ends the states
// there. Valid until the next call of Step.
func (s *Stiff) Dense(i int) Polynomial {
	var d1, d2 float64
	for k := range stages {
		u := s.u[k*s.n+i]
		d1 += table.d[0][k] * u
		d2 += table.d[1][k] * u
	}
	return Polynomial{s.Y0[i], s.Y1[i] - s.Y0[i] + d1, d2 - d1, -d2}
}

func finite(v []float64) bool {
	check := 0.0
	for _, x := range v {
		check += x - x
	}
	return check == 0
}
