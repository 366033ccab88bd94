package convert

import (
	"math"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/source"
	"floatrail/calc/stage"
)

func TestRound(t *testing.T) {
	negativeZero := math.Copysign(0, -1)
	cases := []struct{ v, want float64 }{
		{0, 0}, {negativeZero, 0}, {1.2345678, 1.23457}, {-1.2345678e-9, -1.23457e-9}, {999999.5e3, 1e9}, {0.1 + 0.2, 0.3}, {8.97, 8.97},
		{math.MaxFloat64, 1.79769e308}, {5e-324, 5e-324}, {123456, 123456}, {1234565, 1.23456e6},
	}
	for _, c := range cases {
		if got := Round(c.v); got != c.want || math.Signbit(got) != math.Signbit(c.want) {
			t.Errorf("%g: %g, want %g", c.v, got, c.want)
		}
	}
	for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if number(v) != nil {
			t.Errorf("%g is a number of an answer", v)
		}
	}
}

func TestMeasure(t *testing.T) {
	cases := []struct {
		v    float64
		d    quantity.Dimension
		want string
	}{
		{63.00000004e-9, quantity.Charge, `{"value": 6.3e-8, "unit": "C", "text": "63 nC"}`},
		{-11.2, quantity.Voltage, `{"value": -11.2, "unit": "V", "text": "-11.2 V"}`},
		{85, quantity.Temperature, `{"value": 85, "unit": "°C", "text": "85 °C"}`},
		{0, quantity.Ratio, `{"value": 0, "unit": "1", "text": "0"}`},
		{4.7e3, quantity.Resistance, `{"value": 4700, "unit": "Ω", "text": "4.7 kΩ"}`},
	}
	for _, c := range cases {
		want := &pb.Measure{}
		if err := protojson.Unmarshal([]byte(c.want), want); err != nil {
			t.Fatal(err)
		}
		if got := measureOf(c.v, c.d); !proto.Equal(got, want) {
			t.Errorf("%g: %v, want %v", c.v, got, want)
		}
	}
	if measureOf(math.NaN(), quantity.Voltage) != nil || measureOf(math.Inf(1), quantity.Voltage) != nil {
		t.Error("what is no number stays unset")
	}
}

