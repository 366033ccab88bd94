package corner_test

import (
	"math"
	"slices"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
)

// dip is a hollow of a depth in a line, about 1 wide.
func dip(v, at, depth float64) float64 { return -depth * math.Exp(-(v-at)*(v-at)) }

// Functions of which the worst is known: typical draw, value after Search, value after Polish.
func TestSearch(t *testing.T) {
	cases := []struct {
		name                     string
		f                        func(*bench, *corner.Draw) float64
		typical, found, polished float64
	}{
		{"constant", func(*bench, *corner.Draw) float64 { return 3 }, 3, 3, 3},
		{"rising", func(b *bench, d *corner.Draw) float64 { return d.Need(b.a) }, 2, 1, 1},
		{"falling", func(b *bench, d *corner.Draw) float64 { return -d.Need(b.a) }, -2, -4, -4},
		{"each its own way", func(b *bench, d *corner.Draw) float64 {
			return d.Need(b.a) - d.Need(b.b) + 2*d.Need(b.c) - 3*d.Need(b.hot)
		}, 2 - 20 + 10 - 6, 1 - 30 + 0 - 9, 1 - 30 + 0 - 9},
		{"product of falling terms", func(b *bench, d *corner.Draw) float64 { return -d.Need(b.a) * d.Need(b.b) }, -40, -120, -120},
		{"quotient", func(b *bench, d *corner.Draw) float64 { return d.Need(b.b) / d.Need(b.a) }, 10, 2.5, 2.5},
		{"turning between the ends", func(b *bench, d *corner.Draw) float64 {
			v := d.Need(b.bus) - 3
			return v * v
		}, 4, 0, 0},
		{"highest between the ends", func(b *bench, d *corner.Draw) float64 {
			v := d.Need(b.bus) - 4
			return -v * v
		}, -1, -36, -36},
		{"turning, monotone over its ends and middle", func(b *bench, d *corner.Draw) float64 {
			v := d.Need(b.bus)
			return v + dip(v, 7, 12)
		}, 5 + dip(5, 7, 12), -5, -5},
		{"turning, of an input of a part", func(b *bench, d *corner.Draw) float64 { return math.Abs(d.Need(b.c) - 4) }, 1, 0, 0},
		{"read only at a corner", func(b *bench, d *corner.Draw) float64 {
			if a := d.Need(b.a); a < 2 {
				return a - d.Need(b.b)
			}
			return 50
		}, 50, 1 - 30, 1 - 30},
		// At the typical draw a larger c is better, where a is largest it is worse.
		{"coupling seen only at the corner", func(b *bench, d *corner.Draw) float64 {
			return -10*d.Need(b.a) - (d.Need(b.a)-3)*d.Need(b.c)
		}, -15, -45, -50},
		{"coupling in two steps", func(b *bench, d *corner.Draw) float64 { // c turns where a is largest, then b where c is
			return -100*d.Need(b.a) - 20*(d.Need(b.a)-3)*d.Need(b.c) - (d.Need(b.c)-6)*(d.Need(b.b)-20)
		}, -100, -500, -640},
		{"infinite at an end", func(b *bench, d *corner.Draw) float64 {
			if d.Need(b.a) < 1.5 {
				return math.Inf(-1)
			}
			return -d.Need(b.a)
		}, -2, math.Inf(-1), math.Inf(-1)},
	}
	for _, c := range cases {
		b := newBench(nil)
		sp := b.space(room)
		f := corner.Function(func(d *corner.Draw) float64 { return c.f(b, d) })
		w := sp.Search(f)
		near(t, c.name+": typical", w.Typical, c.typical)
		near(t, c.name+": found", w.Value, c.found)
		sp.Polish(&w, f)
		near(t, c.name+": polished", w.Value, c.polished)
		again, _ := corner.Evaluate(w.Draw, f)
		near(t, c.name+": at the draw", again, w.Value)
		turned := sp.Search(f.Negative().Negative())
		near(t, c.name+": turned twice", turned.Value, c.found)
	}
}

