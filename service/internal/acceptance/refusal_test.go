package acceptance

import (
	"net/http"
	"strings"
	"testing"

	"google.golang.org/genproto/googleapis/rpc/errdetails"
	statuspb "google.golang.org/genproto/googleapis/rpc/status"
	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
)

// violation is one expected fault: its path in the request and phrases of its description.
type violation struct {
	field   string
	phrases []string
}

func at(field string, phrases ...string) violation { return violation{field, phrases} }

// refused demands that a request is refused for exactly the given faults.
func refused(t *testing.T, c client, path, body string, wanted ...violation) {
	t.Helper()
	code, data := c.post(path, body)
	if code != http.StatusBadRequest {
		t.Fatalf("%d %s", code, data)
	}
	var s statuspb.Status
	if err := protojson.Unmarshal(data, &s); err != nil {
		t.Fatalf("%v: %s", err, data)
	}
	if s.GetCode() != 3 || len(s.GetDetails()) != 1 {
		t.Fatalf("code %d, %d details: %s", s.GetCode(), len(s.GetDetails()), data)
	}
	var bad errdetails.BadRequest
	if err := s.GetDetails()[0].UnmarshalTo(&bad); err != nil {
		t.Fatal(err)
	}
	got := bad.GetFieldViolations()
	for i, w := range wanted {
		if i >= len(got) {
			t.Errorf("no fault at %s", w.field)
			continue
		}
		if got[i].GetField() != w.field {
			t.Errorf("fault at %s (%s), want one at %s", got[i].GetField(), got[i].GetDescription(), w.field)
		}
		for _, p := range w.phrases {
			if !strings.Contains(got[i].GetDescription(), p) {
				t.Errorf("%s: no %q in %q", w.field, p, got[i].GetDescription())
			}
		}
		if !strings.Contains(s.GetMessage(), w.field) && i < 3 {
			t.Errorf("the message does not name %s: %s", w.field, s.GetMessage())
		}
	}
	for _, v := range got[min(len(wanted), len(got)):] {
		t.Errorf("unexpected fault at %s: %s", v.GetField(), v.GetDescription())
	}
}

