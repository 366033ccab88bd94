package convert

import (
	"reflect"
	"slices"
	"strconv"

	"google.golang.org/protobuf/encoding/protowire"
	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/stage"
)

// walk is the state of binding one request.
type walk struct {
	*Binder
	paths    paths
	parts    partSet
	inPart   bool // walking a part, which takes no other parts
	uses     []use
	readings []Reading
	faults   []Fault
}

// fault notes a fault of the field at path.
func (w *walk) fault(path, description string) {
	w.faults = append(w.faults, Fault{Field: path, Description: description})
}

// notFitted is the domain's word for a component that is not there.
const notFitted = "NOT_FITTED"

// message binds m to dst, a struct of the shape's type. Either of m and base may be missing: m is what the request says here, base the
// bound component whose fields count where m is silent.
func (w *walk) message(s *shape, m protoreflect.Message, base, dst reflect.Value, path string) {
	if m != nil && !m.IsValid() {
		m = nil
	}
	absent := false // m says that the component is not there
	if m != nil {
		w.unknown(m, path)
		absent = s.fit != nil && m.Get(s.fit.desc).Enum() == protoreflect.EnumNumber(pb.Fit_NOT_FITTED)
		switch {
		case absent:
			base = reflect.Value{}
		case s.use != nil && m.Has(s.use.desc):
			base = w.use(s, m.Get(s.use.desc).String(), path)
		}
	}
	if s.header && base.IsValid() && header(base).Fit == notFitted && written(m) {
		base = reflect.Value{}
	}
	present := s.header && base.IsValid() && header(base).Present
	for i := range s.fields {
		f := &s.fields[i]
		has := m != nil && m.Has(f.desc)
		present = present || has
		if has && absent && f.name != "fit" && f.name != "refdes" && f.name != "part" {
			w.fault(w.paths.member(path, f.name), "read a value beside fit NOT_FITTED, expected none: nothing is there")
			has = false
		}
		w.field(f, m, has, base, dst, path)
	}
	if s.header {
		h := header(dst)
		h.Field, h.Present = path, present && !absent
	}
	if m != nil && !absent && s.typ == capacitorType {
		w.marking(s, m, dst.Addr().Interface().(*stage.Capacitor), path)
	}
}

// header is the header of a component.
func header(v reflect.Value) *stage.Header { return v.Field(0).Addr().Interface().(*stage.Header) }

// written tells whether a message says anything.
func written(m protoreflect.Message) bool {
	if m == nil {
		return false
	}
	any := false
	m.Range(func(protoreflect.FieldDescriptor, protoreflect.Value) bool {
		any = true
		return false
	})
	return any
}

// unknown refuses fields that the contract does not know.
func (w *walk) unknown(m protoreflect.Message, path string) {
	if len(m.GetUnknown()) > 0 {
		w.fault(path, unknownText(m))
	}
}

func unknownText(m protoreflect.Message) string {
	var numbers []protowire.Number
	for rest := []byte(m.GetUnknown()); len(rest) > 0; {
		number, _, n := protowire.ConsumeField(rest)
		if n < 0 {
			break
		}
		rest = rest[n:]
		if len(numbers) < 8 && !slices.Contains(numbers, number) {
			numbers = append(numbers, number)
		}
	}
	read := "unknown fields of number"
	for i, n := range numbers {
		if i > 0 {
			read += ","
		}
		read += " " + strconv.Itoa(int(n))
	}
	return refusal(read, "only fields of "+string(m.Descriptor().FullName()), "")
}

