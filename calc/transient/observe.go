package transient

import (
	"math"

	"floatrail/calc/internal/numeric"
)

const (
	lowLevel, highLevel = 0.1, 0.9 // of V_BUS or of |I|, ends of a passage [1]
	leastRing           = 0.002    // of V_BUS: a smaller ringing is none [1]
	leastTurn           = 0.001    // of V_BUS: where a signal comes back by less it has not turned [1]
)

// span is one step, or the part of it that belongs to the window, with the states over it.
type span struct {
	from, length float64 // [s]
	state        [most]numeric.Polynomial
	n            int
}

func (s *span) at(theta float64) float64 { return s.from + theta*s.length }

// cut leaves the part of the span from 0 to theta.
func (s *span) cut(theta float64) {
	for i := range s.n {
		k := 1.0
		for m := range s.state[i] {
			s.state[i][m] *= k
			k *= theta
		}
	}
	s.length *= theta
}

func (s *span) states(theta float64, y []float64) {
	for i := range s.n {
		y[i] = s.state[i].At(theta)
	}
}

// piece is a signal on a span. What surely contains its values decides whether it is looked at more closely: then it is divided where it
// turns, so that it is monotone between neighbouring points.
type piece struct {
	p           numeric.Polynomial
	least, most float64 // the values lie between them
	divided     bool

	theta [4]float64
	value [4]float64
	n     int // points, first at 0, last at 1
	low   int // of the lowest and of the highest point
	high  int
}

// set takes the polynomial over. A polynomial lies between its Bernstein coefficients over [0, 1].
func (s *piece) set(p *numeric.Polynomial) {
	s.p, s.divided = *p, false
	low, high := p[0], p[0]
	for _, b := range [3]float64{p[0] + p[1]/3, p[0] + (2*p[1]+p[2])/3, p[0] + p[1] + p[2] + p[3]} {
		if b < low {
			low = b
		}
		if b > high {
			high = b
		}
	}
	s.least, s.most = low, high
}

// divide finds where the signal turns.
func (s *piece) divide() {
	if s.divided {
		return
	}
	s.divided = true
	at, n := s.p.Stationary()
	s.n, s.low, s.high = n+2, 0, 0
	s.theta[0], s.value[0] = 0, s.p[0]
	for k := 1; k < s.n; k++ {
		theta := 1.0
		if k <= n {
			theta = at[k-1]
		}
		v := s.p.At(theta)
		s.theta[k], s.value[k] = theta, v
		if v < s.value[s.low] {
			s.low = k
		}
		if v > s.value[s.high] {
			s.high = k
		}
	}
}

// spans tells whether the signal is on both sides of the level; then it is divided.
func (s *piece) spans(level float64) bool {
	if s.least > level || s.most <= level {
		return false
	}
	s.divide()
	return s.value[s.low] <= level && s.value[s.high] > level
}

// cross returns where the signal passes the level between points k-1 and k, and the direction: +1 from at or below to above it, -1 back,
// 0 not at all.
func (s *piece) cross(k int, level float64) (theta float64, way int) {
	left, right := s.value[k-1] > level, s.value[k] > level
	switch {
	case left == right:
		return 0, 0
	case right:
		way = 1
	default:
		way = -1
	}
	if theta, ok := s.p.Crossing(level, s.theta[k-1], s.theta[k], way); ok {
		return theta, way
	}
	return s.theta[k], way // it leaves the level just there
}

func (r *Range) update(at *span, s *piece) {
	if s.least >= r.Min && s.most <= r.Max {
		return
	}
	s.divide()
	if v := s.value[s.low]; v < r.Min {
		r.Min, r.MinTime = v, at.at(s.theta[s.low])
	}
	if v := s.value[s.high]; v > r.Max {
		r.Max, r.MaxTime = v, at.at(s.theta[s.high])
	}
}

// mostDips is the number of dips whose lengths are kept.
const mostDips = 16

// below is a level under watch.
type below struct {
	Dips
	list   bool // keep the length of each dip
	inside bool
	since  float64
}

func (b *below) begin(level, value float64) {
	*b = below{Dips: Dips{Level: level}, inside: value <= level}
}

