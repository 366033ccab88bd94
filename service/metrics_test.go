package main

import (
	"strings"
	"testing"

	"github.com/prometheus/client_golang/prometheus/testutil/promlint"
)

// Everything that is known beforehand is there before the first request.
func TestMetricsExistFromTheStart(t *testing.T) {
	r := start(t, settings(), realHandlers)
	_, data, err := r.get(r.ops + "/metrics")
	if err != nil {
		t.Fatal(err)
	}
	text := string(data)
	for _, want := range []string{
		`floatrail_requests_total{code="OK",method="SizeSupply",transport="rest"} 0`,
		`floatrail_requests_total{code="ResourceExhausted",method="ReviewBoard",transport="grpc"} 0`,
		`floatrail_request_duration_seconds_bucket{method="ReviewStage",le="0.1"} 0`,
		`floatrail_requests_in_flight{method="CheckDutyLimits"} 0`,
		`floatrail_queue_depth{lane="closed_form"} 0`, `floatrail_queue_depth{lane="simulation"} 0`,
		`floatrail_lane_running{lane="closed_form"} 0`, `floatrail_lane_running{lane="simulation"} 0`,
		`floatrail_switching_events_total{method="SIMULATION",result="open"} 0`,
		"floatrail_simulations_total 0", "floatrail_simulation_steps_total 0", "floatrail_simulation_failures_total 0",
		`floatrail_rejections_total{reason="queue_full"} 0`, `floatrail_rejections_total{reason="too_large"} 0`,
		`floatrail_findings_total{outcome="PASS",rule="charge/droop",severity="NONE"} 0`,
		`floatrail_findings_total{outcome="FAIL",rule="diode/reverse-voltage",severity="CRITICAL"} 0`,
		`floatrail_verdicts_total{verdict="INCOMPLETE"} 0`,
		`floatrail_panics_total{place="rule"} 0`, `floatrail_build_info{`, "go_goroutines ", "process_cpu_seconds_total ",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("%s is missing", want)
		}
	}
	problems, err := promlint.New(strings.NewReader(text)).Lint()
	if err != nil || len(problems) > 0 {
		t.Errorf("%v, %v", problems, err)
	}
}

// Requests move the metrics and the log, and nothing of a body gets into either.
func TestMetricsCountAndTellNoNames(t *testing.T) {
	r := start(t, settings(), realHandlers)
	r.post("/v1/reviews", small)
	r.post("/v1/reviews", `{"stage":{"SECRETfield":1,"driver":{"uvloRising":{"typ":"9 SECRET"}}}}`)
	r.post("/v1/SECRET", small)
	for _, c := range []struct {
		want  float64
		name  string
		parts []string
	}{
		{1, "floatrail_requests_total", []string{`method="ReviewStage"`, `transport="rest"`, `code="OK"`}},
		{1, "floatrail_requests_total", []string{`method="ReviewStage"`, `transport="rest"`, `code="InvalidArgument"`}},
		{2, "floatrail_request_duration_seconds_count", []string{`method="ReviewStage"`}},
		{1, "floatrail_http_responses_total", []string{`route="/v1/reviews"`, `status="200"`}},
		{1, "floatrail_http_responses_total", []string{`route="/v1/reviews"`, `status="400"`}},
		{1, "floatrail_http_responses_total", []string{`route="none"`, `status="404"`}},
		{1, "floatrail_verdicts_total", nil},
		{1, "floatrail_findings_total", []string{`rule="charge/lowest-voltage"`, `outcome="MARGINAL"`, `severity="MINOR"`}},
		{1, "floatrail_missing_inputs_total", []string{`field="operatingPoints.loadCurrent"`}},
		{1, "floatrail_missing_inputs_total", []string{`field="bootstrap.capacitor.voltageRating"`}},
		{0, "floatrail_missing_inputs_total", []string{`field="other"`}},
		{0, "floatrail_panics_total", nil},
	} {
		if got := r.metric(c.name, c.parts...); got != c.want {
			t.Errorf("%s%v = %v, want %v", c.name, c.parts, got, c.want)
		}
	}
	_, data, err := r.get(r.ops + "/metrics")
	if err != nil {
		t.Fatal(err)
	}
	for _, secret := range []string{"SECRET", "U77", "held", `"small"`} {
		if strings.Contains(string(data), secret) {
			t.Errorf("the metrics tell %s", secret)
		}
		if strings.Contains(r.log.String(), secret) {
			t.Errorf("the log tells %s:\n%s", secret, r.log)
		}
	}
	if !strings.Contains(r.log.String(), `"msg":"refused","route":"none","status":404`) {
		t.Errorf("log:\n%s", r.log)
	}
	if !strings.Contains(r.log.String(), `"msg":"call","method":"ReviewStage","transport":"rest","code":"OK","duration_ms":`) {
		t.Errorf("log:\n%s", r.log)
	}
}