// An input whose function turns is tried at nine points at least, evenly or, over decades, in proportion.
func TestInteriorSamples(t *testing.T) {
	cases := []struct {
		name           string
		low, typ, high float64
		at             func(k int) float64 // k from 1 to 9
	}{
		{"even", 0, 5.5, 10, func(k int) float64 { return float64(k) }},
		{"even, from above 0", 2, 3.5, 12, func(k int) float64 { return 2 + float64(k) }},
		{"in proportion", 1, 999, 1e5, func(k int) float64 { return math.Pow(10, float64(k)/2) }},
	}
	for _, c := range cases {
		for k := 1; k <= 9; k++ {
			b := newBench(func(b *bench) { *b.bus = stage.Between("stage.bus", c.low, c.typ, c.high) })
			f := func(d *corner.Draw) float64 { // higher at both ends than at typ, lowest at one point
				switch v := d.Need(b.bus); {
				case v == c.typ:
					return 0
				case math.Abs(v/c.at(k)-1) < 1e-9:
					return -1
				}
				return 1
			}
			w := b.space(room).Search(f)
			near(t, c.name, w.Value, -1)
			near(t, c.name+": where", w.Draw.Value(b.bus)/c.at(k), 1)
		}
	}
}

// The points of one curve move together, from the lower curve to the upper one, and nothing else does.
func TestCurve(t *testing.T) {
	b := newBench(nil)
	sp := b.space(room)
	cases := []struct {
		name string
		f    corner.Function
		want float64
	}{
		{"rise between the points", func(d *corner.Draw) float64 { return d.Need(b.high) - d.Need(b.low) }, 0.3}, // not 0.9 - 0.8
		{"rise, turned", func(d *corner.Draw) float64 { return d.Need(b.low) - d.Need(b.high) }, -0.4},           // not 0.5 - 1.1
		{"sum", func(d *corner.Draw) float64 { return d.Need(b.high) + d.Need(b.low) }, 1.4},
		{"with another input", func(d *corner.Draw) float64 { return d.Need(b.a) - d.Need(b.low) }, 1 - 0.8},
	}
	for _, c := range cases {
		w := sp.Search(c.f)
		sp.Polish(&w, c.f)
		near(t, c.name, w.Value, c.want)
	}
	for _, p := range []struct{ position, low, high float64 }{{-1, 0.5, 0.9}, {-0.5, 0.55, 0.95}, {0, 0.6, 1}, {0.5, 0.7, 1.05}, {1, 0.8, 1.1}} {
		d := sp.With(sp.Typical(), corner.Change{ID: b.curve.Position.ID, Value: p.position})
		near(t, "first point", d.Value(b.low), p.low)
		near(t, "second point", d.Value(b.high), p.high)
	}
	w := sp.Search(func(d *corner.Draw) float64 { return d.Need(b.low) })
	if got := fields(sp.Inputs(w.Trace)); !slices.Equal(got, []string{b.curve.Field, b.low.Field}) {
		t.Errorf("read %v, want the position and the point", got)
	}
}

// Swings are measured at the worst draw, the largest first; a value without spread counts from what a nominal calculation would use.
func TestSwings(t *testing.T) {
	b := newBench(func(b *bench) {
		*b.c = stage.Exact("stage.c", 5)
		b.c.Naive = 8
		*b.hot = stage.Exact("stage.hot", 2)
		b.a.Naive = 100
	})
	sp := b.space(room)
	f := corner.Function(func(d *corner.Draw) float64 {
		return d.Need(b.a) + 0.1*d.Need(b.b) - 4*d.Need(b.c) + d.Need(b.hot) + 0*d.Need(b.bus)
	})
	w := sp.Search(f)
	if len(w.Swings) != 0 {
		t.Errorf("%d swings before polishing", len(w.Swings))
	}
	sp.Polish(&w, f)
	near(t, "worst", w.Value, 1+1-20+2) // what a nominal calculation would use is no case
	want := []corner.Swing{{Input: b.a, Range: 99}, {Input: b.c, Range: 12}, {Input: b.b, Range: 2}}
	if len(w.Swings) != len(want) {
		t.Fatalf("swings %v, want %d", w.Swings, len(want))
	}
	for i, s := range w.Swings {
		if s.Input != want[i].Input {
			t.Errorf("swing %d is of %s, want %s", i, s.Input.Field, want[i].Input.Field)
		}
		near(t, s.Input.Field, s.Range, want[i].Range)
	}
	ties := corner.Function(func(d *corner.Draw) float64 { return d.Need(b.b)/20 + d.Need(b.a)/3 })
	w = sp.Replace(corner.Replacement{ID: b.a.ID, Triple: stage.Triple{Min: 97, Typ: 98, Max: 100}}).Search(ties)
	w.Space.Polish(&w, ties)
	if len(w.Swings) != 2 || w.Swings[0].Input != b.a || w.Swings[1].Input != b.b {
		t.Errorf("equal swings are not in the order of the stage: %v", w.Swings)
	}
}

