package convert

import (
	"math"
	"reflect"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

func bind(t testing.TB, text string) *stage.Stage {
	t.Helper()
	s, _, faults := New().Stage(nil, parseStage(t, text), "stage")
	for _, f := range faults {
		t.Errorf("%s: %s", f.Field, f.Description)
	}
	return s
}

func TestEveryDeclarationIsComplete(t *testing.T) {
	b := New()
	values := 0
	for name, s := range b.shapes {
		for i := range s.fields {
			f := &s.fields[i]
			o := option(f.desc)
			switch f.kind {
			case kindQuantity, kindValue, kindNumber:
				values++
			default:
				if o != nil {
					t.Errorf("%s.%s is declared and is no value", name, f.name)
				}
				continue
			}
			if o.GetDimension() == pb.Declaration_DIMENSION_UNSPECIFIED || o.GetLow() == "" || o.GetHigh() == "" || o.GetAbsent() == pb.Declaration_ABSENCE_UNSPECIFIED {
				t.Errorf("%s.%s does not declare dimension, range and absence", name, f.name)
			}
			if d := f.declare; !(d.Low < d.High) {
				t.Errorf("%s.%s: range from %g to %g", name, f.name, d.Low, d.High)
			}
			if d := f.declare; (d.Absence == stage.Assumed) != (d.Direction != stage.Neutral && d.Reason != "") {
				t.Errorf("%s.%s: an assumption has a direction and a reason, nothing else has", name, f.name)
			}
			if assumed := f.declare.Absence == stage.Assumed || f.declare.PolicyDefault; assumed != within(f.declare.AssumedTyp, f.declare) {
				t.Errorf("%s.%s: assumed typ %g, range from %g to %g", name, f.name, f.declare.AssumedTyp, f.declare.Low, f.declare.High)
			}
			if f.kind == kindQuantity && f.declare.Spread == stage.NoSpread {
				t.Errorf("%s.%s: no class of spread", name, f.name)
			}
		}
	}
	if values < 150 {
		t.Errorf("%d values only", values)
	}
}

func TestEveryDomainFieldIsBoundOrMade(t *testing.T) {
	made := map[string]bool{"Header": true, "CommutationCharge": true, "ChargeSlope": true, "TemperatureChange": true, "Bias": true}
	for _, s := range New().shapes {
		bound := map[int]bool{}
		for i := range s.fields {
			bound[s.fields[i].index[0]] = true
		}
		for i := range s.typ.NumField() {
			if f := s.typ.Field(i); f.IsExported() && !bound[i] && !made[f.Name] {
				t.Errorf("%s.%s is bound to nothing", s.typ, f.Name)
			}
		}
	}
}

func TestPolicyOfTheContractIsTheDefaultPolicy(t *testing.T) {
	b := New()
	policy := reflect.ValueOf(stage.DefaultPolicy())
	for i := range b.policy.fields {
		f := &b.policy.fields[i]
		if f.kind != kindNumber {
			continue
		}
		if got := policy.FieldByIndex(f.index).Float(); got != f.declare.AssumedTyp {
			t.Errorf("%s: default policy %g, contract %g", f.name, got, f.declare.AssumedTyp)
		}
	}
}

func TestPolicy(t *testing.T) {
	in := &pb.Policy{}
	text := `{"name": "ours", "guardRatio": "20 %", "junctionMargin": "25 K", "failAt": "CRITICAL", "countMarginal": true, "baseline": ["` + id + `"],
		"severities": [{"rule": "charge/droop", "severity": "MINOR"}]}`
	if err := protojson.Unmarshal([]byte(text), in); err != nil {
		t.Fatal(err)
	}
	got, faults := New().Policy(in)
	compare(t, faults)
	want := stage.DefaultPolicy()
	want.Name, want.GuardRatio, want.JunctionMargin, want.FailAt, want.CountMarginal, want.Baseline = "ours", 0.2, 25, stage.Critical, true, []string{id}
	want.Severities = []stage.SeverityOverride{{Rule: "charge/droop", Severity: stage.Minor}}
	if !sameValue(reflect.ValueOf(got), reflect.ValueOf(want)) {
		t.Errorf("got  %+v\nwant %+v", got, want)
	}
}

func TestWaivers(t *testing.T) {
	text := func(s string) *string { return &s }
	in := []*pb.Waiver{
		{Identity: text(id), Reason: text("measured"), Approver: text("A. Smith"), Expiry: text("2026-12-31"), WorstMargin: text("-5 %")},
		{Identity: text(strings.Repeat("0", 32)), Reason: text("r"), Approver: text("n")},
	}
	got, faults := New().Waivers(in, "2026-01-01")
	compare(t, faults)
	if got[0].Identity != id || got[0].Expiry != "2026-12-31" || got[0].WorstMargin != -0.05 || got[0].Approver != "A. Smith" || !math.IsNaN(got[1].WorstMargin) {
		t.Errorf("%+v", got)
	}
}

func TestValuesArrive(t *testing.T) {
	s := bind(t, fullStage)
	nan, degree := math.NaN(), math.Pi/180
	cases := []struct {
		q     *stage.Quantity
		field string
		want  stage.Triple
	}{
		{&s.HighSide.GateCharge, "stage.highSide.gateCharge", stage.Triple{Min: nan, Typ: 63e-9, Max: 80e-9}},
		{&s.GateSupply.Voltage, "stage.gateSupply.voltage", stage.Triple{Min: 14.25, Typ: 15, Max: 15.75}},
		{&s.Driver.FloatingVoltageMax, "stage.driver.floatingVoltageMax", stage.Triple{Min: 25, Typ: 25, Max: 25}},
		{&s.Driver.PullDownResistance, "stage.driver.pullDownResistance", stage.Triple{Min: nan, Typ: 1.5, Max: 3}},
		{&s.Driver.NodeUndershoot.Items[2].Duration, "stage.driver.nodeUndershoot[2].duration", stage.Triple{Min: 20e-9, Typ: 20e-9, Max: 20e-9}},
		{&s.Driver.NodeUndershoot.Items[0].Duration, "stage.driver.nodeUndershoot[0].duration", stage.Missing()},
		{&s.HighSide.Reverse.ForwardPoints.Items[1].Voltage, "stage.highSide.reverse.forwardPoints[1].voltage", stage.Triple{Min: nan, Typ: 0.95, Max: 1.2}},
		{&s.LowSide.InputCapacitance, "stage.lowSide.inputCapacitance", stage.Missing()},
		{&s.LowSide.GatePullDown.Resistance, "stage.lowSide.gatePullDown.resistance", stage.Missing()},
		{&s.Bootstrap.Capacitor.Capacitance, "stage.bootstrap.capacitor.capacitance", stage.Triple{Min: 1e-6 * (1 - 0.1), Typ: 1e-6, Max: 1e-6 * (1 + 0.1)}},
		{&s.Bootstrap.Capacitor.VoltageRating, "stage.bootstrap.capacitor.voltageRating", stage.Triple{Min: 25, Typ: 25, Max: 25}},
		{&s.OperatingPoints.Items[0].Sinusoidal.DisplacementAngle, "stage.operatingPoints[0].sinusoidal.displacementAngle", stage.Triple{Min: nan, Typ: 30 * degree, Max: nan}},
		{&s.OperatingPoints.Items[1].FixedDuty.Duty, "stage.operatingPoints[1].fixedDuty.duty", stage.Triple{Min: nan, Typ: nan, Max: 0.95}},
		{&s.OperatingPoints.Items[1].JunctionTemperature, "stage.operatingPoints[1].junctionTemperature", stage.Missing()},
	}
	for _, c := range cases {
		if c.q.Field != c.field || !same(c.q.Triple, c.want) {
			t.Errorf("%s %v, want %s %v", c.q.Field, c.q.Triple, c.field, c.want)
		}
		if c.q.Declare == nil || c.q.Declare.Dimension == quantity.None {
			t.Errorf("%s is not declared", c.field)
		}
	}
	if at := s.HighSide.OnResistance.At; len(at) != 2 || at[1].Temperature != 150 || !same(at[1].Triple, stage.Triple{Min: nan, Typ: 0.22, Max: 0.26}) {
		t.Errorf("at: %v", at)
	}
	if s.ID != "leg-a" || s.FormerID != "leg-1" || s.HighSide.Kind != stage.SiMOSFET || s.HighSide.Parallel != 2 || s.LowSide.Parallel != 0 ||
		s.GateSupply.StagesSharing != 3 || s.Bootstrap.Element != stage.DiscreteDiode || s.OperatingPoints.Items[0].Sinusoidal.ZeroSequence != "THIRD_HARMONIC" {
		t.Error("names and counts did not arrive")
	}
	if p := s.OperatingPoints.Items; p[0].Mode() != stage.ModeSinusoidal || p[1].Mode() != stage.ModeFixedDuty || p[2].Mode() != stage.ModeHeldOn || !p[1].Overload {
		t.Error("modes did not arrive")
	}
	if c := &s.Bootstrap.Capacitor; c.Dielectric != "X7R" || c.CaseSize != "0603" || c.Refdes != "C1" {
		t.Errorf("marking: %q %q", c.Dielectric, c.CaseSize)
	}
}

func TestPresence(t *testing.T) {
	s := bind(t, `{"id": "a", "bootstrap": {"clamp": {"fit": "NOT_FITTED", "refdes": "Z1"}, "capacitor": {}, "resistor": {"fit": "FITTED"}}, "layout": {}}`)
	cases := []struct {
		h       *stage.Header
		field   string
		present bool
		want    stage.Presence
	}{
		{&s.Header, "stage", true, stage.Fitted},
		{&s.Bootstrap.Header, "stage.bootstrap", true, stage.Fitted},
		{&s.Bootstrap.Clamp.Header, "stage.bootstrap.clamp", false, stage.NotFitted},
		{&s.Bootstrap.Capacitor.Header, "stage.bootstrap.capacitor", false, stage.PresenceUnknown},
		{&s.Bootstrap.Resistor.Header, "stage.bootstrap.resistor", true, stage.Fitted},
		{&s.Bootstrap.Diode.Header, "stage.bootstrap.diode", false, stage.PresenceUnknown},
		{&s.Layout.Header, "stage.layout", false, stage.PresenceUnknown},
		{&s.Layout.Measured.Header, "stage.layout.measured", false, stage.PresenceUnknown},
		{&s.HighSide.Reverse.Header, "stage.highSide.reverse", false, stage.PresenceUnknown},
	}
	for _, c := range cases {
		if c.h.Field != c.field || c.h.Present != c.present || c.h.Presence() != c.want {
			t.Errorf("%+v, want %s %v %v", *c.h, c.field, c.present, c.want)
		}
	}
	if s.Bootstrap.Clamp.Refdes != "Z1" {
		t.Error("a part that is not fitted keeps its designator")
	}
	if q := &s.HighSide.Reverse.RecoveryCharge; q.Field != "stage.highSide.reverse.recoveryCharge" || q.Given() {
		t.Errorf("absent component: %+v", q)
	}
	if s.OperatingPoints.Field != "stage.operatingPoints" || s.HighSide.ChannelPoints.Field != "stage.highSide.channelPoints" {
		t.Error("empty lists do not know their path")
	}
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
