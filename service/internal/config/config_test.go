package config

import (
	"log/slog"
	"runtime"
	"strings"
	"testing"
	"time"
)

var defaults = Flags{HTTPAddr: "127.0.0.1:8080", GRPCAddr: "127.0.0.1:50051", OpsAddr: "127.0.0.1:9464", Deadline: "10s", MaxRequest: "1MiB",
	MaxBoard: "32MiB", Workers: "auto", Queue: "32", SimulationWorkers: "auto", SimulationQueue: "8", DrainDelay: "1s", DrainTimeout: "20s", LogLevel: "info"}

func TestParse(t *testing.T) {
	want := Config{HTTPAddr: "127.0.0.1:8080", GRPCAddr: "127.0.0.1:50051", OpsAddr: "127.0.0.1:9464", Deadline: 10 * time.Second,
		MaxRequest: 1 << 20, MaxBoard: 32 << 20, Workers: runtime.GOMAXPROCS(0), Queue: 32, SimulationWorkers: runtime.GOMAXPROCS(0), SimulationQueue: 8, DrainDelay: time.Second, DrainTimeout: 20 * time.Second,
		LogLevel: slog.LevelInfo}
	if got, err := Parse(defaults); err != nil || got != want {
		t.Errorf("%+v, %v", got, err)
	}
	f := defaults
	f.MaxRequest, f.MaxBoard, f.Workers, f.LogLevel = "64 KiB", "100000 B", "3", "WARN"
	f.SimulationWorkers, f.SimulationQueue = "1", "0"
	f.HTTPAddr, f.GRPCAddr = ":0", ":0"
	got, err := Parse(f)
	if err != nil || got.MaxRequest != 65536 || got.MaxBoard != 100000 || got.Workers != 3 || got.SimulationWorkers != 1 || got.SimulationQueue != 0 || got.LogLevel != slog.LevelWarn {
		t.Errorf("%+v, %v", got, err)
	}
}

func TestParseTellsEveryFaultAtOnce(t *testing.T) {
	_, err := Parse(Flags{HTTPAddr: "8080", GRPCAddr: "localhost:http", OpsAddr: "[::1]:70000", Deadline: "10", MaxRequest: "1MB", MaxBoard: "-1",
		Workers: "0", Queue: "many", SimulationWorkers: "1025", SimulationQueue: "-1", DrainDelay: "-1s", DrainTimeout: "1h", LogLevel: "loud"})
	if err == nil {
		t.Fatal("accepted")
	}
	lines := strings.Split(err.Error(), "\n")
	for i, start := range []string{
		`--http-addr (FLOATRAIL_HTTP_ADDR): read "8080", expected host:port`,
		`--grpc-addr (FLOATRAIL_GRPC_ADDR): read "localhost:http"`,
		`--ops-addr (FLOATRAIL_OPS_ADDR): read "[::1]:70000"`,
		`--deadline (FLOATRAIL_DEADLINE): read "10", expected a time from 10ms to 10m0s`,
		`--max-request (FLOATRAIL_MAX_REQUEST): read "1MB", expected a size from 1024 B to 67108864 B`,
		`--max-board (FLOATRAIL_MAX_BOARD): read "-1"`,
		`--queue (FLOATRAIL_QUEUE): read "many", expected a whole number from 0 to 10000`,
		`--simulation-queue (FLOATRAIL_SIMULATION_QUEUE): read "-1", expected a whole number from 0 to 10000`,
		`--drain-delay (FLOATRAIL_DRAIN_DELAY): read "-1s"`,
		`--drain-timeout (FLOATRAIL_DRAIN_TIMEOUT): read "1h"`,
		`--log-level (FLOATRAIL_LOG_LEVEL): read "loud", expected debug, info, warn or error`,
		`--workers (FLOATRAIL_WORKERS): read "0"`,
		`--simulation-workers (FLOATRAIL_SIMULATION_WORKERS): read "1025", expected a whole number from 1 to 1024`,
	} {
		if i >= len(lines) || !strings.HasPrefix(lines[i], start) {
			t.Fatalf("line %d: want %s..., got\n%s", i, start, err)
		}
	}
	if len(lines) != 13 {
		t.Errorf("%d faults:\n%s", len(lines), err)
	}
	f := defaults
	f.OpsAddr, f.MaxBoard = f.HTTPAddr, "2KiB"
	if _, err := Parse(f); err == nil || !strings.Contains(err.Error(), "another address than --http-addr") || !strings.Contains(err.Error(), "at least --max-request") {
		t.Errorf("%v", err)
	}
}
