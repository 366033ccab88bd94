package rpc

import (
	"context"
	"slices"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/convert"
	"floatrail/service/internal/wire"
)

// Register offers the handlers on a server. A request that is no message of the contract is the client's fault and is answered like any
// other fault, through the interceptors; the server alone would answer INTERNAL, unseen by them.
func Register(s grpc.ServiceRegistrar, h pb.FloatRailServer) {
	desc := pb.FloatRail_ServiceDesc
	desc.Methods = slices.Clone(desc.Methods)
	for i := range desc.Methods {
		desc.Methods[i].Handler = decoding(desc.Methods[i].Handler)
	}
	s.RegisterService(&desc, h)
}

func decoding(handle grpc.MethodHandler) grpc.MethodHandler {
	return func(srv any, ctx context.Context, decode func(any) error, interceptor grpc.UnaryServerInterceptor) (any, error) {
		var undecodable error
		decodeOrNote := func(m any) error {
			if err := decode(m); err != nil {
				undecodable = refused(err)
			}
			return nil
		}
		intercept := func(ctx context.Context, req any, info *grpc.UnaryServerInfo, handler grpc.UnaryHandler) (any, error) {
			if undecodable != nil {
				handler = func(context.Context, any) (any, error) { return nil, undecodable }
			}
			if interceptor == nil {
				return handler(ctx, req)
			}
			return interceptor(ctx, req, info, handler)
		}
		return handle(srv, ctx, decodeOrNote, intercept)
	}
}

// refused is the answer to a request that does not decode; other errors of decoding, such as of compression, stay as they are.
func refused(err error) error {
	if status.Code(err) != codes.Internal {
		return err
	}
	return refusal(nil, []convert.Fault{{Field: wire.Body, Description: "read a message that does not decode, expected protocol buffers with strings in UTF-8"}})
}
