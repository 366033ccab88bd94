package acceptance

import (
	"net/http"
	"slices"
	"strings"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
)

// running is a stage with resistances and loads of note.
var running = edits{"driver.floatingQuiescentCurrent": "100 uA", "bootstrap.resistor.resistance": "5 ohm", "lowSide.onResistance": "10 mohm"}

// answered demands an answer, without a panic or a number that is none behind any finding.
func answered(t *testing.T, c client, body string) *pb.ReviewStageResponse {
	t.Helper()
	answer := c.review(body)
	for _, f := range answer.GetFindings() {
		text := f.GetMessage() + strings.Join(f.GetNotes(), "; ")
		if strings.Contains(text, "internal") || strings.Contains(text, "NaN") || strings.Contains(text, "Inf") {
			t.Errorf("%s: %s", f.GetRule(), text)
		}
	}
	return answer
}

// Extreme operating points are answered, and what they cannot hold fails: outcomes of charge/lowest-voltage, and of the rule beside it where that is
// another one.
func TestExtremeOperatingPoints(t *testing.T) {
	c := serve(t)
	six := func(chopping, f, d string) edits { return sixStep(f, chopping, d) }
	burst := func(d, active, idle, node string) edits {
		return point("burst", `{"duty":`+typical(d)+`,"activeTime":`+typical(active)+`,"idleTime":`+typical(idle)+`,"idleNodeVoltage":`+typical(node)+`}`)
	}
	dead := edits{"operatingPoints.0.deadTime": "500 ns"}
	for _, z := range []struct {
		name    string
		mode    edits
		more    edits
		lowest  pb.Outcome_Value
		rule    string
		outcome pb.Outcome_Value
	}{
		{"6.7 periods in a fundamental", sinusoidal("0.9", "3 kHz", "30 deg", "MIN_MAX"), nil, pass, "", 0},
		{"a fundamental near the switching frequency", sinusoidal("0.9", "19 kHz", "30 deg", "MIN_MAX"), nil, open, "charge/standing-load", open},
		{"1e8 periods", sinusoidal("0.9", "1 mHz", "30 deg", "MIN_MAX"), edits{"operatingPoints.0.switchingFrequency": "100 kHz"}, pass, "", 0},
		{"1e9 periods, clamped", sinusoidal("0.9", "1 mHz", "30 deg", "CLAMP_60"), edits{"operatingPoints.0.switchingFrequency": "1 MHz"}, fail, "charge/capacitance", fail},
		{"no index", sinusoidal("0", "50 Hz", "30 deg", "NONE"), nil, pass, "", 0},
		{"no index, clamped", sinusoidal("0", "50 Hz", "30 deg", "CLAMP_60"), nil, pass, "", 0},
		{"no index, clamped high", sinusoidal("0", "50 Hz", "30 deg", "CLAMP_120_HIGH"), nil, fail, "duty/largest-duty", fail},
		{"no index, clamped high, hold time", sinusoidal("0", "50 Hz", "30 deg", "CLAMP_120_HIGH"), nil, fail, "duty/longest-on-time", fail},
		{"no index, clamped low", sinusoidal("0", "50 Hz", "30 deg", "CLAMP_120_LOW"), nil, pass, "", 0},
		{"largest index", sinusoidal("4", "50 Hz", "30 deg", "NONE"), nil, pass, "charge/droop", fail},
		{"no current", sinusoidal("0.9", "50 Hz", "30 deg", "NONE"), edits{"operatingPoints.0.loadCurrent": "0 A"}, pass, "charge/gate-sufficiency", pb.Outcome_NOT_APPLICABLE},
		{"negative amplitude", sinusoidal("0.9", "50 Hz", "30 deg", "NONE"), edits{"operatingPoints.0.loadCurrent": "-10 A"}, pass, "", 0},
		{"ripple above the current", sinusoidal("0.9", "50 Hz", "30 deg", "NONE"), edits{"operatingPoints.0.rippleCurrent": "40 A"}, pass, "", 0},
		{"dead times that fill the period", sinusoidal("0.9", "50 Hz", "30 deg", "NONE"), edits{"operatingPoints.0.deadTime": "25 us"}, pass, "", 0},
		{"a pause of a day", burst("0.5", "1 ms", "100000 s", "24 V"), nil, fail, "duty/idle-refresh", fail},
		{"a burst of a nanosecond", burst("0.5", "1 ns", "1 ms", "24 V"), nil, pass, "", 0},
		{"a burst of 1000 s", burst("0.5", "1000 s", "0 s", "0 V"), edits{"operatingPoints.0.switchingFrequency": "100 kHz"}, pass, "", 0},
		{"a burst of full duty", burst("1", "1 ms", "1 ms", "0 V"), nil, pass, "", 0},
		{"a burst of full duty, node up", burst("1", "1 ms", "1 ms", "24 V"), nil, fail, "duty/idle-refresh", fail},
		{"a burst of no duty", burst("0", "1 ms", "1 ms", "0 V"), nil, pass, "", 0},
		{"six steps of no duty", six("HIGH_SIDE", "50 Hz", "0"), nil, pass, "", 0},
		{"six steps of full duty", six("BOTH", "50 Hz", "1"), nil, pass, "charge/droop", fail},
		{"six slow steps", six("BOTH", "1 mHz", "0.5"), nil, fail, "charge/droop", fail},
		{"six slow steps, held", six("LOW_SIDE", "1 mHz", "0.5"), nil, fail, "duty/longest-on-time", fail},
	} {
		answer := answered(t, c.of(t), request(t, running, z.mode, dead, z.more))
		if f := find(t, answer.GetFindings(), "charge/lowest-voltage", ""); f.GetOutcome() != z.lowest {
			t.Errorf("%s: %v: %s", z.name, f.GetOutcome(), f.GetMessage())
		}
		if z.rule == "" {
			continue
		}
		if f := find(t, answer.GetFindings(), z.rule, ""); f.GetOutcome() != z.outcome {
			t.Errorf("%s: %s is %v: %s", z.name, z.rule, f.GetOutcome(), f.GetMessage())
		}
	}
}

