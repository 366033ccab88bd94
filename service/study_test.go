package main

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"io"
	"net/http"
	"os"
	"runtime"
	"slices"
	"strings"
	"testing"
	"time"

	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
)

// studyBody is the request of a demo stage with further members.
func studyBody(t testing.TB, members string) string {
	t.Helper()
	data, err := os.ReadFile("../testdata/stages/buck48.json")
	if err != nil {
		t.Fatal(err)
	}
	body := strings.TrimSpace(string(data))
	return strings.TrimSuffix(body, "}") + "," + members + "}"
}

// study asks for a study over REST and returns its lines.
func (r *running) study(body string) (status int, contentType string, lines [][]byte) {
	r.t.Helper()
	a, data, err := r.do(http.MethodPost, r.http+"/v1/tolerance-studies", "application/json", strings.NewReader(body))
	if err != nil {
		r.t.Fatal(err)
	}
	return a.StatusCode, a.Header.Get("Content-Type"), bytes.Split(bytes.TrimSuffix(data, []byte("\n")), []byte("\n"))
}

// A study is a stream of progress and then the study, over REST line by line and over gRPC with the same messages; the same request has the same
// bytes, whatever the number of processors.
func TestStudyOnBothTransports(t *testing.T) {
	r := start(t, settings(), realHandlers)
	body := studyBody(t, `"draws":200,"seed":4,"distribution":"NORMAL"`)
	code, kind, lines := r.study(body)
	if code != http.StatusOK || kind != "application/x-ndjson" || len(lines) < 4 {
		t.Fatalf("%d %s, %d lines, %.300s", code, kind, len(lines), lines[0])
	}
	before := runtime.GOMAXPROCS(1)
	_, _, again := r.study(body)
	runtime.GOMAXPROCS(before)
	if !slices.EqualFunc(lines, again, bytes.Equal) {
		t.Error("the same request is answered differently by one processor")
	}
	request := new(pb.StudyTolerancesRequest)
	if err := protojson.Unmarshal([]byte(body), request); err != nil {
		t.Fatal(err)
	}
	stream, err := r.client.StudyTolerances(context.Background(), request)
	if err != nil {
		t.Fatal(err)
	}
	done := uint32(0)
	for i, line := range lines {
		message, err := stream.Recv()
		if err != nil {
			t.Fatal(err)
		}
		var wrapped struct{ Result json.RawMessage }
		if err := json.Unmarshal(line, &wrapped); err != nil {
			t.Fatal(err)
		}
		overREST := new(pb.StudyTolerancesResponse)
		if err := protojson.Unmarshal(wrapped.Result, overREST); err != nil {
			t.Fatal(err)
		}
		if !proto.Equal(message, overREST) {
			t.Errorf("message %d differs between the transports", i)
		}
		last := i == len(lines)-1
		if message.GetDraws() != 200 || message.GetSeed() != 4 || message.GetDistribution() != pb.StudyTolerancesRequest_Distribution_NORMAL ||
			message.GetStageId() == "" || message.GetEngine() == nil || message.Within == nil {
			t.Errorf("message %d: %.300v", i, message)
		}
		if !last && (message.GetDone() <= done || message.Overall != nil) || last && message.GetDone() != 200 {
			t.Errorf("message %d of %d: %d draws done after %d", i, len(lines), message.GetDone(), done)
		}
		done = message.GetDone()
		if last {
			checkStudy(t, message)
		}
	}
	if _, err := stream.Recv(); !errors.Is(err, io.EOF) {
		t.Errorf("after the study: %v", err)
	}
	if n := r.metric("floatrail_study_draws_total"); n != 600 {
		t.Errorf("%v draws are counted, want 600", n)
	}
}

