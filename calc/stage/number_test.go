package stage

import (
	"reflect"
	"strings"
	"testing"

	"floatrail/calc/quantity"
)

// populated is a stage of zeros with curves, two operating points and their modes.
func populated() *Stage {
	s := &Stage{ID: "s"}
	d := &s.Bootstrap.Diode.ForwardPoints
	d.Field = "stage.bootstrap.diode.forwardPoints"
	d.Items = []ForwardPoint{{Exact("i0", 0.1), Between("v0", 0.5, 0.6, 0.7)}, {Exact("i1", 1), Exact("v1", 0.9)}, {Exact("i2", 2), Between("v2", 1, 1.1, 1.2)}}
	r := &s.LowSide.Reverse.ForwardPoints
	r.Field = "stage.lowSide.reverse.forwardPoints"
	r.Items = []ForwardPoint{{Exact("i", 1), Exact("v", 0.8)}}
	c := &s.HighSide.OutputCapacitance
	c.Field = "stage.highSide.outputCapacitance"
	c.Items = []CapacitancePoint{{Exact("v", 0), Absent("c", &Declaration{})}}
	c.Items[0].Capacitance.At = []AtTemperature{{25, Triple{1, 1, 1}}, {125, Triple{1, 2, 3}}} // a range at one temperature only
	s.OperatingPoints.Items = []OperatingPoint{{Name: "a", BusVoltage: Between("bus", 40, 48, 56), FixedDuty: &FixedDuty{}}, {Name: "b", HeldOn: &HeldOn{}}}
	return s
}

// quantities finds every quantity of a value in the order of its fields, apart from the numbering.
func quantities(v reflect.Value, out []*Quantity) []*Quantity {
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			out = quantities(v.Elem(), out)
		}
	case reflect.Slice:
		for i := range v.Len() {
			out = quantities(v.Index(i), out)
		}
	case reflect.Struct:
		if q, ok := v.Addr().Interface().(*Quantity); ok {
			return append(out, q)
		}
		for i := range v.NumField() {
			if v.Type().Field(i).IsExported() {
				out = quantities(v.Field(i), out)
			}
		}
	}
	return out
}

func TestNumbering(t *testing.T) {
	s := populated()
	p := DefaultPolicy()
	s.Complete(&p)
	in := s.Inputs()
	if in[0] != nil {
		t.Error("an input has no number")
	}
	seen := map[*Quantity]bool{}
	for id, q := range in[1:] {
		if q.ID != id+1 {
			t.Errorf("%s stands at %d with the number %d", q.Field, id+1, q.ID)
		}
		if seen[q] {
			t.Errorf("%s is numbered twice", q.Field)
		}
		seen[q] = true
	}
	want := 0
	for _, q := range quantities(reflect.ValueOf(s).Elem(), nil) {
		want++
		if !seen[q] {
			t.Errorf("a quantity without a number: %+v", *q)
		}
	}
	if len(in) != want+1 {
		t.Errorf("%d inputs, want %d", len(in)-1, want)
	}
	a, b := &s.OperatingPoints.Items[0], &s.OperatingPoints.Items[1]
	d := &s.Bootstrap.Diode.ForwardPoints
	last := 0
	for i, q := range []*Quantity{&s.GateSupply.Voltage, &s.GateSupply.Reservoir.Capacitance, &s.Driver.UVLORising, &s.Driver.JunctionMax,
		&s.HighSide.GateCharge, &s.LowSide.GateCharge, &d.Position, &d.Items[0].Current, &d.Items[0].Voltage, &d.Items[2].Voltage,
		&s.Bootstrap.Resistor.Resistance, &s.Bootstrap.OtherLoad, &s.Layout.LowSideInductance, &a.BusVoltage, &a.FixedDuty.Duty, &b.BusVoltage,
		&b.HeldOn.Duration, &s.Startup.TimeAvailable} {
		if q.ID <= last {
			t.Errorf("input %d has the number %d after %d", i, q.ID, last)
		}
		last = q.ID
	}
	if s.GateSupply.Voltage.ID != 1 {
		t.Errorf("the first input has the number %d", s.GateSupply.Voltage.ID)
	}
}

// Everything of a switch, down to its gate resistors, takes the junction temperature; nothing else does.
func TestDomains(t *testing.T) {
	s := populated()
	p := DefaultPolicy()
	s.Complete(&p)
	inside := map[*Quantity]bool{}
	for _, w := range []*Switch{&s.HighSide, &s.LowSide} {
		for _, q := range quantities(reflect.ValueOf(w).Elem(), nil) {
			inside[q] = true
		}
	}
	for _, q := range s.Inputs()[1:] {
		want := Surroundings
		if inside[q] {
			want = Junction
		}
		if q.Domain != want {
			t.Errorf("input %d %s: domain %v, want %v", q.ID, q.Field, q.Domain, want)
		}
	}
}

