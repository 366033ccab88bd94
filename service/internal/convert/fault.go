package convert

import (
	"strconv"
	"strings"
	"unicode/utf8"

	"google.golang.org/genproto/googleapis/rpc/errdetails"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/stage"
)

// Fault is one fault of a request: the path in JSON names, what was read and what was expected.
type Fault = stage.Fault

// Reading tells how a letter code, marking or tolerance was read.
type Reading struct {
	Field   string // path in the request
	Text    string // as written
	Meaning string // as understood
}

// maxFaults bounds what one answer lists; a request with more is not a design with slips.
const maxFaults = 1000

// BadRequest lists faults as violations.
func BadRequest(faults []Fault) *errdetails.BadRequest {
	out := &errdetails.BadRequest{}
	for _, f := range faults {
		out.FieldViolations = append(out.FieldViolations, &errdetails.BadRequest_FieldViolation{Field: f.Field, Description: f.Description})
	}
	return out
}

// StageFaults lists the faults of one stage of a board.
func StageFaults(id string, faults []Fault) *pb.StageFaults {
	out := &pb.StageFaults{StageId: label(id)}
	for _, f := range faults {
		out.Faults = append(out.Faults, &pb.Fault{Field: label(f.Field), Description: label(f.Description)})
	}
	return out
}

// report closes a list of faults.
func report(faults []Fault) []Fault {
	if len(faults) <= maxFaults {
		return faults
	}
	rest := len(faults) - maxFaults
	return append(faults[:maxFaults:maxFaults], Fault{Field: faults[maxFaults].Field, Description: strconv.Itoa(rest) + " further faults from here on are not listed"})
}

// refusal words a fault.
func refusal(read, expected, reason string) string {
	out := "read " + read + ", expected " + expected
	if reason != "" {
		out += ": " + reason
	}
	return out
}

// quote is text in quotation marks, cut to what a reader needs.
func quote(text string) string {
	const most = 64
	if len(text) > most {
		cut := most
		for cut > 0 && !utf8.RuneStart(text[cut]) {
			cut--
		}
		text = text[:cut] + "…"
	}
	return strconv.Quote(strings.ToValidUTF8(text, "\ufffd"))
}

// paths makes paths out of large blocks, one allocation for many.
type paths struct{ b *strings.Builder }

const pathBlock = 4096

// text is a + b + c.
func (p *paths) text(a, b, c string) string {
	n := len(a) + len(b) + len(c)
	if p.b == nil || p.b.Cap()-p.b.Len() < n {
		p.b = &strings.Builder{}
		p.b.Grow(max(pathBlock, n))
	}
	start := p.b.Len()
	p.b.WriteString(a)
	p.b.WriteString(b)
	p.b.WriteString(c)
	return p.b.String()[start:]
}

// member is the path of a field.
func (p *paths) member(path, name string) string {
	if path == "" {
		return name
	}
	return p.text(path, ".", name)
}

// element is the path of an element of a list.
func (p *paths) element(path string, i int) string {
	return p.text(path, "["+strconv.Itoa(i), "]")
}
