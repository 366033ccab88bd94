package wire

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/testing/protocmp"

	pb "floatrail/api/floatrail/v1"
)

func decode(body string) (*pb.ReviewStageRequest, *Report) {
	var m pb.ReviewStageRequest
	var r Report
	NewDecoder().Decode([]byte(body), &m, &r)
	return &m, &r
}

func TestDecodeAgreesWithTheStockDecoder(t *testing.T) {
	for _, body := range []string{
		`{}`,
		" {\n\t\"stage\" : { } } \r\n",
		`{"stage":{"id":"u1","driver":{"uvloFalling":{"min":"7.5 V","typ":"8.2 V","max":"8.9 V","at":[{"temperature":"85 degC","typ":"8 V"}]}}}}`,
		`{"stage":{"gate_supply":{"stages_sharing":3}}}`,
		`{"stage":{"gateSupply":{"stagesSharing":3.0}}}`,
		`{"stage":{"gateSupply":{"stagesSharing":1e2}}}`,
		`{"stage":{"operatingPoints":[{"name":"a","overload":false,"fixedDuty":{}},{}]}}`,
		`{"stage":{"highSide":{"kind":"GAN_HEMT","parallel":-0}}}`,
		`{"stage":{"title":"Ü \u00b5 \ud83d\ude00 \ufffd � \\ud800"}}`,
		`{"policy":{"failAt":"UNSPECIFIED","baseline":["a","",""],"countMarginal":true}}`,
		`{"options":{"families":[],"perPoint":false}}`,
	} {
		got, report := decode(body)
		if len(report.Faults) > 0 {
			t.Errorf("%s: %v", body, report.Faults)
		}
		var want pb.ReviewStageRequest
		if err := protojson.Unmarshal([]byte(body), &want); err != nil {
			t.Fatalf("%s: %v", body, err)
		}
		if diff := cmp.Diff(&want, got, protocmp.Transform()); diff != "" {
			t.Errorf("%s:\n%s", body, diff)
		}
	}
}

