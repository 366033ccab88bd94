package wire

import (
	"context"
	"encoding/json"

	"google.golang.org/grpc/metadata"
)

// carrier is the key under which a report travels with a call.
const carrier = "floatrail-report-bin"

// Carry lets a report travel with the calls of the context, so that the handler answers with the faults of the body and its own at once.
func Carry(ctx context.Context, r *Report) context.Context {
	if r == nil || len(r.Faults) == 0 {
		return ctx
	}
	// A report is strings, numbers and a flag: it always encodes.
	data, _ := json.Marshal(r)
	return metadata.AppendToOutgoingContext(ctx, carrier, string(data))
}

// Carried is the report that came with a call; nil where none did. It is to be believed from the gateway's connection only.
func Carried(ctx context.Context) *Report {
	values := metadata.ValueFromIncomingContext(ctx, carrier)
	if len(values) != 1 {
		return nil
	}
	var r Report
	if json.Unmarshal([]byte(values[0]), &r) != nil {
		return nil
	}
	return &r
}

type reportKey struct{}

// WithReport lets the walk of a body, which may happen later, report to whatever is called with the context.
func WithReport(ctx context.Context, r *Report) context.Context {
	return context.WithValue(ctx, reportKey{}, r)
}

// ReportOf is the report of the context; nil where it has none.
func ReportOf(ctx context.Context) *Report {
	r, _ := ctx.Value(reportKey{}).(*Report)
	return r
}