// sample is a report in which every field is filled.
func sample() *finding.Report {
	volts := func(v float64) finding.Measure { return finding.Measure{Value: v, Dimension: quantity.Voltage} }
	span := finding.Span{Min: 1, Typ: 2, Max: 3, Dimension: quantity.Voltage}
	corner := finding.Corner{Name: "hot", Settings: []finding.Setting{{Field: "stage.driver.uvloFalling", Bound: finding.AtMax, Value: volts(8.9)}}}
	margin := finding.Margin{Absolute: volts(0.07), Relative: 0.00787}
	waiver := finding.Waiver{Identity: id, Reason: "measured", Approver: "A. Smith", Expiry: "2026-12-31", WorstMargin: -0.05}
	key := source.All()[0].Key
	window := finding.Window{Low: volts(1), High: volts(2)}
	return &finding.Report{
		StageID: "leg-a", Verdict: finding.Incomplete, Coverage: finding.Coverage{Applicable: 10, Evaluated: 7, Open: 3},
		Findings: []finding.Finding{{
			Rule: "charge/lowest-voltage", Role: "driver", Mode: stage.ModeHeldOn, Outcome: finding.Marginal, Severity: stage.Minor, Title: "t", Message: "m",
			Subjects: []string{"U1"}, OperatingPoint: "hold", Corner: corner, Value: volts(8.97), Limit: volts(8.9), Guard: volts(9.345), Margin: margin,
			Typical: volts(9.5), Equation: "e", Inputs: []finding.Input{{Symbol: "V_UV-", Measure: volts(8.9), Field: "f", Source: "p. 3"}},
			Ranking: []finding.Ranking{{Field: "f", Swing: volts(1)}}, BreakEven: []finding.BreakEven{{Field: "f", Measure: volts(8.97)}}, Sources: []string{key, "not-there"},
			Missing: []string{"stage.layout"}, Notes: []string{"n"},
			Points:   []finding.PointResult{{OperatingPoint: "p", Outcome: finding.Pass, Value: volts(12), Limit: volts(8.9), Margin: margin}},
			Identity: id, Evidence: id, Waiver: &waiver, Known: true,
		}},
		Assumptions:   []stage.Assumption{{Field: "f", Assumed: "0 A", Direction: stage.Optimistic, Reason: "r"}},
		UnusedWaivers: []finding.Waiver{waiver},
		Sizing: &finding.Sizing{
			Budget: []finding.BudgetItem{{Name: "b", Charge: span, OperatingPoint: "p"}}, TotalCharge: span, VoltageBudget: span, MinimumCapacitance: span,
			EffectiveCapacitance: span, Ripple: span, Notes: []string{"n"},
			Recommended: finding.Recommended{Capacitance: volts(1), CapacitorVoltage: volts(1), Resistance: volts(1), ResistanceWindow: window, CapacitanceWindow: window,
				DiodeReverseVoltage: volts(1), DiodeAverageCurrent: volts(1), DiodePeakCurrent: volts(1), ReservoirCapacitance: volts(1)},
		},
		DutyLimits: &finding.DutyLimits{Points: []finding.DutyPoint{{
			OperatingPoint: "p", RechargeWindow: span, RechargeRatio: span, Deficit: span, FloatingVoltageLow: span, FloatingVoltageHigh: span, GateVoltageLow: span,
			Collapses: &finding.Collapse{Periods: 12, Corner: corner}, CapacitanceCancels: true, PeakDetector: true, HighInterval: "dead time",
			Limits: []finding.DerivedLimit{
				{Name: finding.LargestDuty, Measure: volts(1), Corner: corner, Reason: "r"}, {Name: finding.LongestOnTime, Measure: volts(2)},
				{Name: finding.ShortestLowSidePulse, Measure: volts(3)}, {Name: finding.LargestResistance, Measure: volts(4)}, {Name: finding.LargestDeadTime, Measure: volts(5)},
				{Name: finding.LowestSwitchingFrequency, Measure: volts(6)}, {Name: finding.HighestSwitchingFreq, Measure: volts(7)},
				{Name: finding.LargestIndex, Measure: volts(8)}, {Name: finding.LowestFundamental, Measure: volts(9)}, {Name: finding.LongestIdle, Measure: volts(10)},
				{Name: finding.LongestStall, Measure: volts(11)},
			},
			LowAngle: volts(1), HighAngle: volts(2), WithoutRefresh: span, Restart: span,
			Missing: []string{"m"}, Reason: "r",
		}}, Limits: []finding.DerivedLimit{{Name: finding.LargestDuty, Measure: volts(1), Corner: corner, Reason: "r", OperatingPoint: "p"}},
			Trace: []finding.TracePoint{{OperatingPoint: "p", Kind: finding.TraceFundamental, Time: 1e-3, Angle: 0.5, FloatingVoltage: 12}},
			Precharge: &finding.Precharge{Time: span, Pulses: 3, PeakCurrent: span, ResistorEnergy: span, ReservoirLow: span, SettledVoltage: span,
				ReservoirLowSimultaneous: span, ReservoirLowStaged: span, TimeSimultaneous: span, TimeStaged: span}},
		Transient: &finding.TransientStress{Events: []finding.TransientEvent{{
			Event: "TURN_OFF", OperatingPoint: "p", NodeMin: span, PinMin: span, RailToCOMMin: span,
			Undershoots:         []finding.Undershoot{{Level: volts(-5), Duration: span, Total: span, Dips: 3, Each: []finding.Measure{volts(-1)}}},
			FloatingVoltageGain: span, NodeMax: span, RailMax: span, HighSidePeak: span, LowSidePeak: span, SlewPeak: span, Slew10To90: span,
			MillerLow: span, MillerHigh: span, GateMin: span, CurrentSlope: span, RingFrequency: span, RingDamping: span,
			Method: finding.Simulation, Steps: 321, Convergence: 2e-4,
			Comparisons: []finding.Comparison{{Name: "nodeMin", Simulated: volts(-8), Estimated: volts(-12), Difference: 0.5}},
			Missing:     []string{"stage.layout.lowSideInductance"}, Reason: "r",
		}}, Waveforms: []finding.Waveform{{Name: "p, TURN_OFF, node", Unit: "V", Time: []float64{0, 1e-9}, Value: []float64{400, -8}}}},
	}
}

