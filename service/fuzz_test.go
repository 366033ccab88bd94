package main

import (
	"bytes"
	"encoding/json"
	"net/http"
	"testing"
	"time"
)

// FuzzRESTBody holds that no body of a request makes the service panic, answer anything but JSON, or fail: every status is one of the
// client's faults, a full queue or a deadline.
func FuzzRESTBody(f *testing.F) {
	for _, seed := range []string{small, `{}`, ``, `null`, `[`, `{"stage":{"driver":{"uvloRising":{"typ":9}}}}`, `{"stage":{"id":"\ud800"}}`,
		`{"stage":{"operatingPoints":[{"name":"a","fixedDuty":{"duty":{"typ":"1e400"}}},null]}}`, `{"parts":[{"id":"a","use":1}],"stage":{"driver":{"use":"a"}}}`,
		`{"stage":{"bootstrap":{"capacitor":{"marking":"1u/25V/X7R/0603/K"}}},"options":{"families":["duty"],"perPoint":true}}`} {
		f.Add([]byte(seed))
	}
	c := settings()
	c.Deadline = 2 * time.Second
	r := start(f, c, realHandlers)
	f.Fuzz(func(t *testing.T, body []byte) {
		r := *r
		r.t = t
		for _, path := range []string{"/v1/reviews", "/v1/sizing", "/v1/duty-limits"} {
			answer, data, err := r.do(http.MethodPost, r.http+path, "application/json", bytes.NewReader(body))
			if err != nil {
				t.Fatal(err)
			}
			switch answer.StatusCode {
			case http.StatusOK, http.StatusBadRequest, http.StatusRequestEntityTooLarge, http.StatusTooManyRequests, http.StatusServiceUnavailable, http.StatusGatewayTimeout:
			default:
				t.Errorf("%s: %d %s", path, answer.StatusCode, data)
			}
			if !json.Valid(data) || answer.Header.Get("Content-Type") != "application/json" {
				t.Errorf("%s: no JSON: %q", path, data)
			}
		}
		if n := r.metric("floatrail_panics_total"); n != 0 {
			t.Errorf("%v panics", n)
		}
	})
}
