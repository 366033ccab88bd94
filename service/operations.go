package main

import (
	"encoding/json"
	"errors"
	"net/http"
	"sync"

	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/promhttp"

	"floatrail/service/internal/telemetry"
)

// readiness tells whether the service wants requests: its self-test passed and it does not drain.
type readiness struct {
	selfTest func() error

	mu       sync.Mutex
	reason   error
	tested   bool
	draining bool
}

var (
	errUntested = errors.New("the self-test has not finished")
	errDraining = errors.New("draining")
)

// check runs the self-test and keeps its result.
func (r *readiness) check() error {
	err := r.selfTest()
	r.mu.Lock()
	defer r.mu.Unlock()
	r.tested, r.reason = true, err
	return err
}

func (r *readiness) drain() {
	r.mu.Lock()
	defer r.mu.Unlock()
	r.draining = true
}

// state is nil where the service is ready.
func (r *readiness) state() error {
	r.mu.Lock()
	defer r.mu.Unlock()
	switch {
	case r.draining:
		return errDraining
	case !r.tested:
		return errUntested
	}
	return r.reason
}

// operations is what an operator asks the service.
func operations(registry *prometheus.Registry, built telemetry.Build, ready *readiness) http.Handler {
	mux := http.NewServeMux()
	mux.Handle("GET /metrics", promhttp.HandlerFor(registry, promhttp.HandlerOpts{EnableOpenMetrics: true, Registry: registry}))
	mux.HandleFunc("GET /livez", func(w http.ResponseWriter, _ *http.Request) { answer(w, http.StatusOK, "alive") })
	mux.HandleFunc("GET /readyz", func(w http.ResponseWriter, _ *http.Request) {
		if err := ready.state(); err != nil {
			answer(w, http.StatusServiceUnavailable, err.Error())
			return
		}
		answer(w, http.StatusOK, "ready")
	})
	// Build is made of strings: it always encodes.
	info, _ := json.Marshal(built)
	mux.HandleFunc("GET /buildinfo", func(w http.ResponseWriter, _ *http.Request) {
		w.Header().Set("Content-Type", "application/json")
		_, _ = w.Write(append(info, '\n'))
	})
	return mux
}

func answer(w http.ResponseWriter, status int, text string) {
	w.Header().Set("Content-Type", "text/plain; charset=utf-8")
	w.WriteHeader(status)
	_, _ = w.Write([]byte(text + "\n"))
}
