package convert

import (
	"math"
	"slices"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc"
	"floatrail/calc/stage"
	"floatrail/service/internal/wire"
)

func review(t testing.TB, request string) (calc.Request, []Reading) {
	t.Helper()
	r := &pb.ReviewStageRequest{}
	if err := protojson.Unmarshal([]byte(request), r); err != nil {
		t.Fatal(err)
	}
	out, readings, faults := New().ReviewStage(r)
	for _, f := range faults {
		t.Errorf("%s: %s", f.Field, f.Description)
	}
	return out, readings
}

func TestPartsAreTakenAndOverridden(t *testing.T) {
	r, readings := review(t, `{
	"parts": [
		{"id": "q", "switch": {"part": "SW-650", "kind": "SIC_MOSFET", "parallel": 4, "gateCharge": {"typ": "63 nC", "max": "80 nC", "source": "p. 4"},
			"outputCapacitance": [{"voltage": "1 V", "capacitance": {"typ": "3 nF"}}, {"voltage": "25 V", "capacitance": {"typ": "300 pF"}}],
			"onResistance": {"at": [{"temperature": "25 °C", "typ": "90 mΩ"}, {"temperature": "150 °C", "typ": "180 mΩ"}]},
			"reverse": {"gateVoltage": "-4 V", "recoveryCharge": {"typ": "100 nC"}},
			"gateOn": {"resistance": {"typ": "4R7"}}, "gatePullDown": {"fit": "NOT_FITTED"}}},
		{"id": "r", "resistor": {"refdes": "R0", "resistance": {"typ": "10 Ω"}, "power": "250 mW"}},
		{"id": "unused", "diode": {"junctionMax": "150 degC"}}
	],
	"stage": {"id": "a",
		"highSide": {"use": "q", "refdes": "Q1"},
		"lowSide": {"use": "q", "refdes": "Q2", "parallel": 2, "gateCharge": {"typ": "50 nC"}, "outputCapacitance": [{"voltage": "400 V", "capacitance": {"typ": "60 pF"}}],
			"reverse": {"recoveryCharge": {"typ": "200 nC"}}, "gateOn": {"use": "r", "refdes": "R7"}, "gatePullDown": {"resistance": {"typ": "10k"}}}}}`)
	s := r.Stage
	nan := math.NaN()
	h, l := &s.HighSide, &s.LowSide
	if h.Use != "q" || h.Part != "SW-650" || h.Refdes != "Q1" || h.Kind != stage.SiCMOSFET || h.Parallel != 4 || !h.Present || h.Field != "stage.highSide" {
		t.Errorf("%+v %s %d", h.Header, h.Kind, h.Parallel)
	}
	cases := []struct {
		q      *stage.Quantity
		field  string
		triple stage.Triple
	}{
		{&h.GateCharge, "stage.highSide.gateCharge", stage.Triple{Min: nan, Typ: 63e-9, Max: 80e-9}},
		{&l.GateCharge, "stage.lowSide.gateCharge", stage.Triple{Min: nan, Typ: 50e-9, Max: nan}},
		{&h.OutputCapacitance.Items[1].Capacitance, "stage.highSide.outputCapacitance[1].capacitance", stage.Triple{Min: nan, Typ: 300e-12, Max: nan}},
		{&l.OutputCapacitance.Items[0].Voltage, "stage.lowSide.outputCapacitance[0].voltage", stage.Triple{Min: 400, Typ: 400, Max: 400}},
		{&h.Reverse.RecoveryCharge, "stage.highSide.reverse.recoveryCharge", stage.Triple{Min: nan, Typ: 100e-9, Max: nan}},
		{&l.Reverse.RecoveryCharge, "stage.lowSide.reverse.recoveryCharge", stage.Triple{Min: nan, Typ: 200e-9, Max: nan}},
		{&l.Reverse.GateVoltage, "stage.lowSide.reverse.gateVoltage", stage.Triple{Min: -4, Typ: -4, Max: -4}},
		{&h.GateOn.Resistance, "stage.highSide.gateOn.resistance", stage.Triple{Min: nan, Typ: 4.7, Max: nan}},
		{&l.GateOn.Resistance, "stage.lowSide.gateOn.resistance", stage.Triple{Min: nan, Typ: 10, Max: nan}},
		{&l.GateOn.Power, "stage.lowSide.gateOn.power", stage.Triple{Min: 0.25, Typ: 0.25, Max: 0.25}},
		{&l.GatePullDown.Resistance, "stage.lowSide.gatePullDown.resistance", stage.Triple{Min: nan, Typ: 10e3, Max: nan}},
	}
	for _, c := range cases {
		if c.q.Field != c.field || !same(c.q.Triple, c.triple) {
			t.Errorf("%s %v, want %s %v", c.q.Field, c.q.Triple, c.field, c.triple)
		}
	}
	if h.GateCharge.Source != "p. 4" || l.GateCharge.Source != "" {
		t.Error("a source goes with its value")
	}
	if len(l.OutputCapacitance.Items) != 1 {
		t.Error("a repeated field is replaced as a whole")
	}
	if h.GatePullDown.Presence() != stage.NotFitted || l.GatePullDown.Presence() != stage.Fitted {
		t.Error("fit of nested components")
	}
	if l.GateOn.Refdes != "R7" || l.GateOn.Use != "r" || l.GateOn.Field != "stage.lowSide.gateOn" {
		t.Errorf("%+v", l.GateOn.Header)
	}
	h.OnResistance.At[0].Typ = 1
	if l.OnResistance.At[0].Typ != 0.09 {
		t.Error("two places share the entries of one part")
	}
	want := []Reading{{"parts[0].switch.gateOn.resistance.typ", "4R7", "4.7 Ω"}, {"stage.lowSide.gatePullDown.resistance.typ", "10k", "10 kΩ"}}
	if !slices.Equal(readings, want) {
		t.Errorf("readings %v", readings)
	}
}

