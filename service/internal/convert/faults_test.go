package convert

import (
	"reflect"
	"slices"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/encoding/protowire"

	pb "floatrail/api/floatrail/v1"
)

// one is the usual expectation: a single fault.
func one(field string, phrases ...string) []want { return []want{{field, phrases}} }

func TestFaultsOfValues(t *testing.T) {
	cases := []struct {
		name, path, value string
		want              []want
	}{
		{"coulombs for nanocoulombs", "highSide.gateCharge", `{"typ": "63 C"}`,
			one("stage.highSide.gateCharge.typ", `read "63 C"`, "charge from 10 pC to 100 µC", "plausible")},
		{"no unit", "highSide.gateCharge", `{"typ": "63"}`, one("stage.highSide.gateCharge.typ", `read "63"`, "charge", "nC", "unit is missing")},
		{"empty", "highSide.gateCharge", `{"min": ""}`, one("stage.highSide.gateCharge.min", "read", "charge", "empty")},
		{"empty rating", "driver.floatingVoltageMax", `""`, one("stage.driver.floatingVoltageMax", "voltage", "empty")},
		{"other dimension", "highSide.gateCharge", `{"max": "63 nF"}`, one("stage.highSide.gateCharge.max", `"63 nF"`, "charge", "unit of capacitance")},
		{"M for m", "bootstrap.capacitor.capacitance", `{"typ": "1 MF"}`, one("stage.bootstrap.capacitor.capacitance.typ", "M is mega", "milli")},
		{"infinite", "highSide.gateCharge", `{"typ": "inf C"}`, one("stage.highSide.gateCharge.typ", "not a finite number")},
		{"not a number", "gateSupply.voltage", `{"typ": "NaN V"}`, one("stage.gateSupply.voltage.typ", "not a finite number")},
		{"rating below its range", "driver.junctionMax", `"20 degC"`, one("stage.driver.junctionMax", `"20 degC"`, "50 °C to 300 °C")},
		{"nothing", "highSide.gateCharge", `{}`, one("stage.highSide.gateCharge", "read nothing", "at least one of min, typ, max, at")},
		{"a source alone", "highSide.gateCharge", `{"source": "p. 3"}`, one("stage.highSide.gateCharge", "at least one of min, typ, max, at")},
		{"min above typ", "highSide.gateCharge", `{"min": "70 nC", "typ": "63 nC"}`,
			one("stage.highSide.gateCharge", `min "70 nC" above typ "63 nC"`, "min <= typ <= max")},
		{"typ above max", "highSide.gateCharge", `{"typ": "70 nC", "max": "63 nC"}`, one("stage.highSide.gateCharge", `typ "70 nC" above max "63 nC"`)},
		{"min above max", "highSide.gateCharge", `{"min": "70 nC", "max": "63 nC"}`, one("stage.highSide.gateCharge", `min "70 nC" above max "63 nC"`)},
		{"tolerance in min", "highSide.gateCharge", `{"min": "70 nC ±5 %"}`, one("stage.highSide.gateCharge.min", "tolerance", "typical value only")},
		{"tolerance beside max", "highSide.gateCharge", `{"typ": "70 nC ±5 %", "max": "90 nC"}`,
			one("stage.highSide.gateCharge.typ", "beside min or max", "either a tolerance")},
		{"tolerance that leaves the range", "bootstrap.switchResistance", `{"typ": "9 kΩ ±50 %"}`,
			one("stage.bootstrap.switchResistance.typ", "resistance from 10 mΩ to 10 kΩ", "4.5 kΩ to 13.5 kΩ")},
		{"at without temperature", "highSide.onResistance", `{"at": [{"typ": "90 mΩ"}]}`,
			one("stage.highSide.onResistance.at[0].temperature", "read nothing", "temperature from -75 °C to 300 °C")},
		{"at with a temperature in kelvin", "highSide.onResistance", `{"at": [{"temperature": "400 K", "typ": "90 mΩ"}]}`,
			one("stage.highSide.onResistance.at[0].temperature", "K is for differences")},
		{"at without a value", "highSide.onResistance", `{"at": [{"temperature": "100 degC"}]}`,
			one("stage.highSide.onResistance.at[0]", "at least one of min, typ, max")},
		{"at descending", "highSide.onResistance", `{"at": [{"temperature": "100 degC", "typ": "1R"}, {"temperature": "25 degC", "typ": "1R"}]}`,
			one("stage.highSide.onResistance.at[1].temperature", "25 °C after 100 °C", "ascending")},
		{"at twice", "highSide.onResistance", `{"at": [{"temperature": "100 degC", "typ": "1R"}, {"temperature": "100 degC", "typ": "1R"}]}`,
			one("stage.highSide.onResistance.at[1].temperature", "ascending temperatures, each once")},
		{"at 25 °C beside typ", "highSide.onResistance", `{"typ": "1R", "at": [{"temperature": "25 degC", "typ": "1R"}]}`,
			one("stage.highSide.onResistance.at[0].temperature", "beside values", "once")},
		{"at with a bad spread", "highSide.onResistance", `{"at": [{"temperature": "100 degC", "typ": "2R", "max": "1R"}]}`,
			one("stage.highSide.onResistance.at[0]", "typ", "above max")},
		{"at with a value out of range", "highSide.onResistance", `{"at": [{"temperature": "100 degC", "max": "2 kΩ"}]}`,
			one("stage.highSide.onResistance.at[0].max", "resistance from 10 µΩ to 100 Ω")},
		{"too many entries of at", "highSide.onResistance", `{"at": [` + repeat(`{"temperature": "100 degC", "max": "1R"}`, 33) + `]}`,
			one("stage.highSide.onResistance.at", "read 33 elements", "at most 32")},
		{"count of zero", "highSide.parallel", `0`, one("stage.highSide.parallel", "read 0", "1 to 64")},
		{"count above the limit", "gateSupply.stagesSharing", `257`, one("stage.gateSupply.stagesSharing", "read 257", "1 to 256")},
		{"simultaneous", "startup.simultaneous", `65`, one("stage.startup.simultaneous", "1 to 64")},
		{"unknown enum", "highSide.kind", `9`, one("stage.highSide.kind", "the number 9", "SI_MOSFET, SIC_MOSFET, IGBT, GAN_HEMT, DIODE")},
		{"control character", "driver.refdes", `"U1\u0000"`, one("stage.driver.refdes", "control character", "plain text")},
		{"long label", "driver.part", `"` + strings.Repeat("x", 257) + `"`, one("stage.driver.part", "257 characters", "at most 256")},
		{"long id", "id", `"` + strings.Repeat("µ", 129) + `"`, one("stage.id", "129 characters", "at most 128")},
		{"long source", "highSide.gateCharge", `{"typ": "63 nC", "source": "` + strings.Repeat("x", 257) + `"}`,
			one("stage.highSide.gateCharge.source", "at most 256")},
		{"too many operating points", "operatingPoints", `[` + repeat(`{"name": "a"}`, 65) + `]`,
			one("stage.operatingPoints", "read 65 elements", "at most 64")},
		{"too many points", "bootstrap.diode.forwardPoints", `[` + repeat(`{}`, 101) + `]`, one("stage.bootstrap.diode.forwardPoints", "at most 100")},
		{"bad value in a list", "operatingPoints.1.deadTime", `{"typ": "200 nF"}`,
			one("stage.operatingPoints[1].deadTime.typ", `"200 nF"`, "unit of capacitance")},
		{"bad value in a mode", "operatingPoints.2.heldOn.duration", `{"typ": "10 kHz"}`,
			one("stage.operatingPoints[2].heldOn.duration.typ", "unit of frequency")},
		{"marking", "bootstrap.capacitor.marking", `"1u/25V/XXR"`, one("stage.bootstrap.capacitor.marking", `"XXR"`, "marking")},
		{"marking out of range", "bootstrap.capacitor.marking", `"1u/20kV"`, one("stage.bootstrap.capacitor.marking", "voltage from 1 V to 10 kV")},
		{"values inside NOT_FITTED", "bootstrap.clamp", `{"fit": "NOT_FITTED", "refdes": "Z1", "voltage": {"typ": "18 V"}, "power": "1 W"}`,
			[]want{{"stage.bootstrap.clamp.voltage", []string{"NOT_FITTED"}}, {"stage.bootstrap.clamp.power", []string{"NOT_FITTED"}}}},
		{"series resistor not fitted", "highSide.gateOn", `{"fit": "NOT_FITTED"}`, one("stage.highSide.gateOn.fit", "NOT_FITTED", "0R")},
		{"two faults", "highSide", `{"gateCharge": {"min": "1", "max": "2"}, "onResistance": {"typ": "x"}}`,
			[]want{{"stage.highSide.gateCharge.min", nil}, {"stage.highSide.gateCharge.max", nil}, {"stage.highSide.onResistance.typ", []string{"start with a number"}}}},
		{"use without parts", "driver", `{"use": "u1"}`, one("stage.driver.use", `"u1"`, "there are none")},
		{"lockout crossed", "driver.uvloFalling", `{"typ": "9 V"}`, one("stage.driver.uvloFalling", "uvloFalling typ 9 V above uvloRising typ 8.9 V")},
		{"no mode", "operatingPoints.0.sinusoidal", ``, one("stage.operatingPoints[0]", "no mode", "fixedDuty")},
	}
	b := New()
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			st := parseStage(t, edit(t, fullStage, c.path, c.value))
			_, _, faults := b.Stage(nil, st, "stage")
			compare(t, faults, c.want...)
			// The same stage of a board: only the prefix differs.
			_, _, again := b.Stage(nil, st, "stages[2]")
			for i := range again {
				again[i].Field = strings.Replace(again[i].Field, "stages[2]", "stage", 1)
			}
			if !slices.Equal(faults, again) {
				t.Errorf("with another prefix: %v", again)
			}
		})
	}
}

