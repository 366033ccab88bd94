package main

import (
	"bytes"
	"context"
	"math"
	"net/http"
	"os"
	"slices"
	"strings"
	"testing"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
)

// A request for simulated events is answered over REST with their method, their agreement with the estimates and their waveforms, whose
// extremes are the numbers of the event.
func TestSimulatedEventsOverREST(t *testing.T) {
	r := start(t, settings(), realHandlers)
	data, err := os.ReadFile("../testdata/stages/drive400.json")
	if err != nil {
		t.Fatal(err)
	}
	for path, stress := range map[string]func([]byte) *pb.TransientStressResult{
		"/v1/transient-stress": func(b []byte) *pb.TransientStressResult {
			return parse(t, string(b), new(pb.CheckTransientStressResponse)).GetTransientStress()
		},
		"/v1/reviews": func(b []byte) *pb.TransientStressResult {
			return parse(t, string(b), new(pb.ReviewStageResponse)).GetTransientStress()
		},
	} {
		answer, body := r.post(path, simulated(string(data)))
		if answer.StatusCode != http.StatusOK {
			t.Fatalf("%s: %d %.500s", path, answer.StatusCode, body)
		}
		t.Logf("%s: %d bytes", path, len(body))
		if _, again := r.post(path, simulated(string(data))); !bytes.Equal(body, again) {
			t.Errorf("%s: the same request is answered differently", path)
		}
		s := stress(body)
		if len(s.GetEvents()) == 0 {
			t.Fatalf("%s: no events", path)
		}
		for _, e := range s.GetEvents() {
			checkSimulated(t, e, s.GetWaveforms())
		}
		if n := len(s.GetEvents()); len(s.GetWaveforms()) != 11*n {
			t.Errorf("%s: %d waveforms of %d events", path, len(s.GetWaveforms()), n)
		}
	}
}

// checkSimulated checks one event and its waveforms.
func checkSimulated(t *testing.T, e *pb.TransientEvent, all []*pb.Waveform) {
	t.Helper()
	name := e.GetOperatingPoint() + ", " + e.GetEvent().String()
	if e.GetMethod() != pb.TransientEvent_Method_SIMULATION || e.Reason != nil || len(e.GetMissing()) > 0 {
		t.Errorf("%s: %v, %s, %v", name, e.GetMethod(), e.GetReason(), e.GetMissing())
	}
	if e.GetSteps() < 10 || e.Convergence == nil || e.GetConvergence() < 0 || e.GetConvergence() > 0.05 {
		t.Errorf("%s: %d steps, convergence %v", name, e.GetSteps(), e.Convergence)
	}
	if len(e.GetComparisons()) == 0 {
		t.Errorf("%s: no comparisons", name)
	}
	for _, c := range e.GetComparisons() {
		v, estimate := c.GetSimulated().GetValue(), c.GetEstimated().GetValue()
		if c.GetName() == "" || c.GetSimulated() == nil || c.GetEstimated() == nil || v != 0 && math.Abs(c.GetDifference()-(estimate/v-1)) > 1e-4*(1+math.Abs(estimate/v)) {
			t.Errorf("%s: %v", name, c)
		}
		if f := e.ProtoReflect().Descriptor().Fields().ByJSONName(c.GetName()); f == nil || !e.ProtoReflect().Has(f) {
			t.Errorf("%s: %s is no number of the event", name, c.GetName())
		} else if s := e.ProtoReflect().Get(f).Message().Interface().(*pb.Span); s.GetMin().GetValue() != v && s.GetMax().GetValue() != v {
			t.Errorf("%s: %s %v is no end of %v", name, c.GetName(), v, s)
		}
	}
	extremes := map[string][2]float64{}
	for _, w := range all {
		if !strings.HasPrefix(w.GetName(), name+", ") {
			continue
		}
		if n := len(w.GetTime()); n < 10 || n > 2000 || n != len(w.GetValue()) || w.GetUnit() == "" {
			t.Fatalf("%s: %d times, %d values in %q", w.GetName(), n, len(w.GetValue()), w.GetUnit())
		}
		for i, at := range w.GetTime()[1:] {
			if !(at > w.GetTime()[i]) {
				t.Fatalf("%s: %v after %v", w.GetName(), at, w.GetTime()[i])
			}
		}
		extremes[strings.TrimPrefix(w.GetName(), name+", ")] = [2]float64{slices.Min(w.GetValue()), slices.Max(w.GetValue())}
	}
	const bus = 420 // highest of every operating point [V]
	node, ok := extremes["node"]
	if !ok {
		t.Fatalf("%s: no waveform of the node", name)
	}
	shown := 0
	for _, c := range []struct {
		got  float64
		want *pb.Measure
	}{
		{math.Min(0, node[0]), e.GetNodeMin().GetMin()}, {math.Max(bus, node[1]), e.GetNodeMax().GetMax()},
	} {
		if c.want == nil {
			continue
		}
		if shown++; math.Abs(c.got-c.want.GetValue()) > 1e-6*math.Abs(c.want.GetValue()) {
			t.Errorf("%s: the node goes to %v in a waveform, to %v in the event", name, c.got, c.want.GetValue())
		}
	}
	if shown != 1 {
		t.Errorf("%s: %d extremes of the node", name, shown)
	}
	if pin := e.GetPinMin().GetMin(); pin != nil && extremes["V_S pin"][0] < pin.GetValue()-1e-6*math.Abs(pin.GetValue()) { // whose worst draw is another
		t.Errorf("%s: V_S goes to %v in its waveform, to %v in the event", name, extremes["V_S pin"][0], pin.GetValue())
	}
}

// Without the option the events are estimates, and nothing of a simulation is in the answer.
func TestEventsAreEstimatedUnlessAsked(t *testing.T) {
	r := start(t, settings(), realHandlers)
	request := parse(t, corpus(t)[0], new(pb.CheckTransientStressRequest))
	answer, err := r.client.CheckTransientStress(context.Background(), request)
	if err != nil || len(answer.GetTransientStress().GetEvents()) == 0 {
		t.Fatal(err)
	}
	for _, e := range answer.GetTransientStress().GetEvents() {
		if e.GetMethod() != pb.TransientEvent_Method_ESTIMATE || e.Steps != nil || e.Convergence != nil || len(e.GetComparisons()) > 0 {
			t.Errorf("%v", e)
		}
	}
	if len(answer.GetTransientStress().GetWaveforms()) > 0 {
		t.Error("waveforms of estimates")
	}
	if n := r.metric("floatrail_switching_events_total", `method="ESTIMATE"`, `result="evaluated"`); n != float64(len(answer.GetTransientStress().GetEvents())) {
		t.Errorf("%v estimated events are counted", n)
	}
	request.Options = &pb.Options{Simulate: proto.Bool(true)}
	if answer, err = r.client.CheckTransientStress(context.Background(), request); err != nil || len(answer.GetTransientStress().GetWaveforms()) > 0 {
		t.Errorf("waveforms that were not asked for, or %v", err)
	}
	if n := r.metric("floatrail_simulations_total"); n < float64(len(answer.GetTransientStress().GetEvents())) {
		t.Errorf("%v simulations are counted", n)
	}
	if n := r.metric("floatrail_simulation_steps_total"); n < 20*r.metric("floatrail_simulations_total") {
		t.Errorf("%v steps of simulations are counted", n)
	}
	if n := r.metric("floatrail_switching_events_total", `method="SIMULATION"`); n != float64(len(answer.GetTransientStress().GetEvents())) {
		t.Errorf("%v simulated events are counted", n)
	}
}
