package convert

import (
	"reflect"

	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// Binder turns requests into the domain model. It is never written after New and serves any number of requests at once.
type Binder struct {
	shapes      map[protoreflect.FullName]*shape
	stage       *shape
	policy      *shape
	waiver      *shape
	temperature field   // of AtTemperature
	components  []field // of Part, without its id
	rules       []string
	families    []string
}

// New makes the plan of every message that carries values. It panics where contract and domain model do not agree.
func New() *Binder {
	b := &Binder{shapes: map[protoreflect.FullName]*shape{}}
	b.stage = compile(b.shapes, (*pb.Stage)(nil).ProtoReflect().Descriptor(), reflect.TypeFor[stage.Stage]())
	b.policy = compile(b.shapes, (*pb.Policy)(nil).ProtoReflect().Descriptor(), reflect.TypeFor[stage.Policy]())
	b.waiver = compile(b.shapes, (*pb.Waiver)(nil).ProtoReflect().Descriptor(), reflect.TypeFor[finding.Waiver]())
	at := (*pb.AtTemperature)(nil).ProtoReflect().Descriptor().Fields().ByName("temperature")
	b.temperature = field{desc: at, name: at.JSONName(), kind: kindNumber, declare: declaration(at)}
	b.temperature.expect = rangeText(b.temperature.declare)
	part := (*pb.Part)(nil).ProtoReflect().Descriptor()
	for i := range part.Fields().Len() {
		d := part.Fields().Get(i)
		if d.Kind() != protoreflect.MessageKind {
			continue
		}
		s := b.shapes[d.Message().FullName()]
		if s == nil || s.use == nil {
			panic("convert: " + string(d.FullName()) + " is not a component that takes parts")
		}
		b.components = append(b.components, field{desc: d, name: d.JSONName(), kind: kindMessage, shape: s})
	}
	return b
}

// WithRules makes a binder that also knows the ids of the catalogue: policies and options that name another rule or family are refused.
func (b *Binder) WithRules(ids []string) *Binder {
	out := *b
	out.rules = append([]string(nil), ids...)
	out.families = families(ids)
	return &out
}

// Stage binds one stage with the parts that it uses; prefix is its path in the request. The stage is whole only without faults.
func (b *Binder) Stage(parts []*pb.Part, st *pb.Stage, prefix string) (*stage.Stage, []Reading, []Fault) {
	w := &walk{Binder: b}
	w.bindParts(parts)
	s := w.stageAt(st, prefix)
	return s, w.readings, report(w.faults)
}

// Policy binds a policy; what it does not give is that of the default policy.
func (b *Binder) Policy(p *pb.Policy) (stage.Policy, []Fault) {
	w := &walk{Binder: b}
	out := w.policyAt(p, "policy")
	return out, report(w.faults)
}

// Waivers binds the waivers of a request that is judged on the day asOf; empty: no day is given.
func (b *Binder) Waivers(waivers []*pb.Waiver, asOf string) ([]finding.Waiver, []Fault) {
	w := &walk{Binder: b}
	out := w.waiversAt(waivers, asOf, "waivers")
	return out, report(w.faults)
}
