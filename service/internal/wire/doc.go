// Package wire is JSON as it stands on the wire: bodies of requests are walked against the descriptor of their message, so that everything
// wrong with them is found in one pass and told with its path, and answers are written canonically, so that equal messages are equal bytes.
//
// The walk is stricter than the stock JSON mapping of protocol buffers, which stops at its first error with a text that varies from build
// to build: null is refused everywhere, numbers never stand for strings nor strings for numbers, and enumerations are read by name.
package wire

import "strconv"

// Fault is one thing wrong with a body.
type Fault struct {
	Field       string // path in JSON names: stage.operatingPoints[1].deadTime.typ
	Description string // what was read and what was expected
}

// Body is the path of faults that concern the whole body, as the binder names the whole request.
const Body = "request"

// Report is what the walk found wrong.
type Report struct {
	Faults []Fault
	// More counts faults beyond the limit on their number.
	More int
	// Unread is set where the walk ended early: the message is not to be looked at.
	Unread bool
	// Opaque are paths whose value was not read: what a later check says of them, or of anything within, follows from a fault told here.
	Opaque []string
	// Partial are paths of messages that lack a member which was not read: what a later check says of just that path is likewise no news.
	Partial []string
}

// maxFaults bounds the faults of one report, so that an answer about a hostile body stays small.
const maxFaults = 500

// Add adds a fault.
func (r *Report) Add(field, description string) {
	if len(r.Faults) == maxFaults {
		r.More++
		return
	}
	r.Faults = append(r.Faults, Fault{Field: field, Description: description})
}

// Explains tells whether a fault at the path follows from what the walk found already.
func (r *Report) Explains(path string) bool {
	for _, p := range r.Partial {
		if path == p {
			return true
		}
	}
	for _, p := range r.Opaque {
		if within(path, p) {
			return true
		}
	}
	return false
}

// opaque notes that the value at the path was not read.
func (r *Report) opaque(path string) {
	if len(r.Opaque) < maxFaults {
		r.Opaque = append(r.Opaque, path)
	}
}

// partial notes that a member of the message at the path was not read.
func (r *Report) partial(path string) {
	if len(r.Partial) < maxFaults {
		r.Partial = append(r.Partial, path)
	}
}

// join appends a member to a path; a name that is no identifier is quoted.
func join(path, name string) string {
	for i := 0; i < len(name); i++ {
		c := name[i]
		if c != '_' && (c < '0' || c > '9') && (c < 'a' || c > 'z') && (c < 'A' || c > 'Z') {
			name = strconv.Quote(shorten(name))
			break
		}
	}
	name = shorten(name)
	if path == "" {
		return name
	}
	return path + "." + name
}

// element appends an index to a path.
func element(path string, index int) string { return path + "[" + strconv.Itoa(index) + "]" }

// maxText bounds what a fault quotes of a body [byte].
const maxText = 64

// shorten cuts a text, which is valid UTF-8, to what a fault may quote.
func shorten(text string) string {
	if len(text) <= maxText {
		return text
	}
	cut := maxText - len("…")
	for cut > 0 && text[cut]&0xC0 == 0x80 {
		cut--
	}
	return text[:cut] + "…"
}
