package corner

import (
	"math"
	"slices"
)

// memoSlots bounds the number of results that models keep.
const memoSlots = 8

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
type memory [memoSlots][]*signature

func (g *signature) hash(x []float64) uint64 {
	h := uint64(14695981039346656037)
	for _, id := range g.ids {
		h = (h ^ math.Float64bits(x[id])) * 1099511628211
		h ^= h >> 29
	}
	return h
}

// find gives the kept result for the numbers of a draw.
func (m *memory) find(slot int, x []float64) *entry {
	for _, g := range m[slot] {
		e := g.entries[g.hash(x)]
		if e == nil {
			continue
		}
		same := true
		for i, id := range g.ids {
			if math.Float64bits(e.values[i]) != math.Float64bits(x[id]) {
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

// keep stores a result under the inputs that its evaluation read.
func (m *memory) keep(slot int, x []float64, e *entry) {
	var g *signature
	for _, o := range m[slot] {
		if slices.Equal(o.used, e.trace.used) {
			g = o
		}
	}
	if g == nil {
		g = &signature{used: slices.Clone(e.trace.used), entries: map[uint64]*entry{}}
		g.used.each(func(id int) { g.ids = append(g.ids, id) })
		m[slot] = append(m[slot], g)
	}
	e.values = make([]float64, len(g.ids))
	for i, id := range g.ids {
		e.values[i] = x[id]
	}
	g.entries[g.hash(x)] = e
}

// Memo returns f's value at a draw, evaluated once for the numbers that f reads; what f reads counts as read by every caller.
func Memo[T any](d *Draw, slot int, f func() T) T {
	e := d.memo[slot]
	if e == nil {
		e = d.Space.memory.find(slot, d.x)
	}
	if e == nil {
		t := newTrace(len(d.x))
		d.stack = append(d.stack, &t)
		v := f()
		d.stack = d.stack[:len(d.stack)-1]
		e = &entry{value: v, trace: &t}
		d.Space.memory.keep(slot, d.x, e)
	}
	d.memo[slot] = e
	d.current().Add(e.trace)
	return e.value.(T)
}