// unset lists the fields of a message tree that are not set, as paths.
func unset(m protoreflect.Message, path string) []string {
	var out []string
	for i := range m.Descriptor().Fields().Len() {
		d := m.Descriptor().Fields().Get(i)
		own := path + "." + d.JSONName()
		switch {
		case !m.Has(d):
			out = append(out, own)
		case d.Message() != nil && d.IsList():
			out = append(out, unset(m.Get(d).List().Get(0).Message(), own)...)
		case d.Message() != nil:
			out = append(out, unset(m.Get(d).Message(), own)...)
		}
	}
	return out
}

func TestReviewStageResponseCarriesEverything(t *testing.T) {
	got := ReviewStageResponse(Engine{"1.2.3", "7"}, sample(), []Reading{{"f", "4k7", "4.7 kΩ"}})
	// What no report holds: fixes; and the operating point of a limit that stands under it already.
	want := []string{".findings.fixes", ".dutyLimits.points.limits.operatingPoint"}
	if missing := unset(got.ProtoReflect(), ""); strings.Join(missing, " ") != strings.Join(want, " ") {
		t.Errorf("unset: %v, want %v", missing, want)
	}
	f := got.GetFindings()[0]
	if f.GetOutcome() != pb.Outcome_MARGINAL || f.GetSeverity() != pb.Severity_MINOR || got.GetVerdict() != pb.Verdict_INCOMPLETE || !f.GetKnown() ||
		f.GetCorner().GetSettings()[0].GetBound() != pb.Setting_Bound_MAX || got.GetAssumptions()[0].GetDirection() != pb.Assumption_Direction_OPTIMISTIC {
		t.Errorf("%v", got)
	}
	if w := f.GetWaiver(); w.GetWorstMargin() != "-0.05" || w.GetExpiry() != "2026-12-31" {
		t.Errorf("waiver %v", w)
	}
	if s := f.GetSources(); s[0].GetKey() != source.All()[0].Key || s[0].GetTitle() == "" || s[1].GetKey() != "not-there" || s[1].Title != nil {
		t.Errorf("sources %v", s)
	}
	p := got.GetDutyLimits().GetPoints()[0]
	for i, m := range []*pb.Measure{p.LargestDuty, p.LongestOnTime, p.ShortestLowSidePulse, p.LargestResistance, p.LargestDeadTime, p.LowestSwitchingFrequency, p.HighestSwitchingFrequency,
		p.LargestModulationIndex, p.LowestFundamentalFrequency, p.LongestIdleTime, p.LongestStall} {
		if m.GetValue() != float64(i+1) {
			t.Errorf("derived limit %d: %v", i, m)
		}
	}
	for _, word := range []string{"kill", "measurement", "local codes", "licensed practice"} {
		if !strings.Contains(strings.ToLower(got.GetCaution()), word) {
			t.Errorf("the caution lacks %q", word)
		}
	}
}

func TestTypedResponses(t *testing.T) {
	r, e := sample(), Engine{"1", "2"}
	whole := ReviewStageResponse(e, r, nil)
	size, duty := SizeSupplyResponse(e, r, nil), CheckDutyLimitsResponse(e, r, nil)
	if !proto.Equal(size.GetSizing(), wireSizing(r.Sizing)) || !proto.Equal(duty.GetDutyLimits(), whole.GetDutyLimits()) {
		t.Error("typed results differ")
	}
	for _, m := range []protoreflect.Message{size.ProtoReflect(), duty.ProtoReflect()} {
		for i := range m.Descriptor().Fields().Len() {
			d := m.Descriptor().Fields().Get(i)
			w := whole.ProtoReflect()
			if same := w.Descriptor().Fields().ByName(d.Name()); same != nil && !m.Get(d).Equal(w.Get(same)) {
				t.Errorf("%s differs from the whole answer", d.FullName())
			}
		}
	}
}

func TestUnknownNumbersStayUnset(t *testing.T) {
	nan := math.NaN()
	got := wireFinding(&finding.Finding{Outcome: finding.Open, Severity: stage.Major, Value: finding.Measure{Value: nan}, Limit: finding.Measure{Value: nan},
		Guard: finding.Measure{Value: nan}, Typical: finding.Measure{Value: nan}, Margin: finding.Margin{Absolute: finding.Measure{Value: nan}, Relative: nan}})
	want := &pb.Finding{Outcome: pb.Outcome_OPEN, Severity: pb.Severity_MAJOR, Known: proto.Bool(false)}
	if !proto.Equal(got, want) {
		t.Errorf("%v", got)
	}
	if s := wireSpan(&finding.Span{Min: nan, Typ: nan, Max: nan}); s != nil {
		t.Errorf("span %v", s)
	}
	if s := wireSpan(&finding.Span{Min: nan, Typ: 0, Max: nan}); s.GetTyp().GetValue() != 0 || s.Typ == nil || s.Min != nil {
		t.Errorf("span %v", s)
	}
	if got := wireWaiver(&finding.Waiver{WorstMargin: nan}); got.WorstMargin != nil {
		t.Errorf("waiver %v", got)
	}
}

