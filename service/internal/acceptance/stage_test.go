package acceptance

import (
	"encoding/json"
	"fmt"
	"maps"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// plain is a stage in which everything that rules ask about is known and nothing beside C_B plays a part: no currents, no leakage, no
// resistances, no recovery, switches without charge of note, 25 °C throughout, every value without spread. Cases set what theirs is about.
// The diode drops a fixed 0.4 V, given as two near-equal points. The gate charge is all spent up to the plateau (Q_GS + Q_GD = Q_G), so
// that it does not depend on the drive. Edges are slow and the loop's inductances as small as the contract takes them, so that a current
// that commutates adds 50 µV to what the node falls below COM.
const plain = `{"stage": {
  "id": "leg-a",
  "gateSupply": {"voltage": {}, "reservoir": {"fit": "NOT_FITTED"}, "seriesResistance": {}},
  "driver": {"refdes": "U1", "floatingVoltageMax": "24 V", "offsetVoltageMax": "600 V", "railMin": "-5 V", "railOperationalMin": "-4 V",
    "nodeUndershoot": [{"voltage": "-10 V"}], "nodeOperationalMin": "-8 V", "slewMax": "50 V/ns",
    "minimumPulse": "0.1 ns", "junctionMax": "150 degC"},
  "highSide": {"refdes": "Q1", "kind": "SI_MOSFET", "gateChargeVoltage": "10 V", "driveVoltageMin": "2 V", "gateVoltageMax": "24 V",
    "gateVoltageMin": "-20 V", "blockingVoltage": "1200 V", "inputCapacitanceVoltage": "25 V", "thresholdTemperatureCoefficient": "0 V/K",
    "gatePullDown": {"fit": "NOT_FITTED"}},
  "lowSide": {"refdes": "Q2", "kind": "SI_MOSFET", "gateChargeVoltage": "10 V", "gateVoltageMin": "-20 V", "blockingVoltage": "1200 V",
    "inputCapacitanceVoltage": "25 V", "thresholdTemperatureCoefficient": "0 V/K"},
  "bootstrap": {"element": "DISCRETE_DIODE", "diode": {"refdes": "D1", "recoveryTestCurrent": "1 A", "reverseVoltageMax": "1200 V", "averageCurrentMax": "1 A",
    "junctionMax": "150 degC"},
    "resistor": {"refdes": "R1"}, "capacitor": {"refdes": "C1"}, "clamp": {"fit": "NOT_FITTED"}},
  "layout": {"nodeClamp": {"fit": "NOT_FITTED"}},
  "operatingPoints": [{"name": "point"}]
}}`

// edits are members of a request by their path below stage, or by their full path where it starts with a slash. A value that is no JSON is
// a quantity without spread; an empty one removes the member.
type edits map[string]string

// defaults of every case.
func defaults() edits {
	out := edits{
		"gateSupply.voltage": "12 V", "gateSupply.seriesResistance": "0 ohm",
		"driver.uvloFalling": "3 V", "driver.floatingQuiescentCurrent": "0 A", "driver.offsetLeakage": "0 A",
		"driver.levelShiftCharge": "0 C", "driver.edgeTime": "0.1 ns",
		"highSide.gateCharge": "10 nC", "highSide.gateSourceCharge": "5 nC", "highSide.gateDrainCharge": "5 nC", "highSide.plateauVoltage": "5 V",
		"highSide.gateLeakage": "0 A", "highSide.offBias": "0 V", "highSide.outputCapacitance": `[{"voltage":"0 V","capacitance":{"min":"0.01 pF","typ":"0.01 pF","max":"0.01 pF"}}]`,
		"lowSide.onResistance": "10 uohm", "lowSide.offBias": "0 V", "lowSide.outputCapacitance": `[{"voltage":"0 V","capacitance":{"min":"0.01 pF","typ":"0.01 pF","max":"0.01 pF"}}]`,
		"lowSide.reverse.forwardPoints": drops(0.8),
		"bootstrap.diode.forwardPoints": drops(0.4), "bootstrap.diode.reverseLeakage": "0 A", "bootstrap.diode.recoveryCharge": "0 C",
		"bootstrap.diode.junctionCapacitance": "0 F", "bootstrap.resistor.resistance": "0 ohm",
		"bootstrap.capacitor.effectiveCapacitance": "1 uF", "bootstrap.capacitor.leakage": "0 A", "bootstrap.otherLoad": "0 A",
		"layout.nodeResistor.resistance": "0 ohm", "layout.shunt.resistance": "0 ohm",
		"operatingPoints.0.busVoltage": "48 V", "operatingPoints.0.loadCurrent": "0 A", "operatingPoints.0.rippleCurrent": "0 A",
		"operatingPoints.0.junctionTemperature": "25 degC", "operatingPoints.0.ambientTemperature": "25 degC",

		"gateSupply.currentLimit": "100 A", "gateSupply.stagesSharing": "1", "driver.quiescentCurrent": "0 A",
		"driver.pullUpResistance": "1 ohm", "driver.pullDownResistance": "1 ohm", "driver.passivePullDown": "10 kohm",
		"driver.peakSourceCurrent": "10 A", "driver.peakSinkCurrent": "10 A", "driver.turnOnDelay": "0 s", "driver.turnOffDelay": "0 s",
		"driver.delayMismatch": "0 s", "driver.enableDelay": "0 s", "driver.thermalResistance": "1 K/W", "bootstrap.diode.thermalResistance": "1 K/W",
		"bootstrap.capacitor.esr": "0 ohm",
		"lowSide.gateCharge":      "10 nC", "lowSide.gateSourceCharge": "5 nC", "lowSide.gateDrainCharge": "5 nC", "lowSide.plateauVoltage": "5 V",
		"highSide.onResistance":    "10 uohm",
		"layout.lowSideInductance": "0.05 nH", "layout.busLoopInductance": "0.05 nH", "layout.highSideCommonSource": "0 H", "layout.lowSideCommonSource": "0 H",
		"layout.loopResistance": "0 ohm", "layout.ringingQuality": `{"min":"10","typ":"10","max":"10"}`, "layout.driverPinCapacitance": "0 F",
		"layout.measured.turnOffCurrentSlope": "1 A/us", "layout.measured.turnOnCurrentSlope": "1 A/us", "layout.measured.turnOffVoltageSlope": "1 V/ns",
		"layout.measured.turnOnVoltageSlope": "1 V/ns",
		"startup.timeAvailable":              "1 s", "startup.initialVoltage": "0 V", "startup.prebias": "0 V",
	}
	for _, s := range []string{"highSide.", "lowSide."} {
		out[s+"thresholdVoltage"], out[s+"transconductance"] = "1.5 V", "100 S"
		out[s+"inputCapacitance"], out[s+"reverseTransferCapacitance"] = "1 nF", level("0.01 pF")
		out[s+"internalGateResistance"], out[s+"gateOn.resistance"], out[s+"gateOff.resistance"] = "0 ohm", "10 ohm", "10 ohm"
		out[s+"gateLoopInductance"], out[s+"currentFallTime"] = "1 nH", "0.1 ns"
		out[s+"reverse.recoveryCharge"], out[s+"reverse.peakForwardRecovery"] = "0 C", "0 V"
	}
	out["highSide.reverse.forwardPoints"] = drops(0.8)
	return out
}

// sound is what the plain stage needs beside for every rule to pass at a load of 30 A, whose edge of 1 A/ns takes the node to -3.2 V for 30 ns:
// V_F 1.2 V and 2 nH. The table permits -5 V for ever, -12 V for 100 ns, -20 V for 20 ns.
func sound() edits {
	return edits{
		"operatingPoints.0.loadCurrent": "30 A", "layout.measured.turnOffCurrentSlope": "1 A/ns", "layout.lowSideInductance": "2 nH",
		"lowSide.reverse.forwardPoints": drops(1.2), "driver.nodeUndershoot": rows,
		"bootstrap.resistor":            `{"refdes":"R1","resistance":{"min":"2.2 ohm","typ":"2.2 ohm","max":"2.2 ohm"},"power":"1 W","pulseEnergyMax":"1 J"}`,
		"bootstrap.resistor.resistance": "2.2 ohm", "bootstrap.diode.surgeCurrentMax": `"20 A"`, "bootstrap.diode.repetitivePeakCurrentMax": `"20 A"`,
		"driver.floatingSlewMax": `"1 V/ns"`, "driver.floatingQuiescentCurrent": "100 uA",
		"bootstrap.capacitor.voltageRating": `"50 V"`, "bootstrap.capacitor.dielectric": `"X7R"`,
	}
}

// rows is a table of permitted negative node voltages.
const rows = `[{"voltage":"-5 V"},{"voltage":"-12 V","duration":"100 ns"},{"voltage":"-20 V","duration":"20 ns"}]`

// overloaded adds a second operating point, a copy of the first one that judges overload.
func overloaded(t *testing.T, body string) string {
	t.Helper()
	var root map[string]map[string]any
	if err := json.Unmarshal([]byte(body), &root); err != nil {
		t.Fatal(err)
	}
	points := root["stage"]["operatingPoints"].([]any)
	second := maps.Clone(points[0].(map[string]any))
	second["name"], second["overload"] = "overload", true
	root["stage"]["operatingPoints"] = append(points, second)
	out, err := json.Marshal(root)
	if err != nil {
		t.Fatal(err)
	}
	return string(out)
}

// level is a capacitance that does not depend on the voltage, given at three of them.
func level(c string) string {
	at := func(v string) string {
		return `{"voltage":"` + v + `","capacitance":{"min":"` + c + `","typ":"` + c + `","max":"` + c + `"}}`
	}
	return "[" + at("0 V") + "," + at("10 V") + "," + at("100 V") + "]"
}

// request is the plain stage with the edits of a case, later ones first in effect. The lockout has no hysteresis unless a case gives it one.
func request(t *testing.T, all ...edits) string {
	t.Helper()
	final := defaults()
	for _, e := range all {
		for path, value := range e {
			final[path] = value
		}
	}
	if _, ok := final["driver.uvloRising"]; !ok {
		final["driver.uvloRising"] = final["driver.uvloFalling"]
	}
	return edit(t, plain, final)
}

// edit changes members of a document.
func edit(t *testing.T, document string, changes edits) string {
	t.Helper()
	var root any
	if err := json.Unmarshal([]byte(document), &root); err != nil {
		t.Fatal(err)
	}
	paths := make([]string, 0, len(changes))
	for path := range changes {
		paths = append(paths, path)
	}
	slices.Sort(paths)
	for _, path := range paths {
		full := "stage." + path
		if strings.HasPrefix(path, "/") {
			full = path[1:]
		}
		put(t, root, strings.Split(full, "."), changes[path])
	}
	out, err := json.Marshal(root)
	if err != nil {
		t.Fatal(err)
	}
	return string(out)
}

func put(t *testing.T, at any, keys []string, text string) {
	t.Helper()
	var value any
	switch {
	case text == "":
	case json.Valid([]byte(text)):
		if err := json.Unmarshal([]byte(text), &value); err != nil {
			t.Fatal(err)
		}
	default:
		value = map[string]any{"min": text, "typ": text, "max": text}
	}
	for i, key := range keys {
		last := i == len(keys)-1
		switch node := at.(type) {
		case map[string]any:
			switch {
			case last && text == "":
				delete(node, key)
			case last:
				node[key] = value
			case node[key] == nil:
				node[key] = map[string]any{}
			}
			at = node[key]
		case []any:
			n, err := strconv.Atoi(key)
			if err != nil || n >= len(node) {
				t.Fatalf("no element %s in %v", key, keys)
			}
			if last {
				node[n] = value
			}
			at = node[n]
		default:
			t.Fatalf("%v: %s has no members", keys, key)
		}
	}
}

// drops are the forward points of a diode that drops a fixed voltage [V]: two near-equal points, 0.1 mV to either side.
func drops(v float64) string {
	return fmt.Sprintf(`[{"current":"1 mA","voltage":{"min":"%[1]s","typ":"%[1]s","max":"%[1]s"}},{"current":"100 A","voltage":{"min":"%[2]s","typ":"%[2]s","max":"%[2]s"}}]`,
		volts(v-1e-4), volts(v+1e-4))
}

func volts(v float64) string { return strconv.FormatFloat(v, 'g', 8, 64) + " V" }

// gate sets a gate charge that does not depend on the drive [nC].
func gate(nC float64) edits {
	text := func(v float64) string { return strconv.FormatFloat(v, 'g', 8, 64) + " nC" }
	return edits{"highSide.gateCharge": text(nC), "highSide.gateSourceCharge": text(nC / 2), "highSide.gateDrainCharge": text(nC / 2)}
}

// switching sets a fixed duty.
func switching(frequency, duty, deadTime string) edits {
	return edits{"operatingPoints.0.switchingFrequency": frequency, "operatingPoints.0.deadTime": deadTime,
		"operatingPoints.0.fixedDuty": `{"duty":{"typ":"` + duty + `"}}`}
}

// held sets an operating point in which the high side is held on.
func held(from, duration string) edits {
	return edits{"operatingPoints.0.heldOn": `{"duration":{"typ":"` + duration + `"},"initialVoltage":{"typ":"` + from + `"}}`}
}

// find returns the finding of a rule and role.
func find(t *testing.T, findings []*pb.Finding, rule, role string) *pb.Finding {
	t.Helper()
	var out *pb.Finding
	for _, f := range findings {
		if f.GetRule() != rule || f.GetRole() != role {
			continue
		}
		if out != nil {
			t.Fatalf("%s %s: more than one finding", rule, role)
		}
		out = f
	}
	if out == nil {
		t.Fatalf("%s %s: no finding", rule, role)
	}
	return out
}

// judged demands outcome and severity of a finding.
func judged(t *testing.T, f *pb.Finding, outcome pb.Outcome_Value, severity pb.Severity_Value) {
	t.Helper()
	if f.GetOutcome() != outcome || f.GetSeverity() != severity {
		t.Errorf("%s %s: %v %v, want %v %v: %s %v", f.GetRule(), f.GetRole(), f.GetOutcome(), f.GetSeverity(), outcome, severity, f.GetMessage(), f.GetNotes())
	}
}

// near demands a number in its SI unit within a tolerance in that unit.
func near(t *testing.T, what string, got *pb.Measure, want, tolerance float64) {
	t.Helper()
	if got == nil || got.Value == nil || !(math.Abs(got.GetValue()-want) <= tolerance) {
		t.Errorf("%s = %v, want %.6g ± %.2g", what, got, want, tolerance)
	}
}

// all demands one number at all three ends of a span: nothing in a case has a spread.
func all(t *testing.T, what string, got *pb.Span, want, tolerance float64) {
	t.Helper()
	near(t, what+", smallest", got.GetMin(), want, tolerance)
	near(t, what+", typical", got.GetTyp(), want, tolerance)
	near(t, what+", largest", got.GetMax(), want, tolerance)
}

// says demands phrases in the message or the notes of a finding.
func says(t *testing.T, f *pb.Finding, phrases ...string) {
	t.Helper()
	text := f.GetMessage() + "\n" + strings.Join(f.GetNotes(), "\n")
	for _, p := range phrases {
		if !strings.Contains(text, p) {
			t.Errorf("%s: no %q in %q", f.GetRule(), p, text)
		}
	}
}

// first demands the first field of a ranking.
func first(t *testing.T, f *pb.Finding, field string) {
	t.Helper()
	if r := f.GetRanking(); len(r) == 0 || r[0].GetField() != field {
		t.Errorf("%s: ranking %v, want %s first", f.GetRule(), r, field)
	}
}
