package acceptance

import (
	"context"
	"io"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"strings"
	"testing"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"google.golang.org/grpc"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/gateway"
	"floatrail/service/internal/guard"
	"floatrail/service/internal/rpc"
	"floatrail/service/internal/telemetry"
	"floatrail/service/internal/wire"
)

// client posts to the REST interface, behind which the gRPC server runs with all its interceptors.
type client struct {
	t    *testing.T
	base string // URL
}

// serve starts the service for one test.
func serve(t *testing.T) client {
	t.Helper()
	carried := func(ctx context.Context) *wire.Report {
		if !telemetry.Inside(ctx, gateway.Network) {
			return nil
		}
		return wire.Carried(ctx)
	}
	h := rpc.New(rpc.Options{Version: "acceptance", Carried: carried})
	log := slog.New(slog.DiscardHandler)
	metrics := telemetry.New(prometheus.NewRegistry(), telemetry.Build{Version: "acceptance"}, h.Rules())
	limits := guard.Limits{Request: 1 << 20, Board: 32 << 20, Deadline: time.Minute}
	g := &guard.Guard{Limits: limits, Lanes: guard.Lanes{
		ClosedForm: guard.NewLane(2, 32, metrics.Queue(telemetry.ClosedForm)), Simulation: guard.NewLane(2, 32, metrics.Queue(telemetry.Simulation)),
	}, Metrics: metrics, Log: log}
	recorder := telemetry.NewRecorder(metrics, log, gateway.Network)
	server := grpc.NewServer(grpc.ChainUnaryInterceptor(recorder.Unary, g.Unary), grpc.ChainStreamInterceptor(recorder.Stream, g.Stream),
		grpc.MaxHeaderListSize(gateway.MaxHeader))
	rpc.Register(server, h)
	inside := gateway.Listen()
	go func() { _ = server.Serve(inside) }()
	conn, err := gateway.Dial(inside)
	if err != nil {
		t.Fatal(err)
	}
	api, err := gateway.New(conn, gateway.Options{Limits: limits, Metrics: metrics})
	if err != nil {
		t.Fatal(err)
	}
	rest := httptest.NewServer(api)
	t.Cleanup(func() {
		rest.Close()
		_ = conn.Close()
		server.Stop()
	})
	return client{t, rest.URL}
}

// of binds the client to a subtest.
func (c client) of(t *testing.T) client { return client{t, c.base} }

// post sends a body and returns the status and the body of the answer, which is JSON whatever happens.
func (c client) post(path, body string) (int, []byte) {
	c.t.Helper()
	answer, err := http.Post(c.base+path, "application/json", strings.NewReader(body))
	if err != nil {
		c.t.Fatal(err)
	}
	defer func() { _ = answer.Body.Close() }()
	data, err := io.ReadAll(answer.Body)
	if err != nil {
		c.t.Fatal(err)
	}
	if kind := answer.Header.Get("Content-Type"); kind != "application/json" {
		c.t.Fatalf("%s: %d %s %s", path, answer.StatusCode, kind, data)
	}
	return answer.StatusCode, data
}

// ask posts a request that has no faults and reads the answer.
func ask[M proto.Message](c client, path, body string, answer M) M {
	c.t.Helper()
	code, data := c.post(path, body)
	if code != http.StatusOK {
		c.t.Fatalf("%s: %d %s", path, code, data)
	}
	if err := protojson.Unmarshal(data, answer); err != nil {
		c.t.Fatal(err)
	}
	return answer
}

func (c client) review(body string) *pb.ReviewStageResponse {
	c.t.Helper()
	return ask(c, "/v1/reviews", body, &pb.ReviewStageResponse{})
}

func (c client) size(body string) *pb.SizingResult {
	c.t.Helper()
	return ask(c, "/v1/sizing", body, &pb.SizeSupplyResponse{}).GetSizing()
}

func (c client) stress(body string) *pb.CheckTransientStressResponse {
	c.t.Helper()
	return ask(c, "/v1/transient-stress", body, &pb.CheckTransientStressResponse{})
}

// event returns the numbers of an event at the only operating point at which it occurs.
func (c client) event(body string, e pb.TransientEvent_Event_Value) *pb.TransientEvent {
	c.t.Helper()
	var out *pb.TransientEvent
	for _, got := range c.stress(body).GetTransientStress().GetEvents() {
		if got.GetEvent() != e {
			continue
		}
		if out != nil {
			c.t.Fatalf("%v: more than one", e)
		}
		out = got
	}
	if out == nil {
		c.t.Fatalf("no %v", e)
	}
	return out
}

func (c client) precharge(body string) *pb.Precharge {
	c.t.Helper()
	return ask(c, "/v1/duty-limits", body, &pb.CheckDutyLimitsResponse{}).GetDutyLimits().GetPrecharge()
}

// duty returns the only operating point of the duty limits.
func (c client) duty(body string) *pb.DutyPoint {
	c.t.Helper()
	points := ask(c, "/v1/duty-limits", body, &pb.CheckDutyLimitsResponse{}).GetDutyLimits().GetPoints()
	if len(points) != 1 {
		c.t.Fatalf("%d operating points", len(points))
	}
	return points[0]
}
