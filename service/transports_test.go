package main

import (
	"bytes"
	"context"
	"net/http"
	"strconv"
	"strings"
	"testing"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/credentials/insecure"
	healthpb "google.golang.org/grpc/health/grpc_health_v1"
	"google.golang.org/grpc/metadata"
	reflectionpb "google.golang.org/grpc/reflection/grpc_reflection_v1"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/wire"
)

// parse reads a request of JSON for the gRPC transport.
func parse[M proto.Message](t testing.TB, body string, m M) M {
	t.Helper()
	var report wire.Report
	wire.NewDecoder().Decode([]byte(body), m, &report)
	if len(report.Faults) > 0 {
		t.Fatal(report.Faults)
	}
	return m
}

// same makes a request many times over both transports and checks that each answer is the same bytes; it returns them.
func same(t *testing.T, r *running, body string, times int) []byte {
	t.Helper()
	ctx := context.Background()
	var first []byte
	check := func(transport string, data []byte) {
		t.Helper()
		if first == nil {
			first = data
		}
		if !bytes.Equal(first, data) {
			t.Fatalf("%s differs:\n%s\n%s", transport, first, data)
		}
	}
	request := parse(t, body, new(pb.CheckDutyLimitsRequest))
	for range times {
		answer, data := r.post("/v1/duty-limits", body)
		if answer.StatusCode != http.StatusOK || answer.ContentLength != int64(len(data)) {
			t.Fatalf("%d, Content-Length %d of %d: %s", answer.StatusCode, answer.ContentLength, len(data), data)
		}
		check("REST", data)
		message, err := r.client.CheckDutyLimits(ctx, request)
		if err != nil {
			t.Fatal(err)
		}
		data, err = wire.Marshal(message)
		if err != nil {
			t.Fatal(err)
		}
		check("gRPC", data)
	}
	return first
}

func TestAnswersNeverVary(t *testing.T) {
	r := start(t, settings(), realHandlers)
	first := same(t, r, small, 1000)
	full := corpus(t)[0]
	firstFull := same(t, r, full, 2)
	if err := r.stop(); err != nil {
		t.Fatal(err)
	}
	again := start(t, settings(), realHandlers)
	if !bytes.Equal(first, same(t, again, small, 1)) || !bytes.Equal(firstFull, same(t, again, full, 1)) {
		t.Error("another answer after a restart")
	}
	if !bytes.Contains(first, []byte(`"text":"8.969 V"`)) {
		t.Errorf("the lowest V_BS of the held-on case is missing: %s", first)
	}
}

func TestEveryRoute(t *testing.T) {
	r := start(t, settings(), realHandlers)
	for _, c := range []struct {
		method, path, contentType, body string
		status                          int
		header, value, contains         string
	}{
		{"POST", "/v1/sizing", "application/json", small, 200, "Cache-Control", "no-store", `"sizing":`},
		{"POST", "/v1/duty-limits", "application/json; charset=UTF-8", small, 200, "", "", `"dutyLimits":`},
		{"POST", "/v1/reviews", "application/json", small, 200, "", "", `"verdict":`},
		{"GET", "/v1/rules", "", "", 200, "", "", `"charge/droop"`},
		{"GET", "/v1/rules?families=duty&families=gate", "", "", 200, "", "", `"duty/largest-duty"`},
		{"GET", "/v1/rules?familys=duty", "", "", 400, "", "", `the nearest is families`},
		{"GET", "/v1/rules?families=%zz", "", "", 400, "", "", `malformed query`},
		{"GET", "/v1/rules?families=dutty", "", "", 400, "", "", `"field":"families[0]"`},
		{"GET", "/v1/rules/charge/droop", "", "", 200, "", "", `"severityFail":"MAJOR"`},
		{"GET", "/v1/rules/charge/droop?id=x", "", "", 400, "", "", `unknown parameter`},
		{"GET", "/v1/rules/charge/drop", "", "", 404, "", "", `the nearest is \"charge/droop\"`},
		{"HEAD", "/v1/rules", "", "", 200, "Content-Type", "application/json", ""},
		{"OPTIONS", "/v1/sizing", "", "", 204, "Allow", "POST, OPTIONS", ""},
		{"POST", "/v1/sizing?x=1", "application/json", small, 400, "", "", `unknown parameter, expected none`},
		{"GET", "/v1/sizing", "", "", 405, "Allow", "POST, OPTIONS", `"code":12`},
		{"DELETE", "/v1/rules", "", "", 405, "Allow", "GET, HEAD, OPTIONS", `"code":12`},
		{"GET", "/", "", "", 404, "", "", `"code":5`},
		{"POST", "/v2/sizing", "application/json", small, 404, "", "", `"code":5`},
		{"POST", "/v1/sizing", "", small, 415, "", "", `expected application/json`},
		{"POST", "/v1/sizing", "application/x-www-form-urlencoded", small, 415, "", "", `expected application/json`},
		{"POST", "/v1/sizing", "application/json; charset=latin1", small, 415, "", "", `expected utf-8`},
		{"POST", "/v1/transient-stress", "application/json", small, 200, "", "", `"event":"TURN_OFF"`},
		{"POST", "/v1/board-reviews", "application/json", `{}`, 501, "", "", `ReviewBoard`},
		{"POST", "/v1/revision-comparisons", "application/json", `{}`, 501, "", "", `CompareRevisions`},
		{"POST", "/v1/alternate-studies", "application/json", `{}`, 501, "", "", `StudyAlternates`},
		{"POST", "/v1/tolerance-studies", "application/json", `{}`, 400, "", "", `"field":"stage"`},
		{"POST", "/v1/data-gaps", "application/json", `{}`, 501, "", "", `ListDataGaps`},
	} {
		answer, data, err := r.do(c.method, r.http+c.path, c.contentType, strings.NewReader(c.body))
		if err != nil {
			t.Fatal(err)
		}
		if answer.StatusCode != c.status || !strings.Contains(string(data), c.contains) || c.header != "" && answer.Header.Get(c.header) != c.value {
			t.Errorf("%s %s: %d %v %s", c.method, c.path, answer.StatusCode, answer.Header, data)
		}
		if kind := answer.Header.Get("Content-Type"); c.status != 204 && kind != "application/json" {
			t.Errorf("%s %s: Content-Type %q", c.method, c.path, kind)
		}
	}
}

