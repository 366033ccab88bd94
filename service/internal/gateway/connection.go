package gateway

import (
	"context"
	"fmt"
	"math"
	"net"

	"google.golang.org/grpc"
	"google.golang.org/grpc/credentials/insecure"
	"google.golang.org/grpc/test/bufconn"

	"floatrail/service/internal/wire"
)

// Network is the network of the connection within the process, by which the server knows calls of the REST interface.
const Network = "bufconn"

// pipe is the buffer of the connection within the process [byte].
const pipe = 1 << 18

// Listen opens the listener on which the gRPC server takes the calls of the REST interface.
func Listen() *bufconn.Listener { return bufconn.Listen(pipe) }

// Dial connects to the server that serves the listener. What a body's walk found travels with each call.
func Dial(inside *bufconn.Listener) (*grpc.ClientConn, error) {
	conn, err := grpc.NewClient("passthrough:///inside",
		grpc.WithContextDialer(func(ctx context.Context, _ string) (net.Conn, error) { return inside.DialContext(ctx) }),
		grpc.WithTransportCredentials(insecure.NewCredentials()),
		grpc.WithDefaultCallOptions(grpc.MaxCallRecvMsgSize(math.MaxInt32), grpc.MaxCallSendMsgSize(math.MaxInt32)),
		grpc.WithMaxHeaderListSize(MaxHeader),
		grpc.WithUnaryInterceptor(func(ctx context.Context, method string, req, reply any, conn *grpc.ClientConn, call grpc.UnaryInvoker, o ...grpc.CallOption) error {
			return call(wire.Carry(ctx, wire.ReportOf(ctx)), method, req, reply, conn, o...)
		}),
	)
	if err != nil {
		return nil, fmt.Errorf("gateway: %w", err)
	}
	return conn, nil
}

// MaxHeader bounds the headers and trailers of a call: a full report of faults fits [byte].
const MaxHeader = 1 << 20
