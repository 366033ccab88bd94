package render

import (
	"io"
	"strings"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/convert"
)

// Rules lists the catalogue.
func Rules(w io.Writer, rules []*pb.Rule) error {
	p := &page{}
	for i, r := range rules {
		if i > 0 {
			p.blank()
		}
		p.paragraph("", r.GetId()+": "+r.GetTitle())
		for _, part := range []struct{ name, text string }{
			{"value", r.GetEquation()}, {"limit", r.GetLimit()}, {"guard", r.GetGuard()}, {"applies", r.GetApplies()},
			{"severity", "FAIL " + word(r.GetSeverityFail()) + ", MARGINAL " + word(r.GetSeverityMarginal()) + ", OPEN " + word(r.GetSeverityOpen())},
			{"needs", strings.Join(r.GetNeeds(), ", ")}, {"source", sources(r)}, {"since", r.GetSince()},
		} {
			if part.text != "" {
				p.paragraph("  "+pad(part.name, 10), part.text)
			}
		}
	}
	_, err := w.Write(p.Bytes())
	return err
}

func word(s pb.Severity_Value) string {
	if s == pb.Severity_UNSPECIFIED {
		return "-"
	}
	return s.String()
}

func sources(r *pb.Rule) string {
	var texts []string
	for _, s := range r.GetSources() {
		text := s.GetKey()
		if s.GetTitle() != "" {
			text += " (" + s.GetTitle() + ")"
		}
		texts = append(texts, text)
	}
	return strings.Join(texts, "; ")
}

// Fields prints the reference of request fields.
func Fields(w io.Writer) error {
	_, err := io.WriteString(w, convert.Reference(nil))
	return err
}
