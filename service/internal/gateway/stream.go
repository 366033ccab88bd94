package gateway

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"net/http"

	"github.com/grpc-ecosystem/grpc-gateway/v2/runtime"
	"google.golang.org/grpc"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoregistry"

	"floatrail/service/internal/telemetry"
	"floatrail/service/internal/wire"
)

// stream is a call whose answers are many.
type stream struct {
	grpc.ClientStream
	answer func() proto.Message // makes an empty answer
}

// fullMethod is the name of the call in gRPC.
func fullMethod(to route) string {
	return fmt.Sprintf("/%s/%s", to.call.Parent().FullName(), to.call.Name())
}

// open starts the call with the request that the decoder reads.
func (g *gateway) open(ctx context.Context, to route, body runtime.Decoder) (*stream, error) {
	in, err := protoregistry.GlobalTypes.FindMessageByName(to.call.Input().FullName())
	if err != nil {
		return nil, fmt.Errorf("gateway: %w", err)
	}
	out, err := protoregistry.GlobalTypes.FindMessageByName(to.call.Output().FullName())
	if err != nil {
		return nil, fmt.Errorf("gateway: %w", err)
	}
	request := in.New().Interface()
	if err := body.Decode(request); err != nil {
		return nil, fmt.Errorf("gateway: %w", err)
	}
	s, err := g.conn.NewStream(wire.Carry(ctx, wire.ReportOf(ctx)), &grpc.StreamDesc{ServerStreams: true}, fullMethod(to))
	if err != nil {
		return nil, err
	}
	// Where sending fails the reason comes with the first answer.
	if err := s.SendMsg(request); err != nil && !errors.Is(err, io.EOF) {
		return nil, err
	}
	if err := s.CloseSend(); err != nil {
		return nil, err
	}
	return &stream{s, func() proto.Message { return out.New().Interface() }}, nil
}

// forward writes the answers as they come.
func (s *stream) forward(ctx context.Context, g *gateway, m *marshaler, w http.ResponseWriter, r *http.Request) {
	flush := http.NewResponseController(w).Flush
	for first := true; ; first = false {
		answer := s.answer()
		err := s.RecvMsg(answer)
		if first {
			if header, headerErr := s.Header(); headerErr == nil {
				ctx = runtime.NewServerMetadataContext(ctx, runtime.ServerMetadata{HeaderMD: header})
				if id := header.Get(telemetry.RequestID); len(id) > 0 {
					w.Header().Set(telemetry.RequestID, id[0])
				}
			}
			if err != nil && !errors.Is(err, io.EOF) {
				g.fail(ctx, g.mux, m, w, r, err)
				return
			}
			w.Header().Set("Content-Type", "application/x-ndjson")
		}
		name := "result"
		switch {
		case errors.Is(err, io.EOF):
			return
		case err != nil:
			name, answer = "error", status.Convert(err).Proto()
		}
		line, encodeErr := m.Marshal(answer)
		if encodeErr != nil {
			return
		}
		if _, writeErr := w.Write(bytes.Join([][]byte{[]byte(`{"` + name + `":`), line, []byte("}\n")}, nil)); writeErr != nil || err != nil {
			return
		}
		if flush() != nil {
			return
		}
	}
}
