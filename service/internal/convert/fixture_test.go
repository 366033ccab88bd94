package convert

import (
	"encoding/json"
	"strconv"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
)

// fullStage gives every kind of value: two switches, a discrete diode, a ceramic capacitor, layout and three operating points.
const fullStage = `{
  "id": "leg-a", "formerId": "leg-1", "title": "Inverter leg A",
  "gateSupply": {
    "id": "vdd15", "voltage": {"min": "14.25 V", "typ": "15 V", "max": "15.75 V"}, "currentLimit": {"min": "200 mA"},
    "seriesResistance": {"typ": "0R"}, "uvloFalling": {"min": "7.4 V", "typ": "8.2 V", "max": "9 V"},
    "uvloRising": {"min": "8 V", "typ": "8.9 V", "max": "9.8 V"}, "voltageMax": "25 V", "stagesSharing": 3,
    "reservoir": {"refdes": "C10", "capacitance": {"typ": "10 µF ±10 %"}, "voltageRating": "35 V", "dielectric": "X7R"}
  },
  "driver": {
    "refdes": "U1", "part": "DRV-100", "uvloRising": {"min": "8 V", "typ": "8.9 V", "max": "9.8 V"},
    "uvloFalling": {"min": "7.4 V", "typ": "8.2 V", "max": "9 V"}, "floatingQuiescentCurrent": {"typ": "60 µA", "max": "150 µA"},
    "offsetLeakage": {"max": "50 uA"}, "levelShiftCharge": {"typ": "2 nC"}, "pullUpResistance": {"typ": "3 Ω", "max": "6 ohm"},
    "pullDownResistance": {"typ": "1R5", "max": "3R"}, "peakSourceCurrent": {"min": "1.4 A", "typ": "2 A"},
    "peakSinkCurrent": {"min": "1.8 A", "typ": "2.5 A"}, "passivePullDown": {"typ": "100k"}, "floatingVoltageMax": "25 V",
    "floatingVoltageRecommendedMax": "20 V", "offsetVoltageMax": "625 V", "railMin": "-0.3 V", "railOperationalMin": "4 V",
    "nodeUndershoot": [{"voltage": "-5 V"}, {"voltage": "-12 V", "duration": "100 ns"}, {"voltage": "-20 V", "duration": "20 ns"}],
    "nodeOperationalMin": "-8 V", "slewMax": "50 V/ns", "floatingSlewMax": "5 V/us", "minimumPulse": "40 ns", "edgeTime": {"typ": "25 ns", "max": "40 ns"},
    "turnOnDelay": {"typ": "120 ns", "max": "180 ns"}, "turnOffDelay": {"typ": "110 ns", "max": "170 ns"}, "delayMismatch": {"max": "30 ns"},
    "enableDelay": {"max": "10 us"}, "quiescentCurrent": {"typ": "120 uA", "max": "240 uA"}, "thermalResistance": {"typ": "100 K/W"}, "junctionMax": "150 degC"
  },
  "highSide": {
    "refdes": "Q1", "part": "SW-650", "kind": "SI_MOSFET", "parallel": 2, "gateCharge": {"typ": "63 nC", "max": "80 nC"},
    "gateSourceCharge": {"typ": "14 nC"}, "gateDrainCharge": {"typ": "22 nC"}, "gateChargeVoltage": "10 V", "plateauVoltage": {"typ": "5.4 V"},
    "thresholdVoltage": {"min": "3 V", "typ": "3.5 V", "max": "4 V"}, "thresholdTemperatureCoefficient": "-7 mV/K", "transconductance": {"typ": "20 S"},
    "inputCapacitance": {"typ": "2.5 nF"}, "inputCapacitanceVoltage": "100 V",
    "reverseTransferCapacitance": [{"voltage": "1 V", "capacitance": {"typ": "400 pF"}}, {"voltage": "25 V", "capacitance": {"typ": "20 pF"}}, {"voltage": "400 V", "capacitance": {"typ": "3 pF"}}],
    "outputCapacitance": [{"voltage": "1 V", "capacitance": {"typ": "3 nF"}}, {"voltage": "25 V", "capacitance": {"typ": "300 pF"}}, {"voltage": "400 V", "capacitance": {"typ": "60 pF"}}],
    "internalGateResistance": {"typ": "1.6 Ω"}, "onResistance": {"typ": "95 mΩ", "at": [{"temperature": "125 °C", "typ": "190 mΩ"}, {"temperature": "150 °C", "typ": "220 mΩ", "max": "260 mΩ"}]},
    "driveVoltageMin": "10 V", "gateVoltageMax": "20 V", "gateVoltageRecommendedMax": "18 V", "gateVoltageMin": "-20 V", "gateLeakage": {"max": "100 nA"},
    "blockingVoltage": "650 V", "currentFallTime": {"typ": "12 ns"},
    "reverse": {"forwardPoints": [{"current": "1 A", "voltage": {"typ": "0.7 V"}}, {"current": "20 A", "voltage": {"typ": "0.95 V", "max": "1.2 V"}}],
      "gateVoltage": "0 V", "recoveryCharge": {"typ": "6 µC"}, "recoveryTime": {"typ": "400 ns"}, "recoveryTestCurrent": "20 A", "recoveryTestSlope": "100 A/us",
      "peakForwardRecovery": {"typ": "4 V"}, "forwardRecoveryTime": {"typ": "100 ns"}, "forwardRecoveryTestCurrent": "20 A", "forwardRecoveryTestSlope": "500 A/us"},
    "gateOn": {"refdes": "R1", "resistance": {"typ": "10 Ω ±1 %"}, "power": "250 mW"}, "gateOff": {"resistance": {"typ": "4R7"}},
    "gatePullDown": {"resistance": {"typ": "10 kΩ 5%"}}, "gateLoopInductance": {"typ": "8 nH"}, "offBias": {"typ": "0 V"}
  },
  "lowSide": {
    "refdes": "Q2", "kind": "SI_MOSFET", "gateCharge": {"typ": "63 nC", "max": "80 nC"}, "gateSourceCharge": {"typ": "14 nC"}, "gateDrainCharge": {"typ": "22 nC"},
    "gateChargeVoltage": "10 V", "plateauVoltage": {"typ": "5.4 V"}, "thresholdVoltage": {"min": "3 V", "typ": "3.5 V", "max": "4 V"}, "onResistance": {"typ": "95 mΩ"},
    "driveVoltageMin": "10 V", "gateVoltageMax": "20 V", "blockingVoltage": "650 V",
    "reverse": {"forwardPoints": [{"current": "1 A", "voltage": {"typ": "0.7 V"}}, {"current": "20 A", "voltage": {"typ": "0.95 V"}}]},
    "gateOn": {"resistance": {"typ": "10 Ω"}}, "gateOff": {"resistance": {"typ": "4R7"}}, "gatePullDown": {"fit": "NOT_FITTED", "refdes": "R9"}
  },
  "bootstrap": {
    "element": "DISCRETE_DIODE",
    "diode": {"refdes": "D1", "forwardPoints": [{"current": "10 mA", "voltage": {"typ": "0.55 V"}}, {"current": "1 A", "voltage": {"typ": "0.95 V", "max": "1.25 V"}}],
      "seriesResistance": {"typ": "0.1 Ω"}, "reverseLeakage": {"typ": "1 µA", "max": "5 µA", "at": [{"temperature": "100 degC", "max": "150 µA"}]},
      "recoveryCharge": {"typ": "20 nC"}, "recoveryTime": {"typ": "35 ns"}, "recoveryTestCurrent": "1 A", "recoveryTestSlope": "50 A/us",
      "junctionCapacitance": {"typ": "10 pF"}, "reverseVoltageMax": "600 V", "averageCurrentMax": "1 A", "repetitivePeakCurrentMax": "10 A", "surgeCurrentMax": "30 A",
      "thermalResistance": {"typ": "80 K/W"}, "junctionMax": "175 °C"},
    "resistor": {"refdes": "R3", "resistance": {"typ": "2.2 Ω ±5 %"}, "power": "500 mW", "pulseEnergyMax": "5 mJ"},
    "capacitor": {"refdes": "C1", "marking": "1u/25V/X7R/0603/K", "biasCurve": [{"voltage": "0 V", "remaining": "100 %"}, {"voltage": "10 V", "remaining": "75 %"}, {"voltage": "16 V", "remaining": "0.5"}],
      "serviceTime": "50000 h", "leakage": {"max": "1 uA"}, "insulation": "100 s", "esr": {"typ": "10 mΩ"}, "temperature": {"min": "-40 °C", "max": "105 °C"}},
    "clamp": {"voltage": {"min": "17 V", "typ": "18 V", "max": "19 V"}, "leakage": {"max": "5 µA"}, "power": "500 mW"},
    "otherLoad": {"max": "20 µA"}
  },
  "layout": {
    "lowSideInductance": {"typ": "10 nH"}, "busLoopInductance": {"typ": "15 nH"}, "highSideCommonSource": {"typ": "1 nH"}, "lowSideCommonSource": {"typ": "1 nH"},
    "shunt": {"resistance": {"typ": "5 mΩ"}}, "loopResistance": {"typ": "8 mΩ"}, "ringingQuality": {"typ": "12"}, "nodeResistor": {"resistance": {"typ": "0R"}},
    "nodeClamp": {"fit": "NOT_FITTED"}, "driverPinCapacitance": {"typ": "20 pF"},
    "measured": {"turnOffCurrentSlope": {"typ": "1 A/ns"}, "turnOnCurrentSlope": {"typ": "0.8 A/ns"}, "turnOffVoltageSlope": {"typ": "20 V/ns"}, "turnOnVoltageSlope": {"typ": "15 V/ns"}}
  },
  "operatingPoints": [
    {"name": "rated", "busVoltage": {"min": "360 V", "typ": "400 V", "max": "420 V"}, "loadCurrent": {"typ": "20 A"}, "rippleCurrent": {"typ": "4 A"}, "switchingFrequency": {"typ": "20 kHz"},
     "deadTime": {"typ": "500 ns"}, "junctionTemperature": {"min": "-20 °C", "typ": "80 °C", "max": "125 °C"}, "ambientTemperature": {"min": "-20 °C", "typ": "40 °C", "max": "85 °C"},
     "sinusoidal": {"modulationIndex": {"typ": "0.9"}, "fundamentalFrequency": {"typ": "50 Hz"}, "displacementAngle": {"typ": "30 deg"}, "zeroSequence": "THIRD_HARMONIC"}},
    {"name": "boost", "busVoltage": {"typ": "400 V"}, "loadCurrent": {"typ": "-15 A"}, "switchingFrequency": {"typ": "100 kHz"}, "deadTime": {"typ": "200 ns"}, "overload": true,
     "fixedDuty": {"duty": {"max": "95 %"}}},
    {"name": "locked rotor", "busVoltage": {"typ": "400 V"}, "loadCurrent": {"typ": "30 A"}, "switchingFrequency": {"typ": "20 kHz"}, "deadTime": {"typ": "500 ns"},
     "heldOn": {"duration": {"max": "10.64 ms"}, "initialVoltage": {"min": "11 V"}}}
  ],
  "startup": {"timeAvailable": {"typ": "5 ms"}, "pulseWidth": {"typ": "100 µs"}, "pulsePeriod": {"typ": "200 µs"}, "initialVoltage": {"typ": "0 V"}, "prebias": {"typ": "0 V"}, "simultaneous": 3}
}`

