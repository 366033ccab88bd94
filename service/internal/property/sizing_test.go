package property

import (
	"fmt"
	"testing"

	"floatrail/calc"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
)

// sizedBy are the rules whose guards the recommended parts hold.
var sizedBy = []string{"charge/lowest-voltage", "charge/droop", "charge/gate-sufficiency", "charge/capacitance", "charge/oversize",
	"duty/recharge-window", "duty/largest-duty", "resistor/power"}

// TestRecommendedPartsPass puts the parts that sizing recommends into the stage, which then passes every rule that it is sized by; also where
// the stage names no capacitor and no resistor, or ones that are far off.
func TestRecommendedPartsPass(t *testing.T) {
	tree := document(t, "buck48")
	for _, c := range []struct {
		name  string
		edits []edit
	}{
		{"as it is", nil},
		{"without capacitor and resistor", []edit{
			to("stage.bootstrap.capacitor", ``), to("stage.bootstrap.resistor", ``),
			to("stage.gateSupply.reservoir.capacitance.typ", `"68 uF ±10 %"`)}}, // a class 2 ceramic without a bias curve has a wide range
		{"with parts far off", []edit{
			to("stage.bootstrap.capacitor.capacitance.typ", `"10 nF ±10 %"`), to("stage.bootstrap.resistor.resistance.typ", `"1 kohm ±1 %"`)}},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			start := with(tree, c.edits...)
			report := review(t, start, calc.WithSizing)
			rec := report.Sizing.Recommended
			value := func(m finding.Measure, spread string) string {
				if m.Value != m.Value {
					t.Fatalf("no part recommended: %q", report.Sizing.Notes)
				}
				return fmt.Sprintf("%q", quantity.Format(m.Value, m.Dimension)+spread)
			}
			capacitance, resistance := value(rec.Capacitance, " ±10 %"), value(rec.Resistance, " ±1 %")
			fitted := with(start,
				to("stage.bootstrap.capacitor.capacitance", `{"typ": `+capacitance+`}`), to("stage.bootstrap.resistor.resistance", `{"typ": `+resistance+`}`),
				to("stage.bootstrap.resistor.power", `"250 mW"`),
				to("stage.bootstrap.capacitor.dielectric", `"X7R"`), to("stage.bootstrap.capacitor.voltageRating", value(rec.CapacitorVoltage, "")),
				to("stage.gateSupply.reservoir.capacitance", `{"typ": `+value(rec.ReservoirCapacitance, " ±10 %")+`}`),
				to("stage.gateSupply.reservoir.effectiveCapacitance", `{"min": `+value(rec.ReservoirCapacitance, "")+`, "typ": `+
					value(rec.ReservoirCapacitance, "")+`, "max": `+value(rec.ReservoirCapacitance, "")+`}`),
				to("stage.gateSupply.reservoir.capacitance", ``),
				to("stage.bootstrap.diode.reverseVoltageMax", value(rec.DiodeReverseVoltage, "")),
				to("stage.bootstrap.diode.averageCurrentMax", value(rec.DiodeAverageCurrent, "")),
				to("stage.bootstrap.diode.repetitivePeakCurrentMax", value(rec.DiodePeakCurrent, "")),
				to("stage.bootstrap.diode.surgeCurrentMax", value(rec.DiodePeakCurrent, "")))
			again := review(t, fitted, 0)
			for _, id := range sizedBy {
				if f := pick(t, &again, id, ""); f.Outcome != finding.Pass {
					t.Errorf("C_B %s, R_B %s: %s %s: %s", capacitance, resistance, id, f.Outcome, f.Message)
				}
			}
			for _, x := range []struct{ rule, role string }{
				{"capacitor/voltage", "bootstrap.capacitor"}, {"diode/peak-current", "first charge"}, {"diode/peak-current", "repetitive"},
				{"diode/average-current", ""},
			} {
				if f := pick(t, &again, x.rule, x.role); f.Outcome != finding.Pass {
					t.Errorf("ratings: %s %s %s: %s", x.rule, x.role, f.Outcome, f.Message)
				}
			}
			low, high := rec.CapacitanceWindow.Low.Value, rec.CapacitanceWindow.High.Value
			if !(low <= rec.Capacitance.Value && rec.Capacitance.Value <= high) {
				t.Errorf("C_B %g outside its window %g to %g", rec.Capacitance.Value, low, high)
			}
			low, high = rec.ResistanceWindow.Low.Value, rec.ResistanceWindow.High.Value
			if !(low <= rec.Resistance.Value && rec.Resistance.Value <= high) {
				t.Errorf("R_B %g outside its window %g to %g", rec.Resistance.Value, low, high)
			}
		})
	}
}
