package corner_test

import (
	"math"
	"slices"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
)

// What cannot be evaluated somewhere in its ranges is NaN, and tells why.
func TestMissing(t *testing.T) {
	cases := []struct {
		name    string
		f       func(*bench, *corner.Draw) float64
		missing []string
		reasons []string
		only    bool // the one unknown input stands alone in the way
	}{
		{"an input", func(b *bench, d *corner.Draw) float64 { return d.Need(b.absent) }, []string{"stage.absent"}, nil, true},
		{"an input that changes nothing", func(b *bench, d *corner.Draw) float64 {
			d.Need(b.absent)
			return 1
		}, []string{"stage.absent"}, nil, true},
		{"two inputs, in the order of the stage", func(b *bench, d *corner.Draw) float64 { return d.Need(b.other) + d.Need(b.absent) },
			[]string{"stage.absent", "stage.other"}, nil, false},
		{"a list", func(b *bench, d *corner.Draw) float64 { return d.Want("stage.list") + d.Want("stage.list") }, []string{"stage.list"}, nil, false},
		{"a list and an input", func(b *bench, d *corner.Draw) float64 { return d.Want("stage.list") + d.Need(b.absent) },
			[]string{"stage.absent", "stage.list"}, nil, false},
		{"an input by two names of one path", func(b *bench, d *corner.Draw) float64 { return d.Want("stage.absent") + d.Need(b.absent) },
			[]string{"stage.absent"}, nil, false},
		{"a reason", func(b *bench, d *corner.Draw) float64 {
			d.Open("first")
			d.Open("second")
			return d.Open("first")
		}, nil, []string{"first", "second"}, false},
		{"a reason although there is a number", func(b *bench, d *corner.Draw) float64 {
			d.Open("outside")
			return 1
		}, nil, []string{"outside"}, false},
		{"an input and a reason", func(b *bench, d *corner.Draw) float64 { return d.Need(b.absent) + d.Open("why") },
			[]string{"stage.absent"}, []string{"why"}, false},
		{"only at one end", func(b *bench, d *corner.Draw) float64 {
			if d.Need(b.a) > 3 {
				return d.Need(b.absent)
			}
			return 1
		}, []string{"stage.absent"}, nil, true},
		{"not a number", func(b *bench, d *corner.Draw) float64 { return d.Need(b.a) * nan }, nil, nil, false},
		{"an open side that is worse", func(b *bench, d *corner.Draw) float64 { return -d.Need(b.c) }, []string{"stage.c.max"}, nil, false},
	}
	for _, c := range cases {
		b := newBench(func(b *bench) { *b.c = stage.Between("stage.c", 1, nan, nan) })
		sp := b.space(room)
		w := sp.Search(func(d *corner.Draw) float64 { return c.f(b, d) })
		if w.Decided() {
			t.Errorf("%s: decided, %g", c.name, w.Value)
		}
		if got := sp.Missing(w.Trace); !slices.Equal(got, c.missing) {
			t.Errorf("%s: missing %v, want %v", c.name, got, c.missing)
		}
		if got := w.Trace.Reasons(); !slices.Equal(got, c.reasons) {
			t.Errorf("%s: reasons %v, want %v", c.name, got, c.reasons)
		}
		if want := len(c.missing) == 0 && len(c.reasons) == 0; w.Trace.Complete() != want {
			t.Errorf("%s: complete %v", c.name, !want)
		}
		if q := sp.OnlyMissing(w.Trace); (q != nil) != c.only {
			t.Errorf("%s: only missing %v, want one: %v", c.name, q, c.only)
		} else if q != nil && q.Field != c.missing[0] {
			t.Errorf("%s: only missing %s", c.name, q.Field)
		}
		sp.Polish(&w, func(d *corner.Draw) float64 { return c.f(b, d) })
		if w.Decided() {
			t.Errorf("%s, polished: decided, %g", c.name, w.Value)
		}
	}
}

// Polishing that comes to a draw where something is missing leaves the function undecided, and keeps the worst of the other draws.
func TestMissingInPolish(t *testing.T) {
	b := newBench(nil)
	sp := b.space(room)
	f := corner.Function(func(d *corner.Draw) float64 {
		a, c := d.Need(b.a), d.Need(b.c)
		if a > 3 && c > 9 { // neither alone from the typical draw
			return d.Need(b.absent)
		}
		return -10*a + c/10
	})
	w := sp.Search(f)
	near(t, "found", w.Value, -40)
	sp.Polish(&w, f)
	near(t, "polished", w.Value, -40)
	if w.Decided() {
		t.Error("decided although something is missing at a draw")
	}
	if got := sp.Missing(w.Trace); !slices.Equal(got, []string{"stage.absent"}) {
		t.Errorf("missing %v", got)
	}
}

