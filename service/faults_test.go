package main

import (
	"context"
	"encoding/json"
	"net/http"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"google.golang.org/genproto/googleapis/rpc/errdetails"
	spb "google.golang.org/genproto/googleapis/rpc/status"
	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/credentials/insecure"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/encoding/protowire"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
)

// violations are the faults of an error as "path: description".
func violations(t testing.TB, err error) []string {
	t.Helper()
	var all []string
	for _, detail := range status.Convert(err).Details() {
		if bad, ok := detail.(*errdetails.BadRequest); ok {
			for _, v := range bad.GetFieldViolations() {
				all = append(all, v.GetField()+": "+v.GetDescription())
			}
		}
	}
	return all
}

// restError reads the error of a REST answer.
func restError(t testing.TB, data []byte) error {
	t.Helper()
	var s spb.Status
	if err := protojson.Unmarshal(data, &s); err != nil {
		t.Fatalf("%s: %v", data, err)
	}
	return status.FromProto(&s).Err()
}

// fields are the paths of violations.
func fields(violations []string) []string {
	var all []string
	for _, v := range violations {
		path, _, _ := strings.Cut(v, ": ")
		all = append(all, path)
	}
	return all
}

// Requests that both transports can carry are refused alike, with every fault at once.
func TestFaultsAreTheSameOnBothTransports(t *testing.T) {
	r := start(t, settings(), realHandlers)
	for _, c := range []struct {
		name, body string
		want       []string
	}{
		{"unit missing", `{"stage":{"driver":{"uvloRising":{"typ":"9"}}}}`, []string{"stage.driver.uvloRising.typ"}},
		{"another dimension", `{"stage":{"driver":{"uvloRising":{"typ":"9 A"}}}}`, []string{"stage.driver.uvloRising.typ"}},
		{"C for nC", `{"stage":{"highSide":{"gateCharge":{"typ":"63 C"}}}}`, []string{"stage.highSide.gateCharge.typ"}},
		{"min above max", `{"stage":{"driver":{"uvloRising":{"min":"9 V","max":"8 V"}}}}`, []string{"stage.driver.uvloRising"}},
		{"NaN", `{"stage":{"driver":{"uvloRising":{"typ":"NaN V"}}}}`, []string{"stage.driver.uvloRising.typ"}},
		{"infinite", `{"stage":{"driver":{"uvloRising":{"typ":"Inf V"}}}}`, []string{"stage.driver.uvloRising.typ"}},
		{"empty text", `{"stage":{"driver":{"floatingVoltageMax":""}}}`, []string{"stage.driver.floatingVoltageMax"}},
		{"values inside NOT_FITTED", `{"stage":{"bootstrap":{"clamp":{"fit":"NOT_FITTED","power":"1 W"}}}}`, []string{"stage.bootstrap.clamp.power"}},
		{"no stage", `{}`, []string{"stage"}},
		{"no mode", `{"stage":{"operatingPoints":[{"name":"a"}]}}`, []string{"stage.operatingPoints[0]"}},
		{"duplicate ids", `{"parts":[{"id":"a","resistor":{}},{"id":"a","resistor":{}}],"stage":{}}`, []string{"parts[1].id"}},
		{"lockout reversed", `{"stage":{"driver":{"uvloRising":{"typ":"8 V 0%"},"uvloFalling":{"typ":"9 V 0%"}}}}`, []string{"stage.driver.uvloFalling"}},
		{"waivers", `{"stage":{},"asOf":"2026-13-01","waivers":[{"identity":"0123456789abcdef0123456789abcdef","reason":"r","approver":"a","expiry":"tomorrow"}]}`,
			[]string{"asOf", "waivers[0].expiry"}},
		{"expiry without asOf", `{"stage":{},"waivers":[{"identity":"0123456789abcdef0123456789abcdef","reason":"r","approver":"a","expiry":"2027-01-31"}]}`,
			[]string{"waivers[0].expiry"}},
		{"options not offered", `{"stage":{},"options":{"fixes":true,"simulate":true,"waveforms":true,"trace":true,"perPoint":true}}`,
			[]string{"options.fixes"}},
		{"waveforms of nothing", `{"stage":{},"options":{"waveforms":true}}`, []string{"options.waveforms"}},
		{"many at once", `{"stage":{"driver":{"uvloRising":{"typ":"9"},"floatingVoltageMax":"18 C"},"operatingPoints":[{"name":"a"}]},"options":{"fixes":true}}`,
			[]string{"stage.driver.uvloRising.typ", "stage.driver.floatingVoltageMax", "stage.operatingPoints[0]", "options.fixes"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			answer, data := r.post("/v1/reviews", c.body)
			rest := violations(t, restError(t, data))
			if answer.StatusCode != http.StatusBadRequest {
				t.Fatalf("%d %s", answer.StatusCode, data)
			}
			_, err := r.client.ReviewStage(context.Background(), parse(t, c.body, new(pb.ReviewStageRequest)))
			if status.Code(err) != codes.InvalidArgument {
				t.Fatal(err)
			}
			if diff := cmp.Diff(rest, violations(t, err)); diff != "" {
				t.Errorf("REST and gRPC differ:\n%s", diff)
			}
			if diff := cmp.Diff(c.want, fields(rest)); diff != "" {
				t.Errorf("%s\n%s", diff, strings.Join(rest, "\n"))
			}
			if status.Convert(err).Message() != status.Convert(restError(t, data)).Message() {
				t.Error("messages differ")
			}
		})
	}
	if answer, _ := r.post("/v1/reviews", small); answer.StatusCode != http.StatusOK {
		t.Error("the service no longer answers")
	}
}

