package corner_test

import (
	"math"
	"slices"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
)

// model is a function in two steps of which each may be kept with its draw.
type model struct {
	*bench
	sums, products int // evaluations
}

const (
	slotSum = iota
	slotAll
)

func (m *model) direct(d *corner.Draw) float64 {
	return (d.Need(m.a) + math.Sin(d.Need(m.b))) * d.Need(m.bus) * (1 - d.Need(m.c)/20)
}

// kept is the same number by results kept with the draw.
func (m *model) kept(d *corner.Draw, shared bool) float64 {
	type place struct{ sum, all float64 }
	p, ok := d.Slot.(*place)
	if !ok {
		p = &place{}
		d.Slot = p
	}
	return *corner.Memo(d, slotAll, shared, &p.all, func() float64 {
		m.products++
		s := *corner.Memo(d, slotSum, shared, &p.sum, func() float64 {
			m.sums++
			return d.Need(m.a) + math.Sin(d.Need(m.b))
		})
		return s * d.Need(m.bus) * (1 - d.Need(m.c)/20)
	})
}

// Results that are kept or shared are those that would be computed.
func TestMemoChangesNothing(t *testing.T) {
	m := &model{bench: newBench(nil)}
	run := func(f corner.Function) corner.Worst {
		sp := m.space(room)
		w := sp.Search(f)
		sp.Polish(&w, f)
		return w
	}
	plain := run(m.direct)
	for _, shared := range []bool{false, true} {
		w := run(func(d *corner.Draw) float64 { return m.kept(d, shared) })
		if w.Value != plain.Value || w.Typical != plain.Typical {
			t.Errorf("shared %v: %v from %v, want %v from %v", shared, w.Value, w.Typical, plain.Value, plain.Typical)
		}
		if got, want := fields(m.space(room).Inputs(w.Trace)), fields(m.space(room).Inputs(plain.Trace)); !slices.Equal(got, want) {
			t.Errorf("shared %v: read %v, want %v", shared, got, want)
		}
		if !slices.Equal(w.Swings, plain.Swings) {
			t.Errorf("shared %v: swings %v, want %v", shared, w.Swings, plain.Swings)
		}
	}
}

// A result is evaluated once a draw; a shared one once for equal numbers of what it read, also in spaces with other ranges.
func TestMemoCounts(t *testing.T) {
	for _, shared := range []bool{false, true} {
		m := &model{bench: newBench(nil)}
		sp := m.space(room)
		eval := func(sp *corner.Space, changes ...corner.Change) {
			t.Helper()
			d := sp.With(sp.Typical(), changes...)
			v, _ := corner.Evaluate(d, func(d *corner.Draw) float64 { return m.kept(d, shared) + m.kept(d, shared) })
			if want := 2 * m.direct(d); v != want {
				t.Errorf("shared %v: %g, want %g", shared, v, want)
			}
		}
		counts := func(what string, own, sharedSums, sharedProducts int) {
			t.Helper()
			sums, products := own, own
			if shared {
				sums, products = sharedSums, sharedProducts
			}
			if m.sums != sums || m.products != products {
				t.Errorf("%s, shared %v: %d sums, %d products; want %d, %d", what, shared, m.sums, m.products, sums, products)
			}
		}
		eval(sp)
		counts("first draw", 1, 1, 1)
		eval(sp)
		counts("equal draw", 2, 1, 1)
		eval(sp, corner.Change{ID: m.hot.ID, Value: 3})
		counts("moved beside it", 3, 1, 1)
		eval(sp, corner.Change{ID: m.bus.ID, Value: 7})
		counts("moved in the second step", 4, 1, 2)
		eval(sp, corner.Change{ID: m.a.ID, Value: 3})
		counts("moved in the first step", 5, 2, 3)
		eval(sp.Replace(corner.Replacement{ID: m.a.ID, Triple: stage.Triple{Min: 0, Typ: 2, Max: 9}}))
		counts("other ranges, same numbers", 6, 2, 3)
		eval(m.space(room))
		counts("another space", 7, 3, 4)
	}
}

