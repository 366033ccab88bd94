package telemetry

import (
	"testing"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/testutil"

	"floatrail/calc/finding"
	"floatrail/calc/stage"
	"floatrail/calc/study"
)

func TestFieldLabelsAreBounded(t *testing.T) {
	m := New(prometheus.NewRegistry(), Build{}, nil)
	for path, want := range map[string]string{
		"stage.operatingPoints[3].deadTime":                "operatingPoints.deadTime",
		"stages[7].driver.uvloRising":                      "driver.uvloRising",
		"stage.highSide.onResistance":                      "highSide.onResistance",
		"stage.bootstrap.capacitor.biasCurve[0].remaining": "bootstrap.capacitor.biasCurve.remaining",
		"stage.driver.nodeUndershoot[0].voltage":           "driver.nodeUndershoot.voltage",
		"driver.uvloRising":                                "driver.uvloRising",
		"parts[2].driver.uvloRising":                       "parts.driver.uvloRising",
		"stage.operatingPoints[\"my part\"].deadTime":      "operatingPoints.deadTime",
		"stage.operatingPoints[3.deadTime":                 "other",
		"stage.driver.U7":                                  "other",
		"stage":                                            "other",
		"":                                                 "other",
		"BSP-1234 on page 7":                               "other",
	} {
		if got := m.Field(path); got != want {
			t.Errorf("Field(%q) = %q, want %q", path, got, want)
		}
	}
	if n := len(m.fields); n < 100 || n > 1000 {
		t.Errorf("%d labels", n)
	}
}

func TestObserve(t *testing.T) {
	m := New(prometheus.NewRegistry(), Build{}, nil)
	m.Observe(&finding.Report{Verdict: finding.Failed, Internal: 2, Transient: &finding.TransientStress{Events: []finding.TransientEvent{
		{Method: finding.Simulation}, {Method: finding.Simulation, Reason: "it did not converge"}, {Method: finding.Estimate},
		{Method: finding.Simulation, Missing: []string{"stage.layout.lowSideInductance"}}, {Method: finding.Simulation},
	}}, Findings: []finding.Finding{
		{Rule: "a/b", Outcome: finding.Fail, Severity: stage.Critical, Missing: []string{"stage.driver.uvloRising"}},
		{Rule: "a/b", Outcome: finding.Pass},
		{Rule: "c/d", Outcome: finding.Open, Severity: stage.Major, Missing: []string{"stage.driver.uvloRising", "stage.operatingPoints[1].deadTime", "stage.operatingPoints[0].deadTime"}},
	}})
	m.Studied(&study.Report{Draws: 700, Internal: 1})
	for _, c := range []struct {
		what string
		got  prometheus.Collector
		want float64
	}{
		{"verdict", m.verdicts.WithLabelValues("FAIL"), 1},
		{"fail", m.findings.WithLabelValues("a/b", "FAIL", "CRITICAL"), 1},
		{"pass", m.findings.WithLabelValues("a/b", "PASS", "NONE"), 1},
		{"open", m.findings.WithLabelValues("c/d", "OPEN", "MAJOR"), 1},
		{"a field once a request", m.missing.WithLabelValues("driver.uvloRising"), 1},
		{"a field of two points", m.missing.WithLabelValues("operatingPoints.deadTime"), 2},
		{"events simulated", m.events.WithLabelValues("SIMULATION", "evaluated"), 2},
		{"simulations that failed", m.events.WithLabelValues("SIMULATION", "open"), 2},
		{"events estimated", m.events.WithLabelValues("ESTIMATE", "evaluated"), 1},
		{"rules that panicked", m.panics.WithLabelValues(InRule), 3},
		{"draws", m.draws, 700},
	} {
		if got := testutil.ToFloat64(c.got); got != c.want {
			t.Errorf("%s: %v, want %v", c.what, got, c.want)
		}
	}
}

func TestFit(t *testing.T) {
	for id, want := range map[string]bool{"a-1_2.3:4/5": true, "": false, "a b": false, "ü": false, "a\n": false, `"`: false} {
		if Fit(id) != want {
			t.Errorf("Fit(%q) = %v", id, !want)
		}
	}
}
