package rpc

import (
	"bytes"

	"google.golang.org/grpc/encoding"
	grpcproto "google.golang.org/grpc/encoding/proto"
	"google.golang.org/grpc/mem"
	"google.golang.org/protobuf/encoding/protowire"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
)

// Codec is the codec of the server: the stock one, but a message of the contract that does not decode is handed on with a mark. The server
// alone would end the call at once, with INTERNAL and unseen by the interceptors, although the fault is the client's.
func Codec() encoding.CodecV2 { return codec{encoding.GetCodecV2(grpcproto.Name)} }

type codec struct{ encoding.CodecV2 }

// Unmarshal reads a message.
func (c codec) Unmarshal(data mem.BufferSlice, v any) error {
	err := c.CodecV2.Unmarshal(data, v)
	m, ok := v.(proto.Message)
	if err == nil || !ok || m.ProtoReflect().Descriptor().ParentFile().Package() != pb.File_floatrail_v1_service_proto.Package() {
		return err
	}
	proto.Reset(m)
	m.ProtoReflect().SetUnknown(mark())
	return nil
}

// mark is a field of a number that protocol buffers reserve, so that no contract has it. A client that sends it is at fault as well.
func mark() []byte {
	const reserved = 19999
	return protowire.AppendVarint(protowire.AppendTag(nil, reserved, protowire.VarintType), 1)
}

// undecodable tells whether the codec marked the message.
func undecodable(m any) bool {
	message, ok := m.(proto.Message)
	return ok && bytes.Equal(message.ProtoReflect().GetUnknown(), mark())
}
