// Package telemetry is what an operator sees of the service: metrics in one registry that is handed in, and one structured log line per
// call. Neither ever carries a reference designator, a part number, the name of a stage or anything else of a body.
package telemetry

import (
	"runtime"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"google.golang.org/grpc/codes"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
)

// Reasons for which work is rejected.
const (
	QueueFull = "queue_full" // as many wait already as may
	TooLarge  = "too_large"  // the request is larger than permitted
)

// Places in which a panic was caught.
const (
	InCall = "call" // a call was answered INTERNAL
	InRule = "rule" // one rule was left open
)

// Lanes of work.
const (
	ClosedForm = "closed_form"
	Simulation = "simulation"
)

// Build is what was built.
type Build struct {
	Version  string `json:"version"`
	Revision string `json:"revision,omitempty"`
	Go       string `json:"goVersion"`
	RuleSet  string `json:"ruleSet"`
}

// Metrics are the collectors of the service.
type Metrics struct {
	requests   *prometheus.CounterVec
	duration   *prometheus.HistogramVec
	inFlight   *prometheus.GaugeVec
	responses  *prometheus.CounterVec
	queue      *prometheus.GaugeVec
	running    *prometheus.GaugeVec
	rejections *prometheus.CounterVec
	findings   *prometheus.CounterVec
	verdicts   *prometheus.CounterVec
	missing    *prometheus.CounterVec
	panics     *prometheus.CounterVec
	events     *prometheus.CounterVec
	draws      prometheus.Counter
	simulated  map[string]prometheus.Counter
	fields     map[string]bool // of the contract, by which missing inputs are counted
}

// Transports by which a call comes in.
const (
	REST = "rest"
	GRPC = "grpc"
)

// New registers the metrics. Every combination of labels that is known beforehand exists from the start, at zero, so that rates are right
// from the first event on.
func New(registry prometheus.Registerer, build Build, rules []*pb.Rule) *Metrics {
	counter := func(name, help string, labels ...string) *prometheus.CounterVec {
		v := prometheus.NewCounterVec(prometheus.CounterOpts{Namespace: "floatrail", Name: name, Help: help}, labels)
		registry.MustRegister(v)
		return v
	}
	gauge := func(name, help string, labels ...string) *prometheus.GaugeVec {
		v := prometheus.NewGaugeVec(prometheus.GaugeOpts{Namespace: "floatrail", Name: name, Help: help}, labels)
		registry.MustRegister(v)
		return v
	}
	m := &Metrics{
		requests:   counter("requests_total", "Calls answered, by method, transport and status code.", "method", "transport", "code"),
		inFlight:   gauge("requests_in_flight", "Calls being answered.", "method"),
		responses:  counter("http_responses_total", "HTTP responses of the REST interface, by route and status.", "route", "status"),
		queue:      gauge("queue_depth", "Calls waiting for a processor, by lane.", "lane"),
		running:    gauge("lane_running", "Calls that occupy a processor, by lane.", "lane"),
		rejections: counter("rejections_total", "Calls rejected before any work, by reason.", "reason"),
		findings:   counter("findings_total", "Findings, by rule, outcome and severity (NONE: it has none).", "rule", "outcome", "severity"),
		verdicts:   counter("verdicts_total", "Stages judged, by verdict.", "verdict"),
		missing:    counter("missing_inputs_total", "Values that were not given and left a rule open, by field of the contract.", "field"),
		panics:     counter("panics_total", "Panics caught, by place.", "place"),
		events:     counter("switching_events_total", "Switching events in answers, by method and by whether they could be evaluated.", "method", "result"),
		fields:     declaredFields(),
	}
	m.draws = counter("study_draws_total", "Draws of tolerance studies that were finished.").WithLabelValues()
	m.simulated = map[string]prometheus.Counter{}
	for name, help := range map[string]string{
		runs: "Switching events simulated, those that only a search looked at included.", steps: "Steps of the integrator in simulated switching events.",
		failures: "Simulated switching events that did not converge.",
	} {
		m.simulated[name] = counter(name, help).WithLabelValues()
	}
	m.duration = prometheus.NewHistogramVec(prometheus.HistogramOpts{Namespace: "floatrail", Name: "request_duration_seconds",
		Help:    "Time from the arrival of a call to its answer, waiting included.",
		Buckets: []float64{.0005, .001, .0025, .005, .01, .025, .05, .1, .25, .5, 1, 2.5, 5, 10}}, []string{"method"})
	registry.MustRegister(m.duration, collectors.NewGoCollector(), collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}))
	gauge("build_info", "What was built; always 1.", "version", "revision", "goversion", "rule_set").
		WithLabelValues(build.Version, build.Revision, build.Go, build.RuleSet).Set(1)
	m.prepare(rules)
	return m
}

