package corner_test

import (
	"math"
	"slices"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

func TestSets(t *testing.T) {
	exact := func(v float64) [3]float64 { return [3]float64{v, v, v} }
	cases := []struct {
		name              string
		junction, ambient [3]float64
		want              []corner.Set
	}{
		{"through room", [3]float64{-40, 25, 150}, [3]float64{-30, 25, 85}, []corner.Set{{"cold", -40, -30}, {"room", 25, 25}, {"hot", 150, 85}}},
		{"room alone", exact(25), exact(25), []corner.Set{{"room", 25, 25}}},
		{"one temperature", exact(125), exact(70), []corner.Set{{"room", 125, 70}}},
		{"above room", [3]float64{40, 60, 150}, [3]float64{30, 50, 85}, []corner.Set{{"room", 40, 30}, {"hot", 150, 85}}},
		{"below room", [3]float64{-40, -20, 0}, [3]float64{-55, -20, -5}, []corner.Set{{"cold", -40, -55}, {"room", 0, -5}}},
		{"up to room", [3]float64{-40, 0, 25}, [3]float64{-40, 0, 25}, []corner.Set{{"cold", -40, -40}, {"room", 25, 25}}},
		{"only surroundings move", exact(60), [3]float64{-20, 25, 60}, []corner.Set{{"cold", 60, -20}, {"room", 60, 25}, {"hot", 60, 60}}},
		{"only junctions move", [3]float64{20, 80, 150}, exact(40), []corner.Set{{"cold", 20, 40}, {"room", 25, 40}, {"hot", 150, 40}}},
		{"clamped on different sides", [3]float64{60, 80, 150}, [3]float64{-40, -20, 0},
			[]corner.Set{{"cold", 60, -40}, {"room", 60, 0}, {"hot", 150, 0}}},
	}
	for _, c := range cases {
		var p stage.OperatingPoint
		p.JunctionTemperature = stage.Between("", c.junction[0], c.junction[1], c.junction[2])
		p.AmbientTemperature = stage.Between("", c.ambient[0], c.ambient[1], c.ambient[2])
		if got := corner.Sets(&p); !slices.Equal(got, c.want) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}

// Within a set every value moves with the temperature of its own part; at an unknown temperature what moves is unknown.
func TestTemperatureOfParts(t *testing.T) {
	leaks := &stage.Declaration{Law: stage.Leakage, Low: 0, High: 1}
	b := newBench(func(b *bench) { b.a.Declare, b.hot.Declare = leaks, leaks })
	sp := b.space(corner.Set{Name: "hot", Junction: 125, Ambient: 45})
	near(t, "of the driver", sp.Range(b.a).Max, 4*4)    // doubled twice from 25 to 45 °C
	near(t, "of the switch", sp.Range(b.hot).Min, 1024) // doubled ten times from 25 to 125 °C
	near(t, "without a law", sp.Range(b.b).Max, 30)
	if got := sp.Temperature(b.hot); got != 125 {
		t.Errorf("a switch stands at %g °C, want 125", got)
	}
	if got := sp.Temperature(b.bus); got != 45 {
		t.Errorf("an operating point stands at %g °C, want 45", got)
	}
	lost := b.space(corner.Set{Name: "lost", Junction: nan, Ambient: nan})
	w := lost.Search(func(d *corner.Draw) float64 { return d.Need(b.a) + d.Need(b.b) })
	if w.Value == w.Value || !slices.Equal(lost.Missing(w.Trace), []string{"stage.a"}) {
		t.Errorf("at no temperature: %g, missing %v", w.Value, lost.Missing(w.Trace))
	}
}

func TestBound(t *testing.T) {
	b := newBench(func(b *bench) { *b.c = stage.Exact("stage.c", 7) })
	sp := b.space(room)
	cases := []struct {
		name  string
		q     *stage.Quantity
		value float64
		want  finding.Bound
	}{
		{"smallest", b.a, 1, finding.AtMin}, {"typical", b.a, 2, finding.AtTyp}, {"largest", b.a, 4, finding.AtMax},
		{"between", b.a, 3, finding.Interior}, {"without range", b.c, 7, finding.NoBound}, {"unknown", b.absent, 1, finding.NoBound},
		{"point of a curve", b.low, 0.5, finding.NoBound}, {"position of a curve", &b.curve.Position, -1, finding.AtMin},
		{"typical position", &b.curve.Position, 0, finding.AtTyp},
	}
	for _, c := range cases {
		if got := sp.Bound(c.q, c.value); got != c.want {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}

// The ranges of a replaced space are its own; the space that it came from keeps its ranges and its draws.
func TestReplace(t *testing.T) {
	b := newBench(nil)
	sp := b.space(room)
	f := corner.Function(func(d *corner.Draw) float64 { return d.Need(b.a) + d.Need(b.b) })
	near(t, "before", sp.Search(f).Value, 11)
	o := sp.Replace(corner.Replacement{ID: b.a.ID, Triple: stage.Triple{Min: -3, Typ: 0, Max: 1}})
	w := o.Search(f)
	near(t, "replaced", w.Value, 7)
	near(t, "replaced, typical", w.Typical, 20)
	if w.Space != o || w.Draw.Space != o {
		t.Error("the worst draw is of another space")
	}
	near(t, "after", sp.Search(f).Value, 11)
	near(t, "after, typical", sp.Search(f).Typical, 22)
	if r := sp.Range(b.a); r != (stage.Triple{Min: 1, Typ: 2, Max: 4}) {
		t.Errorf("range %v changed", r)
	}
	near(t, "two at once", sp.Replace(corner.Replacement{ID: b.a.ID, Triple: stage.Triple{Min: 0, Typ: 0, Max: 0}},
		corner.Replacement{ID: b.b.ID, Triple: stage.Triple{Min: 1, Typ: 1, Max: 1}}).Search(f).Value, 1)
	gone := sp.Replace(corner.Replacement{ID: b.a.ID, Triple: stage.Missing()}).Search(f)
	if !math.IsNaN(gone.Value) {
		t.Errorf("replaced by nothing: %g, want NaN", gone.Value)
	}
}
