package property

import "testing"

// strained is the 48 V stage with parts that most rules object to.
func strained(t testing.TB) any {
	t.Helper()
	return with(document(t, "buck48"),
		to("stage.bootstrap.capacitor.capacitance.typ", `"33 nF ±10 %"`),
		to("stage.bootstrap.capacitor.dielectric", `"X5R"`),
		to("stage.bootstrap.capacitor.voltageRating", `"12 V"`),
		to("stage.bootstrap.capacitor.insulation", `"100 ms"`),
		to("stage.bootstrap.capacitor.esr", `{"min": "100 mohm", "typ": "150 mohm", "max": "200 mohm"}`),
		to("stage.bootstrap.resistor.resistance.typ", `"47R ±1 %"`),
		to("stage.bootstrap.resistor.power", `"60 mW"`),
		to("stage.bootstrap.resistor.pulseEnergyMax", `"1 uJ"`),
		to("stage.bootstrap.diode.reverseVoltageMax", `"60 V"`),
		to("stage.bootstrap.diode.averageCurrentMax", `"20 mA"`),
		to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"100 mA"`),
		to("stage.bootstrap.diode.surgeCurrentMax", `"150 mA"`),
		to("stage.bootstrap.diode.recoveryCharge", `{"min": "20 nC", "typ": "40 nC", "max": "60 nC"}`),
		to("stage.bootstrap.diode.reverseLeakage", `{"min": "3 uA", "typ": "12 uA", "max": "20 uA",
			"at": [{"temperature": "125 degC", "min": "3 mA", "typ": "12 mA", "max": "20 mA"}]}`),
		to("stage.bootstrap.otherLoad", `{"min": "3 mA", "typ": "5 mA", "max": "8 mA"}`),
		to("stage.driver.floatingVoltageMax", `"10 V"`),
		to("stage.driver.minimumPulse", `"150 ns"`),
		to("stage.highSide.driveVoltageMin", `"8 V"`),
		to("stage.highSide.gateChargeVoltage", `"6 V"`),
		to("stage.highSide.gateSourceCharge", ``),
		to("stage.highSide.gateVoltageMax", `"10 V"`),
		to("stage.gateSupply.reservoir.voltageRating", `"16 V"`),
		to("stage.gateSupply.reservoir.capacitance.typ", `"100 nF ±10 %"`),
		to("stage.operatingPoints.0.ambientTemperature.max", `"100 degC"`),
		to("stage.operatingPoints.0.fixedDuty.duty.max", `"0.95"`),
	)
}

// spindle is the demo stage whose operating points are modulated. Many periods stand behind each of its numbers: it is tried where that matters, and
// less often.
func spindle(t testing.TB) variant {
	t.Helper()
	return variant{name: "spindle325", tree: document(t, "spindle325")}
}

// isModulated tells whether a stage has operating points whose periods differ from one another.
func isModulated(tree any) bool {
	for _, p := range lookup(tree, at("stage.operatingPoints")).([]any) {
		for _, mode := range []string{"sinusoidal", "sixStep", "burst"} {
			if p.(map[string]any)[mode] != nil {
				return true
			}
		}
	}
	return false
}

// subjects are the stages that properties are tried on: the demo stages, of which one hardly objects to anything, and that one strained.
func subjects(t testing.TB) []variant {
	t.Helper()
	return []variant{
		{name: "buck48", tree: document(t, "buck48")},
		{name: "buck48 strained", tree: strained(t)},
		{name: "gan650", tree: document(t, "gan650")},
		{name: "drive400", tree: document(t, "drive400")},
	}
}

// allModes are the subjects and one whose operating points are modulated.
func allModes(t testing.TB) []variant {
	t.Helper()
	return append(subjects(t), variant{name: "drive400 modulated", tree: modulated(t)})
}
