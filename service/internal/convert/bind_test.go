package convert

import (
	"testing"

	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
)

func TestFullStageHasNoFaults(t *testing.T) {
	s, readings, faults := New().Stage(nil, parseStage(t, fullStage), "stage")
	for _, f := range faults {
		t.Errorf("%s: %s", f.Field, f.Description)
	}
	for _, r := range readings {
		t.Logf("%s: %s = %s", r.Field, r.Text, r.Meaning)
	}
	_ = s
}

// text is one value of a message with its dimension.
type text struct {
	text      string
	dimension quantity.Dimension
	typ       bool
}

// texts collects every value of a message tree.
func texts(m protoreflect.Message, outer quantity.Dimension) []text {
	var out []text
	fields := m.Descriptor().Fields()
	for i := range fields.Len() {
		d := fields.Get(i)
		if !m.Has(d) {
			continue
		}
		dim := outer
		if o := option(d); o != nil {
			dim = dimension(o.GetDimension())
		} else if m.Descriptor().FullName() != quantityName && m.Descriptor().Name() != "AtTemperature" {
			dim = quantity.None
		}
		switch {
		case d.Kind() == protoreflect.StringKind && !d.IsList() && dim != quantity.None && d.Name() != "source":
			out = append(out, text{m.Get(d).String(), dim, d.Name() == "typ"})
		case d.Kind() == protoreflect.MessageKind && d.IsList():
			for j := range m.Get(d).List().Len() {
				out = append(out, texts(m.Get(d).List().Get(j).Message(), dim)...)
			}
		case d.Kind() == protoreflect.MessageKind:
			out = append(out, texts(m.Get(d).Message(), dim)...)
		}
	}
	return out
}

// BenchmarkBindStage binds a whole stage: values, paths, checks.
func BenchmarkBindStage(b *testing.B) {
	st := parseStage(b, fullStage)
	binder := New()
	if n := len(texts(st.ProtoReflect(), quantity.None)); n < 150 {
		b.Fatalf("the stage has %d values", n)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, _, faults := binder.Stage(nil, st, "stage"); len(faults) > 0 {
			b.Fatal(faults)
		}
	}
}

// BenchmarkParseValues parses the values of the same stage and does nothing else.
func BenchmarkParseValues(b *testing.B) {
	st := parseStage(b, fullStage)
	all := texts(st.ProtoReflect(), quantity.None)
	b.ReportMetric(float64(len(all)), "values")
	b.ReportAllocs()
	for b.Loop() {
		for _, v := range all {
			var err error
			if v.typ {
				_, _, err = quantity.ParseTyp(v.text, v.dimension)
			} else {
				_, _, err = quantity.Parse(v.text, v.dimension)
			}
			if err != nil {
				b.Fatal(err)
			}
		}
	}
	b.ReportMetric(float64(len(all)), "values")
}

var _ = proto.String
var _ = pb.E_Value