func TestMarkingFillsWhatIsAbsent(t *testing.T) {
	r, readings := review(t, `{
	"parts": [{"id": "c", "capacitor": {"capacitance": {"typ": "4.7 µF"}, "voltageRating": "16 V", "dielectric": "X5R", "esr": {"typ": "5 mΩ"}}}],
	"stage": {"id": "a",
		"bootstrap": {"capacitor": {"marking": "104/50V/X7R/K", "dielectric": "C0G", "voltageRating": "100 V"}},
		"gateSupply": {"reservoir": {"use": "c", "marking": "10u/25V"}}}}`)
	c := &r.Stage.Bootstrap.Capacitor
	if !same(c.Capacitance.Triple, stage.Triple{Min: 100e-9 * (1 - 0.1), Typ: 100e-9, Max: 100e-9 * (1 + 0.1)}) || c.VoltageRating.Typ != 100 || c.Dielectric != "C0G" || c.Marking != "104/50V/X7R/K" {
		t.Errorf("%v %v %s", c.Capacitance.Triple, c.VoltageRating.Triple, c.Dielectric)
	}
	c = &r.Stage.GateSupply.Reservoir
	if c.Capacitance.Typ != 10e-6 || c.VoltageRating.Typ != 25 || c.Dielectric != "X5R" || c.ESR.Typ != 5e-3 || c.Capacitance.Field != "stage.gateSupply.reservoir.capacitance" {
		t.Errorf("a marking beside use overrides the part: %v %v %s", c.Capacitance, c.VoltageRating, c.Dielectric)
	}
	for _, want := range []Reading{
		{"stage.gateSupply.reservoir.marking", "10u", "10 µF"}, {"stage.bootstrap.capacitor.marking", "104", "100 nF"},
		{"stage.bootstrap.capacitor.marking", "K", "±10 %"},
	} {
		if !slices.Contains(readings, want) {
			t.Errorf("no reading %v in %v", want, readings)
		}
	}
}

func TestNearest(t *testing.T) {
	names := []string{"drv-100", "fet", "cap-1"}
	for text, want := range map[string]string{"drv-10": "drv-100", "FET": "fet", "cap_2": "cap-1", "wholly different": "", "": ""} {
		if got := wire.Nearest(text, names); got != want {
			t.Errorf("%q: %q, want %q", text, got, want)
		}
	}
}

func TestReviewBoard(t *testing.T) {
	board := func(stages string) ([]BoardStage, []Fault) {
		r := &pb.ReviewBoardRequest{}
		text := `{"parts": [{"id": "c", "capacitor": {"marking": "104"}}], "policy": {"guardRatio": "20 %"}, "asOf": "2026-01-01", "stages": [` + stages + `]}`
		if err := protojson.Unmarshal([]byte(text), r); err != nil {
			t.Fatal(err)
		}
		out, readings, faults := New().ReviewBoard(r)
		if len(readings) != 1 || readings[0].Field != "parts[0].capacitor.marking" {
			t.Errorf("readings of the parts: %v", readings)
		}
		return out, faults
	}
	const supply = `"gateSupply": {"id": "vdd", "voltage": {"typ": "15 V"}, "reservoir": {"use": "c"}}`
	out, faults := board(`{"id": "a", ` + supply + `}, {"id": "b", "gateSupply": {"id": "vdd", "voltage": {"typ": "15.0 V"}}, "driver": {"refdes": "U\u0001"}}, {"id": "c"}`)
	compare(t, faults)
	compare(t, out[1].Faults, want{"stages[1].driver.refdes", []string{"control character"}})
	if len(out) != 3 || len(out[0].Faults)+len(out[2].Faults) != 0 || out[2].ID != "c" || out[0].Request.Policy.GuardRatio != 0.2 || out[0].Request.AsOf != "2026-01-01" {
		t.Errorf("%+v", out)
	}
	if g := &out[1].Request.Stage.GateSupply; g.StagesSharing != 2 || out[2].Request.Stage.GateSupply.StagesSharing != 0 {
		t.Errorf("%d stages share the supply", g.StagesSharing)
	}
	cases := []struct {
		name, stages string
		want         []want
	}{
		{"no stage", ``, one("stages", "at least one")},
		{"no id", `{"title": "x"}`, one("stages[0].id", "unique on the board")},
		{"same id", `{"id": "a"}, {"id": "b"}, {"id": "a"}`, one("stages[2].id", `"a"`, "stages[0] has it already")},
		{"supplies disagree", `{"id": "a", ` + supply + `}, {"id": "b", "gateSupply": {"id": "vdd", "voltage": {"typ": "12 V"}}}`,
			one("stages[1].gateSupply.voltage", "stages[0].gateSupply.voltage", `"vdd"`)},
		{"reservoirs disagree", `{"id": "a", ` + supply + `}, {"id": "b", "gateSupply": {"id": "vdd", "reservoir": {"capacitance": {"typ": "1 nF"}}}}`,
			one("stages[1].gateSupply.reservoir.capacitance", `"vdd"`)},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			_, faults := board(c.stages)
			compare(t, faults, c.want...)
		})
	}
	out, _ = board(`{"id": "a", "gateSupply": {"stagesSharing": 3}}`)
	compare(t, out[0].Faults, want{"stages[0].gateSupply.stagesSharing", []string{"read 3", "gateSupply.id"}})
}
