package main

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"log/slog"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/credentials/insecure"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/config"
	"floatrail/service/internal/rpc"
)

// small is a stage that takes little time: a high side held on, for which most rules lack data.
const small = `{"stage":{"id":"small","gateSupply":{"voltage":{"typ":"12 V 0%"}},
 "driver":{"refdes":"U77SECRET","part":"GD-SECRET","uvloFalling":{"typ":"8.9 V 0%"},"floatingQuiescentCurrent":{"typ":"150 uA 0%"},"offsetLeakage":{"typ":"0 A"}},
 "highSide":{"kind":"SI_MOSFET","gatePullDown":{"resistance":{"typ":"10 kohm 0%"}},"gateLeakage":{"typ":"0 A"}},
 "bootstrap":{"element":"DISCRETE_DIODE","clamp":{"fit":"NOT_FITTED"},"diode":{"reverseLeakage":{"typ":"0 A"}},"otherLoad":{"typ":"0 A"},
  "capacitor":{"effectiveCapacitance":{"typ":"6 uF 0%"},"leakage":{"typ":"0 A"}}},
 "operatingPoints":[{"name":"held SECRET","heldOn":{"duration":{"typ":"10.64 ms"},"initialVoltage":{"typ":"11 V"}}}]}}`

// corpus are the complete stages of the repository, as requests.
func corpus(t testing.TB) []string {
	t.Helper()
	files, err := filepath.Glob("../testdata/stages/*.json")
	if err != nil || len(files) == 0 {
		t.Fatal("no stages", err)
	}
	var all []string
	for _, file := range files {
		if strings.HasSuffix(file, ".answer.json") {
			continue
		}
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, string(data))
	}
	return all
}

// running is a service on loopback.
type running struct {
	t                testing.TB
	http, grpc, ops  string
	client           pb.FloatRailClient
	log              *lines
	cancel           context.CancelFunc
	done             chan error
	stopped          bool
	transport        *http.Transport
	closeConnections func()
}

// lines is a log that tests read while it is written.
type lines struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (l *lines) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *lines) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}

func settings() config.Config {
	return config.Config{HTTPAddr: "127.0.0.1:0", GRPCAddr: "127.0.0.1:0", OpsAddr: "127.0.0.1:0", Deadline: 30 * time.Second,
		MaxRequest: 1 << 20, MaxBoard: 32 << 20, Workers: 2, Queue: 32, SimulationWorkers: 2, SimulationQueue: 8, DrainTimeout: 20 * time.Second, LogLevel: slog.LevelInfo}
}

func realHandlers(o rpc.Options) pb.FloatRailServer { return rpc.New(o) }

// start runs the real service and waits until it is ready.
func start(t testing.TB, c config.Config, handlers func(rpc.Options) pb.FloatRailServer) *running {
	t.Helper()
	r := &running{t: t, log: &lines{}, done: make(chan error, 1), transport: &http.Transport{MaxIdleConnsPerHost: 64}}
	s, err := newServer(c, slog.New(slog.NewJSONHandler(r.log, &slog.HandlerOptions{Level: c.LogLevel})), handlers)
	if err != nil {
		t.Fatal(err)
	}
	url := func(l net.Listener) string { return "http://" + l.Addr().String() }
	r.http, r.ops, r.grpc = url(s.listeners.http), url(s.listeners.ops), s.listeners.grpc.Addr().String()
	ctx, cancel := context.WithCancel(context.Background())
	r.cancel = cancel
	go func() { r.done <- s.run(ctx) }()
	conn, err := grpc.NewClient(r.grpc, grpc.WithTransportCredentials(insecure.NewCredentials()), grpc.WithDefaultCallOptions(grpc.MaxCallRecvMsgSize(64<<20)))
	if err != nil {
		t.Fatal(err)
	}
	r.closeConnections = func() {
		_ = conn.Close()
		r.transport.CloseIdleConnections()
	}
	r.client = pb.NewFloatRailClient(conn)
	t.Cleanup(func() { _ = r.stop() })
	for deadline := time.Now().Add(20 * time.Second); ; time.Sleep(5 * time.Millisecond) {
		if status, _, _ := r.get(r.ops + "/readyz"); status == http.StatusOK {
			return r
		}
		if time.Now().After(deadline) {
			t.Fatalf("not ready: %s", r.log)
		}
	}
}

// stop ends the service and the connections to it and returns what run returned.
func (r *running) stop() error {
	err := r.halt()
	r.closeConnections()
	return err
}

// halt ends the service alone.
func (r *running) halt() error {
	if r.stopped {
		return nil
	}
	r.stopped = true
	r.cancel()
	return <-r.done
}

func (r *running) do(method, url, contentType string, body io.Reader) (*http.Response, []byte, error) {
	q, err := http.NewRequest(method, url, body)
	if err != nil {
		return nil, nil, err
	}
	if contentType != "" {
		q.Header.Set("Content-Type", contentType)
	}
	a, err := (&http.Client{Transport: r.transport, Timeout: time.Minute}).Do(q)
	if err != nil {
		return nil, nil, err
	}
	defer func() { _ = a.Body.Close() }()
	data, err := io.ReadAll(a.Body)
	return a, data, err
}

func (r *running) get(url string) (int, []byte, error) {
	a, data, err := r.do(http.MethodGet, url, "", nil)
	if err != nil {
		return 0, nil, err
	}
	return a.StatusCode, data, nil
}

// post sends a body of JSON and returns the answer, of which every error must be JSON too.
func (r *running) post(path, body string) (*http.Response, []byte) {
	r.t.Helper()
	a, data, err := r.do(http.MethodPost, r.http+path, "application/json", strings.NewReader(body))
	if err != nil {
		r.t.Fatal(err)
	}
	if kind := a.Header.Get("Content-Type"); kind != "application/json" || !json.Valid(data) {
		r.t.Fatalf("%s: %d %s %q", path, a.StatusCode, kind, data)
	}
	return a, data
}

// metric reads the sum of a metric's series whose text contains all the parts.
func (r *running) metric(name string, parts ...string) float64 {
	r.t.Helper()
	_, data, err := r.get(r.ops + "/metrics")
	if err != nil {
		r.t.Fatal(err)
	}
	sum := 0.0
scan:
	for _, line := range strings.Split(string(data), "\n") {
		if !strings.HasPrefix(line, name+"{") && !strings.HasPrefix(line, name+" ") {
			continue
		}
		for _, p := range parts {
			if !strings.Contains(line, p) {
				continue scan
			}
		}
		var v float64
		if err := json.Unmarshal([]byte(line[strings.LastIndexByte(line, ' ')+1:]), &v); err != nil {
			r.t.Fatalf("%s: %v", line, err)
		}
		sum += v
	}
	return sum
}