// checkStudy checks that nothing is missing in a study and that its numbers agree with each other.
func checkStudy(t *testing.T, m *pb.StudyTolerancesResponse) {
	t.Helper()
	o := m.GetOverall()
	if o.GetWithin()+o.GetFailed()+o.GetOpen() != 200 || o.Share == nil || !(o.GetInterval().GetLow() <= o.GetShare() && o.GetShare() <= o.GetInterval().GetHigh()) {
		t.Errorf("overall %v", o)
	}
	if !strings.Contains(m.GetNote(), "decides nothing that extreme values decide") || m.GetCaution() == "" ||
		len(m.GetReadings()) == 0 || !slices.Equal(m.GetPercents(), []float64{1, 5, 50, 95, 99}) || m.GetConfidence() != 0.95 {
		t.Errorf("note %q, %d readings, percents %v", m.GetNote(), len(m.GetReadings()), m.GetPercents())
	}
	if len(m.GetYields()) < 100 {
		t.Errorf("%d yields", len(m.GetYields()))
	}
	ranked := 0
	for _, y := range m.GetYields() {
		name := y.GetRule() + " " + y.GetRole() + " at " + y.GetOperatingPoint()
		if y.GetPassed()+y.GetMarginal()+y.GetFailed()+y.GetOpen() != 200 || y.GetShare() != float64(y.GetPassed()+y.GetMarginal())/200 ||
			y.GetGuardShare() != float64(y.GetPassed())/200 || y.Interval == nil || y.GuardInterval == nil {
			t.Errorf("%s: %v", name, y)
		}
		if y.GetExtreme().GetOutcome() == pb.Outcome_UNSPECIFIED || y.GetOpen() == 0 && (len(y.GetPercentiles()) != 5 || len(y.GetPercentileIntervals()) != 5) {
			t.Errorf("%s: extreme %v, percentiles %v", name, y.GetExtreme(), y.GetPercentiles())
		}
		below := y.GetSmallest().GetValue()
		for i, p := range y.GetPercentiles() {
			w := y.GetPercentileIntervals()[i]
			if p.GetValue() < below || w.Low != nil && w.GetLow().GetValue() > p.GetValue() || w.High != nil && w.GetHigh().GetValue() < p.GetValue() {
				t.Errorf("%s: percentile %d is %v in %v", name, i, p, w)
			}
			below = p.GetValue()
		}
		if len(y.GetRanking()) > 10 {
			t.Errorf("%s: %d inputs are ranked", name, len(y.GetRanking()))
		}
		least := 1.0
		for _, c := range y.GetRanking() {
			ranked++
			if rho := c.GetRho(); c.GetField() == "" || rho*rho > least+1e-6 || c.GetSquared() > rho*rho+1e-5 {
				t.Errorf("%s: ranking %v", name, y.GetRanking())
			}
			least = c.GetSquared()
		}
	}
	if ranked < 200 {
		t.Errorf("only %d inputs are ranked", ranked)
	}
}

// All faults of a request for a study are told at once, on both transports alike, each with what was read and expected.
func TestStudyFaults(t *testing.T) {
	r := start(t, settings(), realHandlers)
	many := make([]string, 64)
	for i := range many {
		many[i] = `{"name":"p` + strings.Repeat("x", i) + `","fixedDuty":{}}`
	}
	for _, c := range []struct {
		name, body string
		want       []string // beginnings
		rest       bool     // no message can carry it
	}{
		{"no stage", `{}`, []string{"stage: read nothing"}, false},
		{"no draw", studyBody(t, `"draws":0`), []string{"draws: read 0, expected a number of draws from 1 to 100000"}, false},
		{"too many", studyBody(t, `"draws":100001`), []string{"draws: read 100001, expected a number of draws from 1 to 100000"}, false},
		{"too much work", `{"stage":{"id":"a","operatingPoints":[` + strings.Join(many, ",") + `]},"draws":4688}`,
			[]string{"draws: read 4688, expected a number of draws from 1 to 4687: the stage has 64 operating points"}, false},
		{"all at once", studyBody(t, `"draws":0,"distribution":9,"options":{"simulate":true,"fixes":true,"families":["dutty"]},"policy":{"failAt":7}`),
			[]string{"draws: read 0", `distribution: read the number 9, expected one of UNIFORM, NORMAL`, "options.families[0]: ",
				"options.simulate: read true; a study draws closed forms alone", "options.fixes: read true", "policy.failAt: "}, false},
		{"negative", studyBody(t, `"draws":-1`), []string{"draws: "}, true},
		{"unknown", studyBody(t, `"drawz":5,"options":{"seeds":1}`), []string{"drawz: ", "options.seeds: "}, true},
	} {
		a, data, err := r.do(http.MethodPost, r.http+"/v1/tolerance-studies", "application/json", strings.NewReader(c.body))
		if err != nil {
			t.Fatal(err)
		}
		overREST := violations(t, restError(t, data))
		if a.StatusCode != http.StatusBadRequest || a.Header.Get("Content-Type") != "application/json" {
			t.Errorf("%s: %d %s", c.name, a.StatusCode, a.Header.Get("Content-Type"))
		}
		complete(t, c.name, overREST, c.want)
		if c.rest {
			continue
		}
		request := new(pb.StudyTolerancesRequest)
		if err := protojson.Unmarshal([]byte(c.body), request); err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		stream, err := r.client.StudyTolerances(context.Background(), request)
		if err == nil {
			_, err = stream.Recv()
		}
		if status.Code(err) != codes.InvalidArgument {
			t.Errorf("%s: %v", c.name, err)
		}
		complete(t, c.name, violations(t, err), c.want)
	}
}

