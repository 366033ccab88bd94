package recharge

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

type referenceInterval struct {
	Duration, Drive, Load, Conductance float64
	Conducts                           bool
}

type referenceCase struct {
	Name    string
	Element struct {
		Slope         float64
		LogSaturation float64 `json:"log_saturation"`
		Resistance    float64
		Switch        bool
	}
	Capacitance, Charge, Return, Start, Lockout float64

	ChargePerVolt float64 `json:"charge_per_volt"`
	RecoverySpec  float64 `json:"recovery_spec"`
	RecoveryTau   float64 `json:"recovery_tau"`
	On            referenceInterval
	Off           []referenceInterval
	Expected      struct {
		Collapses                          bool
		Before, After, Low, High, Recovery float64
		Periods                            int
	}
}

func (r referenceCase) period() Period {
	p := Period{
		Element: Element{
			Junction:   Junction{Slope: r.Element.Slope, LogSaturation: r.Element.LogSaturation},
			Resistance: r.Element.Resistance, Switch: r.Element.Switch,
		},
		Capacitance: r.Capacitance, On: r.On.interval(), Charge: r.Charge, ChargePerVolt: r.ChargePerVolt, Return: r.Return,
		RecoverySpec: r.RecoverySpec, RecoveryTau: r.RecoveryTau, Start: r.Start, Lockout: r.Lockout,
	}
	for _, iv := range r.Off {
		p.Off = append(p.Off, iv.interval())
	}
	return p
}

func (r referenceInterval) interval() Interval {
	return Interval{Duration: r.Duration, Drive: r.Drive, Conducts: r.Conducts, Load: r.Load, Conductance: r.Conductance}
}

func readReference(tb testing.TB) (cases []referenceCase) {
	tb.Helper()
	text, err := os.ReadFile("../../testdata/reference/recharge.json")
	if err != nil {
		tb.Fatal(err)
	}
	var doc struct {
		Scipy string
		Cases []referenceCase
	}
	if err := json.Unmarshal(text, &doc); err != nil {
		tb.Fatal(err)
	}
	if doc.Scipy == "" || len(doc.Cases) < 70 {
		tb.Fatalf("SciPy %q, %d cases", doc.Scipy, len(doc.Cases))
	}
	return doc.Cases
}

// Against numerical integration of the differential equation: testdata/reference/recharge.py, SciPy 1.10.1, solve_ivp LSODA at
// rtol 1e-11 and brentq. Its own error, amplified by 1/(1 - slope of the map), stays below 1e-8 V.
func TestSteadyStateAgainstIntegration(t *testing.T) {
	const tolerance = 1e-8 // [V]
	worst, collapsed := 0.0, 0
	for _, r := range readReference(t) {
		p := r.period()
		s := p.SteadyState()
		if !s.Converged || s.Collapses != r.Expected.Collapses {
			t.Errorf("%s: %+v, want collapse %v", r.Name, s, r.Expected.Collapses)
			continue
		}
		if s.Collapses {
			collapsed++
			if s.PeriodsToLockout != r.Expected.Periods {
				t.Errorf("%s: %d periods to lockout, want %d", r.Name, s.PeriodsToLockout, r.Expected.Periods)
			}
			continue
		}
		for _, c := range []struct {
			what      string
			got, want float64
		}{
			{"before edge", s.BeforeEdge, r.Expected.Before}, {"after edge", s.AfterEdge, r.Expected.After},
			{"low", s.Low, r.Expected.Low}, {"high", s.High, r.Expected.High},
			{"recovery", s.Recovery / p.Capacitance, r.Expected.Recovery / p.Capacitance},
		} {
			d := math.Abs(c.got - c.want)
			worst = math.Max(worst, d)
			if !(d <= tolerance) {
				t.Errorf("%s: %s %.10f V, want %.10f, off by %.2g", r.Name, c.what, c.got, c.want, d)
			}
		}
		if s.Iterations > 14 {
			t.Errorf("%s: %d evaluations of the map", r.Name, s.Iterations)
		}
	}
	if collapsed < 5 {
		t.Errorf("only %d collapsing cases", collapsed)
	}
	t.Logf("largest difference %.2g V", worst)
}
