module floatrail/ci/protodeps

go 1.26.0

require (
	github.com/jhump/protoreflect/v2 v2.0.1
	google.golang.org/genproto/googleapis/api v0.0.0-20261026165753-2ffab32bce7e
	google.golang.org/genproto/googleapis/rpc v0.0.0-20261019180522-ce908d29299b
	google.golang.org/protobuf v1.36.12
)
