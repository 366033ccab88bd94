package main

import (
	"bytes"
	"context"
	"encoding/json"
	"net/http"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"google.golang.org/genproto/googleapis/rpc/errdetails"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/rpc"
)

// gated handlers hold SizeSupply back until they are released, and panic in CheckDutyLimits.
type gated struct {
	pb.FloatRailServer
	entered chan struct{} // one for each call that has begun
	release chan struct{} // closed: all calls go on
}

func newGated() (*gated, func(rpc.Options) pb.FloatRailServer) {
	g := &gated{entered: make(chan struct{}, 1000), release: make(chan struct{})}
	return g, func(o rpc.Options) pb.FloatRailServer {
		g.FloatRailServer = rpc.New(o)
		return g
	}
}

func (g *gated) SizeSupply(ctx context.Context, r *pb.SizeSupplyRequest) (*pb.SizeSupplyResponse, error) {
	g.entered <- struct{}{}
	select {
	case <-g.release:
	case <-ctx.Done():
		return nil, ctx.Err()
	}
	return g.FloatRailServer.SizeSupply(ctx, r)
}

func (*gated) CheckDutyLimits(context.Context, *pb.CheckDutyLimitsRequest) (*pb.CheckDutyLimitsResponse, error) {
	panic("the stage U77SECRET is to blame")
}

// within waits until the condition holds.
func within(t *testing.T, d time.Duration, what string, condition func() bool) {
	t.Helper()
	for deadline := time.Now().Add(d); !condition(); time.Sleep(2 * time.Millisecond) {
		if time.Now().After(deadline) {
			t.Fatalf("%s: not within %v", what, d)
		}
	}
}

func TestFullQueueIsRejected(t *testing.T) {
	g, handlers := newGated()
	c := settings()
	c.Workers, c.Queue = 2, 3
	r := start(t, c, handlers)
	results := make(chan int, 5)
	for range 5 {
		go func() {
			answer, _, err := r.do(http.MethodPost, r.http+"/v1/sizing", "application/json", strings.NewReader(small))
			if err != nil {
				t.Error(err)
				results <- 0
				return
			}
			results <- answer.StatusCode
		}()
	}
	within(t, 5*time.Second, "two run and three wait", func() bool {
		return r.metric("floatrail_queue_depth") == 3 && r.metric("floatrail_lane_running") == 2 && r.metric("floatrail_requests_in_flight", `"SizeSupply"`) == 5
	})
	answer, data := r.post("/v1/sizing", small)
	if answer.StatusCode != http.StatusTooManyRequests || answer.Header.Get("Retry-After") != "1" || !bytes.Contains(data, []byte("RetryInfo")) {
		t.Errorf("%d %v %s", answer.StatusCode, answer.Header, data)
	}
	_, err := r.client.SizeSupply(context.Background(), parse(t, small, new(pb.SizeSupplyRequest)))
	details := status.Convert(err).Details()
	if status.Code(err) != codes.ResourceExhausted || len(details) != 1 || details[0].(*errdetails.RetryInfo).GetRetryDelay().AsDuration() != time.Second {
		t.Error(err, details)
	}
	if r.metric("floatrail_rejections_total", `reason="queue_full"`) != 2 {
		t.Error("rejections are not counted")
	}
	// The catalogue needs no processor.
	if code, _, err := r.get(r.http + "/v1/rules"); err != nil || code != http.StatusOK {
		t.Error(code, err)
	}
	close(g.release)
	for range 5 {
		if code := <-results; code != http.StatusOK {
			t.Errorf("an accepted request was answered %d", code)
		}
	}
	within(t, 5*time.Second, "the lane is empty", func() bool { return r.metric("floatrail_lane_running") == 0 && r.metric("floatrail_queue_depth") == 0 })
}