// What a kept result read, missed or assumed counts for everyone who uses it.
func TestMemoTrace(t *testing.T) {
	assumed := stage.Assumption{Field: "stage.x", Assumed: "1", Direction: stage.Optimistic, Reason: "r"}
	for _, shared := range []bool{false, true} {
		b := newBench(nil)
		sp := b.space(room)
		f := func(d *corner.Draw) float64 {
			var at float64
			return *corner.Memo(d, 0, shared, &at, func() float64 {
				d.Assume(assumed)
				return d.Need(b.absent) + d.Need(b.low) + d.Want("stage.list") + d.Open("why")
			})
		}
		for i, d := range []*corner.Draw{sp.Typical(), sp.Typical(), sp.With(sp.Typical())} {
			_, tr := corner.Evaluate(d, f)
			if got := sp.Missing(tr); !slices.Equal(got, []string{"stage.absent", "stage.list"}) {
				t.Errorf("shared %v, use %d: missing %v", shared, i, got)
			}
			if got := tr.Reasons(); !slices.Equal(got, []string{"why"}) {
				t.Errorf("shared %v, use %d: reasons %v", shared, i, got)
			}
			if got := sp.Assumptions(tr); !slices.Equal(got, []stage.Assumption{assumed}) {
				t.Errorf("shared %v, use %d: assumptions %v", shared, i, got)
			}
			if got := fields(sp.Inputs(tr)); !slices.Equal(got, []string{"stage.absent", b.curve.Field, b.low.Field}) {
				t.Errorf("shared %v, use %d: read %v", shared, i, got)
			}
		}
	}
}

// Try hands out draws that were used before; nothing of their former use is left, and no draw is handed out twice at a time.
func TestTry(t *testing.T) {
	m := &model{bench: newBench(nil)}
	sp := m.space(room)
	base := sp.With(sp.Typical(), corner.Change{ID: m.a.ID, Value: 1.5})
	change := func(v float64) corner.Change { return corner.Change{ID: m.a.ID, Value: v} }
	first := m.kept(base, false)
	for _, v := range []float64{1, 2, 3, 4} {
		sp.Try(base, func(outer *corner.Draw) {
			near(t, "outer", m.kept(outer, false), m.direct(outer))
			near(t, "outer input", outer.Value(m.a), v)
			sp.Try(outer, func(inner *corner.Draw) {
				near(t, "inner", m.kept(inner, false), m.direct(inner))
				near(t, "inner input", inner.Value(m.a), v)
				near(t, "inner bus", inner.Value(m.bus), v+1)
			}, corner.Change{ID: m.bus.ID, Value: v + 1})
			near(t, "outer bus, afterwards", outer.Value(m.bus), 5)
			near(t, "outer, afterwards", m.kept(outer, false), m.direct(outer))
		}, change(v))
		near(t, "draw tried from", base.Value(m.a), 1.5)
	}
	near(t, "draw tried from, kept", m.kept(base, false), first)
	near(t, "draw tried from, computed", m.direct(base), first)
}

// The worst draw stays as it was found while others are tried.
func TestWorstDrawIsHeld(t *testing.T) {
	m := &model{bench: newBench(nil)}
	sp := m.space(room)
	f := corner.Function(func(d *corner.Draw) float64 { // found by polishing
		return -10*d.Need(m.a) - (d.Need(m.a)-3)*d.Need(m.c)
	})
	w := sp.Search(f)
	sp.Polish(&w, f)
	for range 3 {
		sp.BreakEven(w.Draw, m.c, f, 0, 100)
		sp.Try(w.Draw, func(d *corner.Draw) { f(d) }, corner.Change{ID: m.c.ID, Value: 99})
		other := sp.Search(f.Negative())
		sp.Polish(&other, f.Negative())
	}
	near(t, "a", w.Draw.Value(m.a), 4)
	near(t, "c", w.Draw.Value(m.c), 10)
	v, _ := corner.Evaluate(w.Draw, f)
	near(t, "value", v, w.Value)
}