func repeat(s string, n int) string { return strings.TrimSuffix(strings.Repeat(s+",", n), ",") }

func TestFaultsOfParts(t *testing.T) {
	const head = `{"stage": {"id": "a", `
	cases := []struct {
		name, request string
		want          []want
	}{
		{"nearest id", head + `"driver": {"use": "drv-10"}}, "parts": [{"id": "drv-100", "driver": {}}, {"id": "drv-1000", "switch": {}}]}`,
			one("stage.driver.use", `"drv-10"`, `nearest is "drv-100"`)},
		{"another kind", head + `"driver": {"use": "q"}}, "parts": [{"id": "q", "switch": {"kind": "IGBT"}}]}`,
			one("stage.driver.use", `"q"`, "id of a driver", "it is a switch")},
		{"fault inside a part once", head + `"highSide": {"use": "q"}, "lowSide": {"use": "q"}}, "parts": [{"id": "q", "switch": {"gateCharge": {"typ": "63 C"}}}]}`,
			one("parts[0].switch.gateCharge.typ", "charge from")},
		{"contradiction inside a part once", head + `"highSide": {"use": "q"}, "lowSide": {"use": "q"}}, "parts": [{"id": "q", "switch": {"gateCharge": {"typ": "63 nC"},
			"gateSourceCharge": {"typ": "40 nC"}, "gateDrainCharge": {"typ": "30 nC"}}}]}`,
			one("parts[0].switch.gateCharge", "gateSourceCharge + gateDrainCharge typ 70 nC above gateCharge typ 63 nC")},
		{"contradiction through an override", head + `"highSide": {"use": "q", "gateSourceCharge": {"typ": "40 nC"}}}, "parts": [{"id": "q", "switch": {"gateCharge": {"typ": "63 nC"},
			"gateSourceCharge": {"typ": "10 nC"}, "gateDrainCharge": {"typ": "30 nC"}}}]}`, one("stage.highSide.gateCharge", "typ 70 nC above")},
		{"nested use inside a part", head + `"highSide": {"use": "q"}}, "parts": [{"id": "r", "resistor": {}}, {"id": "q", "switch": {"gateOn": {"use": "r"}}}]}`,
			one("parts[1].switch.gateOn.use", `"r"`, "takes no other part")},
		{"use inside a part", head + `"driver": {"use": "a"}}, "parts": [{"id": "a", "driver": {"use": "a"}}]}`, one("parts[0].driver.use", "takes no other part")},
		{"duplicate id", head + `"driver": {"use": "a"}}, "parts": [{"id": "a", "driver": {}}, {"id": "a", "diode": {}}]}`,
			one("parts[1].id", `"a"`, "parts[0] has it already")},
		{"no id", head + `"title": "t"}, "parts": [{"driver": {}}]}`, one("parts[0].id", "nothing", "id")},
		{"no component", head + `"title": "t"}, "parts": [{"id": "a"}]}`, one("parts[0]", "no component", "driver, switch")},
		{"a part that is not fitted", head + `"title": "t"}, "parts": [{"id": "a", "diode": {"fit": "NOT_FITTED"}}]}`, one("parts[0].diode.fit", "where it is used")},
		{"use beside NOT_FITTED", head + `"bootstrap": {"diode": {"use": "a", "fit": "NOT_FITTED"}}}, "parts": [{"id": "a", "diode": {"junctionMax": "150 degC"}}]}`,
			one("stage.bootstrap.diode.use", "NOT_FITTED")},
		{"no stage", `{}`, one("stage", "nothing", "a stage")},
		{"every fault at once, in order", `{"parts": [{"id": "q", "switch": {"gateCharge": {"typ": "1"}}}], "stage": {"id": "x", "driver": {"use": "z"}, "highSide": {"use": "q"}},
			"policy": {"guardRatio": "2"}, "waivers": [{"identity": "zz"}], "asOf": "1.2.2026", "options": {"families": ["gate", "gate"]}}`,
			[]want{{"parts[0].switch.gateCharge.typ", nil}, {"stage.driver.use", nil}, {"policy.guardRatio", []string{"ratio from 0 to 0.9"}}, {"asOf", []string{"YYYY-MM-DD"}},
				{"waivers[0].identity", []string{"32 hexadecimal"}}, {"waivers[0].reason", nil}, {"waivers[0].approver", nil}, {"options.families[1]", []string{"once"}}}},
	}
	b := New()
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			compare(t, faultsOf(t, b, c.request), c.want...)
		})
	}
}