// What a pause of a day empties is recharged in every burst all the same.
func TestPauseThatEmptiesIsNoLackOfRecharge(t *testing.T) {
	c := serve(t)
	answer := c.review(request(t, running, point("burst", `{"duty":{"typ":"0.5"},"activeTime":{"typ":"1 s"},"idleTime":{"typ":"1 s"},"idleNodeVoltage":{"typ":"24 V"}}`)))
	f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
	judged(t, f, fail, major)
	says(t, f, "the supply collapses", "without recharge for 1 s")
	if text := f.GetMessage() + strings.Join(f.GetNotes(), ""); strings.Contains(text, "nothing recharges") || strings.Contains(text, "C cancels") {
		t.Error(text)
	}
	// Half of the time 20,000 windows of 25 µs a second: 12.5 µs in the mean of all periods.
	near(t, "window", find(t, answer.GetFindings(), "duty/recharge-window", "").GetValue(), 12.5e-6, 1e-9)
	limit(t, answer, "longest pause between bursts", (11.7-0.01-3)/100, 1e-3) // 10 A at 10 mΩ, 10 nC and 100 µA on 1 µF
}

// Whatever a mode needs and is not given is named, and no rule passes better without it.
func TestMissingInputsOfModes(t *testing.T) {
	c := serve(t)
	dead := edits{"operatingPoints.0.deadTime": "500 ns"}
	modes := []struct {
		name   string
		set    edits
		fields []string
	}{
		{"sinusoidal", sinusoidal("0.9", "50 Hz", "30 deg", "CLAMP_60"), []string{"modulationIndex", "fundamentalFrequency", "displacementAngle", "zeroSequence"}},
		{"sixStep", sixStep("50 Hz", "HIGH_SIDE", "0.5"), []string{"electricalFrequency", "chopping", "duty"}},
		{"burst", bursts("1 ms", "24 V"), []string{"duty", "activeTime", "idleTime", "idleNodeVoltage"}},
		{"heldOn", held("11 V", "1 ms"), []string{"duration", "initialVoltage"}},
		{"fixedDuty", switching("20 kHz", "50 %", "500 ns"), []string{"duty"}},
	}
	common := []string{"loadCurrent", "busVoltage", "switchingFrequency", "deadTime"}
	for _, m := range modes {
		full := request(t, running, edits{"operatingPoints.0.loadCurrent": "10 A"}, m.set, dead)
		was := answered(t, c, full)
		if f := find(t, was.GetFindings(), "charge/lowest-voltage", ""); f.GetOutcome() != pass {
			t.Fatalf("%s: %v", m.name, f)
		}
		for _, field := range slices.Concat(m.fields, common) {
			at := "operatingPoints.0." + m.name + "." + field
			if slices.Contains(common, field) {
				at = "operatingPoints.0." + field
			}
			t.Run(m.name+" without "+field, func(t *testing.T) {
				code, data := c.of(t).post("/v1/reviews", edit(t, full, edits{at: ""}))
				answer := &pb.ReviewStageResponse{}
				if err := protojson.Unmarshal(data, answer); code != http.StatusOK || err != nil {
					t.Fatalf("%d %v %s", code, err, data)
				}
				needed := !(m.name == "heldOn" && slices.Contains(common, field)) && !(m.name == "sixStep" && field == "deadTime")
				lowest := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
				if needed {
					judged(t, lowest, open, major)
					says(t, lowest, "missing "+strings.ReplaceAll(at, "s.0.", "s[0]."))
				}
				for i, f := range answer.GetFindings() {
					if strings.Contains(f.GetMessage(), "internal") {
						t.Errorf("%s: %s", f.GetRule(), f.GetMessage())
					}
					if before := was.GetFindings()[i]; before.GetRule() == f.GetRule() && before.GetOutcome() != pass && f.GetOutcome() == pass {
						t.Errorf("%s: %v becomes %v: %s", f.GetRule(), before.GetOutcome(), f.GetOutcome(), f.GetMessage())
					}
				}
				if p := answer.GetDutyLimits().GetPoints()[0]; needed && (p.GetFloatingVoltageLow().GetTyp() != nil || !slices.ContainsFunc(p.GetMissing(),
					func(m string) bool { return strings.HasSuffix(m, field) })) {
					t.Errorf("duty limits: %v", p)
				}
			})
		}
	}
}
