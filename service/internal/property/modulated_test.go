package property

import (
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"floatrail/calc"
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

// randomMode is a mode with numbers between those of a servo and of a standby supply, some of them with a range.
func randomMode(g *rand.Rand) (mode, text string) {
	span := func(low, high float64) float64 { return low * math.Pow(high/low, g.Float64()) }
	q := func(v float64, unit string) string {
		if g.IntN(3) == 0 {
			return fmt.Sprintf(`{"min": "%g%s", "typ": "%g%[2]s", "max": "%g%[2]s"}`, 0.9*v, unit, v, 1.05*v)
		}
		return fmt.Sprintf(`{"typ": "%g%s"}`, v, unit)
	}
	duty := func() string { return q(0.9*g.Float64(), "") }
	switch g.IntN(4) {
	case 0:
		return "sixStep", fmt.Sprintf(`{"electricalFrequency": %s, "chopping": "%s", "duty": %s}`, q(span(0.1, 1500), " Hz"),
			[]string{"HIGH_SIDE", "LOW_SIDE", "BOTH"}[g.IntN(3)], duty())
	case 1:
		return "burst", fmt.Sprintf(`{"duty": %s, "activeTime": %s, "idleTime": %s, "idleNodeVoltage": %s}`, duty(), q(span(1e-4, 1), " s"), q(span(1e-4, 10), " s"),
			q(20*g.Float64(), " V"))
	}
	return "sinusoidal", fmt.Sprintf(`{"modulationIndex": %s, "fundamentalFrequency": %s, "displacementAngle": %s, "zeroSequence": "%s"}`, q(1.3*g.Float64(), ""),
		q(span(0.1, 1500), " Hz"), q(180*g.Float64(), " deg"), []string{"NONE", "THIRD_HARMONIC", "MIN_MAX", "CLAMP_60", "CLAMP_120_HIGH", "CLAMP_120_LOW"}[g.IntN(6)])
}

// TestModulatedAnswersNeverVary reviews random stages of three modulated operating points: the report is the same on one, two and four processors, the
// numbers are in whatever order the points stand, and no rule panics.
func TestModulatedAnswersNeverVary(t *testing.T) {
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(0))
	g := rand.New(rand.NewPCG(23, 29))
	plain := pinned(document(t, "drive400"))
	for k := range max(1, 8/every) {
		var points []any
		for n, p := range lookup(plain, at("stage.operatingPoints")).([]any) {
			mode, text := randomMode(g)
			p = with(without(p, path{"fixedDuty"}), to(mode, text))
			if element := g.IntN(4); element == 0 {
				p = with(p, to("rippleCurrent", `{"typ": "30 A"}`))
			}
			p.(map[string]any)["name"] = fmt.Sprint("point ", n)
			points = append(points, p)
		}
		tree := with(plain, edit{at("stage.operatingPoints"), points})
		if k%4 == 3 {
			tree = with(tree, to("stage.bootstrap.element", `"INTEGRATED_SWITCH"`), to("stage.bootstrap.switchResistance", `{"min": "50 ohm", "typ": "60 ohm", "max": "80 ohm"}`))
		}
		runtime.GOMAXPROCS(1)
		first := review(t, tree, calc.WithDutyLimits)
		for _, processors := range []int{2, 4} {
			runtime.GOMAXPROCS(processors)
			if d := cmp.Diff(first, review(t, tree, calc.WithDutyLimits), cmpopts.EquateNaNs()); d != "" {
				t.Errorf("%d on %d processors: %s", k, processors, d)
			}
		}
		slices.Reverse(points)
		want := judge(t, bind(t, tree), searched())
		sameNumbers(t, want, judge(t, bind(t, with(tree, edit{at("stage.operatingPoints"), points})), searched()))
	}
}
