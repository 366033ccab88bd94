package telemetry

import (
	"strings"

	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
	"floatrail/calc/study"
)

// undeclared is the field label of a path that the contract does not have.
const undeclared = "other"

// Results of a switching event.
const (
	evaluated = "evaluated"
	open      = "open"
)

// What simulations take.
const (
	runs     = "simulations_total"
	steps    = "simulation_steps_total"
	failures = "simulation_failures_total"
)

// Observe counts what one review found.
func (m *Metrics) Observe(r *finding.Report) {
	m.verdicts.WithLabelValues(r.Verdict.String()).Inc()
	for i := range r.Findings {
		f := &r.Findings[i]
		grade := none
		if f.Severity != stage.NoSeverity {
			grade = f.Severity.String()
		}
		m.findings.WithLabelValues(f.Rule, f.Outcome.String(), grade).Inc()
	}
	for _, field := range m.missingFields(r) {
		m.missing.WithLabelValues(field).Inc()
	}
	if r.Transient != nil {
		for i := range r.Transient.Events {
			result := evaluated
			if r.Transient.Events[i].Reason != "" || len(r.Transient.Events[i].Missing) > 0 {
				result = open
			}
			m.events.WithLabelValues(r.Transient.Events[i].Method, result).Inc()
		}
	}
	m.simulated[runs].Add(float64(r.Simulations))
	m.simulated[steps].Add(float64(r.SimulationSteps))
	m.simulated[failures].Add(float64(r.SimulationFailures))
	for range r.Internal {
		m.Panic(InRule)
	}
}

// Studied counts what one study took.
func (m *Metrics) Studied(r *study.Report) {
	m.draws.Add(float64(r.Draws))
	for range r.Internal {
		m.Panic(InRule)
	}
}

// missingFields are the fields of the contract that the report misses, each value once however many rules need it.
func (m *Metrics) missingFields(r *finding.Report) []string {
	seen := map[string]bool{}
	var fields []string
	for i := range r.Findings {
		for _, path := range r.Findings[i].Missing {
			if !seen[path] {
				seen[path] = true
				fields = append(fields, m.Field(path))
			}
		}
	}
	return fields
}

// Field is the label of a path: without the request's prefix and without indices. What the contract does not declare is `other`, so that
// the labels stay bounded whatever a request says.
func (m *Metrics) Field(path string) string {
	path = stage.Relative(path)
	var b strings.Builder
	for len(path) > 0 {
		before, rest, found := strings.Cut(path, "[")
		b.WriteString(before)
		if !found {
			break
		}
		if _, path, found = strings.Cut(rest, "]"); !found {
			return undeclared
		}
	}
	name := b.String()
	for _, end := range []string{"", ".min", ".max"} { // of a value with one end alone the other is missing
		if declared := strings.TrimSuffix(name, end); m.fields[declared] {
			return declared
		}
	}
	return undeclared
}

// declaredFields are the paths of every member of a stage down to its values, and of the parts, without indices.
func declaredFields() map[string]bool {
	fields := map[string]bool{}
	collect(fields, (*pb.Stage)(nil).ProtoReflect().Descriptor(), "")
	collect(fields, (*pb.Part)(nil).ProtoReflect().Descriptor(), "parts.")
	return fields
}

func collect(fields map[string]bool, md protoreflect.MessageDescriptor, prefix string) {
	for i := range md.Fields().Len() {
		fd := md.Fields().Get(i)
		path := prefix + fd.JSONName()
		fields[path] = true
		if fd.Message() != nil && fd.Message().Name() != "Quantity" {
			collect(fields, fd.Message(), path+".")
		}
	}
}