func faultsOf(t testing.TB, b *Binder, request string) []Fault {
	t.Helper()
	r := &pb.ReviewStageRequest{}
	if err := protojson.Unmarshal([]byte(request), r); err != nil {
		t.Fatal(err)
	}
	_, _, faults := b.ReviewStage(r)
	return faults
}

const id = "0123456789abcdef0123456789abcdef"

func TestFaultsOfPolicyWaiversOptions(t *testing.T) {
	waiver := `"stage": {"id": "a"}, "waivers": [{"identity": "` + id + `", "reason": "r", "approver": "n"`
	cases := []struct {
		name, request string
		want          []want
	}{
		{"expiry without asOf", `{` + waiver + `, "expiry": "2026-05-01"}]}`, one("waivers[0].expiry", "without asOf")},
		{"expiry that is no day", `{` + waiver + `, "expiry": "2026-02-30"}], "asOf": "2026-01-01"}`, one("waivers[0].expiry", "2026-02-30", "YYYY-MM-DD")},
		{"worst margin in volts", `{` + waiver + `, "worstMargin": "1 V"}]}`, one("waivers[0].worstMargin", "ratio")},
		{"twice", `{` + waiver + `}, {"identity": "` + id + `", "reason": "r", "approver": "n"}]}`, one("waivers[1].identity", "one waiver for a finding")},
		{"unknown rule", `{"stage": {"id": "a"}, "policy": {"severities": [{"rule": "charge/drop", "severity": "MINOR"}]}}`,
			one("policy.severities[0].rule", `"charge/drop"`, `nearest is "charge/droop"`)},
		{"override without severity", `{"stage": {"id": "a"}, "policy": {"severities": [{"rule": "charge/droop"}]}}`, one("policy.severities[0].severity", "NOTE, MINOR")},
		{"override twice", `{"stage": {"id": "a"}, "policy": {"severities": [{"rule": "charge/droop", "severity": "NOTE"}, {"rule": "charge/droop", "severity": "NOTE"}]}}`,
			one("policy.severities[1].rule", "each rule once")},
		{"unknown severity", `{"stage": {"id": "a"}, "policy": {"failAt": 7}}`, one("policy.failAt", "the number 7", "CRITICAL")},
		{"baseline", `{"stage": {"id": "a"}, "policy": {"baseline": ["` + id + `", "x"]}}`, one("policy.baseline[1]", `"x"`, "32 hexadecimal")},
		{"unknown family", `{"stage": {"id": "a"}, "options": {"families": ["gate", "chrage"]}}`, one("options.families[1]", `"chrage"`, `nearest is "charge"`)},
		{"waveforms without simulation", `{"stage": {"id": "a"}, "options": {"simulate": false, "waveforms": true}}`,
			one("options.waveforms", "read true without simulate", "expected", "true in options.simulate")},
	}
	b := New().WithRules([]string{"charge/droop", "charge/oversize", "gate/negative"})
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			compare(t, faultsOf(t, b, c.request), c.want...)
		})
	}
}

