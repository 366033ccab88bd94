package main

import (
	"context"
	"net"
	"slices"
	"testing"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/credentials/insecure"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/rpc"
)

// echo answers every SizeSupply with the same message and does nothing else.
type echo struct {
	pb.UnimplementedFloatRailServer
	answer *pb.SizeSupplyResponse
}

func (e *echo) SizeSupply(context.Context, *pb.SizeSupplyRequest) (*pb.SizeSupplyResponse, error) {
	return e.answer, nil
}

// BenchmarkSizeSupplyOverGRPC measures, in turns within one run, a call of SizeSupply over gRPC, the handler alone (binding, computing,
// writing the answer) and a bare echo of messages of the same size. What the service adds to the handler, over the echo, is reported as
// overhead/echo; it is to stay below 1.5. Of each the tenth percentile counts: what a call takes when nothing else disturbs it.
func BenchmarkSizeSupplyOverGRPC(b *testing.B) {
	ctx := context.Background()
	c := settings()
	r := start(b, c, realHandlers)
	request := parse(b, small, new(pb.SizeSupplyRequest))
	handlers := rpc.New(rpc.Options{Version: version})
	answer, err := handlers.SizeSupply(ctx, request)
	if err != nil {
		b.Fatal(err)
	}
	bare := dialEcho(b, answer)
	measures := []struct {
		name string
		call func() error
		took []time.Duration
	}{
		{name: "service", call: func() error { _, err := r.client.SizeSupply(ctx, request); return err }},
		{name: "handler", call: func() error { _, err := handlers.SizeSupply(ctx, request); return err }},
		{name: "echo", call: func() error { _, err := bare.SizeSupply(ctx, request); return err }},
	}
	for b.Loop() {
		for i := range measures {
			m := &measures[i]
			began := time.Now()
			if err := m.call(); err != nil {
				b.Fatal(m.name, err)
			}
			m.took = append(m.took, time.Since(began))
		}
	}
	undisturbed := func(i int) float64 {
		slices.Sort(measures[i].took)
		return float64(measures[i].took[len(measures[i].took)/10].Nanoseconds())
	}
	service, handler, bareTime := undisturbed(0), undisturbed(1), undisturbed(2)
	b.ReportMetric((service-handler)/bareTime, "overhead/echo")
	b.ReportMetric(handler/1e3, "handler-µs")
	b.ReportMetric(bareTime/1e3, "echo-µs")
	b.ReportMetric(service/1e3, "service-µs")
}

func dialEcho(b *testing.B, answer *pb.SizeSupplyResponse) pb.FloatRailClient {
	listener, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		b.Fatal(err)
	}
	server := grpc.NewServer()
	pb.RegisterFloatRailServer(server, &echo{answer: answer})
	go func() { _ = server.Serve(listener) }()
	b.Cleanup(server.Stop)
	conn, err := grpc.NewClient(listener.Addr().String(), grpc.WithTransportCredentials(insecure.NewCredentials()))
	if err != nil {
		b.Fatal(err)
	}
	b.Cleanup(func() { _ = conn.Close() })
	return pb.NewFloatRailClient(conn)
}
