package rpc

import (
	"context"
	"slices"

	"google.golang.org/grpc"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/convert"
	"floatrail/service/internal/wire"
)

// Register offers the handlers on a server with the package's Codec. A request that is no message of the contract is answered like any
// other fault, through the interceptors.
func Register(s grpc.ServiceRegistrar, h pb.FloatRailServer) {
	desc := pb.FloatRail_ServiceDesc
	desc.Methods = slices.Clone(desc.Methods)
	for i := range desc.Methods {
		desc.Methods[i].Handler = refusing(desc.Methods[i].Handler)
	}
	desc.Streams = slices.Clone(desc.Streams)
	for i := range desc.Streams {
		handle := desc.Streams[i].Handler
		desc.Streams[i].Handler = func(srv any, stream grpc.ServerStream) error { return handle(srv, strictStream{stream}) }
	}
	s.RegisterService(&desc, h)
}

// strictStream refuses messages that did not decode.
type strictStream struct{ grpc.ServerStream }

// RecvMsg receives one message.
func (s strictStream) RecvMsg(m any) error {
	if err := s.ServerStream.RecvMsg(m); err != nil {
		return err
	}
	if undecodable(m) {
		return notAMessage()
	}
	return nil
}

// notAMessage is the refusal of what does not decode.
func notAMessage() error {
	return refusal(nil, []convert.Fault{{Field: wire.Body, Description: "read a message that does not decode, expected protocol buffers with strings in UTF-8"}})
}

// refusing puts the refusal of messages that did not decode in front of a handler, behind the interceptors.
func refusing(handle grpc.MethodHandler) grpc.MethodHandler {
	return func(srv any, ctx context.Context, decode func(any) error, interceptor grpc.UnaryServerInterceptor) (any, error) {
		return handle(srv, ctx, decode, func(ctx context.Context, req any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
			if undecodable(req) {
				handler = func(context.Context, any) (any, error) { return nil, notAMessage() }
			}
			if interceptor == nil {
				return handler(ctx, req)
			}
			return interceptor(ctx, req, info, handler)
		})
	}
}
