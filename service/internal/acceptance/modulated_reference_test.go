package acceptance

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// modulationReference is one case of testdata/reference/modulation.json: a leg in the numbers of its script, and the periodic solution that the script
// found by integrating every carrier period.
type modulationReference struct {
	Name, Kind  string
	Supply, Bus float64 // [V]
	Element     struct {
		Slope         float64 // [V]
		LogSaturation float64 `json:"log_saturation"`
		Resistance    float64 // [ohm]
		Switch        bool
	}
	Capacitance, Load, Conductance, Charge, Current float64
	ChargePerVolt                                   float64 `json:"charge_per_volt"`
	Junction                                        float64 `json:"junction_charge"`
	RecoverySpec                                    float64 `json:"recovery_spec"`
	RecoveryTau                                     float64 `json:"recovery_tau"`
	Frequency                                       float64 `json:"switching_frequency"`
	DeadTime                                        float64 `json:"dead_time"`
	Shortest                                        float64 `json:"shortest_pulse"`
	LowSide                                         string  `json:"low_side"`
	OnResistance                                    float64 `json:"on_resistance"`
	SaturationLevel                                 float64 `json:"saturation_level"`
	SaturationResistance                            float64 `json:"saturation_resistance"`
	ReverseLevel                                    float64 `json:"reverse_level"`
	ReverseResistance                               float64 `json:"reverse_resistance"`
	OutputCharge                                    float64 `json:"output_charge"`
	ZeroSequence                                    string  `json:"zero_sequence"`
	Index, Displacement, Duty                       float64
	Chopping                                        string
	Periods, Active                                 int
	IdleTime                                        float64 `json:"idle_time"`
	IdleNode                                        float64 `json:"idle_node"`
	UVLORising                                      float64 `json:"uvlo_rising"`
	Expected                                        struct {
		Low, High  float64
		LowAngle   float64  `json:"low_angle"`
		Rival      float64  `json:"rival_difference"`
		Sourcing   *float64 `json:"low_sourcing"`
		Collapses  bool
		LongestOn  float64 `json:"longest_on"`
		Restarts   bool
		IdleEnd    float64  `json:"idle_end"`
		NoRecharge *float64 `json:"without_refresh"`
	}
}

// line is two points of a straight line over the current, as curves of a switch are given.
func line(level, slope float64) string {
	at := func(i float64) string {
		v := units(level+slope*i+1e-7*i, "V")
		return fmt.Sprintf(`{"current":"%s","voltage":{"min":"%s","typ":"%[2]s","max":"%[2]s"}}`, units(i, "A"), v)
	}
	return "[" + at(1e-3) + "," + at(200) + "]"
}

func units(v float64, unit string) string { return strconv.FormatFloat(v, 'g', 17, 64) + " " + unit }

// stage expresses a case through the contract: a diode by two points of its junction, charges by the parts that bring them.
func (r *modulationReference) stage() edits {
	e := edits{
		"gateSupply.voltage": units(r.Supply, "V"), "bootstrap.capacitor.effectiveCapacitance": units(r.Capacitance, "F"),
		"driver.floatingQuiescentCurrent": units(r.Load, "A"), "driver.minimumPulse": `"` + units(r.Shortest-1e-10, "s") + `"`,
		"driver.uvloFalling": "1 V", "driver.uvloRising": units(math.Max(1, r.UVLORising), "V"),
		"lowSide.kind": `"IGBT"`, "lowSide.channelPoints": line(r.SaturationLevel, r.SaturationResistance), "lowSide.onResistance": "",
		"lowSide.reverse.forwardPoints": line(r.ReverseLevel, r.ReverseResistance),
		"operatingPoints.0.busVoltage":  units(r.Bus, "V"), "operatingPoints.0.loadCurrent": units(r.Current, "A"),
		"operatingPoints.0.switchingFrequency": units(r.Frequency, "Hz"), "operatingPoints.0.deadTime": units(r.DeadTime, "s"),
	}
	if r.LowSide == "MOSFET" {
		e["lowSide.kind"], e["lowSide.channelPoints"], e["lowSide.onResistance"] = `"SI_MOSFET"`, "", units(r.OnResistance, "ohm")
	}
	for _, s := range []string{"highSide", "lowSide"} {
		c := units(r.OutputCharge/2/r.Bus, "F")
		e[s+".outputCapacitance"] = fmt.Sprintf(`[{"voltage":"0 V","capacitance":{"min":"%s","typ":"%[1]s","max":"%[1]s"}}]`, c)
	}
	// Above a plateau of 5 V the gate takes charge_per_volt, up to the specification at 10 V.
	plateau := (r.Charge + 5*r.ChargePerVolt) / 2
	e["highSide.gateCharge"] = units(r.Charge+10*r.ChargePerVolt, "C")
	e["highSide.gateSourceCharge"], e["highSide.gateDrainCharge"] = units(plateau, "C"), units(plateau, "C")
	if r.Conductance > 0 {
		e["highSide.gatePullDown"] = fmt.Sprintf(`{"resistance":{"min":"%s","typ":"%[1]s","max":"%[1]s"}}`, units(1/r.Conductance, "ohm"))
	}
	if r.Element.Switch {
		e["bootstrap.element"], e["bootstrap.switchResistance"] = `"INTEGRATED_SWITCH"`, units(r.Element.Resistance, "ohm")
	} else {
		at := func(i float64) string {
			x := math.Log(i) - r.Element.LogSaturation
			v := units(r.Element.Slope*(x+math.Log1p(math.Exp(-x))), "V")
			return fmt.Sprintf(`{"current":"%s","voltage":{"min":"%s","typ":"%[2]s","max":"%[2]s"}}`, units(i, "A"), v)
		}
		e["bootstrap.diode.forwardPoints"] = "[" + at(1e-3) + "," + at(1) + "]"
		e["bootstrap.resistor.resistance"] = units(r.Element.Resistance, "ohm")
		e["bootstrap.diode.junctionCapacitance"] = units(r.Junction/r.Bus, "F")
		if r.RecoverySpec > 0 {
			e["bootstrap.diode.recoveryCharge"] = units(r.RecoverySpec, "C")
			e["bootstrap.diode.recoveryTestCurrent"] = `"` + units(r.RecoverySpec/r.RecoveryTau, "A") + `"`
		}
	}
	f := units(r.Frequency/float64(r.Periods), "Hz")
	number := func(v float64) string { return strconv.FormatFloat(v, 'g', 17, 64) }
	var mode edits
	switch r.Kind {
	case "sinusoidal":
		mode = sinusoidal(number(r.Index), f, units(r.Displacement, "deg"), r.ZeroSequence)
	case "sixStep":
		mode = sixStep(f, r.Chopping, number(r.Duty))
	default:
		mode = point("burst", `{"duty":`+typical(number(r.Duty))+`,"activeTime":`+typical(units(float64(r.Active)/r.Frequency, "s"))+`,"idleTime":`+
			typical(units(r.IdleTime, "s"))+`,"idleNodeVoltage":`+typical(units(r.IdleNode, "V"))+`}`)
	}
	for path, value := range mode {
		if _, ok := e[path]; !ok {
			e[path] = value
		}
	}
	return e
}