// What only JSON can get wrong is told together with what is wrong with the values.
func TestFaultsOfBodies(t *testing.T) {
	r := start(t, settings(), realHandlers)
	for _, c := range []struct {
		name, body string
		want       []string
	}{
		{"body and values", `{"stage":{"id":"a","drvier":{},"driver":{"uvloRising":{"typ":9},"uvloFalling":{"typ":"8 C"},"uvloFalling":{}},
			"operatingPoints":[{"name":"p","fixedDtuy":{}},{"name":"q","switchingFrequency":{"typ":"1 MHz"},"deadTime":{"typ":"1 F"},"fixedDuty":null}]},"options":{"fixes":true}}`,
			[]string{"stage.drvier", "stage.driver.uvloRising.typ", "stage.driver.uvloFalling", "stage.operatingPoints[0].fixedDtuy", "stage.operatingPoints[1].fixedDuty",
				"stage.driver.uvloFalling.typ", "stage.operatingPoints[1].deadTime.typ", "options.fixes"}},
		{"a stage that is none", `{"stage":7}`, []string{"stage"}},
		{"a stage misspelt", `{"stgae":{}}`, []string{"stgae"}},
		{"unknown beside known", `{"stage":{},"waiver":[]}`, []string{"waiver"}},
		{"twice", `{"stage":{},"stage":{}}`, []string{"stage"}},
		{"empty", ``, []string{"request"}},
		{"white space", " \n ", []string{"request"}},
		{"no object", `"stage"`, []string{"request"}},
		{"cut off", `{"stage":{"id":"a"`, []string{"request"}},
		{"NaN", `{"stage":{"driver":{"uvloRising":{"typ":NaN}}}}`, []string{"request"}},
		{"trailing", `{"stage":{}} {}`, []string{"request"}},
		{"no UTF-8", "{\"stage\":{\"id\":\"\xff\"}}", []string{"request"}},
		{"deep", strings.Repeat(`{"stage":`, 100_000), []string{"stage.stage", "request"}},
		{"deep lists", strings.Repeat(`[`, 500_000), []string{"request"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			answer, data := r.post("/v1/reviews", c.body)
			if answer.StatusCode != http.StatusBadRequest {
				t.Fatalf("%d %s", answer.StatusCode, data)
			}
			all := violations(t, restError(t, data))
			if diff := cmp.Diff(c.want, fields(all)); diff != "" {
				t.Errorf("%s\n%s", diff, strings.Join(all, "\n"))
			}
		})
	}
	for _, size := range []int{1<<20 + 1, 10 << 20} {
		answer, data := r.post("/v1/reviews", `{"stage":{"title":"`+strings.Repeat("x", size)+`"}}`)
		if answer.StatusCode != http.StatusRequestEntityTooLarge || !strings.Contains(string(data), "1048576 bytes") {
			t.Errorf("%d bytes: %d %s", size, answer.StatusCode, data)
		}
	}
	if r.metric("floatrail_rejections_total", `reason="too_large"`) != 2 {
		t.Error("large bodies are not counted")
	}
	if answer, _ := r.post("/v1/reviews", small); answer.StatusCode != http.StatusOK {
		t.Error("the service no longer answers")
	}
}

