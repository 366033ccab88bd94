package convert

import (
	"fmt"
	"strings"

	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
)

// Comments are the contract's comments: of a message under its name, of a field under Message.field in JSON names. Descriptors that are
// linked into a program carry none.
type Comments map[string]string

// Reference is the contract in Markdown: each message that a request may contain, each field with its kind, unit, plausible range and the
// meaning of its absence, and the units that each dimension takes. Ranges and meanings come from the declarations that the parser obeys.
func Reference(comments Comments) string {
	var b strings.Builder
	b.WriteString("# Fields of floatrail.v1\n\nGenerated from the contract; not to be edited.\n\n")
	b.WriteString("Every value is a string that carries its unit. A *Quantity* has `min`, `typ`, `max`, `at` and `source`, each of them optional; " +
		"a *value* is one string. A range is what is plausible: a value outside it is refused as a slip.\n")
	for _, m := range requestMessages() {
		fmt.Fprintf(&b, "\n## %s\n\n", m.Name())
		if c := comments[string(m.Name())]; c != "" {
			b.WriteString(cell(c) + "\n\n")
		}
		b.WriteString("| field | kind | unit | range | absent | |\n|---|---|---|---|---|---|\n")
		for i := range m.Fields().Len() {
			d := m.Fields().Get(i)
			unit, limits, absent := declared(d)
			fmt.Fprintf(&b, "| `%s` | %s | %s | %s | %s | %s |\n", d.JSONName(), kindText(d), unit, limits, absent,
				cell(comments[string(m.Name())+"."+d.JSONName()]))
		}
	}
	b.WriteString("\n## Units\n\n| dimension | unit of answers | takes |\n|---|---|---|\n")
	for _, d := range quantity.Dimensions() {
		if d != quantity.Count {
			fmt.Fprintf(&b, "| %s | %s | %s |\n", d, d.Unit(), cell(d.Accepts()))
		}
	}
	return b.String()
}

// Annotation is what the description of a field says of its declaration; empty for fields that are no values.
func Annotation(message, field string) string {
	for _, m := range requestMessages() {
		if string(m.Name()) != message {
			continue
		}
		for i := range m.Fields().Len() {
			d := m.Fields().Get(i)
			if d.JSONName() != field || option(d) == nil {
				continue
			}
			unit, limits, absent := declared(d)
			if unit == "1" {
				unit = "none (a plain number or %)"
			}
			return "Unit: " + unit + ". Range: " + limits + ". Absent: " + absent + "."
		}
	}
	return ""
}

// requestMessages are the messages that a request may contain, requests first found first.
func requestMessages() []protoreflect.MessageDescriptor {
	var out []protoreflect.MessageDescriptor
	seen := map[protoreflect.FullName]bool{}
	var visit func(m protoreflect.MessageDescriptor)
	visit = func(m protoreflect.MessageDescriptor) {
		if seen[m.FullName()] {
			return
		}
		seen[m.FullName()] = true
		out = append(out, m)
		for i := range m.Fields().Len() {
			if d := m.Fields().Get(i); d.Message() != nil {
				visit(d.Message())
			}
		}
	}
	methods := pb.File_floatrail_v1_service_proto.Services().ByName("FloatRail").Methods()
	for i := range methods.Len() {
		visit(methods.Get(i).Input())
	}
	return out
}

// declared words the declaration of a field.
func declared(d protoreflect.FieldDescriptor) (unit, limits, absent string) {
	o := option(d)
	if o == nil {
		return "", "", ""
	}
	f := declaration(d)
	unit = f.Dimension.Unit()
	limits = quantity.Format(f.Low, f.Dimension) + " to " + quantity.Format(f.High, f.Dimension)
	switch o.GetAbsent() {
	case pb.Declaration_UNKNOWN:
		absent = "unknown; rules that need it are OPEN"
	case pb.Declaration_ASSUMED:
		a := o.GetAssumed()
		value := a.GetTyp()
		if a.Min != nil && a.Max != nil && a.GetMin() != a.GetMax() {
			value = a.GetMin() + " to " + a.GetMax()
		}
		absent = "assumed " + value + " (" + strings.ToLower(o.GetDirection().String()) + ": " + o.GetReason() + ")"
	case pb.Declaration_POLICY:
		absent = "default policy: " + o.GetAssumed().GetTyp()
	case pb.Declaration_NONE:
		absent = "nothing depends on it alone"
	default:
		absent = "refused"
	}
	return unit, limits, absent
}

// kindText words the kind of a field.
func kindText(d protoreflect.FieldDescriptor) string {
	list := ""
	if d.IsList() {
		list = "list of "
	}
	switch {
	case d.Message() != nil:
		name := string(d.Message().Name())
		return list + "[" + name + "](#" + strings.ToLower(name) + ")"
	case d.Enum() != nil:
		return list + "`" + strings.ReplaceAll(choices(enumNames(d.Enum())), ", ", "` `") + "`"
	case option(d) != nil:
		return list + "value"
	case d.Kind() == protoreflect.StringKind:
		return list + "text"
	case d.Kind() == protoreflect.BoolKind:
		return list + "true or false"
	}
	return list + "number"
}

// cell makes a text fit for a table.
func cell(s string) string {
	return strings.ReplaceAll(strings.Join(strings.Fields(s), " "), "|", `\|`)
}