// TestModulationReference expresses the modulated cases of testdata/reference/modulation.json as stages: the service's voltages within 5 mV, and the
// angle at which V_BS is lowest within one carrier period.
func TestModulationReference(t *testing.T) {
	text, err := os.ReadFile("../../../testdata/reference/modulation.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct{ Cases []modulationReference }
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	c := serve(t)
	kinds := map[string]int{}
	for i := range doc.Cases {
		r := &doc.Cases[i]
		modulated := r.Kind == "sinusoidal" || r.Kind == "sixStep" || r.Kind == "burst"
		if !modulated || r.Shortest < 1e-10 || r.Element.Switch && r.Junction > 0 || r.Index > 4 { // no driver passes every pulse, a switch has no junction, the contract no such index
			continue
		}
		t.Run(r.Name, func(t *testing.T) {
			answer := c.of(t).review(request(t, r.stage()))
			p := answer.GetDutyLimits().GetPoints()[0]
			lowest := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
			kinds[r.Kind]++
			want := &r.Expected
			if want.Collapses {
				judged(t, lowest, fail, major)
				says(t, lowest, "collapses")
				return
			}
			const tolerance = 5e-3
			all(t, "lowest V_BS", p.GetFloatingVoltageLow(), want.Low, tolerance)
			all(t, "highest V_BS", p.GetFloatingVoltageHigh(), want.High, tolerance)
			if want.Sourcing != nil && r.Current > 0 {
				all(t, "lowest drive with forward current", p.GetGateVoltageLow(), *want.Sourcing, tolerance)
			}
			if r.Kind == "burst" {
				f := find(t, answer.GetFindings(), "duty/idle-refresh", "")
				near(t, "V_BS after the pause", f.GetValue(), want.IdleEnd, tolerance)
				if restarts := f.GetOutcome() != fail; restarts != want.Restarts {
					t.Errorf("restarts %t, want %t", restarts, want.Restarts)
				}
				return
			}
			if want.Rival > 1e-3 { // else another period is as low
				angleSaid(t, lowest, want.LowAngle, 360/float64(r.Periods)+0.1) // four digits are said
			}
		})
	}
	if kinds["sinusoidal"] < 40 || kinds["sixStep"] < 5 || kinds["burst"] < 5 {
		t.Errorf("only %v", kinds)
	}
}

// angleSaid demands the angle of the note "lowest at ..." [deg].
func angleSaid(t *testing.T, f *pb.Finding, want, tolerance float64) {
	t.Helper()
	for _, n := range append(f.GetNotes(), f.GetMessage()) {
		_, rest, ok := strings.Cut(n, "lowest at ")
		if !ok {
			continue
		}
		text, _, _ := strings.Cut(rest, "°")
		got, err := strconv.ParseFloat(text, 64)
		if off := math.Abs(math.Remainder(got-want, 360)); err != nil || !(off <= tolerance) {
			t.Errorf("lowest at %q deg, want %g ± %g", text, want, tolerance)
		}
		return
	}
	t.Errorf("no angle in %v %v", f.GetMessage(), f.GetNotes())
}