// The points of a curve that have a spread follow one position.
func TestPositions(t *testing.T) {
	s := populated()
	p := DefaultPolicy()
	s.Complete(&p)
	d := &s.Bootstrap.Diode.ForwardPoints
	if d.Position.Triple != (Triple{-1, 0, 1}) || d.Position.Field != d.Field || d.Position.Along != 0 {
		t.Errorf("position %+v", d.Position)
	}
	for i, want := range []int{d.Position.ID, 0, d.Position.ID} {
		if got := d.Items[i].Voltage.Along; got != want {
			t.Errorf("voltage %d follows %d, want %d", i, got, want)
		}
		if got := d.Items[i].Current.Along; got != 0 {
			t.Errorf("current %d follows %d", i, got)
		}
	}
	r := &s.LowSide.Reverse.ForwardPoints
	if r.Position.Triple != (Triple{0, 0, 0}) || r.Items[0].Voltage.Along != 0 {
		t.Errorf("a curve without spread: position %v", r.Position.Triple)
	}
	c := &s.HighSide.OutputCapacitance
	if c.Position.Triple != (Triple{-1, 0, 1}) || c.Items[0].Capacitance.Along != c.Position.ID {
		t.Errorf("a spread at one temperature: position %v", c.Position.Triple)
	}
	if e := &s.Bootstrap.Capacitor.BiasCurve; e.Position.Triple != (Triple{0, 0, 0}) || e.Position.ID == 0 {
		t.Errorf("an empty curve: position %+v", e.Position)
	}
	for _, q := range []*Quantity{&s.Bootstrap.OtherLoad, &s.OperatingPoints.Items[0].BusVoltage} { // operating points are no curve
		if q.Along != 0 {
			t.Errorf("%s follows %d", q.Field, q.Along)
		}
	}
}

// Both capacitors and both switches go through their classes, and what these imply is numbered.
func TestCompleteStage(t *testing.T) {
	s := populated()
	s.GateSupply.Reservoir, s.Bootstrap.Capacitor = capacitorOf("X7R"), capacitorOf("C0G")
	p := DefaultPolicy()
	s.Complete(&p)
	if !same(s.GateSupply.Reservoir.TemperatureChange.Triple, Triple{-0.15, 0, 0.15}) || !same(s.Bootstrap.Capacitor.Bias.Triple, Triple{0, 0, 0}) {
		t.Error("a capacitor was left out")
	}
	if !same(s.LowSide.CommutationCharge.Triple, Triple{0, 0, 1e-3}) || s.HighSide.CommutationCharge.Known() {
		t.Error("a switch was left out")
	}
	if s.Bootstrap.Capacitor.Bias.ID == 0 || s.LowSide.CommutationCharge.ID == 0 {
		t.Error("what a class implies has no number")
	}
}

// A clone shares nothing that trials or Complete change.
func TestClone(t *testing.T) {
	s, untouched := populated(), populated()
	s.HighSide.GateCharge.At = []AtTemperature{{125, Triple{nan, 5, nan}}}
	untouched.HighSide.GateCharge.At = []AtTemperature{{125, Triple{nan, 5, nan}}}
	c := s.Clone()
	if !reflect.DeepEqual(printed(c), printed(s)) {
		t.Fatal("a clone differs")
	}
	mine := map[*Quantity]bool{}
	for _, q := range quantities(reflect.ValueOf(s).Elem(), nil) {
		mine[q] = true
	}
	for _, q := range quantities(reflect.ValueOf(c).Elem(), nil) {
		if mine[q] {
			t.Errorf("%s is shared", q.Field)
		}
		q.Triple = Triple{-7, -7, -7}
	}
	c.OperatingPoints.Items[0].Name = "changed"
	c.Bootstrap.Diode.ForwardPoints.Items = c.Bootstrap.Diode.ForwardPoints.Items[:1]
	p := DefaultPolicy()
	c.Complete(&p)
	if !reflect.DeepEqual(printed(s), printed(untouched)) {
		t.Error("a change of the clone reached the original")
	}
	if s.Inputs() != nil || len(c.Inputs()) == 0 {
		t.Error("inputs are shared")
	}
	again := c.Clone()
	again.Complete(&p)
	if c.Inputs()[1] != &c.GateSupply.Voltage || again.Inputs()[1] != &again.GateSupply.Voltage {
		t.Error("inputs of a completed stage are shared")
	}
}

// printed is all numbers of a stage as text, so that NaN equals itself.
func printed(s *Stage) []string {
	var out []string
	for _, q := range quantities(reflect.ValueOf(s).Elem(), nil) {
		out = append(out, strings.Join([]string{q.Field, describeAll(q.Triple), describeAt(q.At)}, " "))
	}
	for i := range s.OperatingPoints.Items {
		out = append(out, s.OperatingPoints.Items[i].Name)
	}
	return out
}

func describeAll(t Triple) string {
	var out []string
	for _, v := range t.ends() {
		out = append(out, quantity.Format(v, quantity.Ratio))
	}
	return strings.Join(out, "/")
}

func describeAt(at []AtTemperature) string {
	var out []string
	for _, a := range at {
		out = append(out, describeAll(a.Triple))
	}
	return strings.Join(out, ",")
}
