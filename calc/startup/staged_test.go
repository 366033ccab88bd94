package startup_test

import (
	"encoding/json"
	"math"
	"os"
	"testing"

	"floatrail/calc/startup"
)

// stagedCase is a case of testdata/reference/staged.json.
type stagedCase struct {
	Name, Kind string
	Element    struct {
		Slope         float64
		LogSaturation float64 `json:"log_saturation"`
		Resistance    float64
		Switch        bool
	}
	Bootstrap, Reservoir, Supply, Initial, Load, Target float64
	SupplyCurrent                                       float64 `json:"supply_current"`
	Stages, Count                                       int
	Interval                                            *float64 // nil: each group waits for the one before
	Expected                                            struct{ Time, Lowest, Start float64 }
}

func (r *stagedCase) order() startup.Order {
	e := referenceCase{Element: r.Element}.element()
	o := startup.Order{
		Reservoir: startup.Reservoir{Element: e, Bootstrap: r.Bootstrap, Reservoir: r.Reservoir, Count: r.Count, Supply: r.Supply,
			Initial: r.Initial, Load: r.Load, SupplyCurrent: r.SupplyCurrent},
		Stages: r.Stages, Waits: r.Interval == nil, Target: r.Target,
	}
	if r.Interval != nil {
		o.Interval = *r.Interval
	}
	return o
}

func stagedReference(t *testing.T) []stagedCase {
	t.Helper()
	text, err := os.ReadFile("../../testdata/reference/staged.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Scipy string
		Cases []stagedCase
	}
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	if doc.Scipy == "" || len(doc.Cases) < 40 {
		t.Fatalf("SciPy %q, %d cases", doc.Scipy, len(doc.Cases))
	}
	return doc.Cases
}

// Against numerical integration of all capacitors, each with a state of its own: testdata/reference/staged.py, SciPy 1.10.1, solve_ivp LSODA at
// rtol 1e-11. All at once, each waiting for the one before, spaced so that the supply refills the reservoir between, and so close that several
// groups charge together; and twelve groups, more than voltages that are told apart.
func TestStagedAgainstIntegration(t *testing.T) {
	type tolerance struct{ volts, time float64 } // [V], relative [1]
	tolerances := map[string]tolerance{"together": {1e-8, 1e-8}, "waiting": {2e-5, 2e-5}, "spaced": {2e-5, 2e-5}, "crowded": {2e-5, 2e-5}, "many": {5e-5, 5e-5}}
	worst, seen := map[string]tolerance{}, map[string]int{}
	for _, r := range stagedReference(t) {
		limit, ok := tolerances[r.Kind]
		if !ok {
			t.Fatalf("%s is %q", r.Name, r.Kind)
		}
		got := r.order().Run()
		dv := math.Abs(got.Lowest - r.Expected.Lowest)
		dt := math.Abs(got.Time/r.Expected.Time - 1)
		ds := math.Abs(got.Last-r.Expected.Start) / r.Expected.Time
		if !(dv <= limit.volts) || !(dt <= limit.time) || !(ds <= limit.time) {
			t.Errorf("%s: %.10g V, want %.10g, off by %.2g; %.10g s, want %.10g, off by %.2g; last start %.10g s, want %.10g", r.Name,
				got.Lowest, r.Expected.Lowest, dv, got.Time, r.Expected.Time, dt, got.Last, r.Expected.Start)
		}
		seen[r.Kind]++
		w := worst[r.Kind]
		worst[r.Kind] = tolerance{math.Max(w.volts, dv), math.Max(w.time, dt)}
	}
	for kind := range tolerances {
		if seen[kind] < 8 {
			t.Errorf("%d cases %s", seen[kind], kind)
		}
		t.Logf("%s: %d cases, largest differences %.2g V, %.2g of the time", kind, seen[kind], worst[kind].volts, worst[kind].time)
	}
}

func BenchmarkStaged(b *testing.B) {
	o := staged()
	for b.Loop() {
		o.Run()
	}
}
