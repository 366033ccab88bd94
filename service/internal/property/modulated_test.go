package property

import (
	"math"
	"slices"
	"strings"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/derive"
	"floatrail/calc/finding"
)

// pinned is a stage without spreads, but in the named fields: its searches are short.
func pinned(tree any, but ...string) any {
	var edits []edit
	visit(tree, nil, func(p path, value any) {
		q, ok := value.(map[string]any)
		if typ, has := q["typ"].(string); ok && has && !slices.Contains(but, p.last()) && !slices.Contains(p, any("at")) {
			typ, _, _ = strings.Cut(typ, " ±")
			edits = append(edits, edit{p, map[string]any{"min": typ, "typ": typ, "max": typ}})
		}
	})
	return with(tree, edits...)
}

// modulated is the drive stage in the modes of a drive: driving and regenerating with a clamped phase, six-step at low speed, bursts in standby. Only what the
// modulation and the lockout are about has a spread.
func modulated(t testing.TB) any {
	t.Helper()
	tree := document(t, "drive400")
	points := lookup(tree, at("stage.operatingPoints")).([]any)
	of := func(k int, name, mode, text string) any {
		out := without(points[k], path{"fixedDuty"}).(map[string]any)
		out["name"] = name
		return with(out, to(mode, text))
	}
	tree = with(tree, edit{at("stage.operatingPoints"), []any{
		of(0, "driving", "sinusoidal", `{"modulationIndex": {"min": "0.1", "typ": "0.8", "max": "1.1"}, "fundamentalFrequency": {"min": "9 Hz", "typ": "50 Hz", "max": "80 Hz"},
			"displacementAngle": {"min": "20 deg", "typ": "30 deg", "max": "45 deg"}, "zeroSequence": "CLAMP_60"}`),
		of(0, "regenerating", "sinusoidal", `{"modulationIndex": {"min": "0.1", "typ": "0.7", "max": "0.95"}, "fundamentalFrequency": {"typ": "40 Hz"},
			"displacementAngle": {"min": "150 deg", "typ": "160 deg", "max": "170 deg"}, "zeroSequence": "MIN_MAX"}`),
		of(0, "six steps", "sixStep", `{"electricalFrequency": {"min": "35 Hz", "typ": "60 Hz", "max": "100 Hz"}, "chopping": "LOW_SIDE", "duty": {"min": "0.2", "typ": "0.5", "max": "0.8"}}`),
		of(0, "standby", "burst", `{"duty": {"min": "0.3", "typ": "0.4", "max": "0.5"}, "activeTime": {"min": "0.9 ms", "typ": "1 ms", "max": "1.1 ms"},
			"idleTime": {"min": "4 ms", "typ": "5 ms", "max": "6 ms"}, "idleNodeVoltage": {"min": "0 V", "typ": "1 V", "max": "60 V"}}`),
	}}, to("stage.highSide.driveVoltageMin", `"11 V"`), to("stage.driver.uvloFalling", `{"min": "8.5 V", "typ": "9 V", "max": "9.5 V"}`),
		to("stage.driver.uvloRising", `{"min": "9.2 V", "typ": "9.8 V", "max": "10.3 V"}`))
	return pinned(tree, "uvloFalling", "uvloRising", "modulationIndex", "fundamentalFrequency", "electricalFrequency", "idleTime")
}

// TestModulatedLimitsTurn evaluates the floating supply just inside and just outside of every derived limit of modulated operating points, as
// TestDerivedLimitsTurn does for constant duties, on the stage as it is and where it is hard to hold. A fundamental has whole periods of the carrier: a
// limit on a frequency turns within the period by which a hold is rounded.
func TestModulatedLimitsTurn(t *testing.T) {
	hard := with(modulated(t), to("stage.driver.uvloFalling", `{"min": "11 V", "typ": "11 V", "max": "11 V"}`), to("stage.highSide.driveVoltageMin", `"12 V"`),
		to("stage.driver.uvloRising", `{"min": "11.5 V", "typ": "11.5 V", "max": "11.5 V"}`),
		to("stage.operatingPoints.3.burst.idleNodeVoltage", `{"typ": "60 V"}`), to("stage.bootstrap.capacitor.capacitance", `{"min": "2 uF", "typ": "2 uF", "max": "2 uF"}`))
	found := map[string]int{}
	for _, tree := range []any{modulated(t), hard} {
		j := judge(t, bind(t, tree), nil)
		for i := range j.bench.Points {
			p := &j.bench.Points[i]
			for _, w := range corner.SearchSets(p.Spaces, func(d *corner.Draw) float64 { return derive.Hold(circuit.Of(d)) }) {
				c := circuit.Of(w.Draw)
				for _, name := range derive.Names(p.Operating.Mode()) {
					r := derive.Limit(c, name)
					if r.Whole && !derive.Holds(c, name, r.Input) {
						t.Errorf("%s %s: %s: the whole range holds, but not %g", p.Name(), w.Space.Set.Name, name, r.Input)
					}
					if !r.Found {
						continue
					}
					found[name]++
					outward, by := 1.0, 1e-4
					switch name {
					case finding.LongestOnTime:
						if p.Operating.SixStep != nil || p.Operating.Sinusoidal != nil && c.LongestOn() > 1/c.Value(&c.Point.SwitchingFrequency) { // found by the fundamental
							outward, by = -1, 2e-2
						}
					case finding.LowestFundamental, finding.LowestSwitchingFrequency:
						outward, by = -1, 2e-2
					case finding.HighestSwitchingFreq:
						by = 2e-2
					}
					if !derive.Holds(c, name, r.Input) {
						t.Errorf("%s %s: %s: %g does not hold", p.Name(), w.Space.Set.Name, name, r.Input)
					}
					if out := r.Input * (1 + outward*by); derive.Holds(c, name, out) {
						t.Errorf("%s %s: %s: %g still holds beyond %g", p.Name(), w.Space.Set.Name, name, out, r.Input)
					}
				}
				// A stall from running operation lasts until V_BS falls to what it must keep.
				if stall := c.Stall(); p.Operating.Burst == nil && !math.IsInf(stall, 1) {
					if !(stall > 0) {
						t.Errorf("%s: stall %g", p.Name(), stall)
					}
					found[finding.LongestStall]++
				}
			}
		}
	}
	for _, name := range []string{finding.LargestIndex, finding.LargestResistance, finding.LargestDeadTime, finding.LowestFundamental, finding.HighestSwitchingFreq,
		finding.LowestSwitchingFrequency, finding.LongestIdle, finding.LongestOnTime, finding.LongestStall} {
		if found[name] == 0 {
			t.Errorf("%s is found nowhere", name)
		}
	}
	t.Log(found)
}
