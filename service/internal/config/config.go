// Package config is the configuration of the server: flags, each of which is also an environment variable, checked together so that
// everything wrong with them is told at once.
package config

import (
	"errors"
	"fmt"
	"log/slog"
	"net"
	"runtime"
	"strconv"
	"strings"
	"time"
)

// Flags are the settings as they were written. Each is text here, so that all of them can be checked before any is refused.
type Flags struct {
	HTTPAddr          string `name:"http-addr" default:"127.0.0.1:8080" placeholder:"HOST:PORT" help:"Address of the REST interface."`
	GRPCAddr          string `name:"grpc-addr" default:"127.0.0.1:50051" placeholder:"HOST:PORT" help:"Address of the gRPC interface."`
	OpsAddr           string `name:"ops-addr" default:"127.0.0.1:9464" placeholder:"HOST:PORT" help:"Address of /metrics, /livez, /readyz and /buildinfo."`
	Deadline          string `default:"10s" placeholder:"TIME" help:"Longest time for an answer; a client may ask for less."`
	MaxRequest        string `default:"1MiB" placeholder:"SIZE" help:"Largest request."`
	MaxBoard          string `default:"32MiB" placeholder:"SIZE" help:"Largest request about a whole board."`
	Workers           string `default:"auto" placeholder:"N" help:"Reviews computed at once; auto: one a processor."`
	Queue             string `default:"32" placeholder:"N" help:"Reviews that may wait; further ones are rejected."`
	SimulationWorkers string `default:"auto" placeholder:"N" help:"Reviews with simulated switching events computed at once, beside the others; auto: one a processor."`
	SimulationQueue   string `default:"8" placeholder:"N" help:"Reviews with simulated switching events that may wait; further ones are rejected."`
	DrainDelay        string `default:"1s" placeholder:"TIME" help:"Time between the end of readiness and the closing of the listeners."`
	DrainTimeout      string `default:"20s" placeholder:"TIME" help:"Time that accepted requests get to finish."`
	LogLevel          string `default:"info" placeholder:"LEVEL" help:"Least level that is logged: debug, info, warn or error."`
}

// Config is a valid configuration.
type Config struct {
	HTTPAddr, GRPCAddr, OpsAddr string
	Deadline                    time.Duration
	MaxRequest, MaxBoard        int // [byte]
	Workers, Queue              int
	SimulationWorkers           int
	SimulationQueue             int
	DrainDelay, DrainTimeout    time.Duration
	LogLevel                    slog.Level
}

// Parse checks the settings; its error joins every fault.
func Parse(f Flags) (Config, error) {
	var p parser
	c := Config{
		HTTPAddr:        p.address("http-addr", f.HTTPAddr),
		GRPCAddr:        p.address("grpc-addr", f.GRPCAddr),
		OpsAddr:         p.address("ops-addr", f.OpsAddr),
		Deadline:        p.duration("deadline", f.Deadline, 10*time.Millisecond, 10*time.Minute),
		MaxRequest:      p.size("max-request", f.MaxRequest, 1<<10, 64<<20),
		MaxBoard:        p.size("max-board", f.MaxBoard, 1<<10, 256<<20),
		Queue:           p.number("queue", f.Queue, 0, 10_000),
		SimulationQueue: p.number("simulation-queue", f.SimulationQueue, 0, 10_000),
		DrainDelay:      p.duration("drain-delay", f.DrainDelay, 0, 5*time.Minute),
		DrainTimeout:    p.duration("drain-timeout", f.DrainTimeout, 10*time.Millisecond, 10*time.Minute),
		LogLevel:        p.level("log-level", f.LogLevel),
	}
	c.Workers = p.places("workers", f.Workers)
	c.SimulationWorkers = p.places("simulation-workers", f.SimulationWorkers)
	if c.MaxBoard > 0 && c.MaxBoard < c.MaxRequest {
		p.fault("max-board", f.MaxBoard, "at least --max-request, which is "+f.MaxRequest)
	}
	p.distinct([]string{"http-addr", "grpc-addr", "ops-addr"}, []string{c.HTTPAddr, c.GRPCAddr, c.OpsAddr})
	return c, errors.Join(p.faults...)
}

// parser collects what is wrong.
type parser struct{ faults []error }

// Variable is the environment variable of a flag.
func Variable(flag string) string {
	return "FLOATRAIL_" + strings.ToUpper(strings.ReplaceAll(flag, "-", "_"))
}

func (p *parser) fault(flag, read, expected string) {
	p.faults = append(p.faults, fmt.Errorf("--%s (%s): read %q, expected %s", flag, Variable(flag), read, expected))
}

func (p *parser) address(flag, text string) string {
	const expected = "host:port, such as 127.0.0.1:8080 or :8080"
	_, port, err := net.SplitHostPort(text)
	if err != nil {
		p.fault(flag, text, expected)
		return ""
	}
	if n, err := strconv.Atoi(port); err != nil || n < 0 || n > 65535 {
		p.fault(flag, text, expected+", with a port from 0 to 65535")
		return ""
	}
	return text
}

// distinct refuses one fixed address for two listeners.
func (p *parser) distinct(flags, addresses []string) {
	for i, a := range addresses {
		for j, b := range addresses[:i] {
			if a != "" && a == b && !strings.HasSuffix(a, ":0") {
				p.fault(flags[i], a, "another address than --"+flags[j])
			}
		}
	}
}

func (p *parser) duration(flag, text string, low, high time.Duration) time.Duration {
	d, err := time.ParseDuration(text)
	if err != nil || d < low || d > high {
		p.fault(flag, text, fmt.Sprintf("a time from %v to %v with its unit, such as 500ms or 10s", low, high))
		return 0
	}
	return d
}

func (p *parser) number(flag, text string, low, high int) int {
	n, err := strconv.Atoi(text)
	if err != nil || n < low || n > high {
		p.fault(flag, text, fmt.Sprintf("a whole number from %d to %d", low, high))
		return 0
	}
	return n
}

// places is how many calls run at once.
func (p *parser) places(flag, text string) int {
	if text == "auto" {
		return runtime.GOMAXPROCS(0)
	}
	return p.number(flag, text, 1, 1024)
}

func (p *parser) size(flag, text string, low, high int) int {
	digits, unit := text, 1
	for _, u := range []struct {
		name string
		size int
	}{{"KiB", 1 << 10}, {"MiB", 1 << 20}, {"B", 1}} {
		if cut, ok := strings.CutSuffix(text, u.name); ok {
			digits, unit = strings.TrimSpace(cut), u.size
			break
		}
	}
	n, err := strconv.Atoi(digits)
	if err != nil || n < 0 || n > high/unit || n*unit < low {
		p.fault(flag, text, fmt.Sprintf("a size from %d B to %d B, such as 65536, 512KiB or 1MiB", low, high))
		return 0
	}
	return n * unit
}

func (p *parser) level(flag, text string) slog.Level {
	for _, l := range []slog.Level{slog.LevelDebug, slog.LevelInfo, slog.LevelWarn, slog.LevelError} {
		if strings.EqualFold(text, l.String()) {
			return l
		}
	}
	p.fault(flag, text, "debug, info, warn or error")
	return slog.LevelInfo
}
