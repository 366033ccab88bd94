// Package gateway is the REST interface: it routes, reads bodies strictly, and passes every call to the gRPC server over a connection
// within the process, so that limits, deadlines, metrics and logs apply once and alike on both transports.
//
// A body that is at fault is not answered here. What the walk found wrong goes with the call, and the handler adds what is wrong with the
// values that could be read: all faults stand in one answer.
package gateway

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"net/http"
	"strconv"
	"strings"
	"time"

	"github.com/grpc-ecosystem/grpc-gateway/v2/runtime"
	"google.golang.org/genproto/googleapis/rpc/errdetails"
	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/guard"
	"floatrail/service/internal/telemetry"
	"floatrail/service/internal/wire"
)

// Options of the gateway.
type Options struct {
	Limits  guard.Limits
	Metrics *telemetry.Metrics
	Log     *slog.Logger
}

// New returns the REST interface in front of the gRPC server at the other end of the connection, which Dial made.
func New(conn *grpc.ClientConn, o Options) (http.Handler, error) {
	g := &gateway{Options: o, conn: conn, decoder: wire.NewDecoder(), routes: routes(pb.File_floatrail_v1_service_proto.Services().ByName("FloatRail"))}
	g.mux = runtime.NewServeMux(
		runtime.WithMarshalerOption(runtime.MIMEWildcard, &marshaler{decoder: g.decoder}),
		runtime.WithMiddlewares(g.receive),
		runtime.WithErrorHandler(g.fail),
		runtime.WithRoutingErrorHandler(g.misrouted),
		runtime.WithIncomingHeaderMatcher(incoming),
		runtime.WithOutgoingHeaderMatcher(outgoing),
		runtime.WithOutgoingTrailerMatcher(func(string) (string, bool) { return "", false }),
		runtime.WithDisablePathLengthFallback(),
		runtime.WithDisableHTTPMethodOverride(),
		runtime.WithWriteContentLength(),
	)
	if err := pb.RegisterFloatRailHandlerClient(context.Background(), g.mux, pb.NewFloatRailClient(conn)); err != nil {
		return nil, fmt.Errorf("gateway: %w", err)
	}
	return http.HandlerFunc(g.serve), nil
}

type gateway struct {
	Options
	conn    *grpc.ClientConn
	mux     *runtime.ServeMux
	routes  []route
	decoder *wire.Decoder
}

// serve answers one request and counts its response. A request that reaches a method is logged there; one that does not is logged here.
func (g *gateway) serve(w http.ResponseWriter, r *http.Request) {
	route, methods := match(g.routes, r.URL.Path)
	out := &response{ResponseWriter: w}
	defer func() {
		g.Metrics.Response(route, strconv.Itoa(out.code()))
		if out.code() >= http.StatusBadRequest && out.Header().Get(telemetry.RequestID) == "" {
			g.Log.LogAttrs(r.Context(), slog.LevelInfo, "refused", slog.String("route", route), slog.Int("status", out.code()))
		}
	}()
	h := out.Header()
	h.Set("X-Content-Type-Options", "nosniff")
	h.Set("Cache-Control", "no-store")
	switch {
	case r.Method == http.MethodOptions && len(methods) > 0:
		h.Set("Allow", strings.Join(methods, ", "))
		out.WriteHeader(http.StatusNoContent)
		return
	case r.Method == http.MethodHead:
		// The server drops the body of a response to HEAD; it is routed as GET.
		r = r.Clone(r.Context())
		r.Method = http.MethodGet
	}
	g.mux.ServeHTTP(out, r)
}

// misrouted answers what no route takes.
func (g *gateway) misrouted(ctx context.Context, mux *runtime.ServeMux, m runtime.Marshaler, w http.ResponseWriter, r *http.Request, httpStatus int) {
	_, methods := match(g.routes, r.URL.Path)
	err := &runtime.HTTPStatusError{HTTPStatus: http.StatusNotFound, Err: status.Error(codes.NotFound, "there is no such path; the API stands below /v1/")}
	switch {
	case len(methods) > 0:
		w.Header().Set("Allow", strings.Join(methods, ", "))
		err.HTTPStatus = http.StatusMethodNotAllowed
		err.Err = status.Error(codes.Unimplemented, "the path does not take this method; expected "+strings.Join(methods, ", "))
	case httpStatus == http.StatusBadRequest:
		err.HTTPStatus = httpStatus
		err.Err = status.Error(codes.InvalidArgument, "the path is malformed")
	}
	g.fail(ctx, mux, m, w, r, err)
}

// fail writes an error: always application/json, the google.rpc.Status with its details.
func (g *gateway) fail(ctx context.Context, _ *runtime.ServeMux, m runtime.Marshaler, w http.ResponseWriter, _ *http.Request, err error) {
	httpStatus := 0
	var routed *runtime.HTTPStatusError
	if errors.As(err, &routed) {
		httpStatus, err = routed.HTTPStatus, routed.Err
	}
	s := status.Convert(err)
	if httpStatus == 0 {
		httpStatus = runtime.HTTPStatusFromCode(s.Code())
	}
	if md, ok := runtime.ServerMetadataFromContext(ctx); ok {
		if id := md.HeaderMD.Get(telemetry.RequestID); len(id) > 0 {
			w.Header().Set(telemetry.RequestID, id[0])
		}
	}
	for _, detail := range s.Details() {
		if retry, ok := detail.(*errdetails.RetryInfo); ok {
			w.Header().Set("Retry-After", strconv.Itoa(int((retry.GetRetryDelay().AsDuration()+time.Second-1)/time.Second)))
		}
	}
	body, err := m.Marshal(s.Proto())
	if err != nil {
		httpStatus, body = http.StatusInternalServerError, []byte(`{"code":13,"message":"internal error"}`)
	}
	w.Header().Set("Content-Type", "application/json")
	w.Header().Set("Content-Length", strconv.Itoa(len(body)))
	w.WriteHeader(httpStatus)
	// A client that is gone needs no answer.
	_, _ = w.Write(body)
}

// incoming passes no header of a client to the server but the name of the call.
func incoming(header string) (string, bool) {
	return telemetry.RequestID, strings.EqualFold(header, telemetry.RequestID)
}

// outgoing passes no header of the server to a client but the name of the call.
func outgoing(key string) (string, bool) {
	return telemetry.RequestID, key == telemetry.RequestID
}