// Simulations have places and a queue of their own: that both are full keeps nothing else from being answered, and the other way round.
func TestLanesAreApart(t *testing.T) {
	g, handlers := newGated()
	c := settings()
	c.Workers, c.Queue, c.SimulationWorkers, c.SimulationQueue = 1, 0, 1, 1
	r := start(t, c, handlers)
	quick, slow := parse(t, small, new(pb.SizeSupplyRequest)), parse(t, simulated(small), new(pb.SizeSupplyRequest))
	results := make(chan codes.Code, 3)
	send := func(q *pb.SizeSupplyRequest) {
		_, err := r.client.SizeSupply(context.Background(), q)
		results <- status.Code(err)
	}
	full := func(q *pb.SizeSupplyRequest) {
		t.Helper()
		if _, err := r.client.SizeSupply(context.Background(), q); status.Code(err) != codes.ResourceExhausted {
			t.Errorf("in a full lane: %v", err)
		}
	}
	go send(slow)
	go send(slow)
	within(t, 5*time.Second, "one simulation runs and one waits", func() bool {
		return r.metric("floatrail_lane_running", `lane="simulation"`) == 1 && r.metric("floatrail_queue_depth", `lane="simulation"`) == 1
	})
	full(slow)
	go send(quick)
	within(t, 5*time.Second, "a closed form runs beside it", func() bool { return r.metric("floatrail_lane_running", `lane="closed_form"`) == 1 })
	full(quick)
	if len(results) != 0 {
		t.Error("a call was answered before it was let go")
	}
	close(g.release)
	got := map[codes.Code]int{}
	for range 3 {
		got[<-results]++
	}
	if got[codes.OK] != 1 || got[codes.InvalidArgument] != 2 { // sizing simulates nothing, and says so
		t.Errorf("%v", got)
	}
	within(t, 5*time.Second, "the lanes are empty", func() bool { return r.metric("floatrail_lane_running") == 0 && r.metric("floatrail_queue_depth") == 0 })
}

func TestDeadlines(t *testing.T) {
	g, handlers := newGated()
	defer close(g.release)
	c := settings()
	c.Deadline = slowdown * 150 * time.Millisecond
	r := start(t, c, handlers)
	answer, data := r.post("/v1/sizing", small)
	if answer.StatusCode != http.StatusGatewayTimeout {
		t.Errorf("%d %s", answer.StatusCode, data)
	}
	ctx, cancel := context.WithTimeout(context.Background(), 20*time.Millisecond)
	defer cancel()
	began := time.Now()
	if _, err := r.client.SizeSupply(ctx, parse(t, small, new(pb.SizeSupplyRequest))); status.Code(err) != codes.DeadlineExceeded || time.Since(began) > slowdown*120*time.Millisecond {
		t.Errorf("%v after %v", err, time.Since(began))
	}
	for timeout, want := range map[string]int{"20m": http.StatusGatewayTimeout, "soon": http.StatusBadRequest} {
		q, err := http.NewRequest(http.MethodPost, r.http+"/v1/sizing", strings.NewReader(small))
		if err != nil {
			t.Fatal(err)
		}
		q.Header.Set("Content-Type", "application/json")
		q.Header.Set("Grpc-Timeout", timeout)
		began = time.Now()
		a, err := http.DefaultClient.Do(q)
		if err != nil {
			t.Fatal(err)
		}
		_ = a.Body.Close()
		if a.StatusCode != want || time.Since(began) > slowdown*120*time.Millisecond {
			t.Errorf("Grpc-Timeout %s: %d after %v", timeout, a.StatusCode, time.Since(began))
		}
	}
	within(t, time.Second, "the lane is empty", func() bool { return r.metric("floatrail_lane_running") == 0 })
}