func parseStage(t testing.TB, text string) *pb.Stage {
	t.Helper()
	st := &pb.Stage{}
	if err := protojson.Unmarshal([]byte(text), st); err != nil {
		t.Fatal(err)
	}
	return st
}

// edit sets or deletes (value empty) one member of a JSON document; the path has keys and indices.
func edit(t testing.TB, document, path, value string) string {
	t.Helper()
	var root any
	if err := json.Unmarshal([]byte(document), &root); err != nil {
		t.Fatal(err)
	}
	var to any
	if value != "" {
		if err := json.Unmarshal([]byte(value), &to); err != nil {
			t.Fatalf("%s: %v", value, err)
		}
	}
	keys := strings.Split(path, ".")
	at := root
	for i, key := range keys {
		last := i == len(keys)-1
		switch node := at.(type) {
		case map[string]any:
			switch {
			case last && value == "":
				delete(node, key)
			case last:
				node[key] = to
			case node[key] == nil:
				node[key] = map[string]any{}
			}
			at = node[key]
		case []any:
			n, err := strconv.Atoi(key)
			if err != nil || n >= len(node) {
				t.Fatalf("no element %s of %s", key, path)
			}
			if last {
				node[n] = to
			}
			at = node[n]
		default:
			t.Fatalf("%s has no member %s", path, key)
		}
	}
	out, err := json.Marshal(root)
	if err != nil {
		t.Fatal(err)
	}
	return string(out)
}

// want is one expected fault: its field and phrases of its description.
type want struct {
	field   string
	phrases []string
}

// compare demands exactly the faults.
func compare(t *testing.T, got []Fault, wanted ...want) {
	t.Helper()
	for i, w := range wanted {
		if i >= len(got) {
			t.Errorf("no fault at %s", w.field)
			continue
		}
		if got[i].Field != w.field {
			t.Errorf("fault at %s (%s), want one at %s", got[i].Field, got[i].Description, w.field)
		}
		for _, p := range w.phrases {
			if !strings.Contains(got[i].Description, p) {
				t.Errorf("%s: %q lacks %q", got[i].Field, got[i].Description, p)
			}
		}
	}
	for _, f := range got[min(len(wanted), len(got)):] {
		t.Errorf("unexpected fault at %s: %s", f.Field, f.Description)
	}
}