// Faults put into a request that is answered without them. Each is refused with its exact path, with what was read and what was expected.
func TestFaultsAreRefused(t *testing.T) {
	c := serve(t)
	good := request(t, gate(63), switching("20 kHz", "50 %", "500 ns"))
	for _, path := range []string{"/v1/reviews", "/v1/sizing", "/v1/duty-limits", "/v1/transient-stress"} {
		if code, data := c.post(path, good); code != http.StatusOK {
			t.Fatalf("%s: the request without faults: %d %s", path, code, data)
		}
	}
	const charge = "stage.highSide.gateCharge"
	for _, z := range []struct {
		name   string
		faults edits
		want   []violation
	}{
		{"missing unit", edits{"highSide.gateCharge.typ": `"63"`}, []violation{at(charge+".typ", `read "63"`, "expected", "charge", "nC", "unit is missing")}},
		{"number instead of a string", edits{"highSide.gateCharge.typ": `63e-9`}, []violation{at(charge+".typ", "read the number 6", "expected a string with its unit", "nC")}},
		{"wrong dimension", edits{"highSide.gateCharge.max": `"63 nF"`}, []violation{at(charge+".max", `read "63 nF"`, "charge", "unit of capacitance")}},
		{"C for nC", edits{"highSide.gateCharge": `{"typ":"63 C"}`}, []violation{at(charge+".typ", `read "63 C"`, "charge from 10 pC to 100 µC", "plausible")}},
		{"M for m", edits{"bootstrap.capacitor.effectiveCapacitance": `{"typ":"1 MF"}`},
			[]violation{at("stage.bootstrap.capacitor.effectiveCapacitance.typ", `read "1 MF"`, "M is mega", "milli")}},
		{"min above max", edits{"highSide.gateCharge": `{"min":"70 nC","max":"63 nC"}`}, []violation{at(charge, `read min "70 nC" above max "63 nC"`, "expected min <= typ <= max")}},
		{"unknown field", edits{"highSide.gateCharg": `{"typ":"63 nC"}`}, []violation{at("stage.highSide.gateCharg", `read the unknown field "gateCharg"`, "nearest is gateCharge")}},
		{"unknown field in a mode", edits{"operatingPoints.0.fixedDuty.dutty": `{"typ":"0.5"}`},
			[]violation{at("stage.operatingPoints[0].fixedDuty.dutty", "unknown field", "nearest is duty")}},
		{"NaN", edits{"gateSupply.voltage": `{"typ":"NaN V"}`}, []violation{at("stage.gateSupply.voltage.typ", `read "NaN V"`, "not a finite number")}},
		{"infinity", edits{"gateSupply.voltage": `{"max":"inf V"}`}, []violation{at("stage.gateSupply.voltage.max", "not a finite number")}},
		{"empty string", edits{"driver.floatingVoltageMax": `""`}, []violation{at("stage.driver.floatingVoltageMax", "empty", "expected", "voltage")}},
		{"null", edits{"driver.uvloFalling": `null`}, []violation{at("stage.driver.uvloFalling", "read null")}},
		{"values inside NOT_FITTED", edits{"bootstrap.clamp": `{"fit":"NOT_FITTED","voltage":{"typ":"18 V"},"power":"1 W"}`},
			[]violation{at("stage.bootstrap.clamp.voltage", "NOT_FITTED"), at("stage.bootstrap.clamp.power", "NOT_FITTED")}},
		{"series resistor not fitted", edits{"bootstrap.resistor": `{"fit":"NOT_FITTED"}`, "bootstrap.resistor.resistance": ""},
			[]violation{at("stage.bootstrap.resistor.fit", "NOT_FITTED", "0R")}},
		{"misspelt enumeration", edits{"highSide.kind": `"SICMOSFET"`}, []violation{at("stage.highSide.kind", `read the string "SICMOSFET"`, "nearest is SIC_MOSFET")}},
		{"charges that do not add up", edits{"highSide.gateDrainCharge": "40 nC"}, []violation{at(charge, "gateSourceCharge + gateDrainCharge", "above gateCharge")}},
		{"lockout reversed", edits{"driver.uvloRising": "2.5 V"}, []violation{at("stage.driver.uvloFalling", "above uvloRising", "2.5 V")}},
		{"no mode", edits{"operatingPoints.0.fixedDuty": ""}, []violation{at("stage.operatingPoints[0]", "no mode", "fixedDuty")}},
		{"two modes", edits{"operatingPoints.0.heldOn": `{}`}, []violation{at("stage.operatingPoints[0].heldOn", "beside fixedDuty", "only one of")}},
		{"bias curve that is not sorted", edits{"bootstrap.capacitor.biasCurve": `[{"voltage":"10 V","remaining":"60 %"},{"voltage":"5 V","remaining":"80 %"}]`},
			[]violation{at("stage.bootstrap.capacitor.biasCurve[1].voltage", "5 V", "10 V", "ascending")}},
		{"two points that no diode can have", edits{"bootstrap.diode.forwardPoints": `[{"current":"1 A","voltage":{"typ":"0.7 V"}},{"current":"2 A","voltage":{"typ":"0.6 V"}}]`},
			[]violation{at("stage.bootstrap.diode.forwardPoints[1].voltage")}},
		{"two faults", edits{"driver.uvloFalling": `{"typ":"8.9"}`, "operatingPoints.0.deadTime": `{"typ":"500 nF"}`},
			[]violation{at("stage.driver.uvloFalling.typ", `read "8.9"`, "unit is missing"), at("stage.operatingPoints[0].deadTime.typ", `read "500 nF"`, "unit of capacitance")}},
		// The body's own faults come first, then those of values.
		{"faults of the body, of a value and of an option", edits{"drvier": `{}`, "driver.uvloFalling": `{"typ":"8.9"}`, "/options": `{"fixes":true}`, "/policy": `{"guardRatio":"2"}`},
			[]violation{at("stage.drvier", "nearest is driver"), at("stage.driver.uvloFalling.typ", "unit is missing"), at("policy.guardRatio", "ratio from 0 to 0.9"),
				at("options.fixes", "no search for fixes")}},
	} {
		t.Run(z.name, func(t *testing.T) {
			refused(t, c.of(t), "/v1/reviews", edit(t, good, z.faults), z.want...)
		})
	}
	// A duplicate field can be written in text alone.
	twice := strings.Replace(good, `"uvloFalling":`, `"uvloFalling":{"typ":"2 V"},"uvloFalling":`, 1)
	refused(t, c, "/v1/reviews", twice, at("stage.driver.uvloFalling", "twice"))
	for _, path := range []string{"/v1/sizing", "/v1/duty-limits", "/v1/transient-stress"} {
		refused(t, c, path, edit(t, good, edits{"highSide.gateCharge.typ": `"63"`}), at(charge+".typ", "unit is missing"))
	}
}