// wide is a stage that takes seconds: a complete one with as many operating points as may be.
func wide(t testing.TB) string {
	t.Helper()
	var request map[string]any
	if err := json.Unmarshal([]byte(corpus(t)[0]), &request); err != nil {
		t.Fatal(err)
	}
	stage := request["stage"].(map[string]any)
	point := stage["operatingPoints"].([]any)[0].(map[string]any)
	var points []any
	for i := range 64 {
		copied := map[string]any{}
		for k, v := range point {
			copied[k] = v
		}
		copied["name"] = "point " + strconv.Itoa(i)
		copied["rippleCurrent"] = map[string]any{"typ": strconv.Itoa(i+1) + " mA"}
		points = append(points, copied)
	}
	stage["operatingPoints"] = points
	text, err := json.Marshal(request)
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// simulated asks for simulated events and their waveforms in a request without options.
func simulated(request string) string {
	return strings.TrimSuffix(strings.TrimSpace(request), "}") + `,"options":{"simulate":true,"waveforms":true}}`
}

// timed tells when ReviewStage begins and ends.
type timed struct {
	pb.FloatRailServer
	began chan struct{}
	ended chan time.Time
}

func (h *timed) ReviewStage(ctx context.Context, r *pb.ReviewStageRequest) (*pb.ReviewStageResponse, error) {
	h.began <- struct{}{}
	defer func() { h.ended <- time.Now() }()
	return h.FloatRailServer.ReviewStage(ctx, r)
}

// A client that leaves stops the computation within 100 ms, on both transports and in the midst of simulations as well.
func TestCancelStopsTheComputation(t *testing.T) {
	h := &timed{began: make(chan struct{}, 1), ended: make(chan time.Time, 1)}
	r := start(t, settings(), func(o rpc.Options) pb.FloatRailServer {
		h.FloatRailServer = rpc.New(o)
		return h
	})
	calls := map[string]func(context.Context) error{}
	for kind, body := range map[string]string{"estimated": wide(t), "simulated": simulated(wide(t))} {
		request := parse(t, body, new(pb.ReviewStageRequest))
		calls["gRPC, "+kind] = func(ctx context.Context) error {
			_, err := r.client.ReviewStage(ctx, request)
			return err
		}
		calls["REST, "+kind] = func(ctx context.Context) error {
			q, err := http.NewRequestWithContext(ctx, http.MethodPost, r.http+"/v1/reviews", strings.NewReader(body))
			if err != nil {
				t.Error(err)
			}
			q.Header.Set("Content-Type", "application/json")
			a, err := http.DefaultClient.Do(q)
			if err == nil {
				_ = a.Body.Close()
			}
			return err
		}
	}
	for transport, call := range calls {
		var took []time.Duration
		for i := range 5 {
			ctx, cancel := context.WithCancel(context.Background())
			done := make(chan error, 1)
			go func() { done <- call(ctx) }()
			<-h.began
			time.Sleep(slowdown * time.Duration(50+30*i) * time.Millisecond) // at another stage of the work each time
			left := time.Now()
			cancel()
			if err := <-done; err == nil {
				t.Fatal("the stage is too small for this test: it was answered")
			}
			took = append(took, (<-h.ended).Sub(left))
		}
		slices.Sort(took)
		t.Logf("%s: stopped after %v", transport, took)
		if took[len(took)/2] > slowdown*100*time.Millisecond {
			t.Errorf("%s: the computation went on for %v", transport, took)
		}
	}
	within(t, 5*time.Second, "the cancelled calls are counted", func() bool {
		return r.metric("floatrail_requests_total", `method="ReviewStage"`, `code="Canceled"`) == 20
	})
}

func TestPanicEndsOneCall(t *testing.T) {
	_, handlers := newGated()
	r := start(t, settings(), handlers)
	var wait sync.WaitGroup
	for range 4 {
		wait.Go(func() {
			answer, data, err := r.do(http.MethodPost, r.http+"/v1/duty-limits", "application/json", strings.NewReader(small))
			if err != nil || answer.StatusCode != http.StatusInternalServerError || strings.Contains(string(data), "SECRET") || !json.Valid(data) {
				t.Errorf("%v %s %v", answer, data, err)
			}
		})
	}
	wait.Wait()
	if r.metric("floatrail_panics_total", `place="call"`) != 4 || r.metric("floatrail_lane_running") != 0 {
		t.Error("panics are not counted, or their places not given back")
	}
	if answer, _ := r.post("/v1/reviews", small); answer.StatusCode != http.StatusOK {
		t.Error("the service no longer answers")
	}
}