func TestOptionsOfSimulation(t *testing.T) {
	for _, c := range []struct {
		in                  *pb.Options
		simulate, waveforms bool
	}{
		{nil, false, false}, {&pb.Options{}, false, false}, {&pb.Options{Simulate: proto.Bool(true)}, true, false},
		{&pb.Options{Simulate: proto.Bool(true), Waveforms: proto.Bool(true)}, true, true},
		{&pb.Options{Simulate: proto.Bool(false), Waveforms: proto.Bool(false)}, false, false},
	} {
		got, faults := New().Options(c.in)
		if len(faults) > 0 || got.Simulate != c.simulate || got.Waveforms != c.waveforms {
			t.Errorf("%v: %+v, %v", c.in, got, faults)
		}
	}
}

// The numbers of a simulation arrive as they are; what one does not know stays unset.
func TestSimulatedEvent(t *testing.T) {
	nan := math.NaN()
	e := sample().Transient.Events[0]
	got := wireEvent(&e)
	want := &pb.Comparison{Name: proto.String("nodeMin"), Simulated: measureOf(-8, quantity.Voltage), Estimated: measureOf(-12, quantity.Voltage), Difference: proto.Float64(0.5)}
	if got.GetMethod() != pb.TransientEvent_Method_SIMULATION || got.GetSteps() != 321 || got.GetConvergence() != 2e-4 || len(got.GetComparisons()) != 1 ||
		!proto.Equal(got.GetComparisons()[0], want) || strings.Join(got.GetMissing(), " ") != "stage.layout.lowSideInductance" || got.GetReason() != "r" {
		t.Errorf("%v", got)
	}
	e.Method, e.Steps, e.Convergence, e.Missing, e.Reason = finding.Estimate, 0, nan, nil, ""
	e.Comparisons[0].Difference = nan
	got = wireEvent(&e)
	if got.GetMethod() != pb.TransientEvent_Method_ESTIMATE || got.Steps != nil || got.Convergence != nil || got.GetComparisons()[0].Difference != nil ||
		got.Missing != nil || got.Reason != nil {
		t.Errorf("%v", got)
	}
}

// A waveform is rounded as every number is; its time still rises, and its extremes stay.
func TestWaveform(t *testing.T) {
	w := finding.Waveform{Name: "p, TURN_OFF, node", Unit: "V",
		Time:  []float64{0, 1.0000001e-6, 1.0000002e-6, 1.0000003e-6, 2e-6, 2.0000001e-6, 3e-6},
		Value: []float64{1, 5, -7.12345678, 4, 5, 9, 3}}
	want := &pb.Waveform{Name: proto.String(w.Name), Unit: proto.String("V"), Time: []float64{0, 1e-6, 2e-6, 3e-6}, Value: []float64{1, -7.12346, 9, 3}}
	if got := wireWaveform(&w); !proto.Equal(got, want) {
		t.Errorf("%v, want %v", got, want)
	}
	if got := wireWaveform(&finding.Waveform{Name: "none"}); len(got.GetTime()) != 0 || len(got.GetValue()) != 0 {
		t.Errorf("%v", got)
	}
}

