package wire

import (
	"encoding/json"
	"math"
	"strconv"
	"strings"

	"google.golang.org/protobuf/reflect/protoreflect"

	"floatrail/calc/quantity"
)

// scalar reads a value that is neither message nor list, or says what is wrong with it.
func (w *walk) scalar(fd, declared protoreflect.FieldDescriptor, tok json.Token) (v protoreflect.Value, fault string) {
	switch fd.Kind() {
	case protoreflect.StringKind:
		if s, ok := tok.(string); ok {
			if w.loneSurrogate(s) {
				return v, "read half of a surrogate pair, expected characters"
			}
			return protoreflect.ValueOfString(s), ""
		}
	case protoreflect.BoolKind:
		if b, ok := tok.(bool); ok {
			return protoreflect.ValueOfBool(b), ""
		}
	case protoreflect.EnumKind:
		if s, ok := tok.(string); ok {
			if ev := fd.Enum().Values().ByName(protoreflect.Name(s)); ev != nil {
				return protoreflect.ValueOfEnum(ev.Number()), ""
			}
			if near := Nearest(s, enumNames(fd.Enum())); near != "" {
				return v, read(tok) + ", expected " + w.kind(fd, declared) + "; the nearest is " + near
			}
		}
	case protoreflect.Int32Kind:
		if n, ok := whole(tok, math.MinInt32, math.MaxInt32); ok {
			return protoreflect.ValueOfInt32(int32(n)), ""
		}
	case protoreflect.Uint32Kind:
		if n, ok := whole(tok, 0, math.MaxUint32); ok {
			return protoreflect.ValueOfUint32(uint32(n)), ""
		}
	case protoreflect.DoubleKind:
		if n, ok := tok.(json.Number); ok {
			if f, err := strconv.ParseFloat(n.String(), 64); err == nil {
				return protoreflect.ValueOfFloat64(f), ""
			}
		}
	default:
		panic(errNoValue)
	}
	description := read(tok) + ", expected " + w.kind(fd, declared)
	if tok == nil {
		description += "; a field that is not known is left out"
	}
	return v, description
}

// whole reads a number without fraction within bounds; 3.0 and 1e2 are such numbers.
func whole(tok json.Token, low, high int64) (int64, bool) {
	number, ok := tok.(json.Number)
	if !ok {
		return 0, false
	}
	if n, err := strconv.ParseInt(number.String(), 10, 64); err == nil {
		return n, n >= low && n <= high
	}
	f, err := strconv.ParseFloat(number.String(), 64)
	if err != nil || f != math.Trunc(f) || f < float64(low) || f > float64(high) {
		return 0, false
	}
	return int64(f), true
}

// kind words what the field expects, or each element of it where it is a list.
func (w *walk) kind(fd, declared protoreflect.FieldDescriptor) string {
	d := w.dimensions[declared.FullName()]
	switch fd.Kind() {
	case protoreflect.MessageKind:
		if fd.Message().Name() == "Quantity" && d != quantity.None {
			return `an object with min, typ or max, such as {"typ": "` + d.Examples()[0] + `"}`
		}
		return "an object with " + strings.Join(names(fd.Message().Fields()), ", ")
	case protoreflect.StringKind:
		if d != quantity.None && (fd == declared || fd.Name() == "min" || fd.Name() == "typ" || fd.Name() == "max") {
			return "a string with its unit (" + d.Accepts() + ")"
		}
		return "a string"
	case protoreflect.BoolKind:
		return "true or false"
	case protoreflect.EnumKind:
		return "one of " + strings.Join(enumNames(fd.Enum())[1:], ", ")
	case protoreflect.Int32Kind, protoreflect.Uint32Kind:
		return "a whole number"
	}
	return "a number"
}

// enumNames are the names of an enumeration, the zero value first.
func enumNames(ed protoreflect.EnumDescriptor) []string {
	all := make([]string, ed.Values().Len())
	for i := range all {
		all[i] = string(ed.Values().Get(i).Name())
	}
	return all
}
