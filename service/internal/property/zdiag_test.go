package property

import (
	"floatrail/calc/catalog"
	"floatrail/calc/corner"
	"math"
	"math/rand/v2"
	"testing"
)

func descend(s *corner.Space, d *corner.Draw, f corner.Function) (float64, *corner.Draw) {
	v, _ := corner.Evaluate(d, f)
	for pass := 0; pass < 6; pass++ {
		start := v
		_, tr := corner.Evaluate(d, f)
		for _, q := range s.Inputs(tr) {
			r := s.Range(q)
			if !(r.Min < r.Max) {
				continue
			}
			for k := 0; k <= 10; k++ {
				x := r.Min + (r.Max-r.Min)*float64(k)/10
				if k == 10 {
					x = r.Max
				}
				n := s.With(d, corner.Change{ID: q.ID, Value: x})
				if u, _ := corner.Evaluate(n, f); u < v {
					v, d = u, n
				}
			}
		}
		if !(v < start) {
			break
		}
	}
	return v, d
}

func TestDiag(t *testing.T) {
	for _, s := range subjects(t) {
		j := judge(t, bind(t, s.tree), catalog.All())
		g := rand.New(rand.NewPCG(7, 11))
		for _, rl := range catalog.All() {
			if rl.Proxy != nil {
				continue
			}
			for _, role := range rolesOf(rl) {
				for i := range j.bench.Points {
					pt := &j.bench.Points[i]
					if rl.Inapplicable(j.bench.Stage, pt.Operating, role) != "" {
						continue
					}
					p := place{rl.ID, role, pt.Name()}
					is := j.at[p]
					f := rl.Worst(role)
					A, B, R := math.Inf(1), math.Inf(1), math.Inf(1)
					setA, setB := "", ""
					var dB, dA *corner.Draw
					for _, w := range corner.SearchSets(pt.Spaces, f) {
						if w.Value < R {
							R = w.Value
						}
					}
					for _, sp := range pt.Spaces {
						w := sp.Search(f)
						if w.Value != w.Value {
							continue
						}
						sp.Polish(&w, f)
						if w.Value < A {
							A, setA, dA = w.Value, sp.Set.Name, w.Draw
						}
						v, d := descend(sp, w.Draw, f)
						if v < B {
							B, setB, dB = v, sp.Set.Name, d
						}
						for n := 0; n < 12; n++ {
							v, d := descend(sp, drawn(g, sp, sp.Typical(), 1), f)
							if v < B {
								B, setB, dB = v, sp.Set.Name, d
							}
						}
					}
					scale := math.Max(math.Abs(is.value), math.Abs(is.limit))
					if is.margin-B > 1e-6*scale {
						t.Logf("%s %s bind=%v reported %.6g | sets-unpolished %.6g | search+polish %.6g %s | multistart %.6g %s | %s", s.name, p, is.binding, is.margin, R, A, setA, B, setB, is.text)
						if A-B > 1e-6*scale && dA != nil {
							_, ta := corner.Evaluate(dA, f)
							read := map[string]bool{}
							for _, q := range dA.Space.Inputs(ta) {
								read[q.Field] = true
							}
							_, tb := corner.Evaluate(dB, f)
							for _, q := range dB.Space.Inputs(tb) {
								read[q.Field] = true
							}
							for _, q := range j.bench.Stage.Inputs()[1:] {
								a, b := dA.Value(q), dB.Value(q)
								if read[q.Field] && a != b && a == a {
									r := dB.Space.Range(q)
									t.Logf("      %s polish %.6g multi %.6g range %.6g..%.6g..%.6g", q.Field, a, b, r.Min, r.Typ, r.Max)
								}
							}
						}
					}
				}
			}
		}
	}
}
