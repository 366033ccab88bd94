package convert

import (
	"reflect"

	"google.golang.org/protobuf/reflect/protoreflect"

	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

var capacitorType = reflect.TypeFor[stage.Capacitor]()

// marking reads the printed line of a capacitor into the fields that m does not give itself.
func (w *walk) marking(s *shape, m protoreflect.Message, c *stage.Capacitor, component string) {
	f := s.field("marking")
	if !m.Has(f.desc) {
		return
	}
	path := w.paths.member(component, f.name)
	text := m.Get(f.desc).String()
	mark, err := quantity.ParseMarking(text)
	if err != nil {
		w.fault(path, err.Error())
		return
	}
	for _, r := range mark.Readings {
		w.readings = append(w.readings, Reading{path, r.Text, r.Meaning})
	}
	absent := func(name string) bool { return !m.Has(s.field(name).desc) }
	if f := s.field("capacitance"); absent(f.name) {
		nominal := mark.Capacitance
		c.Capacitance = stage.Absent(w.paths.member(component, f.name), f.declare)
		c.Capacitance.Typ = nominal
		low, high := nominal, nominal
		if mark.HasTolerance {
			low, high = nominal*(1+mark.ToleranceLow), nominal*(1+mark.ToleranceHigh)
			c.Capacitance.Min, c.Capacitance.Max = low, high
		}
		if !within(low, f.declare) || !within(high, f.declare) {
			w.fault(path, refusal(quote(text), f.expect, "the marked capacitance is outside the plausible range"))
		}
	}
	if f := s.field("voltageRating"); absent(f.name) && mark.HasVoltage {
		v := mark.Voltage
		c.VoltageRating = stage.Absent(w.paths.member(component, f.name), f.declare)
		c.VoltageRating.Triple = stage.Triple{Min: v, Typ: v, Max: v}
		if !within(v, f.declare) {
			w.fault(path, refusal(quote(text), f.expect, "the marked voltage is outside the plausible range"))
		}
	}
	if mark.Dielectric != "" && absent("dielectric") {
		c.Dielectric = mark.Dielectric
	}
	if mark.CaseSize != "" && absent("caseSize") {
		c.CaseSize = mark.CaseSize
	}
}

// field finds the plan of a field by its JSON name.
func (s *shape) field(name string) *field {
	for i := range s.fields {
		if s.fields[i].name == name {
			return &s.fields[i]
		}
	}
	panic("convert: " + string(s.name) + " has no field " + name)
}