func TestNamesOfEnumsAgree(t *testing.T) {
	check := func(name string, values map[string]int32, unspecified bool) {
		if n, ok := values[name]; !ok || (n == 0) != unspecified {
			t.Errorf("%s is not a name of the contract", name)
		}
	}
	for o := finding.NoOutcome; o <= finding.Fail; o++ {
		check(o.String(), pb.Outcome_Value_value, o == finding.NoOutcome)
	}
	for v := finding.NoVerdict; v <= finding.Incomplete; v++ {
		check(v.String(), pb.Verdict_Value_value, v == finding.NoVerdict)
	}
	for b := finding.NoBound; b <= finding.Interior; b++ {
		check(b.String(), pb.Setting_Bound_Value_value, b == finding.NoBound)
	}
	for d := stage.Neutral; d <= stage.Optimistic; d++ {
		check(d.String(), pb.Assumption_Direction_Value_value, d == stage.Neutral)
	}
	for s := stage.NoSeverity; s <= stage.Critical; s++ {
		check(s.String(), pb.Severity_Value_value, s == stage.NoSeverity)
		if pb.Severity_Value_value[s.String()] != int32(s) {
			t.Errorf("severity %s has another number in the contract", s)
		}
	}
	check(finding.Estimate, pb.TransientEvent_Method_Value_value, false)
	check(finding.Simulation, pb.TransientEvent_Method_Value_value, false)
	kinds := (*pb.Switch_Kind)(nil).ProtoReflect().Descriptor().Enums().Get(0).Values()
	for _, name := range []string{stage.SiMOSFET, stage.SiCMOSFET, stage.IGBT, stage.GaNHEMT, stage.DiodeOnly} {
		if kinds.ByName(protoreflect.Name(name)) == nil {
			t.Errorf("%s is no kind of switch", name)
		}
	}
	if pb.Fit_Value_value[notFitted] != int32(pb.Fit_NOT_FITTED) {
		t.Error("NOT_FITTED has another name")
	}
}

func TestRules(t *testing.T) {
	r := &rule.Rule{ID: "charge/droop", Title: "t", Since: "1", Equation: "e", Limit: "l", Guard: "g", Applies: "a", Needs: []string{"driver.uvloFalling"},
		Sources: []string{source.All()[0].Key}, Fail: stage.Critical, Marginal: stage.Minor, Open: stage.Major}
	list := ListRulesResponse(Engine{"1", "2"}, []*rule.Rule{r, r})
	if missing := unset(list.ProtoReflect(), ""); missing != nil || len(list.GetRules()) != 2 {
		t.Errorf("unset: %v", missing)
	}
	got := GetRuleResponse(Engine{"1", "2"}, r).GetRule()
	if got.GetSeverityFail() != pb.Severity_CRITICAL || got.GetSeverityMarginal() != pb.Severity_MINOR || got.GetSeverityOpen() != pb.Severity_MAJOR || !got.GetGuardsDestruction() {
		t.Errorf("%v", got)
	}
}

func TestFaultsOnTheWire(t *testing.T) {
	faults := []Fault{{Field: "stage.id", Description: "read nothing"}}
	if v := BadRequest(faults).GetFieldViolations(); len(v) != 1 || v[0].GetField() != "stage.id" || v[0].GetDescription() != "read nothing" {
		t.Errorf("%v", v)
	}
	if s := StageFaults("a", faults); s.GetStageId() != "a" || s.GetFaults()[0].GetField() != "stage.id" || s.GetFaults()[0].GetDescription() != "read nothing" {
		t.Errorf("%v", s)
	}
}

func TestReference(t *testing.T) {
	text := Reference(Comments{"Driver": "The gate | driver.", "Driver.slewMax": "Largest slew."})
	for _, want := range []string{
		"## Driver\n\nThe gate \\| driver.\n", "| `slewMax` | value | V/s | 100 V/µs to 1000 V/ns | unknown; rules that need it are OPEN | Largest slew. |",
		"| `otherLoad` | [Quantity](#quantity) | A | 0 A to 100 mA | assumed 0 A (optimistic: ", "assumed -40 degC to 150 degC (conservative: ",
		"| `guardRatio` | value | 1 | 0 to 0.9 | default policy: 10 % |", "| `kind` | `SI_MOSFET` `SIC_MOSFET` `IGBT` `GAN_HEMT` `DIODE` |",
		"| charge | C | C with a prefix from f to m", "| `operatingPoints` | list of [OperatingPoint](#operatingpoint) |",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q", want)
		}
	}
	for _, d := range quantity.Dimensions() {
		if d != quantity.Count && !strings.Contains(text, "\n| "+d.String()+" | ") {
			t.Errorf("no units of %s", d)
		}
	}
	for _, s := range New().shapes {
		if name := string(s.name.Name()); !strings.Contains(text, "\n## "+name+"\n") {
			t.Errorf("no message %s", name)
		}
	}
	if Annotation("Driver", "refdes") != "" || Annotation("Nothing", "x") != "" {
		t.Error("labels are annotated")
	}
	if got, want := Annotation("Policy", "guardRatio"), "Unit: none (a plain number or %). Range: 0 to 0.9. Absent: default policy: 10 %."; got != want {
		t.Errorf("%q, want %q", got, want)
	}
}
