package main

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"time"

	"github.com/prometheus/client_golang/prometheus"
	"google.golang.org/grpc"
	"google.golang.org/grpc/health"
	healthpb "google.golang.org/grpc/health/grpc_health_v1"
	"google.golang.org/grpc/keepalive"
	"google.golang.org/grpc/reflection"
	"google.golang.org/grpc/test/bufconn"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/config"
	"floatrail/service/internal/gateway"
	"floatrail/service/internal/guard"
	"floatrail/service/internal/rpc"
	"floatrail/service/internal/selftest"
	"floatrail/service/internal/telemetry"
	"floatrail/service/internal/wire"
)

// server is the whole service: three listeners and what answers on them.
type server struct {
	config config.Config
	log    *slog.Logger

	grpc   *grpc.Server
	health *health.Server
	rest   *http.Server
	ops    *http.Server
	ready  *readiness

	listeners struct{ http, grpc, ops net.Listener }
	inside    *bufconn.Listener
	conn      *grpc.ClientConn
}

// newServer opens the listeners and puts the service together around the handlers that provide returns; nothing is served yet.
func newServer(c config.Config, log *slog.Logger, provide func(rpc.Options) pb.FloatRailServer) (_ *server, err error) {
	s := &server{config: c, log: log, ready: &readiness{}, health: health.NewServer(), inside: gateway.Listen()}
	defer func() {
		if err != nil {
			s.close()
		}
	}()
	var faults []error
	for _, l := range []struct {
		flag, address string
		to            *net.Listener
	}{{"http-addr", c.HTTPAddr, &s.listeners.http}, {"grpc-addr", c.GRPCAddr, &s.listeners.grpc}, {"ops-addr", c.OpsAddr, &s.listeners.ops}} {
		if *l.to, err = net.Listen("tcp", l.address); err != nil {
			faults = append(faults, fmt.Errorf("--%s (%s): %w", l.flag, config.Variable(l.flag), err))
		}
	}
	if err = errors.Join(faults...); err != nil {
		return s, err
	}
	registry := prometheus.NewRegistry()
	limits := guard.Limits{Request: c.MaxRequest, Board: c.MaxBoard, Deadline: c.Deadline}
	built := build()
	metrics := telemetry.New(registry, built, rpc.New(rpc.Options{Version: built.Version}).Rules())
	handlers := provide(rpc.Options{Version: built.Version, Observe: metrics.Observe, Studied: metrics.Studied, Carried: carried})
	s.serveGRPC(handlers, metrics, limits)
	if s.conn, err = gateway.Dial(s.inside); err != nil {
		return s, err
	}
	api, err := gateway.New(s.conn, gateway.Options{Limits: limits, Metrics: metrics, Log: log})
	if err != nil {
		return s, err
	}
	s.rest = httpServer(api, log)
	s.rest.WriteTimeout = c.Deadline + 30*time.Second
	s.ops = httpServer(operations(registry, built, s.ready), log)
	s.ready.selfTest = selftest.Run
	return s, nil
}

// carried believes reports about bodies from the REST interface alone.
func carried(ctx context.Context) *wire.Report {
	if !telemetry.Inside(ctx, gateway.Network) {
		return nil
	}
	return wire.Carried(ctx)
}

func (s *server) serveGRPC(handlers pb.FloatRailServer, metrics *telemetry.Metrics, limits guard.Limits) {
	g := &guard.Guard{Limits: limits, Lanes: guard.Lanes{
		ClosedForm: guard.NewLane(s.config.Workers, s.config.Queue, metrics.Queue(telemetry.ClosedForm)),
		Simulation: guard.NewLane(s.config.SimulationWorkers, s.config.SimulationQueue, metrics.Queue(telemetry.Simulation)),
	}, Metrics: metrics, Log: s.log}
	recorder := telemetry.NewRecorder(metrics, s.log, gateway.Network)
	s.grpc = grpc.NewServer(
		grpc.ChainUnaryInterceptor(recorder.Unary, g.Unary),
		grpc.ChainStreamInterceptor(recorder.Stream, g.Stream),
		grpc.MaxRecvMsgSize(max(limits.Request, limits.Board)),
		grpc.ForceServerCodecV2(rpc.Codec()),
		grpc.MaxHeaderListSize(gateway.MaxHeader),
		grpc.ConnectionTimeout(10*time.Second),
		grpc.KeepaliveEnforcementPolicy(keepalive.EnforcementPolicy{MinTime: 10 * time.Second, PermitWithoutStream: true}),
	)
	rpc.Register(s.grpc, handlers)
	healthpb.RegisterHealthServer(s.grpc, s.health)
	reflection.Register(s.grpc)
	s.healthy(false)
}