// prepare makes the known combinations of labels.
func (m *Metrics) prepare(rules []*pb.Rule) {
	for _, method := range pb.FloatRail_ServiceDesc.Methods {
		m.prepareMethod(method.MethodName)
	}
	for _, stream := range pb.FloatRail_ServiceDesc.Streams {
		m.prepareMethod(stream.StreamName)
	}
	for _, reason := range []string{QueueFull, TooLarge} {
		m.rejections.WithLabelValues(reason)
	}
	for _, method := range []string{finding.Estimate, finding.Simulation} {
		m.events.WithLabelValues(method, evaluated)
		m.events.WithLabelValues(method, open)
	}
	for _, place := range []string{InCall, InRule} {
		m.panics.WithLabelValues(place)
	}
	for _, v := range []pb.Verdict_Value{pb.Verdict_PASS, pb.Verdict_FAIL, pb.Verdict_INCOMPLETE} {
		m.verdicts.WithLabelValues(v.String())
	}
	for _, r := range rules {
		m.findings.WithLabelValues(r.GetId(), pb.Outcome_PASS.String(), none)
		m.findings.WithLabelValues(r.GetId(), pb.Outcome_NOT_APPLICABLE.String(), none)
		m.findings.WithLabelValues(r.GetId(), pb.Outcome_FAIL.String(), severity(r.GetSeverityFail()))
		m.findings.WithLabelValues(r.GetId(), pb.Outcome_MARGINAL.String(), severity(r.GetSeverityMarginal()))
		m.findings.WithLabelValues(r.GetId(), pb.Outcome_OPEN.String(), severity(r.GetSeverityOpen()))
	}
}

func (m *Metrics) prepareMethod(method string) {
	m.duration.WithLabelValues(method)
	m.inFlight.WithLabelValues(method)
	for _, transport := range []string{REST, GRPC} {
		for _, code := range []codes.Code{codes.OK, codes.InvalidArgument, codes.ResourceExhausted, codes.DeadlineExceeded, codes.Canceled, codes.Internal,
			codes.Unimplemented} {
			m.requests.WithLabelValues(method, transport, code.String())
		}
	}
}

// none is the severity label of findings without a severity.
const none = "NONE"

func severity(s pb.Severity_Value) string {
	if s == pb.Severity_UNSPECIFIED {
		return none
	}
	return s.String()
}

// Reject counts a call that was rejected.
func (m *Metrics) Reject(reason string) { m.rejections.WithLabelValues(reason).Inc() }

// Panic counts a panic that was caught.
func (m *Metrics) Panic(place string) { m.panics.WithLabelValues(place).Inc() }

// Queue returns what notes how many calls of a lane wait and how many run.
func (m *Metrics) Queue(lane string) func(waiting, running int) {
	depth, places := m.queue.WithLabelValues(lane), m.running.WithLabelValues(lane)
	return func(waiting, running int) {
		depth.Set(float64(waiting))
		places.Set(float64(running))
	}
}

// Response counts an HTTP response.
func (m *Metrics) Response(route, status string) { m.responses.WithLabelValues(route, status).Inc() }

// GoVersion is the version of the toolchain that built the program.
func GoVersion() string { return runtime.Version() }
