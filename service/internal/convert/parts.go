package convert

import (
	"reflect"
	"strings"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/stage"
)

// part is one bound entry of parts[].
type part struct {
	path  string // of the component
	kind  string // driver, switch, diode, capacitor, resistor
	shape *shape
	value reflect.Value
	check []Fault // across the part's own fields
}

// partSet is the parts of one request.
type partSet struct {
	byID  map[string]*part
	ids   []string // in the order of the request
	hints *int     // searches for the nearest id that are left to the request
}

// maxHints bounds the searches for the nearest id: each looks at every part.
const maxHints = 200

// hint names the id that is most like the one that is not there, of the right kind if there is one.
func (p *partSet) hint(s *shape, id string) string {
	if *p.hints == 0 {
		return ""
	}
	*p.hints--
	if hint := suggestion(id, p.of(s)); hint != "" {
		return hint
	}
	return suggestion(id, p.ids)
}

// of lists the ids of parts of one kind.
func (p *partSet) of(s *shape) []string {
	var ids []string
	for _, id := range p.ids {
		if p.byID[id].shape == s {
			ids = append(ids, id)
		}
	}
	return ids
}

// use is a place that takes a part.
type use struct {
	path string // of the component
	part *part
}

// bindParts binds every part, used or not, so that each fault is told once and where it stands.
func (w *walk) bindParts(parts []*pb.Part) {
	hints := maxHints
	w.parts = partSet{byID: make(map[string]*part, min(len(parts), maxParts)), hints: &hints}
	if len(parts) > maxParts {
		w.fault("parts", tooMany(len(parts), maxParts))
		return
	}
	w.inPart = true
	for i, in := range parts {
		w.bindPart(in, w.paths.element("parts", i))
	}
	w.inPart = false
}

func (w *walk) bindPart(in *pb.Part, path string) {
	m := in.ProtoReflect()
	w.unknown(m, path)
	id := in.GetId()
	switch first := w.parts.byID[id]; {
	case id == "":
		w.fault(w.paths.member(path, "id"), refusal("nothing", "an id by which the part is used", ""))
	case !w.label(id, labelLimit("id"), path, "id"):
		id = ""
	case first != nil:
		w.fault(w.paths.member(path, "id"), refusal(quote(id), "an id of its own", first.path[:strings.IndexByte(first.path, '.')]+" has it already"))
		id = ""
	}
	for i := range w.components {
		f := &w.components[i]
		if !m.Has(f.desc) {
			continue
		}
		value := reflect.New(f.shape.typ)
		own := w.paths.member(path, f.name)
		component := m.Get(f.desc).Message()
		w.message(f.shape, component, reflect.Value{}, value.Elem(), own)
		if header(value.Elem()).Fit == notFitted {
			w.fault(w.paths.member(own, "fit"), refusal("NOT_FITTED", "a part", "whether it is fitted is said where it is used"))
		}
		p := &part{path: own, kind: f.name, shape: f.shape, value: value.Elem(), check: stage.CheckPart(value.Interface())}
		w.checked(p.check, nil)
		if id != "" {
			w.parts.byID[id] = p
			w.parts.ids = append(w.parts.ids, id)
		}
		return
	}
	w.fault(path, refusal("no component", "one of driver, switch, diode, capacitor, resistor", ""))
}

// use finds the part that the component at path takes; an invalid value after a fault.
func (w *walk) use(s *shape, id, path string) reflect.Value {
	own := func() string { return w.paths.member(path, "use") }
	if w.inPart {
		w.fault(own(), refusal(quote(id), "the fields themselves", "a part takes no other part"))
		return reflect.Value{}
	}
	p := w.parts.byID[id]
	switch {
	case p == nil && len(w.parts.ids) == 0:
		w.fault(own(), refusal(quote(id), "the id of an entry of parts", "there are none"))
	case p == nil:
		w.fault(own(), refusal(quote(id), "the id of an entry of parts", w.parts.hint(s, id)))
	case p.shape != s:
		w.fault(own(), refusal(quote(id), "the id of a "+kindOf(s), "it is a "+p.kind))
	default:
		w.uses = append(w.uses, use{path, p})
		return p.value
	}
	return reflect.Value{}
}

// kindOf is the word for a component: driver, switch.
func kindOf(s *shape) string { return strings.ToLower(string(s.name.Name())) }

// checked notes faults across fields, except where a field is at fault already or where the part that a component takes is.
func (w *walk) checked(faults []Fault, uses []use) {
	if len(faults) == 0 {
		return
	}
	known := make(map[string]bool, len(w.faults))
	for _, f := range w.faults {
		known[f.Field] = true
	}
	for _, f := range faults {
		if !known[f.Field] && !ofPart(f, uses) {
			w.faults = append(w.faults, f)
		}
	}
}

// ofPart tells whether the part that a component takes has the same fault.
func ofPart(f Fault, uses []use) bool {
	for _, u := range uses {
		rest, ok := strings.CutPrefix(f.Field, u.path)
		if !ok {
			continue
		}
		for _, p := range u.part.check {
			if p.Field == u.part.path+rest && p.Description == f.Description {
				return true
			}
		}
	}
	return false
}
