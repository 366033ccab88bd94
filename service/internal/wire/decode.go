package wire

import (
	"encoding/json"
	"errors"
	"strconv"
	"strings"

	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/reflect/protoregistry"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
)

// Decoder reads bodies.
type Decoder struct {
	dimensions map[protoreflect.FullName]quantity.Dimension // of the fields that carry values
}

// NewDecoder returns a decoder of the contract's messages.
func NewDecoder() *Decoder {
	d := &Decoder{dimensions: map[protoreflect.FullName]quantity.Dimension{}}
	protoregistry.GlobalFiles.RangeFilesByPackage(pb.File_floatrail_v1_service_proto.Package(), func(file protoreflect.FileDescriptor) bool {
		for i := range file.Messages().Len() {
			d.learn(file.Messages().Get(i))
		}
		return true
	})
	return d
}

// learn notes the dimensions that the fields of a message declare; they serve to word what a value is expected to look like.
func (d *Decoder) learn(md protoreflect.MessageDescriptor) {
	for i := range md.Fields().Len() {
		fd := md.Fields().Get(i)
		declared, ok := proto.GetExtension(fd.Options(), pb.E_Value).(*pb.Declaration)
		if !ok || declared == nil {
			continue
		}
		name := strings.ToLower(strings.ReplaceAll(declared.GetDimension().String(), "_", " "))
		for _, known := range quantity.Dimensions() {
			if known.String() == name {
				d.dimensions[fd.FullName()] = known
			}
		}
	}
}

// Decode walks the body against the descriptor of the message and sets every member that is in order; what is not is reported and left
// out, so that the rest can be checked further. Elements of lists are never left out but stay empty, so that indices hold.
func (d *Decoder) Decode(body []byte, m proto.Message, report *Report) {
	w := walk{tokens: newTokens(body), report: report, dimensions: d.dimensions}
	if err := w.body(m.ProtoReflect()); err != nil {
		report.Unread = true
		// Room is made for the fault that ended the walk.
		report.Faults = report.Faults[:min(len(report.Faults), maxFaults-1)]
		report.Add(Body, err.Error())
	}
}

type walk struct {
	*tokens
	report     *Report
	dimensions map[protoreflect.FullName]quantity.Dimension
}

// body reads the outermost object.
func (w *walk) body(m protoreflect.Message) error {
	if err := w.invalidUTF8(); err != nil {
		return err
	}
	tok, err := w.next()
	if err != nil {
		return err
	}
	if tok != json.Delim('{') {
		return &stop{read(tok) + ", expected a JSON object, the " + string(m.Descriptor().Name())}
	}
	if err := w.object(m, "", nil); err != nil {
		return err
	}
	return w.end()
}

// object reads the members of an object up to its end. declared is the field that carries the declaration of the object's values: a
// quantity's strings are declared by the field that holds it.
func (w *walk) object(m protoreflect.Message, path string, declared protoreflect.FieldDescriptor) error {
	fields := m.Descriptor().Fields()
	var seen []protoreflect.FieldNumber
	var meant []protoreflect.FieldDescriptor // by names that are not known
	for w.dec.More() {
		tok, err := w.next()
		if err != nil {
			return err
		}
		name, _ := tok.(string)
		if tok, err = w.next(); err != nil {
			return err
		}
		fd := field(fields, name)
		switch {
		case fd == nil:
			near := w.unknown(m.Descriptor(), path, name)
			if near != nil {
				meant = append(meant, near)
			}
			if w.holdsAlternatives(m.Descriptor(), near) {
				w.report.partial(path)
			}
			err = w.skip(tok)
		case contains(seen, fd.Number()):
			w.report.Add(join(path, fd.JSONName()), "read the field twice"+spelling(name, fd)+", expected it once")
			err = w.skip(tok)
		default:
			seen = append(seen, fd.Number())
			err = w.member(m, fd, path, declared, tok)
		}
		if err != nil {
			return err
		}
	}
	for _, fd := range meant {
		if !contains(seen, fd.Number()) {
			w.report.opaque(join(path, fd.JSONName()))
		}
	}
	_, err := w.next()
	return err
}

// member reads the value of one field.
func (w *walk) member(m protoreflect.Message, fd protoreflect.FieldDescriptor, path string, declared protoreflect.FieldDescriptor, tok json.Token) error {
	here := join(path, fd.JSONName())
	if o := realOneof(fd); o != nil && m.WhichOneof(o) != nil {
		w.report.Add(here, "read the field beside "+m.WhichOneof(o).JSONName()+", expected only one of "+strings.Join(names(o.Fields()), ", "))
		return w.skip(tok)
	}
	if w.declares(fd) || declared == nil {
		declared = fd
	}
	ok, err := w.value(m, fd, here, declared, tok)
	if err == nil && !ok {
		w.report.opaque(here)
		if w.holdsAlternatives(m.Descriptor(), fd) {
			w.report.partial(path)
		}
	}
	return err
}