func TestUnknownFieldsAreRefused(t *testing.T) {
	unknown := protowire.AppendVarint(protowire.AppendTag(nil, 777, protowire.VarintType), 1)
	r := &pb.ReviewStageRequest{Stage: parseStage(t, fullStage), Policy: &pb.Policy{}, Options: &pb.Options{}, Waivers: []*pb.Waiver{{}},
		Parts: []*pb.Part{{Component: &pb.Part_Driver{Driver: &pb.Driver{}}}}}
	reason, name, who := id, "p", "n"
	r.Waivers[0].Identity, r.Waivers[0].Reason, r.Waivers[0].Approver, r.Parts[0].Id = &reason, &name, &who, &name
	r.ProtoReflect().SetUnknown(unknown)
	r.Parts[0].ProtoReflect().SetUnknown(unknown)
	r.Parts[0].GetDriver().ProtoReflect().SetUnknown(unknown)
	r.Stage.ProtoReflect().SetUnknown(unknown)
	r.Stage.HighSide.OnResistance.ProtoReflect().SetUnknown(unknown)
	r.Stage.HighSide.OnResistance.At[1].ProtoReflect().SetUnknown(unknown)
	r.Stage.OperatingPoints[2].GetHeldOn().ProtoReflect().SetUnknown(unknown)
	r.Policy.ProtoReflect().SetUnknown(unknown)
	r.Waivers[0].ProtoReflect().SetUnknown(unknown)
	r.Options.ProtoReflect().SetUnknown(unknown)
	_, _, faults := New().ReviewStage(r)
	var wanted []want
	for _, path := range []string{"request", "parts[0]", "parts[0].driver", "stage", "stage.highSide.onResistance", "stage.highSide.onResistance.at[1]",
		"stage.operatingPoints[2].heldOn", "policy", "waivers[0]", "options"} {
		wanted = append(wanted, want{path, []string{"unknown fields of number 777", "floatrail.v1."}})
	}
	compare(t, faults, wanted...)
}

