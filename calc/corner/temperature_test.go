package corner_test

import (
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/stage"
)

// TestSpreadInOneSetOnly has inputs whose spread, or whose being read at all, is there in the hot set only: the search of that set moves them
// although the room set shows no direction for them.
func TestSpreadInOneSetOnly(t *testing.T) {
	b := newBench(func(b *bench) {
		b.op.AmbientTemperature = stage.Between("stage.ambient", -40, 25, 125)
		b.a.At = []stage.AtTemperature{{Temperature: 25, Triple: stage.Triple{Min: 2, Typ: 2, Max: 2}}, {Temperature: 125, Triple: stage.Triple{Min: 1, Typ: 3, Max: 7}}}
	})
	var sets []*corner.Space
	for _, set := range corner.Sets(b.op) {
		sets = append(sets, corner.NewSpace(b.Stage, &policy, b.op, set))
	}
	if len(sets) != 3 {
		t.Fatalf("%d sets", len(sets))
	}
	for _, c := range []struct {
		name string
		f    corner.Function
		want float64
	}{
		{"spread", func(d *corner.Draw) float64 { return 10 - d.Need(b.a) }, 3},
		{"read", func(d *corner.Draw) float64 {
			if d.Space.Set.Name == "hot" {
				return 100 - d.Need(b.b)
			}
			return 100
		}, 70},
	} {
		least := 1e9
		for _, w := range corner.SearchSets(sets, c.f) {
			least = min(least, w.Value)
		}
		if least != c.want {
			t.Errorf("%s: worst %g, want %g", c.name, least, c.want)
		}
	}
}
