package property

import (
	"fmt"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

// example is a stage on which a rule has each of its outcomes: edits of the 48 V stage, which as it stands passes unless pass says otherwise.
type example struct {
	rule, role                 string
	base, fail, marginal, open []edit
	// never tells why a rule has no such outcome.
	neverPasses, neverOpen string
}

// heldOn makes the operating points ones in which the high side is held on.
var heldOn = []edit{
	to("stage.operatingPoints.0.fixedDuty", ``), to("stage.operatingPoints.1.fixedDuty", ``),
	to("stage.operatingPoints.0.heldOn", `{"duration": {"typ": "1 ms"}, "initialVoltage": {"min": "9 V", "typ": "9.2 V", "max": "9.4 V"}}`),
	to("stage.operatingPoints.1.heldOn", `{"duration": {"typ": "0.5 ms"}, "initialVoltage": {"min": "9 V", "typ": "9.2 V", "max": "9.4 V"}}`),
}

func list(e ...edit) []edit { return e }

// lockout sets both thresholds of the floating lockout, the falling one up to a voltage.
func lockout(volts float64) []edit {
	text := func(v float64) string { return fmt.Sprintf(`"%.3g V"`, v) }
	return list(to("stage.driver.uvloFalling.max", text(volts)), to("stage.driver.uvloRising.max", text(volts+0.4)))
}

var examples = []example{
	{rule: "charge/droop", fail: list(to("stage.bootstrap.capacitor.capacitance.typ", `"100 nF ±10 %"`)),
		marginal: list(to("stage.bootstrap.capacitor.capacitance.typ", `"220 nF ±10 %"`)), open: list(to("stage.driver.levelShiftCharge", ``))},
	{rule: "charge/lowest-voltage", fail: lockout(9), marginal: lockout(8.4), open: list(to("stage.driver.uvloFalling", ``))},
	{rule: "charge/gate-sufficiency", fail: list(to("stage.highSide.driveVoltageMin", `"9 V"`)),
		marginal: list(to("stage.highSide.driveVoltageMin", `"8.4 V"`)), open: list(to("stage.highSide.driveVoltageMin", ``))},
	{rule: "charge/capacitance", fail: list(to("stage.bootstrap.capacitor.capacitance.typ", `"100 nF ±10 %"`)),
		marginal: list(to("stage.bootstrap.capacitor.capacitance.typ", `"220 nF ±10 %"`)), open: list(to("stage.bootstrap.diode.forwardPoints", ``))},
	{rule: "charge/oversize", fail: list(to("stage.gateSupply.reservoir.capacitance.typ", `"10 uF ±10 %"`)),
		marginal: list(to("stage.gateSupply.reservoir.capacitance.typ", `"15 uF ±10 %"`)), open: list(to("stage.startup.timeAvailable", ``))},
	{rule: "charge/standing-load", fail: list(to("stage.bootstrap.otherLoad.max", `"8 mA"`)),
		marginal: list(to("stage.bootstrap.otherLoad.max", `"2.25 mA"`)), open: list(to("stage.bootstrap.clamp", ``))},
	{rule: "charge/charge-condition", base: list(to("stage.highSide.gateSourceCharge", ``)), fail: list(to("stage.highSide.gateChargeVoltage", `"8 V"`)),
		marginal: list(to("stage.highSide.offBias", ``)), open: list(to("stage.highSide.gateChargeVoltage", ``))},
	{rule: "charge/lockout-suits-switch", fail: list(to("stage.highSide.driveVoltageMin", `"8 V"`)),
		marginal: list(to("stage.highSide.driveVoltageMin", `"6 V"`)), open: list(to("stage.highSide.kind", ``))},
	{rule: "capacitor/voltage", role: "bootstrap.capacitor", fail: list(to("stage.bootstrap.capacitor.voltageRating", `"10 V"`)),
		marginal: list(to("stage.bootstrap.capacitor.voltageRating", `"16 V"`)), open: list(to("stage.bootstrap.capacitor.voltageRating", ``))},
	{rule: "capacitor/voltage", role: "gateSupply.reservoir", fail: list(to("stage.gateSupply.reservoir.voltageRating", `"10 V"`)),
		marginal: list(to("stage.gateSupply.reservoir.voltageRating", `"16 V"`)), open: list(to("stage.gateSupply.reservoir", ``))},
	{rule: "capacitor/dielectric", role: "bootstrap.capacitor", fail: list(to("stage.bootstrap.capacitor.dielectric", `"Y5V"`)),
		marginal: list(to("stage.bootstrap.capacitor.dielectric", `"ALUMINIUM"`)), open: list(to("stage.bootstrap.capacitor.dielectric", ``))},
	{rule: "capacitor/dielectric", role: "gateSupply.reservoir", fail: list(to("stage.gateSupply.reservoir.dielectric", `"Z5U"`)),
		open: list(to("stage.gateSupply.reservoir.dielectric", ``))},
	{rule: "capacitor/effective-value", fail: list(to("stage.bootstrap.capacitor.biasCurve.1.remaining", `"40 %"`),
		to("stage.bootstrap.capacitor.biasCurve.2.remaining", `"30 %"`), to("stage.bootstrap.capacitor.biasCurve.3.remaining", `"20 %"`)),
		marginal: list(to("stage.bootstrap.capacitor.biasCurve.1.remaining", `"49 %"`), to("stage.bootstrap.capacitor.biasCurve.2.remaining", `"48 %"`),
			to("stage.bootstrap.capacitor.biasCurve.3.remaining", `"47 %"`)),
		open: list(to("stage.bootstrap.capacitor.biasCurve", ``))},
	{rule: "capacitor/leakage", fail: list(to("stage.bootstrap.capacitor.leakage", `{"max": "60 uA"}`)),
		marginal: list(to("stage.bootstrap.capacitor.leakage", `{"max": "14 uA"}`)), open: list(to("stage.driver.offsetLeakage", ``))},
	{rule: "capacitor/esr-drop", fail: list(to("stage.bootstrap.capacitor.esr.max", `"150 mohm"`)),
		marginal: list(to("stage.bootstrap.capacitor.esr.max", `"120 mohm"`)), open: list(to("stage.bootstrap.capacitor.esr", ``))},
	{rule: "diode/reverse-voltage", fail: list(to("stage.bootstrap.diode.reverseVoltageMax", `"55 V"`)),
		marginal:    list(to("stage.bootstrap.diode.reverseVoltageMax", `"75 V"`)),
		open:        list(to("stage.bootstrap.diode.reverseVoltageMax", ``)),
		neverPasses: "the node's overshoot has no model yet"},
	{rule: "diode/peak-current", role: "first charge", fail: list(to("stage.bootstrap.diode.surgeCurrentMax", `"4 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"2 A"`)),
		marginal: list(to("stage.bootstrap.diode.surgeCurrentMax", `"4.4 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"2 A"`)),
		open:     list(to("stage.bootstrap.diode.surgeCurrentMax", ``))},
	{rule: "diode/peak-current", role: "repetitive", fail: list(to("stage.bootstrap.diode.averageCurrentMax", `"0.1 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"0.4 A"`)),
		marginal: list(to("stage.bootstrap.diode.averageCurrentMax", `"0.1 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"0.48 A"`)),
		open:     list(to("stage.bootstrap.diode.repetitivePeakCurrentMax", ``))},
	{rule: "diode/average-current", fail: list(to("stage.bootstrap.diode.averageCurrentMax", `"15 mA"`)),
		marginal: list(to("stage.bootstrap.diode.averageCurrentMax", `"19 mA"`)), open: list(to("stage.bootstrap.diode.averageCurrentMax", ``))},
	{rule: "diode/recovery", fail: list(to("stage.bootstrap.diode.recoveryCharge", `{"min": "20 nC", "typ": "40 nC", "max": "60 nC"}`)),
		marginal: list(to("stage.bootstrap.diode.recoveryCharge", `{"min": "10 nC", "typ": "15 nC", "max": "19 nC"}`)),
		open:     list(to("stage.bootstrap.diode.recoveryTestCurrent", ``))},
	{rule: "diode/hot-leakage", fail: list(to("stage.bootstrap.diode.reverseLeakage.at.0.max", `"15 mA"`)),
		marginal: list(to("stage.bootstrap.diode.reverseLeakage.at.0.max", `"1.35 mA"`)), open: list(to("stage.bootstrap.diode.thermalResistance", ``))},
	{rule: "resistor/pulse-energy", fail: list(to("stage.bootstrap.resistor.pulseEnergyMax", `"20 uJ"`)),
		marginal: list(to("stage.bootstrap.resistor.pulseEnergyMax", `"27 uJ"`)), open: list(to("stage.bootstrap.resistor.pulseEnergyMax", ``))},
	{rule: "resistor/power", fail: list(to("stage.bootstrap.resistor.power", `"10 mW"`)), marginal: list(to("stage.bootstrap.resistor.power", `"15 mW"`)),
		open: list(to("stage.bootstrap.resistor.power", ``))},
	{rule: "duty/recharge-window", fail: list(to("stage.operatingPoints.0.fixedDuty.duty.max", `"0.98"`), to("stage.bootstrap.element", `"INTEGRATED_SWITCH"`),
		to("stage.bootstrap.switchResistance", `{"min": "1 ohm", "typ": "2 ohm", "max": "3 ohm"}`)),
		marginal: list(to("stage.operatingPoints.1.fixedDuty.duty.max", `"0.965"`)),
		open:     list(to("stage.driver.minimumPulse", ``))},
	{rule: "duty/largest-duty", fail: list(to("stage.operatingPoints.0.fixedDuty.duty.max", `"0.998"`)),
		marginal: list(to("stage.operatingPoints.0.fixedDuty.duty.max", `"0.9916"`)), open: list(to("stage.operatingPoints.0.fixedDuty.duty", ``))},
	{rule: "duty/longest-on-time", base: heldOn, fail: list(to("stage.operatingPoints.0.heldOn.duration.typ", `"20 ms"`)),
		marginal: list(to("stage.operatingPoints.0.heldOn.duration.typ", `"2.25 ms"`)), open: list(to("stage.operatingPoints.0.heldOn.duration", ``))},
	{rule: "gate/overvoltage", role: "driver", fail: list(to("stage.driver.floatingVoltageMax", `"10 V"`)),
		marginal: list(to("stage.driver.floatingVoltageMax", `"10.3 V"`)), open: list(to("stage.lowSide.reverse", ``)),
		neverPasses: "the charge that an undershoot adds has no model yet"},
	{rule: "gate/overvoltage", role: "highSide", fail: list(to("stage.highSide.gateVoltageMax", `"10 V"`)),
		marginal: list(to("stage.highSide.gateVoltageMax", `"10.3 V"`)), open: list(to("stage.bootstrap.clamp", ``)),
		neverPasses: "the charge that an undershoot adds has no model yet"},
}

// TestEveryRuleHasEveryOutcome shows each rule, in each role, a stage on which it passes, is marginal, fails and is open.
func TestEveryRuleHasEveryOutcome(t *testing.T) {
	tree := document(t, "buck48")
	seen := map[string]bool{}
	for _, x := range examples {
		rl, ok := catalog.Find(x.rule)
		if !ok {
			t.Fatalf("no rule %s", x.rule)
		}
		seen[x.rule+" "+x.role] = true
		t.Run(x.rule+" "+x.role, func(t *testing.T) {
			judged := func(edits []edit) verdict {
				j := judge(t, bind(t, with(with(tree, x.base...), edits...)), []*rule.Rule{rl})
				out := verdict{}
				for f, v := range j.binding {
					if f.role == x.role {
						out = v
					}
				}
				return out
			}
			for _, c := range []struct {
				edits []edit
				want  finding.Outcome
				never string
			}{
				{nil, finding.Pass, x.neverPasses}, {x.marginal, finding.Marginal, ""}, {x.fail, finding.Fail, ""}, {x.open, finding.Open, x.neverOpen},
			} {
				if c.edits == nil && c.want != finding.Pass { // the rule has no guard of its own in this role
					continue
				}
				got := judged(c.edits)
				if c.never != "" {
					if got.outcome == c.want {
						t.Errorf("%s although %s: %s", c.want, c.never, got.text)
					}
					continue
				}
				if got.outcome != c.want {
					t.Errorf("%s, want %s: value %g, limit %g: %s", got.outcome, c.want, got.value, got.limit, got.text)
				}
			}
		})
	}
	for _, rl := range catalog.All() {
		for _, role := range rolesOf(rl) {
			if !seen[rl.ID+" "+role] {
				t.Errorf("no example of %s %s", rl.ID, role)
			}
		}
	}
}