// field binds one field of m to its field of dst; has tells whether m gives it.
func (w *walk) field(f *field, m protoreflect.Message, has bool, base, dst reflect.Value, path string) {
	to := dst.FieldByIndex(f.index)
	var from reflect.Value
	if base.IsValid() {
		from = base.FieldByIndex(f.index)
	}
	switch f.kind {
	case kindQuantity, kindValue:
		q := to.Addr().Interface().(*stage.Quantity)
		own := w.paths.member(path, f.name)
		switch {
		case has && f.kind == kindQuantity:
			w.quantity(f, m.Get(f.desc).Message().Interface().(*pb.Quantity), q, own)
		case has:
			*q = stage.Absent(own, f.declare)
			v := w.number(f, m.Get(f.desc).String(), own)
			q.Triple = stage.Triple{Min: v, Typ: v, Max: v}
		case from.IsValid():
			*q = *from.Addr().Interface().(*stage.Quantity)
			q.Field, q.At = own, slices.Clone(q.At)
		default:
			*q = stage.Absent(own, f.declare)
		}
	case kindMessage:
		var sub protoreflect.Message
		if has {
			sub = m.Get(f.desc).Message()
		}
		w.message(f.shape, sub, from, to, w.paths.member(path, f.name))
	case kindMode:
		if has {
			to.Set(reflect.New(f.shape.typ))
			w.message(f.shape, m.Get(f.desc).Message(), reflect.Value{}, to.Elem(), w.paths.member(path, f.name))
		}
	case kindList:
		own := w.paths.member(path, f.name)
		to.Field(0).SetString(own)
		if has || !from.IsValid() {
			w.list(f, m, has, reflect.Value{}, to.Field(1), own)
			return
		}
		w.list(f, nil, false, from.Field(1), to.Field(1), own)
	case kindSlice:
		w.list(f, m, has, from, to, w.paths.member(path, f.name))
	default:
		switch {
		case has:
			w.scalar(f, m.Get(f.desc), to, path)
		case from.IsValid():
			to.Set(from)
		}
	}
}

// list binds the elements of a repeated message, those of the request or those of a part.
func (w *walk) list(f *field, m protoreflect.Message, has bool, from, to reflect.Value, path string) {
	var items protoreflect.List
	n := 0
	switch {
	case has:
		items = m.Get(f.desc).List()
		if n = items.Len(); n > f.limit {
			w.fault(path, tooMany(n, f.limit))
			return
		}
	case from.IsValid():
		n = from.Len()
	}
	if n == 0 {
		return
	}
	to.Set(reflect.MakeSlice(to.Type(), n, n))
	for i := range n {
		var item protoreflect.Message
		var base reflect.Value
		if has {
			item = items.Get(i).Message()
		} else {
			base = from.Index(i)
		}
		w.message(f.shape, item, base, to.Index(i), w.paths.element(path, i))
	}
}

func tooMany(n, limit int) string {
	return refusal(strconv.Itoa(n)+" elements", "at most "+strconv.Itoa(limit), "")
}

// scalar binds a field that is neither a quantity nor a message.
func (w *walk) scalar(f *field, v protoreflect.Value, to reflect.Value, path string) {
	switch f.kind {
	case kindNumber:
		if x := w.number(f, v.String(), w.paths.member(path, f.name)); x == x {
			to.SetFloat(x)
		}
	case kindLabel:
		text := v.String()
		w.label(text, f.limit, path, f.name)
		to.SetString(text)
	case kindLabels:
		own := w.paths.member(path, f.name)
		to.Set(reflect.ValueOf(w.labels(v.List(), f.limit, own)))
	case kindEnum, kindGrade:
		n := v.Enum()
		if n < 0 || int(n) >= len(f.names) || f.names[n] == "" {
			w.fault(w.paths.member(path, f.name), refusal("the number "+strconv.Itoa(int(n)), "one of "+choices(f.names), ""))
			return
		}
		switch {
		case n == 0:
		case f.kind == kindGrade:
			to.SetUint(uint64(n))
		default:
			to.SetString(f.names[n])
		}
	case kindCount:
		n := v.Int()
		if n < 1 || n > int64(f.limit) {
			w.fault(w.paths.member(path, f.name), refusal(strconv.FormatInt(n, 10), "a count from 1 to "+strconv.Itoa(f.limit), ""))
			return
		}
		to.SetInt(n)
	case kindFlag:
		to.SetBool(v.Bool())
	}
}

// choices lists the names of an enum without UNSPECIFIED.
func choices(names []string) string {
	out := ""
	for i, n := range names {
		if i == 0 || n == "" {
			continue
		}
		if out != "" {
			out += ", "
		}
		out += n
	}
	return out
}