func TestManyFaultsAreCutOff(t *testing.T) {
	r := &pb.ReviewStageRequest{Stage: &pb.Stage{}}
	for range maxParts {
		r.Parts = append(r.Parts, &pb.Part{})
	}
	_, _, faults := New().ReviewStage(r)
	if len(faults) != maxFaults+1 || faults[maxFaults].Description != "3000 further faults from here on are not listed" {
		t.Errorf("%d faults, at last %v", len(faults), faults[len(faults)-1])
	}
}

func TestBindingIsDeterministic(t *testing.T) {
	text := `{"stage": ` + edit(t, edit(t, fullStage, "driver", `{"use": "d", "uvloFalling": {"typ": "x"}}`), "layout.shunt", `{"use": "nope"}`) +
		`, "parts": [{"id": "d", "driver": {"uvloRising": {"typ": "8R"}, "railMin": "4k7"}}, {"id": "r", "resistor": {"resistance": {"typ": "4k7"}}}]}`
	r := &pb.ReviewStageRequest{}
	if err := protojson.Unmarshal([]byte(text), r); err != nil {
		t.Fatal(err)
	}
	first, readings, faults := New().ReviewStage(r)
	if len(faults) < 3 || len(readings) < 3 {
		t.Fatalf("%d faults, %d readings", len(faults), len(readings))
	}
	for range 20 {
		again, r2, f2 := New().ReviewStage(r)
		if !slices.Equal(faults, f2) || !slices.Equal(readings, r2) {
			t.Fatalf("faults or readings differ:\n%v\n%v", faults, f2)
		}
		if !sameValue(reflect.ValueOf(first), reflect.ValueOf(again)) {
			t.Fatal("the bound requests differ")
		}
	}
}