func TestFaults(t *testing.T) {
	const unit = "a string with its unit (V with an SI prefix, such as 18 V or 350 mV)"
	const seconds = "a string with its unit (s with a prefix from f to m, min or h, such as 25 ns, 10.64 ms, 5 min or 20000 h)"
	for _, c := range []struct {
		name, body string
		want       []Fault
	}{
		{"unknown, with the nearest name", `{"stage":{"driver":{"uvloRisng":{"typ":"9 V"}}}}`, []Fault{
			{"stage.driver.uvloRisng", `read the unknown field "uvloRisng", expected a field of Driver; the nearest is uvloRising`}}},
		{"unknown, nothing near", `{"zzzzzzzzzzzz":[{"a":[1,2,{"b":null}]}]}`, []Fault{
			{"zzzzzzzzzzzz", `read the unknown field "zzzzzzzzzzzz", expected one of parts, stage, policy, waivers, asOf, options`}}},
		{"unknown, no identifier", `{"stage":{"we ird\n":1}}`, []Fault{
			{`stage."we ird\n"`, `read the unknown field "we ird\n", expected one of id, formerId, title, gateSupply, driver, highSide, lowSide, bootstrap, layout, operatingPoints, startup`}}},
		{"twice", `{"asOf":"2026-01-01","asOf":"2027-01-01"}`, []Fault{{"asOf", "read the field twice, expected it once"}}},
		{"twice in two spellings", `{"asOf":"2026-01-01","as_of":"2027-01-01"}`, []Fault{{"asOf", "read the field twice (as as_of the second time), expected it once"}}},
		{"a bare number for a value", `{"stage":{"driver":{"floatingVoltageMax":18}}}`, []Fault{
			{"stage.driver.floatingVoltageMax", "read the number 18, expected " + unit}}},
		{"a bare number within a quantity", `{"stage":{"operatingPoints":[{},{"deadTime":{"typ":1e-9,"at":[{"min":2}]}}]}}`, []Fault{
			{"stage.operatingPoints[1].deadTime.typ", "read the number 1e-9, expected " + seconds},
			{"stage.operatingPoints[1].deadTime.at[0].min", "read the number 2, expected " + seconds}}},
		{"a number for a source", `{"stage":{"driver":{"uvloRising":{"source":4}}}}`, []Fault{
			{"stage.driver.uvloRising.source", "read the number 4, expected a string"}}},
		{"a string for a quantity", `{"stage":{"driver":{"uvloRising":"9 V"}}}`, []Fault{
			{"stage.driver.uvloRising", `read the string "9 V", expected an object with min, typ or max, such as {"typ": "18 V"}`}}},
		{"an object for a value", `{"stage":{"driver":{"floatingVoltageMax":{"typ":"18 V"}}}}`, []Fault{
			{"stage.driver.floatingVoltageMax", "read an object, expected " + unit}}},
		{"null", `{"stage":{"driver":{"uvloRising":null},"operatingPoints":[null]},"parts":null,"asOf":null}`, []Fault{
			{"stage.driver.uvloRising", `read null, expected an object with min, typ or max, such as {"typ": "18 V"}`},
			{"stage.operatingPoints[0]", "read null, expected an object with name, busVoltage, loadCurrent, rippleCurrent, switchingFrequency, deadTime, junctionTemperature, ambientTemperature, overload, fixedDuty, sinusoidal, sixStep, burst, heldOn"},
			{"parts", "read null, expected a list of an object with id, driver, switch, diode, capacitor, resistor"},
			{"asOf", "read null, expected a string; a field that is not known is left out"}}},
		{"an enumeration by number", `{"stage":{"highSide":{"kind":2}}}`, []Fault{
			{"stage.highSide.kind", "read the number 2, expected one of SI_MOSFET, SIC_MOSFET, IGBT, GAN_HEMT, DIODE"}}},
		{"an enumeration misspelt", `{"stage":{"highSide":{"kind":"SICMOSFET"}}}`, []Fault{
			{"stage.highSide.kind", `read the string "SICMOSFET", expected one of SI_MOSFET, SIC_MOSFET, IGBT, GAN_HEMT, DIODE; the nearest is SIC_MOSFET`}}},
		{"counts", `{"stage":{"gateSupply":{"stagesSharing":"3"},"highSide":{"parallel":1.5},"lowSide":{"parallel":3000000000}}}`, []Fault{
			{"stage.gateSupply.stagesSharing", `read the string "3", expected a whole number`},
			{"stage.highSide.parallel", "read the number 1.5, expected a whole number"},
			{"stage.lowSide.parallel", "read the number 3000000000, expected a whole number"}}},
		{"a flag", `{"options":{"fixes":"true"}}`, []Fault{{"options.fixes", `read the string "true", expected true or false`}}},
		{"two modes", `{"stage":{"operatingPoints":[{"fixedDuty":{},"heldOn":{}}]}}`, []Fault{
			{"stage.operatingPoints[0].heldOn", "read the field beside fixedDuty, expected only one of fixedDuty, sinusoidal, sixStep, burst, heldOn"}}},
		{"half a surrogate pair", `{"stage":{"title":"\ud83d x"}}`, []Fault{{"stage.title", "read half of a surrogate pair, expected characters"}}},
		{"elements", `{"policy":{"baseline":["a",1,[2]]}}`, []Fault{
			{"policy.baseline[1]", "read the number 1, expected a string"}, {"policy.baseline[2]", "read a list, expected a string"}}},
		{"empty", " \n", []Fault{{Body, "read an empty body, expected a JSON object"}}},
		{"no object", `[1]`, []Fault{{Body, "read a list, expected a JSON object, the ReviewStageRequest"}}},
		{"cut off", `{"stage":{"id":"u`, []Fault{{Body, "malformed JSON: the body ends at line 1, column 17, within an object, a list or a string"}}},
		{"malformed", "{\"stage\":\n  {\"id\": NaN}}", []Fault{{Body, "malformed JSON at line 2, column 10: invalid character 'N' looking for beginning of value"}}},
		{"malformed behind a fault", "{\"as_of\":1,\n,}", []Fault{{"asOf", "read the number 1, expected a string"},
			{Body, "malformed JSON at line 2, column 1: invalid character ',' looking for beginning of object key string"}}},
		{"trailing comma", `{"asOf":"a",}`, []Fault{{Body, "malformed JSON at line 1, column 13: invalid character '}' looking for beginning of object key string"}}},
		{"trailing data", "{}\n{}", []Fault{{Body, "read further data behind the object, at line 2, column 1, expected the end of the body"}}},
		{"no UTF-8", "{\"stage\":{\"title\":\"\xc3\x28\"}}", []Fault{{Body, "read the byte 0xC3 at line 1, column 20, expected UTF-8"}}},
		{"deep", strings.Repeat(`{"stage":`, 40), []Fault{{"stage.stage", `read the unknown field "stage", expected one of id, formerId, title, gateSupply, driver, highSide, lowSide, bootstrap, layout, operatingPoints, startup`},
			{Body, "read more than 32 nested objects and lists at line 1, column 289, expected at most 32"}}},
	} {
		t.Run(c.name, func(t *testing.T) {
			_, report := decode(c.body)
			if diff := cmp.Diff(c.want, report.Faults); diff != "" {
				t.Error(diff)
			}
		})
	}
}

