package convert

import (
	"fmt"
	"reflect"
	"strings"

	"google.golang.org/protobuf/reflect/protoreflect"

	"floatrail/calc/stage"
)

// kind tells how a field of the contract becomes a field of the domain.
type kind uint8

const (
	kindQuantity kind = iota // Quantity -> stage.Quantity
	kindValue                // annotated string -> stage.Quantity without spread
	kindNumber               // annotated string -> float64
	kindLabel                // string -> string
	kindLabels               // repeated string -> []string
	kindEnum                 // enum -> its name, empty for UNSPECIFIED
	kindGrade                // Severity -> stage.Severity
	kindCount                // int32 -> int, 0 where not given
	kindFlag                 // bool -> bool
	kindMessage              // message -> struct
	kindMode                 // message of a oneof -> pointer to struct
	kindList                 // repeated message -> stage.List
	kindSlice                // repeated message -> slice
)

// field is the plan of one field.
type field struct {
	desc    protoreflect.FieldDescriptor
	name    string // JSON name
	kind    kind
	index   []int              // of the Go field
	declare *stage.Declaration // of values
	expect  string             // range in words, of values
	names   []string           // of an enum's values by number; empty where a number is not used
	shape   *shape             // of messages and list elements
	limit   int                // characters of a label, elements of a list, largest count
}

// shape is the plan of one message.
type shape struct {
	name   protoreflect.FullName
	typ    reflect.Type
	fields []field // in the order of the contract
	header bool    // the struct begins with stage.Header
	use    *field  // nil where the message takes no part
	fit    *field  // nil where the message is always fitted
}

var (
	quantityType = reflect.TypeFor[stage.Quantity]()
	severityType = reflect.TypeFor[stage.Severity]()
	headerType   = reflect.TypeFor[stage.Header]()
)

const quantityName = "floatrail.v1.Quantity"

// compile makes the plan of a message that becomes the struct type t; shapes holds what was compiled before.
func compile(shapes map[protoreflect.FullName]*shape, d protoreflect.MessageDescriptor, t reflect.Type) *shape {
	if s := shapes[d.FullName()]; s != nil {
		if s.typ != t {
			panic(fmt.Sprintf("convert: %s becomes both %s and %s", d.FullName(), s.typ, t))
		}
		return s
	}
	s := &shape{name: d.FullName(), typ: t}
	shapes[d.FullName()] = s
	if h, ok := t.FieldByName("Header"); ok && h.Type == headerType {
		s.header = true
	}
	for i := range d.Fields().Len() {
		s.fields = append(s.fields, compileField(shapes, d.Fields().Get(i), t))
	}
	for i := range s.fields {
		switch f := &s.fields[i]; f.name {
		case "use":
			s.use = f
		case "fit":
			s.fit = f
		}
	}
	return s
}

func compileField(shapes map[protoreflect.FullName]*shape, d protoreflect.FieldDescriptor, t reflect.Type) field {
	name := d.JSONName()
	g, ok := t.FieldByNameFunc(func(s string) bool { return strings.EqualFold(s, name) })
	if !ok {
		panic(fmt.Sprintf("convert: %s has no counterpart in %s", d.FullName(), t))
	}
	f := field{desc: d, name: name, index: g.Index, declare: declaration(d)}
	if f.declare != nil {
		f.expect = rangeText(f.declare)
	}
	known := false
	switch {
	case d.Message() != nil && d.IsList():
		known = f.list(shapes, g.Type)
	case d.Message() != nil:
		known = f.message(shapes, g.Type)
	case d.Kind() == protoreflect.StringKind:
		known = f.text(g.Type)
	default:
		known = f.choice(g.Type)
	}
	if !known {
		panic(fmt.Sprintf("convert: %s cannot become %s", d.FullName(), g.Type))
	}
	return f
}

// list plans a repeated message.
func (f *field) list(shapes map[protoreflect.FullName]*shape, t reflect.Type) bool {
	f.limit = listLimit(f.name)
	switch {
	case t.Kind() == reflect.Slice:
		f.kind, f.shape = kindSlice, compile(shapes, f.desc.Message(), t.Elem())
	case strings.HasPrefix(t.Name(), "List["):
		items, _ := t.FieldByName("Items")
		f.kind, f.shape = kindList, compile(shapes, f.desc.Message(), items.Type.Elem())
	default:
		return false
	}
	return true
}

// message plans a single message.
func (f *field) message(shapes map[protoreflect.FullName]*shape, t reflect.Type) bool {
	isQuantity := f.desc.Message().FullName() == quantityName
	switch {
	case isQuantity || t == quantityType:
		f.kind = kindQuantity
		return isQuantity && t == quantityType && f.declare != nil
	case t.Kind() == reflect.Pointer && f.desc.ContainingOneof() != nil:
		f.kind, f.shape = kindMode, compile(shapes, f.desc.Message(), t.Elem())
	case t.Kind() == reflect.Struct:
		f.kind, f.shape = kindMessage, compile(shapes, f.desc.Message(), t)
	default:
		return false
	}
	return true
}

// text plans a string: a declared one is a value, any other a label.
func (f *field) text(t reflect.Type) bool {
	switch declared := f.declare != nil; {
	case f.desc.IsList():
		f.kind, f.limit = kindLabels, listLimit(f.name)
		return !declared && t == reflect.TypeFor[[]string]()
	case !declared:
		f.kind, f.limit = kindLabel, labelLimit(f.name)
		return t.Kind() == reflect.String
	case t.Kind() == reflect.Float64:
		f.kind = kindNumber
		return true
	}
	f.kind = kindValue
	return t == quantityType
}

// choice plans an enum, a count or a flag.
func (f *field) choice(t reflect.Type) bool {
	if f.desc.IsList() {
		return false
	}
	switch f.desc.Kind() {
	case protoreflect.EnumKind:
		f.kind, f.names = kindEnum, enumNames(f.desc.Enum())
		if t == severityType {
			f.kind = kindGrade
			return true
		}
		return t.Kind() == reflect.String
	case protoreflect.Int32Kind:
		f.kind, f.limit = kindCount, countLimit(f.name)
		return t.Kind() == reflect.Int
	case protoreflect.BoolKind:
		f.kind = kindFlag
		return t.Kind() == reflect.Bool
	}
	return false
}

func enumNames(d protoreflect.EnumDescriptor) []string {
	var names []string
	for i := range d.Values().Len() {
		v := d.Values().Get(i)
		for len(names) <= int(v.Number()) {
			names = append(names, "")
		}
		names[v.Number()] = string(v.Name())
	}
	return names
}

// Limits of lists.
const (
	maxAt            = 32
	maxParts         = 2000
	maxWaivers       = 2000
	maxStages        = 2000
	maxFamilies      = 64
	maxPolicyEntries = 2000
)

// listLimit is the largest number of elements of a list.
func listLimit(name string) int {
	switch name {
	case "operatingPoints":
		return 64
	case "severities", "baseline":
		return maxPolicyEntries
	}
	return 100 // points of a curve
}

// labelLimit is the largest number of characters of a string that is no value.
func labelLimit(name string) int {
	switch name {
	case "id", "formerId", "name", "use", "identity", "rule":
		return 128
	case "reason":
		return 2000
	}
	return 256
}

// countLimit is the largest count.
func countLimit(name string) int {
	if name == "stagesSharing" {
		return 256
	}
	return 64
}