// Parts are written once; what stands beside use overrides them.
func TestPartsAreUsedAndOverridden(t *testing.T) {
	c := serve(t)
	const switches = `{"id":"sw","switch":{"part":"SW-80","kind":"SI_MOSFET","gateCharge":{"min":"80 nC","typ":"80 nC","max":"80 nC","source":"p. 3"},
		"gateSourceCharge":{"min":"40 nC","typ":"40 nC","max":"40 nC"},"gateDrainCharge":{"min":"40 nC","typ":"40 nC","max":"40 nC"},"gateChargeVoltage":"10 V",
		"plateauVoltage":{"min":"5 V","typ":"5 V","max":"5 V"},"driveVoltageMin":"8 V","gateVoltageMax":"20 V"}}`
	const capacitor = `{"id":"cap","capacitor":{"refdes":"Cx","effectiveCapacitance":{"min":"470 nF","typ":"470 nF","max":"470 nF"},"leakage":{"max":"0 A","typ":"0 A","min":"0 A"}}}`
	base := request(t, switching("20 kHz", "50 %", "0 s"), edits{
		"/parts": `[` + switches + `,` + capacitor + `]`, "highSide.use": `"sw"`, "highSide.gateCharge": "", "highSide.gateSourceCharge": "", "highSide.gateDrainCharge": "",
		"highSide.gateChargeVoltage": "", "highSide.plateauVoltage": "", "highSide.driveVoltageMin": "", "highSide.gateVoltageMax": "",
		"bootstrap.capacitor": `{"use":"cap","refdes":"C1"}`, "bootstrap.capacitor.effectiveCapacitance": "", "bootstrap.capacitor.leakage": "",
	})
	answer := c.review(base)
	all(t, "Q_B", c.size(base).GetTotalCharge(), 80e-9, 1e-13)
	f := find(t, answer.GetFindings(), "charge/droop", "")
	near(t, "droop", f.GetValue(), 80e-9/470e-9, 1e-6)
	named := false
	for _, in := range f.GetInputs() {
		if in.GetField() == "stage.highSide.gateCharge" {
			named = in.GetSource() == "p. 3"
		}
	}
	if !named {
		t.Errorf("the source of the part's value is not named: %v", f.GetInputs())
	}
	near(t, "drive of the part", find(t, answer.GetFindings(), "charge/lockout-suits-switch", "").GetLimit(), 8, 0)

	answer = c.review(edit(t, base, edits{"highSide.gateCharge": "120 nC", "bootstrap.capacitor.effectiveCapacitance": "1 uF"}))
	f = find(t, answer.GetFindings(), "charge/droop", "")
	// The slope above the plateau is (120 - 80) nC/(10 V - 5 V) = 8 nF: at V_BS after the edge, 11.6 V less the droop, Q_G = 120 nC + 8 nF·(V_BS - 10 V).
	near(t, "droop with both overridden", f.GetValue(), (120e-9+8e-9*1.6)/(1e-6+8e-9), 1e-5)
	near(t, "drive still that of the part", find(t, answer.GetFindings(), "charge/lockout-suits-switch", "").GetLimit(), 8, 0)
	if answer.GetVerdict() == pb.Verdict_UNSPECIFIED {
		t.Error("no verdict")
	}

	refused(t, c, "/v1/reviews", edit(t, base, edits{"highSide.use": `"swi"`}), at("stage.highSide.use", `read "swi"`, `nearest is "sw"`))
	refused(t, c, "/v1/reviews", edit(t, base, edits{"highSide.use": `"cap"`}), at("stage.highSide.use", "id of a switch", "it is a capacitor"))
	refused(t, c, "/v1/reviews", edit(t, base, edits{"/parts.1.id": `"sw"`, "bootstrap.capacitor.use": `"sw"`}),
		at("parts[1].id", `read "sw"`, "parts[0] has it already"), at("stage.bootstrap.capacitor.use", "id of a capacitor", "it is a switch"))
	refused(t, c, "/v1/reviews", edit(t, base, edits{"/parts.0.switch.gateCharge.max": `"63"`}), at("parts[0].switch.gateCharge.max", "unit is missing"))
	refused(t, c, "/v1/reviews", edit(t, base, edits{"highSide.gateSourceCharge": "60 nC"}), at("stage.highSide.gateCharge", "above gateCharge"))
}