// value reads a list, a message or a scalar into the field; ok is false where it was not set.
func (w *walk) value(m protoreflect.Message, fd protoreflect.FieldDescriptor, path string, declared protoreflect.FieldDescriptor, tok json.Token) (ok bool, err error) {
	switch {
	case fd.IsList():
		if tok != json.Delim('[') {
			return w.refuse(path, tok, "a list of "+w.kind(fd, declared))
		}
		return true, w.list(m.Mutable(fd).List(), fd, path, declared)
	case fd.Message() != nil:
		if tok != json.Delim('{') {
			return w.refuse(path, tok, w.kind(fd, declared))
		}
		return true, w.object(m.Mutable(fd).Message(), path, declared)
	}
	v, fault := w.scalar(fd, declared, tok)
	if fault != "" {
		w.report.Add(path, fault)
		return false, w.skip(tok)
	}
	m.Set(fd, v)
	return true, nil
}

// list reads the elements of a list up to its end.
func (w *walk) list(l protoreflect.List, fd protoreflect.FieldDescriptor, path string, declared protoreflect.FieldDescriptor) error {
	for i := 0; w.dec.More(); i++ {
		tok, err := w.next()
		if err != nil {
			return err
		}
		here := element(path, i)
		switch {
		case fd.Message() != nil && tok == json.Delim('{'):
			err = w.object(l.AppendMutable().Message(), here, declared)
		case fd.Message() != nil:
			l.AppendMutable()
			w.report.opaque(here)
			_, err = w.refuse(here, tok, w.kind(fd, declared))
		default:
			v, fault := w.scalar(fd, declared, tok)
			if fault != "" {
				w.report.Add(here, fault)
				w.report.opaque(here)
				v, err = l.NewElement(), w.skip(tok)
			}
			l.Append(v)
		}
		if err != nil {
			return err
		}
	}
	_, err := w.next()
	return err
}

// refuse reports a value of another kind and reads past it.
func (w *walk) refuse(path string, tok json.Token, expected string) (ok bool, err error) {
	w.report.Add(path, read(tok)+", expected "+expected)
	return false, w.skip(tok)
}

// unknown reports a name that the message does not have and returns the field that it most likely means, or nil.
func (w *walk) unknown(md protoreflect.MessageDescriptor, path, name string) protoreflect.FieldDescriptor {
	known := names(md.Fields())
	description := "read the unknown field " + strconv.Quote(shorten(name)) + ", expected "
	near := Nearest(name, known)
	if near == "" {
		w.report.Add(join(path, name), description+"one of "+strings.Join(known, ", "))
		return nil
	}
	w.report.Add(join(path, name), description+"a field of "+string(md.Name())+"; the nearest is "+near)
	return md.Fields().ByJSONName(near)
}

// holdsAlternatives tells whether a message without the field may look incomplete for that reason alone: the field is a member of a oneof,
// or the message is a value, of which any one string suffices.
func (w *walk) holdsAlternatives(md protoreflect.MessageDescriptor, fd protoreflect.FieldDescriptor) bool {
	return md.Name() == "Quantity" || md.Name() == "AtTemperature" || fd != nil && realOneof(fd) != nil
}

// declares tells whether the field says itself which texts it takes.
func (w *walk) declares(fd protoreflect.FieldDescriptor) bool {
	return w.dimensions[fd.FullName()] != quantity.None
}

// field finds a field by the name in JSON or in the .proto file.
func field(fields protoreflect.FieldDescriptors, name string) protoreflect.FieldDescriptor {
	if fd := fields.ByJSONName(name); fd != nil {
		return fd
	}
	return fields.ByTextName(name)
}

// names are the JSON names of the fields, in their order.
func names(fields interface {
	Len() int
	Get(int) protoreflect.FieldDescriptor
}) []string {
	all := make([]string, fields.Len())
	for i := range all {
		all[i] = fields.Get(i).JSONName()
	}
	return all
}

// realOneof is the oneof of the field, nil for none and for the one that only tracks presence.
func realOneof(fd protoreflect.FieldDescriptor) protoreflect.OneofDescriptor {
	if o := fd.ContainingOneof(); o != nil && !o.IsSynthetic() {
		return o
	}
	return nil
}

// spelling tells how a field was written where that is not its JSON name.
func spelling(name string, fd protoreflect.FieldDescriptor) string {
	if name == fd.JSONName() {
		return ""
	}
	return " (as " + name + " the second time)"
}

func contains(all []protoreflect.FieldNumber, n protoreflect.FieldNumber) bool {
	for _, m := range all {
		if m == n {
			return true
		}
	}
	return false
}

// errNoValue is the panic of a field of a kind that no request of the contract has.
var errNoValue = errors.New("wire: the contract has no map, group, bytes or 64-bit field")