// A gigantic number of faults stays a small answer.
func TestHostileBody(t *testing.T) {
	r := start(t, settings(), realHandlers)
	answer, data := r.post("/v1/reviews", `{`+strings.Repeat(`"a":0,`, 170_000)+`"b":0}`)
	if answer.StatusCode != http.StatusBadRequest || len(data) > 200_000 || !strings.Contains(string(data), "further faults of the body are not listed") {
		t.Errorf("%d, %d bytes", answer.StatusCode, len(data))
	}
	var decoded map[string]any
	if err := json.Unmarshal(data, &decoded); err != nil {
		t.Error(err)
	}
}

// raw sends bytes as a gRPC message.
type raw struct{}

func (raw) Marshal(v any) ([]byte, error)      { return v.([]byte), nil }
func (raw) Unmarshal(data []byte, v any) error { *v.(*[]byte) = data; return nil }
func (raw) Name() string                       { return "proto" }

func TestFaultsOfMessages(t *testing.T) {
	r := start(t, settings(), realHandlers)
	conn, err := grpc.NewClient(r.grpc, grpc.WithTransportCredentials(insecure.NewCredentials()), grpc.WithDefaultCallOptions(grpc.ForceCodec(raw{})))
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = conn.Close() }()
	send := func(message []byte) error {
		var answer []byte
		return conn.Invoke(context.Background(), pb.FloatRail_ReviewStage_FullMethodName, message, &answer)
	}
	unknown := protowire.AppendVarint(protowire.AppendTag(nil, 9000, protowire.VarintType), 1)
	stage, err := proto.Marshal(&pb.ReviewStageRequest{Stage: &pb.Stage{Id: proto.String("a")}})
	if err != nil {
		t.Fatal(err)
	}
	for name, c := range map[string]struct {
		message []byte
		code    codes.Code
		field   string
	}{
		"not a message":     {[]byte{0xff, 0xff, 0xff}, codes.InvalidArgument, "request"},
		"no UTF-8":          {[]byte{0x2a, 0x01, 0xff}, codes.InvalidArgument, "request"},
		"unknown field":     {append(stage, unknown...), codes.InvalidArgument, "request"},
		"larger than may":   {append(stage, protowire.AppendBytes(protowire.AppendTag(nil, 5, protowire.BytesType), make([]byte, 2<<20))...), codes.ResourceExhausted, ""},
		"larger than board": {make([]byte, 33<<20), codes.ResourceExhausted, ""},
	} {
		err := send(c.message)
		if status.Code(err) != c.code {
			t.Errorf("%s: %v", name, err)
		}
		if all := fields(violations(t, err)); c.field != "" && (len(all) != 1 || all[0] != c.field) {
			t.Errorf("%s: %v", name, all)
		}
	}
	if n := r.metric("floatrail_requests_total", `method="ReviewStage"`, `transport="grpc"`, `code="InvalidArgument"`); n != 3 {
		t.Errorf("%v refused messages are counted", n)
	}
	// A report about a body is believed from the REST interface alone.
	if err := send(stage); err != nil {
		t.Error(err)
	}
}