func TestOperations(t *testing.T) {
	r := start(t, settings(), realHandlers)
	for path, want := range map[string]string{"/livez": "alive", "/readyz": "ready", "/buildinfo": `"ruleSet":"`, "/metrics": "floatrail_build_info{"} {
		if status, data, err := r.get(r.ops + path); err != nil || status != 200 || !strings.Contains(string(data), want) {
			t.Errorf("%s: %d %s %v", path, status, data, err)
		}
	}
}

func TestHealthAndReflection(t *testing.T) {
	r := start(t, settings(), realHandlers)
	conn, err := grpc.NewClient(r.grpc, grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = conn.Close() }()
	ctx := context.Background()
	for _, service := range []string{"", pb.FloatRail_ServiceDesc.ServiceName} {
		h, err := healthpb.NewHealthClient(conn).Check(ctx, &healthpb.HealthCheckRequest{Service: service})
		if err != nil || h.GetStatus() != healthpb.HealthCheckResponse_SERVING {
			t.Errorf("%q: %v, %v", service, h, err)
		}
	}
	s, err := reflectionpb.NewServerReflectionClient(conn).ServerReflectionInfo(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if err := s.Send(&reflectionpb.ServerReflectionRequest{MessageRequest: &reflectionpb.ServerReflectionRequest_ListServices{}}); err != nil {
		t.Fatal(err)
	}
	if answer, err := s.Recv(); err != nil || !strings.Contains(answer.String(), pb.FloatRail_ServiceDesc.ServiceName) {
		t.Errorf("%v, %v", answer, err)
	}
}

func TestRequestID(t *testing.T) {
	r := start(t, settings(), realHandlers)
	for given, kept := range map[string]bool{"ci/run-7:3": true, "": false, "two words": false, strings.Repeat("x", 129): false, `"}{"level":"FAKE"`: false} {
		q, _ := http.NewRequest(http.MethodGet, r.http+"/v1/rules/charge/droop", nil)
		q.Header.Set("X-Request-Id", given)
		a, err := http.DefaultClient.Do(q)
		if err != nil {
			t.Fatal(err)
		}
		_ = a.Body.Close()
		if got := a.Header.Get("X-Request-Id"); (got == given) != kept || got == "" {
			t.Errorf("%q: answered %q", given, got)
		}
	}
	var header metadata.MD
	ctx := metadata.AppendToOutgoingContext(context.Background(), "x-request-id", "bot-42")
	if _, err := r.client.GetRule(ctx, &pb.GetRuleRequest{Id: proto.String("charge/droop")}, grpc.Header(&header)); err != nil || header.Get("x-request-id")[0] != "bot-42" {
		t.Errorf("%v, %v", header, err)
	}
	if log := r.log.String(); !strings.Contains(log, `"request_id":"ci/run-7:3"`) || !strings.Contains(log, `"request_id":"bot-42"`) || strings.Contains(log, "FAKE") {
		t.Errorf("log:\n%s", log)
	}
}

func TestRulesOverGRPC(t *testing.T) {
	r := start(t, settings(), realHandlers)
	ctx := context.Background()
	all, err := r.client.ListRules(ctx, &pb.ListRulesRequest{})
	if err != nil || len(all.GetRules()) < 20 {
		t.Fatalf("%v, %v", all, err)
	}
	duty, err := r.client.ListRules(ctx, &pb.ListRulesRequest{Families: []string{"duty"}})
	if err != nil || len(duty.GetRules()) == 0 || len(duty.GetRules()) >= len(all.GetRules()) {
		t.Errorf("%d rules, %v", len(duty.GetRules()), err)
	}
	for i, rule := range all.GetRules() {
		one, err := r.client.GetRule(ctx, &pb.GetRuleRequest{Id: rule.Id})
		if err != nil || !proto.Equal(one.GetRule(), rule) {
			t.Errorf("%d %s: %v, %v", i, rule.GetId(), one, err)
		}
	}
	for id, code := range map[string]codes.Code{"": codes.InvalidArgument, "charge": codes.NotFound, "charge/" + strconv.Itoa(1): codes.NotFound} {
		if _, err := r.client.GetRule(ctx, &pb.GetRuleRequest{Id: proto.String(id)}); status.Code(err) != code {
			t.Errorf("%q: %v", id, err)
		}
	}
}