func TestHas(t *testing.T) {
	b := newBench(nil)
	sp := b.space(room)
	w := sp.Search(func(d *corner.Draw) float64 {
		if v, ok := d.Has(b.absent); ok || v == v {
			t.Errorf("an unknown input is there: %g", v)
		}
		v, ok := d.Has(b.a)
		if !ok {
			t.Error("a known input is not there")
		}
		return v
	})
	near(t, "worst", w.Value, 1)
	if got := fields(sp.Inputs(w.Trace)); !slices.Equal(got, []string{"stage.a"}) || !w.Trace.Complete() {
		t.Errorf("read %v, complete %v", got, w.Trace.Complete())
	}
}

// Assumptions are those behind what was read, each once, and those that the evaluation makes.
func TestAssumptions(t *testing.T) {
	behind := stage.Assumption{Field: "stage.b", Assumed: "10", Direction: stage.Conservative, Reason: "r"}
	unread := stage.Assumption{Field: "stage.c", Assumed: "5", Direction: stage.Optimistic, Reason: "r"}
	made := stage.Assumption{Field: "stage.x", Assumed: "1", Direction: stage.Optimistic, Reason: "s"}
	b := newBench(func(b *bench) { b.b.Assumption, b.c.Assumption = &behind, &unread })
	sp := b.space(room)
	w := sp.Search(func(d *corner.Draw) float64 {
		d.Assume(made)
		d.Assume(made)
		return d.Need(b.a) + d.Need(b.b)
	})
	if got := sp.Assumptions(w.Trace); !slices.Equal(got, []stage.Assumption{behind, made}) {
		t.Errorf("assumptions %v", got)
	}
	if !w.Trace.Complete() {
		t.Error("an assumption stands in the way")
	}
}

// A trace tells what its evaluation read, not what an earlier one at the same draw did.
func TestEvaluateAfresh(t *testing.T) {
	b := newBench(nil)
	sp := b.space(room)
	d := sp.Typical()
	_, first := corner.Evaluate(d, func(d *corner.Draw) float64 { return d.Need(b.absent) + d.Open("x") + d.Open("x") + d.Want("y") })
	if got := first.Reasons(); !slices.Equal(got, []string{"x"}) {
		t.Errorf("reasons %v", got)
	}
	if first.Complete() {
		t.Error("complete although an input is unknown")
	}
	v, second := corner.Evaluate(d, func(d *corner.Draw) float64 { return d.Need(b.c) })
	near(t, "typical", v, 5)
	if got := fields(sp.Inputs(second)); !slices.Equal(got, []string{"stage.c"}) || !second.Complete() {
		t.Errorf("read %v, complete %v", got, second.Complete())
	}
}

// Of a value with one end alone the other side is open: what gets worse there cannot be decided, what does not is not hindered.
func TestOpenSides(t *testing.T) {
	for _, c := range []struct {
		name           string
		low, typ, high float64
		sign           float64
		missing        []string
	}{
		{"min alone, more is worse", 1, nan, nan, -1, []string{"stage.c.max"}},
		{"min alone, less is worse", 1, nan, nan, 1, nil},
		{"max alone, less is worse", nan, nan, 1, 1, []string{"stage.c.min"}},
		{"max alone, more is worse", nan, nan, 1, -1, nil},
		{"zero alone", nan, nan, 0, 1, nil}, // no step is known where no range is declared
	} {
		b := newBench(func(b *bench) { *b.c = stage.Between("stage.c", c.low, c.typ, c.high) })
		sp := b.space(room)
		f := corner.Function(func(d *corner.Draw) float64 { return c.sign * d.Need(b.c) })
		w := sp.Search(f)
		if w.Decided() != (len(c.missing) == 0) || !slices.Equal(sp.Missing(w.Trace), c.missing) {
			t.Errorf("%s: decided %v, missing %v, want %v", c.name, w.Decided(), sp.Missing(w.Trace), c.missing)
		}
	}
	// At the worst draw a side may matter that does not at the typical one.
	b := newBench(func(b *bench) { *b.c = stage.Between("stage.c", 1, nan, nan) })
	sp := b.space(room)
	f := corner.Function(func(d *corner.Draw) float64 {
		a := d.Need(b.a)
		return -a - math.Max(0, a-3)*d.Need(b.c)
	})
	w := sp.Search(f)
	sp.Polish(&w, f)
	if w.Decided() || !slices.Equal(sp.Missing(w.Trace), []string{"stage.c.max"}) {
		t.Errorf("at the worst draw: decided %v, missing %v", w.Decided(), sp.Missing(w.Trace))
	}
}
