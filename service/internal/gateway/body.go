package gateway

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"mime"
	"net/http"
	"os"
	"strings"

	"github.com/grpc-ecosystem/grpc-gateway/v2/runtime"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"

	"floatrail/service/internal/telemetry"
	"floatrail/service/internal/wire"
)

// body is the whole body of a request; what its walk finds goes to the report.
type body struct {
	bytes.Reader
	data   []byte
	report *wire.Report
}

// Close does nothing.
func (*body) Close() error { return nil }

// receive reads and checks all of a request that the contract does not see: query, media type, size. The body is walked when the route
// decodes it.
func (g *gateway) receive(next runtime.HandlerFunc) runtime.HandlerFunc {
	return func(w http.ResponseWriter, r *http.Request, params map[string]string) {
		template, _ := match(g.routes, r.URL.Path)
		to, ok := find(g.routes, template)
		if !ok {
			g.misrouted(r.Context(), g.mux, &marshaler{}, w, r, http.StatusNotFound)
			return
		}
		report := new(wire.Report)
		r = r.WithContext(wire.WithReport(r.Context(), report))
		r.URL.RawQuery = query(to, r.URL.RawQuery, params, report)
		if to.method != http.MethodPost {
			next(w, r, params)
			return
		}
		data, err := g.read(w, r, string(to.call.Name()))
		if err != nil {
			g.fail(r.Context(), g.mux, &marshaler{}, w, r, err)
			return
		}
		r.Body = &body{Reader: *bytes.NewReader(data), data: data, report: report}
		if to.call.IsStreamingServer() {
			g.stream(w, r, to)
			return
		}
		next(w, r, params)
	}
}

// read reads a body of JSON within the limit of the method.
func (g *gateway) read(w http.ResponseWriter, r *http.Request, method string) ([]byte, error) {
	if err := jsonOnly(r.Header); err != nil {
		return nil, err
	}
	limit := g.Limits.Size(method)
	if r.ContentLength > int64(limit) {
		w.Header().Set("Connection", "close")
		return nil, g.tooLarge(method, limit)
	}
	data, err := io.ReadAll(http.MaxBytesReader(w, r.Body, int64(limit)))
	var large *http.MaxBytesError
	switch {
	case errors.As(err, &large):
		return nil, g.tooLarge(method, limit)
	case errors.Is(err, os.ErrDeadlineExceeded):
		return nil, refuse(http.StatusRequestTimeout, codes.DeadlineExceeded, "the body did not arrive in time")
	case err != nil:
		return nil, refuse(http.StatusBadRequest, codes.Canceled, "the body ended early")
	}
	return data, nil
}

func (g *gateway) tooLarge(method string, limit int) error {
	g.Metrics.Reject(telemetry.TooLarge)
	return refuse(http.StatusRequestEntityTooLarge, codes.ResourceExhausted, fmt.Sprintf("the body is larger than the %d bytes that %s takes", limit, method))
}

// jsonOnly refuses bodies that are not plain JSON in UTF-8.
func jsonOnly(h http.Header) error {
	const expected = "expected application/json"
	given := h.Get("Content-Type")
	if given == "" {
		return refuse(http.StatusUnsupportedMediaType, codes.InvalidArgument, "no Content-Type was read; "+expected)
	}
	kind, params, err := mime.ParseMediaType(given)
	if err != nil || kind != "application/json" {
		return refuse(http.StatusUnsupportedMediaType, codes.InvalidArgument, "another Content-Type was read; "+expected)
	}
	if charset := params["charset"]; charset != "" && !strings.EqualFold(charset, "utf-8") {
		return refuse(http.StatusUnsupportedMediaType, codes.InvalidArgument, "another charset was read; expected utf-8")
	}
	if encoding := h.Get("Content-Encoding"); encoding != "" && !strings.EqualFold(encoding, "identity") {
		return refuse(http.StatusUnsupportedMediaType, codes.InvalidArgument, "a Content-Encoding was read; expected a plain body")
	}
	return nil
}

// refuse is an error with its HTTP status.
func refuse(httpStatus int, code codes.Code, text string) error {
	return &runtime.HTTPStatusError{HTTPStatus: httpStatus, Err: status.Error(code, text)}
}

// marshaler reads bodies by the strict walk and writes canonical JSON.
type marshaler struct{ decoder *wire.Decoder }

// Marshal writes a message.
func (*marshaler) Marshal(v any) ([]byte, error) {
	m, ok := v.(proto.Message)
	if !ok {
		return nil, fmt.Errorf("gateway: %T is no message", v)
	}
	return wire.Marshal(m)
}

// Unmarshal is not used by the routes of the contract: bodies are read by NewDecoder.
func (*marshaler) Unmarshal([]byte, any) error { return errors.ErrUnsupported }

// NewDecoder reads one body into a message.
func (m *marshaler) NewDecoder(r io.Reader) runtime.Decoder {
	return runtime.DecoderFunc(func(v any) error {
		b, isBody := r.(*body)
		message, isMessage := v.(proto.Message)
		if !isBody || !isMessage {
			return errors.ErrUnsupported
		}
		m.decoder.Decode(b.data, message, b.report)
		return nil
	})
}

// NewEncoder writes messages.
func (m *marshaler) NewEncoder(w io.Writer) runtime.Encoder {
	return runtime.EncoderFunc(func(v any) error {
		data, err := m.Marshal(v)
		if err == nil {
			_, err = w.Write(data)
		}
		return err
	})
}

// ContentType is the media type of answers.
func (*marshaler) ContentType(any) string { return "application/json" }

// stream answers a call whose answers are many: lines of {"result": ...}, at last {"error": ...} where one occurred. An error before the
// first answer is answered like that of any other call.
func (g *gateway) stream(w http.ResponseWriter, r *http.Request, to route) {
	m := &marshaler{decoder: g.decoder}
	ctx, err := runtime.AnnotateContext(r.Context(), g.mux, r, fullMethod(to))
	if err != nil {
		g.fail(r.Context(), g.mux, m, w, r, err)
		return
	}
	ctx, cancel := context.WithCancel(ctx)
	defer cancel()
	s, err := g.open(ctx, to, m.NewDecoder(r.Body))
	if err != nil {
		g.fail(ctx, g.mux, m, w, r, err)
		return
	}
	s.forward(ctx, g, m, w, r)
}
