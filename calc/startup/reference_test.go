package startup_test

import (
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"

	"floatrail/calc/recharge"
	"floatrail/calc/startup"
)

type referenceCase struct {
	Name, Kind string
	Element    struct {
		Slope         float64
		LogSaturation float64 `json:"log_saturation"`
		Resistance    float64
		Switch        bool
	}
	Supply, Node, Load, Initial float64

	Capacitance, Target, At, Width, Period float64 // of continuous and pulsed
	Bootstrap, Reservoir                   float64
	SupplyCurrent                          float64 `json:"supply_current"`
	Count                                  int
	Expected                               struct {
		Time, Reached, Lowest float64
		Pulses                int
	}
}

func (r referenceCase) element() recharge.Element {
	return recharge.Element{
		Junction:   recharge.Junction{Slope: r.Element.Slope, LogSaturation: r.Element.LogSaturation},
		Resistance: r.Element.Resistance, Switch: r.Element.Switch,
	}
}

func (r referenceCase) charge() startup.Charge {
	return startup.Charge{Element: r.element(), Capacitance: r.Capacitance, Supply: r.Supply, Node: r.Node, Load: r.Load, Initial: r.Initial}
}

func readReference(t *testing.T) (cases []referenceCase) {
	t.Helper()
	text, err := os.ReadFile("../../testdata/reference/startup.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Scipy string
		Cases []referenceCase
	}
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	if doc.Scipy == "" || len(doc.Cases) < 64 {
		t.Fatalf("SciPy %q, %d cases", doc.Scipy, len(doc.Cases))
	}
	return doc.Cases
}

// Against numerical integration of the differential equations, pulse by pulse: testdata/reference/startup.py, SciPy 1.10.1, solve_ivp Radau
// at rtol 3e-13. Trains of more than 64 pulses are averaged in between and have a tolerance of their own.
func TestAgainstIntegration(t *testing.T) {
	type tolerance struct{ volts, time float64 } // [V], relative [1]
	tolerances := map[string]tolerance{
		"continuous": {1e-11, 1e-10}, "pulsed": {1e-11, 1e-11}, "averaged": {2e-6, 2e-7}, "reservoir": {1e-11, 2e-10},
	}
	worst, seen := map[string]tolerance{}, map[string]int{}
	for _, r := range readReference(t) {
		var volts, time, wantVolts float64
		kind := r.Kind
		switch r.Kind {
		case "continuous":
			c := r.charge()
			time, volts, wantVolts = c.Time(r.Target), c.Reached(r.At), r.Expected.Reached
		case "pulsed":
			c := r.charge()
			var n int
			time, n = c.PulsedTime(r.Width, r.Period, r.Target)
			volts, wantVolts = c.PulsedReached(r.Width, r.Period, r.At), r.Expected.Reached
			if n != r.Expected.Pulses {
				t.Errorf("%s: %d pulses, want %d", r.Name, n, r.Expected.Pulses)
			}
			if n > 64 || r.At > 64*r.Period {
				kind = "averaged"
			}
		case "reservoir":
			v := startup.Reservoir{
				Element: r.element(), Bootstrap: r.Bootstrap, Reservoir: r.Reservoir, Count: r.Count, Supply: r.Supply,
				Initial: r.Initial, Load: r.Load, SupplyCurrent: r.SupplyCurrent,
			}
			time, volts, wantVolts = v.LowestTime(), v.Lowest(), r.Expected.Lowest
		default:
			t.Fatalf("%s is %q", r.Name, r.Kind)
		}
		seen[kind]++
		dv, dt := math.Abs(volts-wantVolts), math.Abs(time-r.Expected.Time)
		if r.Expected.Time > 0 {
			dt /= r.Expected.Time
		}
		if limit := tolerances[kind]; !(dv <= limit.volts) || !(dt <= limit.time) {
			t.Errorf("%s: %.12g V, want %.12g, off by %.2g; %.12g s, want %.12g, off by %.2g", r.Name, volts, wantVolts, dv, time, r.Expected.Time, dt)
		}
		w := worst[kind]
		worst[kind] = tolerance{math.Max(w.volts, dv), math.Max(w.time, dt)}
	}
	for kind, n := range map[string]int{"continuous": 16, "pulsed": 8, "averaged": 12, "reservoir": 24} {
		if seen[kind] < n {
			t.Errorf("%d cases %s", seen[kind], kind)
		}
		t.Logf("%s: %d cases, largest differences %.2g V, %.2g of the time", strings.ToUpper(kind[:1])+kind[1:], seen[kind], worst[kind].volts, worst[kind].time)
	}
}