func TestTheRestIsReadBesideFaults(t *testing.T) {
	m, report := decode(`{"stage":{"id":"u1","tilte":"x","driver":{"uvloRising":{"typ":9},"uvloFalling":{"typ":"8 V"}},
		"operatingPoints":[7,{"name":"b","fixedDtuy":{}}]},"policy":{"baseline":[1,"b"]}}`)
	if len(report.Faults) != 5 || report.Unread {
		t.Fatalf("%+v", report)
	}
	if s := m.GetStage(); s.GetId() != "u1" || s.GetDriver().GetUvloFalling().GetTyp() != "8 V" || s.GetOperatingPoints()[1].GetName() != "b" {
		t.Errorf("the rest was lost: %v", m)
	}
	if b := m.GetPolicy().GetBaseline(); len(b) != 2 || b[1] != "b" {
		t.Errorf("indices moved: %v", b)
	}
	for path, explained := range map[string]bool{
		"stage.driver.uvloRising":              true, // an empty quantity
		"stage.driver.uvloRising.typ":          true,
		"stage.driver":                         false,
		"stage.driver.uvloFalling":             false,
		"stage.operatingPoints[0]":             true,
		"stage.operatingPoints[0].name":        true,
		"stage.operatingPoints[1]":             true, // no mode
		"stage.operatingPoints[1].name":        false,
		"stage.operatingPoints[1].fixedDuty":   true,
		"stage.operatingPoints[1].fixedDutyXX": false,
		"stage.title":                          true,
		"policy.baseline[0]":                   true,
		"policy.baseline[1]":                   false,
	} {
		if got := report.Explains(path); got != explained {
			t.Errorf("Explains(%s) = %v", path, got)
		}
	}
}

func TestFaultsAreBounded(t *testing.T) {
	var b strings.Builder
	b.WriteString(`{"stage":{`)
	for i := range 10_000 {
		fmt.Fprintf(&b, `"%s%d":0,`, strings.Repeat("x", 80), i)
	}
	_, report := decode(b.String() + `"id":"u1"}}`)
	if len(report.Faults) != maxFaults || report.More != 10_000-maxFaults || report.Unread {
		t.Errorf("%d faults, %d more, unread %v", len(report.Faults), report.More, report.Unread)
	}
	_, report = decode(b.String())
	if last := report.Faults[len(report.Faults)-1]; len(report.Faults) != maxFaults || last.Field != Body || !report.Unread {
		t.Errorf("%d faults, the last %v", len(report.Faults), last)
	}
}

func TestNearest(t *testing.T) {
	known := []string{"uvloRising", "uvloFalling", "charge/droop", "charge/lowest-voltage"}
	for name, want := range map[string]string{
		"uvloRisng": "uvloRising", "uvlo_falling": "uvloFalling", "UVLORISING": "uvloRising", "uvolRising": "uvloRising",
		"charge/drop": "charge/droop", "charge/lowest_voltage": "charge/lowest-voltage", "": "", "nothing like it": "",
	} {
		if got := Nearest(name, known); got != want {
			t.Errorf("Nearest(%q) = %q, want %q", name, got, want)
		}
	}
}

func TestMarshalIsCanonical(t *testing.T) {
	m := &pb.ReviewStageResponse{StageId: proto.String("u1 <&> \u2028"), Coverage: &pb.Coverage{Open: proto.Int32(0)},
		Findings: []*pb.Finding{{Known: proto.Bool(false), Margin: &pb.Margin{Relative: proto.Float64(0)}}}}
	const want = "{\"stageId\":\"u1 <&> \u2028\",\"coverage\":{\"open\":0},\"findings\":[{\"margin\":{\"relative\":0},\"known\":false}]}"
	for range 1000 {
		got, err := Marshal(m)
		if err != nil || string(got) != want {
			t.Fatalf("%s, %v", got, err)
		}
	}
}

// FuzzDecode holds that what the walk accepts the stock decoder reads alike, and that nothing makes it panic.
func FuzzDecode(f *testing.F) {
	for _, seed := range []string{`{}`, `{"stage":{"id":"u1","operatingPoints":[{"fixedDuty":{"duty":{"typ":"45 %"}}}]}}`, `{"as_of":"\ud83d\ude00"}`,
		`{"stage":{"gateSupply":{"stagesSharing":1e2}},"policy":{"failAt":"MAJOR"}}`, `[`, `{"a":`, `{"options":{"families":["x"]}}`} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, body []byte) {
		var got, want pb.ReviewStageRequest
		var report Report
		NewDecoder().Decode(body, &got, &report)
		if len(report.Faults) > 0 {
			return
		}
		if err := protojson.Unmarshal(body, &want); err != nil {
			t.Fatalf("accepted %q, the stock decoder says %v", body, err)
		}
		if !proto.Equal(&want, &got) {
			t.Fatalf("%q reads as %v, the stock decoder reads %v", body, &got, &want)
		}
	})
}