// healthy tells gRPC's health service.
func (s *server) healthy(yes bool) {
	state := healthpb.HealthCheckResponse_NOT_SERVING
	if yes {
		state = healthpb.HealthCheckResponse_SERVING
	}
	for _, service := range []string{"", pb.FloatRail_ServiceDesc.ServiceName} {
		s.health.SetServingStatus(service, state)
	}
}

func httpServer(h http.Handler, log *slog.Logger) *http.Server {
	return &http.Server{Handler: h, ReadHeaderTimeout: 5 * time.Second, ReadTimeout: 30 * time.Second, WriteTimeout: 30 * time.Second,
		IdleTimeout: 2 * time.Minute, MaxHeaderBytes: 16 << 10, ErrorLog: slog.NewLogLogger(log.Handler(), slog.LevelDebug)}
}

// run serves until the context ends, then drains: not ready, a pause in which load balancers notice, no new requests, the accepted ones
// finished. It returns nil after a clean stop.
func (s *server) run(ctx context.Context) error {
	failed := make(chan error, 4)
	serve := func(what string, f func() error) {
		go func() {
			if err := f(); err != nil && !errors.Is(err, http.ErrServerClosed) && !errors.Is(err, grpc.ErrServerStopped) {
				failed <- fmt.Errorf("%s: %w", what, err)
			}
		}()
	}
	serve("gRPC", func() error { return s.grpc.Serve(s.listeners.grpc) })
	serve("gRPC within the process", func() error { return s.grpc.Serve(s.inside) })
	serve("operations", func() error { return s.ops.Serve(s.listeners.ops) })
	serve("REST", func() error { return s.rest.Serve(s.listeners.http) })
	defer s.close()
	if err := s.ready.check(); err != nil {
		// The service stays up, not ready, so that it can be looked at.
		s.log.Error("self-test failed", "error", err.Error())
	} else {
		s.healthy(true)
		s.log.Info("ready", "version", version)
	}
	select {
	case err := <-failed:
		return err
	case <-ctx.Done():
	}
	return s.drain()
}

func (s *server) drain() error {
	s.log.Info("draining", "delay", s.config.DrainDelay.String(), "timeout", s.config.DrainTimeout.String())
	s.ready.drain()
	s.healthy(false)
	time.Sleep(s.config.DrainDelay)
	ctx, cancel := context.WithTimeout(context.Background(), s.config.DrainTimeout)
	defer cancel()
	err := s.rest.Shutdown(ctx)
	done := make(chan struct{})
	go func() {
		s.grpc.GracefulStop()
		close(done)
	}()
	select {
	case <-done:
	case <-ctx.Done():
		s.grpc.Stop()
		<-done
		err = errors.Join(err, errors.New("calls were still running at the end of --drain-timeout"))
	}
	if err != nil {
		return fmt.Errorf("drain: %w", err)
	}
	s.log.Info("stopped")
	return nil
}

// close frees what is still open.
func (s *server) close() {
	for _, l := range []net.Listener{s.listeners.http, s.listeners.grpc, s.listeners.ops} {
		if l != nil {
			_ = l.Close()
		}
	}
	if s.conn != nil {
		_ = s.conn.Close()
	}
	if s.rest != nil {
		_ = s.rest.Close()
	}
	if s.ops != nil {
		_ = s.ops.Close()
	}
	if s.grpc != nil {
		s.grpc.Stop()
	}
	_ = s.inside.Close()
}