func (b *below) close(t float64) {
	b.Count++
	b.Total += t - b.since
	if b.list && len(b.Each) < mostDips {
		b.Each = append(b.Each, t-b.since)
	}
	if t-b.since > b.Longest {
		b.Longest, b.Start = t-b.since, b.since
	}
	b.inside = false
}

func (b *below) update(at *span, s *piece) {
	if !s.spans(b.Level) {
		return
	}
	for k := 1; k < s.n; k++ {
		switch theta, way := s.cross(k, b.Level); {
		case way < 0:
			b.inside, b.since = true, at.at(theta)
		case way > 0 && b.inside:
			b.close(at.at(theta))
		}
	}
}

// passage is the time from the last passage of a first level to the first passage of a second one, in the direction from one to the other.
type passage struct {
	first, second float64
	begin, end    float64
	begun, done   bool
}

func newPassage(low, high float64, falls bool) passage {
	if falls {
		return passage{first: high, second: low}
	}
	return passage{first: low, second: high}
}

// see takes in that the level was passed at t. What lies between the passages of one span must come in order.
func (p *passage) see(second bool, way int, t float64) {
	switch {
	case p.done:
	case !second:
		p.begin, p.begun = t, true
	case (way > 0) == (p.second > p.first):
		p.end, p.done = t, true
	}
}

func (p *passage) slope() float64 {
	if !p.done || !p.begun || !(p.end > p.begin) {
		return 0
	}
	return math.Abs(p.second-p.first) / (p.end - p.begin)
}

func (p *passage) update(at *span, s *piece) {
	if p.done || !s.spans(p.first) && !s.spans(p.second) {
		return
	}
	for k := 1; k < s.n; k++ {
		a, wayA := s.cross(k, p.first)
		b, wayB := s.cross(k, p.second)
		if wayB != 0 && (wayA == 0 || b < a) {
			p.see(true, wayB, at.at(b))
			wayB = 0
		}
		if wayA != 0 {
			p.see(false, wayA, at.at(a))
		}
		if wayB != 0 {
			p.see(true, wayB, at.at(b))
		}
	}
}

// ringing is the highest maximum of a signal, the minimum after it and the maximum after that one. Where the signal comes
// back by no more than a ripple it has not turned.
type ringing struct {
	least     float64 // e2 - e1 of a ringing [V]
	ripple    float64 // [V]
	t, v      [3]float64
	found     int // 1: a maximum, 2: and a minimum, 3: both maxima
	direction int // of the signal since its last turn
	turnT     float64
	turnV     float64 // the extreme since then
	begun     bool
}

func (r *ringing) update(at *span, s *piece) {
	if r.found == 3 && s.most <= r.v[0] {
		return
	}
	s.divide()
	if !r.begun {
		r.begun, r.turnV, r.turnT, r.direction = true, s.value[0], at.from, 1
	}
	for k := 1; k < s.n; k++ {
		v, d := s.value[k], float64(r.direction)
		switch {
		case d*(v-r.turnV) >= 0:
			r.turnV, r.turnT = v, at.at(s.theta[k])
		case d*(r.turnV-v) > r.ripple:
			r.turn()
			r.direction = -r.direction
			r.turnV, r.turnT = v, at.at(s.theta[k])
		}
	}
}

func (r *ringing) turn() {
	switch {
	case r.direction > 0 && (r.found == 0 || r.turnV > r.v[0]):
		r.t[0], r.v[0], r.found = r.turnT, r.turnV, 1
	case r.direction < 0 && r.found == 1:
		r.t[1], r.v[1], r.found = r.turnT, r.turnV, 2
	case r.direction > 0 && r.found == 2:
		r.t[2], r.v[2], r.found = r.turnT, r.turnV, 3
	}
}

// result returns frequency [Hz] and damping [1], eq. (30), zero where the signal does not ring.
func (r *ringing) result() (frequency, damping float64) {
	if r.direction > 0 && r.found > 0 && r.turnV > r.v[0] {
		return 0, 0 // it still rises above what was its maximum
	}
	if r.found < 3 || !(r.v[2]-r.v[1] >= r.least) || !(r.v[0]-r.v[1] > r.v[2]-r.v[1]) {
		return 0, 0
	}
	x := math.Log((r.v[0] - r.v[1]) / (r.v[2] - r.v[1]))
	return 1 / (r.t[2] - r.t[0]), x / math.Hypot(math.Pi, x)
}
