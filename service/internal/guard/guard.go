package guard

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"path"
	"runtime/debug"
	"time"

	"google.golang.org/genproto/googleapis/rpc/errdetails"
	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/types/known/durationpb"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/telemetry"
)

// errFull: the queue of a lane is full.
var errFull = errors.New("guard: the queue is full")

// Retry is the pause that a rejected client is asked for.
const Retry = time.Second

// Limits bound one call.
type Limits struct {
	Request  int           // size of a request [byte]
	Board    int           // size of the request of a whole board [byte]
	Deadline time.Duration // time for an answer where the client does not set less
}

// Size is the limit on a request of the method, given by its last name [byte].
func (l Limits) Size(method string) int {
	if method == "ReviewBoard" {
		return l.Board
	}
	return l.Request
}

// Guard holds the interceptors.
type Guard struct {
	Limits  Limits
	Lanes   Lanes
	Metrics *telemetry.Metrics
	Log     *slog.Logger
}

// computes tells whether the method occupies a processor; the rest only reads tables.
func computes(fullMethod string) bool {
	service, method := path.Split(fullMethod)
	return service == "/floatrail.v1.FloatRail/" && method != "ListRules" && method != "GetRule"
}

// lane is that of a call, nil where it needs none.
func (g *Guard) lane(fullMethod string, req any) *Lane {
	if !computes(fullMethod) {
		return nil
	}
	switch path.Base(fullMethod) {
	case "StudyAlternates", "StudyTolerances":
		return g.Lanes.Simulation
	}
	if r, ok := req.(interface{ GetOptions() *pb.Options }); ok && r.GetOptions().GetSimulate() {
		return g.Lanes.Simulation
	}
	return g.Lanes.ClosedForm
}

// Unary is the interceptor of unary calls.
func (g *Guard) Unary(ctx context.Context, req any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (answer any, err error) {
	err = g.run(ctx, info.FullMethod, req, func(ctx context.Context) (err error) {
		answer, err = handler(ctx, req)
		return err
	})
	if err != nil {
		return nil, err
	}
	return answer, nil
}

// Stream is the interceptor of streams. Health checks and reflection last as long as their client likes.
func (g *Guard) Stream(srv any, ss grpc.ServerStream, info *grpc.StreamServerInfo, handler grpc.StreamHandler) error {
	if !computes(info.FullMethod) {
		return g.recovered(ss.Context(), info.FullMethod, func(context.Context) error { return handler(srv, ss) })
	}
	return g.run(ss.Context(), info.FullMethod, nil, func(ctx context.Context) error {
		return handler(srv, &limitedStream{ServerStream: ss, ctx: ctx, guard: g, method: info.FullMethod})
	})
}

// limitedStream carries the deadline and checks the size of what it receives.
type limitedStream struct {
	grpc.ServerStream
	ctx    context.Context
	guard  *Guard
	method string
}

// Context is the context of the call, with its deadline.
func (s *limitedStream) Context() context.Context { return s.ctx }

// RecvMsg receives one message.
func (s *limitedStream) RecvMsg(m any) error {
	if err := s.ServerStream.RecvMsg(m); err != nil {
		return err
	}
	return s.guard.fits(s.method, m)
}

// run runs one call within its limits.
func (g *Guard) run(ctx context.Context, fullMethod string, req any, call func(context.Context) error) error {
	if err := g.fits(fullMethod, req); err != nil {
		return err
	}
	ctx, cancel := context.WithTimeout(ctx, g.Limits.Deadline)
	defer cancel()
	if lane := g.lane(fullMethod, req); lane != nil {
		if err := lane.Enter(ctx); err != nil {
			return g.turnedAway(ctx, fullMethod, err)
		}
		defer lane.Leave()
	}
	err := g.recovered(ctx, fullMethod, call)
	if _, known := status.FromError(err); known {
		return err
	}
	return g.ended(ctx, fullMethod, err)
}

// recovered turns a panic into INTERNAL. Its text goes to the log and never to the client.
func (g *Guard) recovered(ctx context.Context, fullMethod string, call func(context.Context) error) (err error) {
	defer func() {
		if p := recover(); p != nil {
			g.Metrics.Panic(telemetry.InCall)
			g.Log.LogAttrs(ctx, slog.LevelError, "panic", slog.String("method", path.Base(fullMethod)), slog.String("panic", fmt.Sprint(p)),
				slog.String("stack", string(debug.Stack())))
			err = status.Error(codes.Internal, internal)
		}
	}()
	return call(ctx)
}

// fits checks the size of a request.
func (g *Guard) fits(fullMethod string, req any) error {
	m, ok := req.(proto.Message)
	if !ok {
		return nil
	}
	method := path.Base(fullMethod)
	if size, limit := proto.Size(m), g.Limits.Size(method); size > limit {
		g.Metrics.Reject(telemetry.TooLarge)
		return status.Errorf(codes.ResourceExhausted, "the request has %d bytes; %s takes at most %d", size, method, limit)
	}
	return nil
}

// turnedAway is the answer to a call that found no place.
func (g *Guard) turnedAway(ctx context.Context, fullMethod string, err error) error {
	if !errors.Is(err, errFull) {
		return g.ended(ctx, fullMethod, err)
	}
	g.Metrics.Reject(telemetry.QueueFull)
	s := status.New(codes.ResourceExhausted, "all processors are busy and the queue is full; try again later")
	if detailed, err := s.WithDetails(&errdetails.RetryInfo{RetryDelay: durationpb.New(Retry)}); err == nil {
		s = detailed
	}
	return s.Err()
}

// ended is the status of a call whose context ended, or INTERNAL for an error without a status.
func (g *Guard) ended(ctx context.Context, fullMethod string, err error) error {
	switch {
	case errors.Is(err, context.DeadlineExceeded):
		return status.Error(codes.DeadlineExceeded, "the deadline passed before the answer was ready")
	case errors.Is(err, context.Canceled):
		return status.Error(codes.Canceled, "the client cancelled the call")
	}
	g.Log.LogAttrs(ctx, slog.LevelError, "internal error", slog.String("method", path.Base(fullMethod)), slog.String("error", err.Error()))
	return status.Error(codes.Internal, internal)
}

// internal is all that a client learns of an error of ours.
const internal = "internal error; it has been logged"
