package telemetry

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"log/slog"
	"path"
	"time"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/metadata"
	"google.golang.org/grpc/peer"
	"google.golang.org/grpc/status"
)

// RequestID is the header, on both transports, that names a call in the logs: taken from the client, else made up, and returned.
const RequestID = "x-request-id"

// Recorder records every call: metrics and one line in the log.
type Recorder struct {
	metrics *Metrics
	log     *slog.Logger
	inside  string // network of the connection over which the REST interface reaches the server
}

// NewRecorder returns a recorder; calls over the inside network come from the REST interface.
func NewRecorder(m *Metrics, log *slog.Logger, inside string) *Recorder {
	return &Recorder{metrics: m, log: log, inside: inside}
}

// Unary is the interceptor of unary calls.
func (r *Recorder) Unary(ctx context.Context, req any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
	id := requestID(ctx)
	if err := grpc.SetHeader(ctx, metadata.Pairs(RequestID, id)); err != nil {
		r.log.LogAttrs(ctx, slog.LevelDebug, "header not set", slog.String("request_id", id))
	}
	var answer any
	err := r.record(ctx, info.FullMethod, id, func() (err error) {
		answer, err = handler(ctx, req)
		return err
	})
	return answer, err
}

// Stream is the interceptor of streams.
func (r *Recorder) Stream(srv any, ss grpc.ServerStream, info *grpc.StreamServerInfo, handler grpc.StreamHandler) error {
	id := requestID(ss.Context())
	if err := ss.SetHeader(metadata.Pairs(RequestID, id)); err != nil {
		r.log.LogAttrs(ss.Context(), slog.LevelDebug, "header not set", slog.String("request_id", id))
	}
	return r.record(ss.Context(), info.FullMethod, id, func() error { return handler(srv, ss) })
}

// record runs the call. Only the service's own methods are counted: health checks and reflection would drown them.
func (r *Recorder) record(ctx context.Context, fullMethod, id string, call func() error) error {
	service, method := path.Split(fullMethod)
	if service != "/floatrail.v1.FloatRail/" {
		return call()
	}
	inFlight := r.metrics.inFlight.WithLabelValues(method)
	inFlight.Inc()
	defer inFlight.Dec()
	begin := time.Now()
	err := call()
	took := time.Since(begin)
	code := Code(err)
	transport := r.transport(ctx)
	r.metrics.duration.WithLabelValues(method).Observe(took.Seconds())
	r.metrics.requests.WithLabelValues(method, transport, code.String()).Inc()
	level := slog.LevelInfo
	if code == codes.Internal || code == codes.Unknown || code == codes.DataLoss {
		level = slog.LevelError
	}
	r.log.LogAttrs(ctx, level, "call", slog.String("method", method), slog.String("transport", transport), slog.String("code", code.String()),
		slog.Float64("duration_ms", float64(took.Microseconds())/1000), slog.String("request_id", id))
	return err
}

// Code is the status code of an error, the one of a context's end included.
func Code(err error) codes.Code {
	if s, ok := status.FromError(err); ok {
		return s.Code()
	}
	return status.FromContextError(err).Code()
}

func (r *Recorder) transport(ctx context.Context) string {
	if Inside(ctx, r.inside) {
		return REST
	}
	return GRPC
}

// Inside tells whether the call came over a connection of the network.
func Inside(ctx context.Context, network string) bool {
	p, ok := peer.FromContext(ctx)
	return ok && p.Addr != nil && p.Addr.Network() == network
}

// requestID is the client's name of the call where it is fit for a log, else a random one.
func requestID(ctx context.Context) string {
	if given := metadata.ValueFromIncomingContext(ctx, RequestID); len(given) == 1 && Fit(given[0]) {
		return given[0]
	}
	var random [8]byte
	// crypto/rand never fails.
	_, _ = rand.Read(random[:])
	return hex.EncodeToString(random[:])
}

// Fit tells whether a client's name of a call is fit for a log: at most 128 letters, digits and - _ . : /
func Fit(id string) bool {
	if id == "" || len(id) > 128 {
		return false
	}
	for i := 0; i < len(id); i++ {
		switch c := id[i]; {
		case c >= '0' && c <= '9', c >= 'a' && c <= 'z', c >= 'A' && c <= 'Z', c == '-', c == '_', c == '.', c == ':', c == '/':
		default:
			return false
		}
	}
	return true
}
