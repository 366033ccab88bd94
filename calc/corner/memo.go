package corner

import (
	"math"
	"slices"
)

// memoSlots bounds the number of results that models keep.
const memoSlots = 32

// cell tells whether a result stands at a draw, and what its evaluation read.
type cell struct {
	valid bool
	trace Trace
}

// entry is a result with what it was made of: the numbers of all inputs that its evaluation read.
type entry struct {
	value  any
	trace  *Trace
	values []float64
}

// signature is a set of inputs that evaluations of a slot have read, with the results by the hash of their numbers.
type signature struct {
	ids     []int
	used    Bits
	entries map[uint64]*entry
}

// memory keeps results across the draws of a space. An evaluation depends on the numbers it reads and on nothing else, so that a draw which
// agrees in all of them has the same result.
type memory struct {
	slots [memoSlots][]*signature
	known []*memory // of twins, which nobody changes any more
	of    *Draw     // whose results alone are kept; nil: those of every draw
}

func (g *signature) hash(d *Draw) uint64 {
	h := uint64(14695981039346656037)
	for _, id := range g.ids {
		h = (h ^ math.Float64bits(d.get(id))) * 1099511628211
		h ^= h >> 29
	}
	return h
}

// find gives the kept result for the numbers of a draw.
func (m *memory) find(slot int, d *Draw) *entry {
	for _, o := range m.known {
		if e := o.find(slot, d); e != nil {
			return e
		}
	}
	for _, g := range m.slots[slot] {
		if len(g.entries) == 0 {
			continue
		}
		e := g.entries[g.hash(d)]
		if e == nil {
			continue
		}
		same := true
		for i, id := range g.ids {
			if math.Float64bits(e.values[i]) != math.Float64bits(d.get(id)) {
				same = false
				break
			}
		}
		if same {
			return e
		}
	}
	return nil
}

// forget drops all results.
func (m *memory) forget() {
	for _, slot := range m.slots {
		for _, g := range slot {
			clear(g.entries)
		}
	}
}

// keep stores a result under the inputs that its evaluation read.
func (m *memory) keep(slot int, d *Draw, e *entry) {
	var g *signature
	for _, o := range m.slots[slot] {
		if slices.Equal(o.used, e.trace.used) {
			g = o
		}
	}
	if g == nil {
		g = &signature{used: slices.Clone(e.trace.used), entries: map[uint64]*entry{}}
		g.used.each(func(id int) { g.ids = append(g.ids, id) })
		m.slots[slot] = append(m.slots[slot], g)
	}
	e.values = make([]float64, len(g.ids))
	for i, id := range g.ids {
		e.values[i] = d.get(id)
	}
	g.entries[g.hash(d)] = e
}

// Memo returns f's value at a draw, evaluated once per draw into the place given; what f reads counts as read by every caller. A shared
// result is also looked for among those of other draws with the same numbers of all that f reads.
func Memo[T any](d *Draw, slot int, shared bool, at *T, f func() T) *T {
	c := d.memo[slot]
	if c == nil {
		c = &cell{trace: d.Space.newTrace()}
		d.memo[slot] = c
	}
	if !c.valid {
		var e *entry
		if shared {
			e = d.Space.memory.find(slot, d)
		}
		if e != nil {
			*at = e.value.(T)
			c.trace.copy(e.trace)
		} else {
			c.trace.reset()
			*at = under(d, &c.trace, f)
			if m := d.Space.memory; shared && (m.of == nil || m.of == d) {
				m.keep(slot, d, &entry{value: *at, trace: c.trace.clone()})
			}
		}
		c.valid = true
	}
	d.current().Add(&c.trace)
	return at
}

// under runs f with what it reads at a draw noted in a trace, whatever becomes of f.
func under[T any](d *Draw, t *Trace, f func() T) T {
	d.stack = append(d.stack, t)
	defer func() { d.stack = d.stack[:len(d.stack)-1] }()
	return f()
}
