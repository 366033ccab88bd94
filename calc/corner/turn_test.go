package corner_test

import (
	"math"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
)

func TestBreakEven(t *testing.T) {
	cases := []struct {
		name             string
		start, low, high float64
		f                func(x float64) float64
		want             float64 // NaN: none
	}{
		{"above", 4, 0, 100, func(x float64) float64 { return 10 - x }, 10},
		{"below", 40, 0, 100, func(x float64) float64 { return x - 10 }, 10},
		{"from a failing draw", 40, 0, 100, func(x float64) float64 { return 10 - x }, 10},
		{"over decades", 1, 1e-6, 1e6, func(x float64) float64 { return 1234 - x }, 1234},
		{"over decades downward", 1, 1e-6, 1e6, func(x float64) float64 { return x - 2.5e-4 }, 2.5e-4},
		{"of two the one below", 6, 0, 100, func(x float64) float64 { return (x - 2) * (x - 20) }, 2},
		{"of two the one above", 8, 0, 100, func(x float64) float64 { return (x - 2) * (x - 20) }, 20},
		{"from 0", 0, 0, 100, func(x float64) float64 { return 25 - x }, 25},
		{"across 0", -3, -10, 10, func(x float64) float64 { return 7 - x }, 7},
		{"none", 4, 0, 100, func(float64) float64 { return 1 }, nan},
		{"no number at one end", 4, 0, 100, func(x float64) float64 {
			if x > 99 {
				return nan
			}
			return x - 1
		}, 1},
		{"no number at the draw", 4, 0, 100, func(float64) float64 { return nan }, nan},
		{"infinite beyond", 4, 0, 100, func(x float64) float64 {
			if x > 30 {
				return math.Inf(-1)
			}
			return 1
		}, 30},
	}
	for _, c := range cases {
		b := newBench(func(b *bench) { *b.c = stage.Exact("stage.c", c.start) })
		sp := b.space(room)
		got, ok := sp.BreakEven(sp.Typical(), b.c, func(d *corner.Draw) float64 { return c.f(d.Need(b.c)) }, c.low, c.high)
		if ok != (c.want == c.want) {
			t.Errorf("%s: found %v at %g, want %g", c.name, ok, got, c.want)
			continue
		}
		if ok && !(math.Abs(got-c.want) <= 2e-4*math.Max(math.Abs(c.want), math.Abs(c.start))) {
			t.Errorf("%s: %g, want %g", c.name, got, c.want)
		}
	}
}

// A break-even stands for the draw that it is asked at, the others staying where they are.
func TestBreakEvenAtDraw(t *testing.T) {
	b := newBench(nil)
	sp := b.space(room)
	f := corner.Function(func(d *corner.Draw) float64 { return 50 - d.Need(b.b) - d.Need(b.c) })
	w := sp.Search(f)
	got, ok := sp.BreakEven(w.Draw, b.c, f, 0, 100)
	if !ok || math.Abs(got-20) > 0.01 { // b at its largest, 30
		t.Errorf("break-even %g, %v; want 20", got, ok)
	}
	near(t, "the draw itself", w.Draw.Value(b.c), 10)
	if v, ok := sp.BreakEven(w.Draw, b.absent, f, 0, 100); ok {
		t.Errorf("break-even of an unknown input: %g", v)
	}
}

// Turn finds what an unknown input must be, the others at their worst.
func TestTurn(t *testing.T) {
	cases := []struct {
		name string
		f    func(b *bench, d *corner.Draw) float64
		want float64 // NaN: none
	}{
		{"at least", func(b *bench, d *corner.Draw) float64 { return d.Need(b.absent) - 30 - d.Need(b.c) }, 40},
		{"at most", func(b *bench, d *corner.Draw) float64 { return 70 - d.Need(b.absent) - d.Need(b.c) }, 60},
		{"small against its range", func(b *bench, d *corner.Draw) float64 { return 1e-6 + 1e-7*d.Need(b.a) - d.Need(b.absent) }, 1.1e-6},
		{"holds everywhere", func(b *bench, d *corner.Draw) float64 { return d.Need(b.absent) + 1 }, nan},
		{"holds nowhere", func(b *bench, d *corner.Draw) float64 { return -d.Need(b.absent) - 1 }, nan},
		{"another unknown", func(b *bench, d *corner.Draw) float64 { return d.Need(b.absent) - 30 + d.Need(b.other) }, nan},
	}
	for _, c := range cases {
		b := newBench(nil)
		sp := b.space(room)
		f := corner.Function(func(d *corner.Draw) float64 { return c.f(b, d) })
		got, ok := sp.Turn(b.absent, f)
		if ok != (c.want == c.want) {
			t.Errorf("%s: found %v at %g, want %g", c.name, ok, got, c.want)
			continue
		}
		if !ok {
			continue
		}
		if math.Abs(got-c.want) > 2e-7*c.want {
			t.Errorf("%s: %g, want %g", c.name, got, c.want)
		}
		if v := sp.Replace(corner.Replacement{ID: b.absent.ID, Triple: stage.Triple{Min: got, Typ: got, Max: got}}).Search(f).Value; v < 0 {
			t.Errorf("%s: at %.9g the function does not hold: %g", c.name, got, v)
		}
	}
}

// Ends that the policy filled are moved as far again, and only those: by ratio where all is positive, else by distance, within what is plausible.
func TestStretch(t *testing.T) {
	for _, c := range []struct {
		name           string
		low, typ, high float64
		sign           float64 // of the function: which end is the worse
		spread         stage.Spread
		want           float64 // NaN: not moved
	}{
		{"filled above", nan, 10, nan, -1, stage.SpreadResistance, 22.5},
		{"filled below", nan, 10, nan, 1, stage.SpreadResistance, 10 / 2.25},
		{"given above", nan, 10, 14, -1, stage.SpreadResistance, nan},
		{"given above, filled below", nan, 10, 14, 1, stage.SpreadResistance, 10 / 2.25},
		{"as far as is plausible", nan, 60, nan, -1, stage.SpreadResistance, 100},
	} {
		b := newBench(func(b *bench) {
			*b.c = between("stage.c", c.low, c.typ, c.high)
			b.c.Declare.Spread = c.spread
		})
		sp := b.space(room)
		w := sp.Search(func(d *corner.Draw) float64 { return c.sign * d.Need(b.c) })
		changes, fields := sp.Stretch(w.Draw, w.Trace)
		switch {
		case c.want != c.want:
			if len(changes) != 0 {
				t.Errorf("%s: moved to %v", c.name, changes)
			}
		case len(changes) != 1 || len(fields) != 1 || fields[0] != "stage.c":
			t.Errorf("%s: %v %v", c.name, changes, fields)
		default:
			near(t, c.name, changes[0].Value, c.want)
		}
	}
}
