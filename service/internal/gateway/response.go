package gateway

import "net/http"

// response notes the status of a response.
type response struct {
	http.ResponseWriter
	status int // 0: none yet
}

// WriteHeader notes the status.
func (r *response) WriteHeader(status int) {
	if r.status == 0 {
		r.status = status
	}
	r.ResponseWriter.WriteHeader(status)
}

// Unwrap gives access to the controls of the response below.
func (r *response) Unwrap() http.ResponseWriter { return r.ResponseWriter }

// code is the status that the client sees.
func (r *response) code() int {
	if r.status == 0 {
		return http.StatusOK
	}
	return r.status
}
