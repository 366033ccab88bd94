package corner

import (
	"math"
	"math/bits"
	"slices"

	"floatrail/calc/stage"
)

// Bits is a set of input IDs.
type Bits []uint64

func newBits(n int) Bits { return make(Bits, (n+63)/64) }

func (b Bits) set(i int)      { b[i>>6] |= 1 << (i & 63) }
func (b Bits) clear(i int)    { b[i>>6] &^= 1 << (i & 63) }
func (b Bits) has(i int) bool { return b[i>>6]&(1<<(i&63)) != 0 }

// or adds all of o.
func (b Bits) or(o Bits) {
	for i := range o {
		b[i] |= o[i]
	}
}

// each calls f with every member in ascending order.
func (b Bits) each(f func(i int)) {
	for w, word := range b {
		for ; word != 0; word &= word - 1 {
			f(w<<6 + bits.TrailingZeros64(word))
		}
	}
}

// Trace is what a function read from a draw.
type Trace struct {
	used        Bits
	missing     Bits
	shown       Bits               // points of curves, read through the position of their curve
	assumptions []stage.Assumption // made while evaluating, beside those of inputs
	reasons     []string           // why the function cannot be evaluated
	wants       []string           // paths of missing components and lists
}

func newTrace(n int) Trace {
	k := (n + 63) / 64
	return traceIn(make(Bits, 3*k), k)
}

// traceIn makes an empty trace of sets of k words in memory that is clear.
func traceIn(b Bits, k int) Trace {
	return Trace{used: b[:k:k], missing: b[k : 2*k : 2*k], shown: b[2*k : 3*k : 3*k]}
}

// traceWords is the memory that a space takes for traces at once [words].
const traceWords = 4096

// newTrace makes a trace in memory of the space.
func (s *Space) newTrace() Trace {
	k := (len(s.inputs) + 63) / 64
	if len(s.words) < 3*k {
		s.words = make(Bits, max(traceWords, 3*k))
	}
	t := traceIn(s.words[:3*k:3*k], k)
	s.words = s.words[3*k:]
	return t
}

func (t *Trace) reset() {
	clear(t.used)
	clear(t.missing)
	clear(t.shown)
	t.assumptions, t.reasons, t.wants = t.assumptions[:0], t.reasons[:0], t.wants[:0]
}

// Add joins another trace to this one.
func (t *Trace) Add(o *Trace) {
	t.used.or(o.used)
	t.missing.or(o.missing)
	t.shown.or(o.shown)
	for _, a := range o.assumptions {
		if !slices.Contains(t.assumptions, a) {
			t.assumptions = append(t.assumptions, a)
		}
	}
	for _, r := range o.reasons {
		if !slices.Contains(t.reasons, r) {
			t.reasons = append(t.reasons, r)
		}
	}
	for _, w := range o.wants {
		if !slices.Contains(t.wants, w) {
			t.wants = append(t.wants, w)
		}
	}
}

// clone copies the trace.
func (t *Trace) clone() *Trace {
	out := newTrace(64 * len(t.used))
	out.Add(t)
	return &out
}

// copy makes the trace that of another.
func (t *Trace) copy(o *Trace) {
	t.reset()
	t.Add(o)
}

// Complete tells whether nothing was missing and no reason against evaluation was found.
func (t *Trace) Complete() bool {
	for _, w := range t.missing {
		if w != 0 {
			return false
		}
	}
	return len(t.reasons) == 0 && len(t.wants) == 0
}

// Draw is one number for every input of a stage at one set.
type Draw struct {
	Space *Space
	x     []float64 // by ID; shared with other draws where one input is moved
	moved int       // ID of the input that stands elsewhere than x says; 0: none
	to    float64   // where it stands
	trace Trace
	stack []*Trace         // traces of memoised parts under way
	memo  [memoSlots]*cell // nil: not asked for yet
	// Slot is free for what a model keeps with the draw.
	Slot any
}

// get is the number drawn for an input.
func (d *Draw) get(id int) float64 {
	if id == d.moved {
		return d.to
	}
	return d.x[id]
}

// numbers are all numbers of the draw, by ID; a copy.
func (d *Draw) numbers() []float64 {
	x := slices.Clone(d.x)
	x[d.moved] = d.get(d.moved)
	return x
}

// Need reads an input. Unknown: NaN, and the field is noted as missing.
func (d *Draw) Need(q *stage.Quantity) float64 {
	t := d.current()
	if q.Along > 0 {
		t.used.set(q.Along)
		t.shown.set(q.ID)
	} else {
		t.used.set(q.ID)
	}
	v := d.Value(q)
	if v != v {
		t.missing.set(q.ID)
	}
	return v
}

// Has reads an input that may be absent without noting it as missing.
func (d *Draw) Has(q *stage.Quantity) (float64, bool) {
	v := d.get(q.ID)
	if v != v {
		return v, false
	}
	d.current().used.set(q.ID)
	return v, true
}

// Want notes a missing component or list by its path.
func (d *Draw) Want(path string) float64 {
	t := d.current()
	if !slices.Contains(t.wants, path) {
		t.wants = append(t.wants, path)
	}
	return math.NaN()
}

// Open notes why the function cannot be evaluated at this draw.
func (d *Draw) Open(reason string) float64 {
	t := d.current()
	if !slices.Contains(t.reasons, reason) {
		t.reasons = append(t.reasons, reason)
	}
	return math.NaN()
}

// Assume notes an assumption that the evaluation makes.
func (d *Draw) Assume(a stage.Assumption) {
	t := d.current()
	if !slices.Contains(t.assumptions, a) {
		t.assumptions = append(t.assumptions, a)
	}
}

func (d *Draw) current() *Trace {
	if n := len(d.stack); n > 0 {
		return d.stack[n-1]
	}
	return &d.trace
}

// Value is the number drawn for an input, without noting it as read. A point of a curve lies where the curve's position says.
func (d *Draw) Value(q *stage.Quantity) float64 {
	if q.Along == 0 {
		return d.get(q.ID)
	}
	position := d.get(q.Along)
	r := d.Space.Range(q)
	if position >= 0 {
		return r.Typ + position*(r.Max-r.Typ)
	}
	return r.Typ + position*(r.Typ-r.Min)
}