// Directions are found at the room set and hold at the others.
func TestSearchSets(t *testing.T) {
	leaks := &stage.Declaration{Law: stage.Leakage, Low: 0, High: 1}
	b := newBench(func(b *bench) { b.a.Declare = leaks })
	calls := map[string]int{}
	f := corner.Function(func(d *corner.Draw) float64 {
		calls[d.Space.Set.Name]++
		return d.Need(b.b) - 3*d.Need(b.a)*d.Need(b.hot)
	})
	var spaces []*corner.Space
	for _, set := range corner.Sets(b.op) {
		spaces = append(spaces, b.space(set))
	}
	got := corner.SearchSets(spaces, f)
	if calls["cold"] != 2 || calls["hot"] != 2 || calls["room"] < 8 {
		t.Errorf("evaluations %v: want the typical draw and one corner away from room", calls)
	}
	growth := func(temperature float64) float64 { return math.Exp2((temperature - 25) / 10) }
	for i, want := range []float64{10 - 36*growth(-40), 10 - 36, 10 - 36*growth(85)} {
		near(t, spaces[i].Set.Name, got[i].Value, want)
		if got[i].Space != spaces[i] || got[i].Draw.Space != spaces[i] {
			t.Errorf("%s: a result of another set", spaces[i].Set.Name)
		}
		near(t, spaces[i].Set.Name+" alone", b.space(spaces[i].Set).Search(f).Value, want)
	}
	near(t, "typical of hot", got[2].Typical, 20-12*growth(85))

	// A turn seen at room is sampled by polishing at the others.
	valley := corner.Function(func(d *corner.Draw) float64 {
		v := d.Need(b.bus)
		return d.Need(b.c) + (v-3)*(v-3) - 2*v*float64(d.Space.Set.Ambient-25)/60 // lowest at 3 V at room, at 4 V at 85 °C
	})
	got = corner.SearchSets(spaces, valley)
	spaces[2].Polish(&got[2], valley)
	near(t, "where, hot", got[2].Draw.Value(b.bus), 4)
	near(t, "hot", got[2].Value, 1-8)
}

// Where the room set cannot be evaluated the others are searched on their own.
func TestSearchSetsOpen(t *testing.T) {
	b := newBench(nil)
	spaces := []*corner.Space{b.space(corner.Set{Name: "cold", Junction: 0, Ambient: 0}), b.space(room)}
	got := corner.SearchSets(spaces, func(d *corner.Draw) float64 {
		if d.Space.Set.Name == "room" {
			d.Need(b.absent)
		}
		return d.Need(b.a)
	})
	near(t, "cold", got[0].Value, 1)
	near(t, "room", got[1].Value, nan)
	if m := spaces[1].Missing(got[1].Trace); !slices.Equal(m, []string{"stage.absent"}) {
		t.Errorf("missing %v", m)
	}
	if got := corner.SearchSets(spaces[:1], func(d *corner.Draw) float64 { return -d.Need(b.a) }); got[0].Value != -4 {
		t.Errorf("without a room set: %g, want -4", got[0].Value)
	}
}