// complete demands faults that begin as wanted, no more and no fewer.
func complete(t *testing.T, name string, got, want []string) {
	t.Helper()
	for _, w := range want {
		if !slices.ContainsFunc(got, func(g string) bool { return strings.HasPrefix(g, w) }) {
			t.Errorf("%s: no fault %q in %q", name, w, got)
		}
	}
	if len(got) != len(want) {
		t.Errorf("%s: %d faults, want %d: %q", name, len(got), len(want), got)
	}
}

// A client that leaves, and a deadline, end the study: its lane is free within 100 ms, races and busy machines apart.
func TestStudyStops(t *testing.T) {
	r := start(t, settings(), realHandlers)
	request := new(pb.StudyTolerancesRequest)
	if err := protojson.Unmarshal([]byte(studyBody(t, `"draws":100000`)), request); err != nil {
		t.Fatal(err)
	}
	for name, c := range map[string]struct {
		context func() (context.Context, context.CancelFunc)
		code    codes.Code
	}{
		"cancel": {func() (context.Context, context.CancelFunc) { return context.WithCancel(context.Background()) }, codes.Canceled},
		"deadline": {func() (context.Context, context.CancelFunc) {
			return context.WithTimeout(context.Background(), time.Second)
		}, codes.DeadlineExceeded},
	} {
		ctx, cancel := c.context()
		stream, err := r.client.StudyTolerances(ctx, request)
		if err != nil {
			t.Fatal(err)
		}
		begin := time.Now()
		if first, err := stream.Recv(); err != nil || first.GetDone() == 0 || time.Since(begin) > time.Second*slowdown {
			t.Errorf("%s: first progress %v after %v, %v", name, first.GetDone(), time.Since(begin), err)
		}
		ended := time.Now()
		if c.code == codes.Canceled {
			cancel()
		} else {
			ended = begin.Add(time.Second)
		}
		for err == nil {
			_, err = stream.Recv()
		}
		if status.Code(err) != c.code {
			t.Errorf("%s: %v", name, err)
		}
		within(t, 5*time.Second, name+": the place is free", func() bool { return r.metric("floatrail_lane_running", `lane="simulation"`) == 0 })
		if took := time.Since(ended); took > 100*time.Millisecond*slowdown {
			t.Errorf("%s: the study ran on for %v", name, took)
		}
		cancel()
	}
}

// Over REST a deadline ends the lines with an error, and a client that hangs up ends the study.
func TestStudyStopsOverREST(t *testing.T) {
	c := settings()
	c.Deadline = time.Second
	r := start(t, c, realHandlers)
	body := studyBody(t, `"draws":100000`)
	code, kind, lines := r.study(body)
	last := lines[len(lines)-1]
	if code != http.StatusOK || kind != "application/x-ndjson" || len(lines) < 2 || !bytes.HasPrefix(last, []byte(`{"error":{"code":4,`)) {
		t.Errorf("%d %s, %d lines, the last one %.300s", code, kind, len(lines), last)
	}
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	request, err := http.NewRequestWithContext(ctx, http.MethodPost, r.http+"/v1/tolerance-studies", strings.NewReader(body))
	if err != nil {
		t.Fatal(err)
	}
	request.Header.Set("Content-Type", "application/json")
	answer, err := (&http.Client{Transport: r.transport}).Do(request)
	if err != nil {
		t.Fatal(err)
	}
	first := make([]byte, 64)
	if _, err := io.ReadFull(answer.Body, first); err != nil || !bytes.HasPrefix(first, []byte(`{"result":{"engine":`)) {
		t.Errorf("first line %q, %v", first, err)
	}
	cancel()
	_ = answer.Body.Close()
	hungUp := time.Now()
	within(t, 5*time.Second, "the place is free", func() bool { return r.metric("floatrail_lane_running", `lane="simulation"`) == 0 })
	if took := time.Since(hungUp); took > 100*time.Millisecond*slowdown {
		t.Errorf("the study ran on for %v", took)
	}
	within(t, 5*time.Second, "both calls are counted", func() bool {
		return r.metric("floatrail_requests_total", `method="StudyTolerances"`, `transport="rest"`, `code="Canceled"`) == 1 &&
			r.metric("floatrail_requests_total", `method="StudyTolerances"`, `transport="rest"`, `code="DeadlineExceeded"`) == 1
	})
}
