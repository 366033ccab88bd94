package property

import (
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// TestSamplerDrawsAsASpaceDoes makes draws in the memory of one sampler, at temperatures up and down, and each again in a space of its own at those
// temperatures: ranges are the same to the bit, and so is what every rule finds, to what a root is found to.
func TestSamplerDrawsAsASpaceDoes(t *testing.T) {
	const root = 1e-7
	for _, s := range subjects(t) {
		r := bind(t, s.tree)
		policy := r.Policy
		r.Stage.Complete(&policy)
		g := rand.New(rand.NewPCG(13, 17))
		checked, moved := 0, 0
		for i := range r.Stage.OperatingPoints.Items {
			op := &r.Stage.OperatingPoints.Items[i]
			m := corner.NewSampler(r.Stage, &policy, op)
			for range 4 + 16/every {
				set := corner.Set{Name: "draw", Junction: -60 + 240*g.Float64(), Ambient: -60 + 240*g.Float64()} // beyond all entries, too
				u := 0.25 + 0.5*float64(g.IntN(2))                                                               // the same numbers at other temperatures, too
				d := m.Draw(set.Junction, set.Ambient, func(_ int, r stage.Triple) float64 { return r.Min + u*(r.Max-r.Min) })
				own := corner.NewSpace(r.Stage, &policy, op, set)
				var changes []corner.Change
				for _, q := range r.Stage.Inputs()[1:] {
					want := own.Range(q)
					if got := d.Space.Range(q); got != want && !(got.IsMissing() && want.IsMissing()) {
						t.Fatalf("%s: %s ranges over %v, want %v", s.name, q.Field, got, want)
					}
					if corner.Varies(q) {
						changes = append(changes, corner.Change{ID: q.ID, Value: want.Min + u*(want.Max-want.Min)})
					}
					if len(q.At) > 0 || q.Declare.Law != stage.Constant {
						moved++
					}
				}
				fresh := own.With(own.Typical(), changes...)
				for _, rl := range searched() {
					for _, role := range rolesOf(rl) {
						if rl.Inapplicable(r.Stage, op, role) != "" {
							continue
						}
						checked++
						a, complete := checkAt(d, rl, role)
						b, want := checkAt(fresh, rl, role)
						near := func(x, y float64) bool {
							return x == y || x != x && y != y || math.Abs(x-y) <= root*math.Max(math.Abs(x), math.Abs(y))
						}
						if complete != want || !near(a.Value, b.Value) || !near(a.Limit, b.Limit) || !near(a.Guard, b.Guard) || a.Floor != b.Floor {
							t.Errorf("%s: %s %s at %q, %g °C: %+v %t, want %+v %t", s.name, rl.ID, role, op.Name, set.Ambient, a, complete, b, want)
						}
					}
				}
			}
		}
		if checked < 200 || moved < 10 {
			t.Errorf("%s: %d checks, %d values that temperature moves", s.name, checked, moved)
		}
	}
}

// checkAt is a rule's check at a draw, and whether nothing was missing.
func checkAt(d *corner.Draw, rl *rule.Rule, role string) (k rule.Check, complete bool) {
	_, trace := corner.Evaluate(d, func(d *corner.Draw) float64 {
		k = rl.Check(circuit.Of(d), role)
		return 0
	})
	return k, trace.Complete()
}
