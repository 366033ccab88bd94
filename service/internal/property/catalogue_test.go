package property

import (
	"fmt"
	"strings"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
)

// example is a stage on which a rule has each of its outcomes: edits of the 48 V stage, which with the edits of base passes.
type example struct {
	rule, role                 string
	when                       string // what base makes of the stage, where a rule has several examples in a role
	base, fail, marginal, open []edit
	simulated                  bool // with the switching events simulated
	// neverFails and neverMarginal tell why a rule has no such outcome in the role; it must not have it on the stages of tried either.
	neverFails, neverMarginal string
	tried                     [][]edit
}

// Bases that make rules apply which have nothing to judge on the stage as it is.
var (
	// heldOn makes the operating points ones in which the high side is held on.
	heldOn = list(
		to("stage.operatingPoints.0.fixedDuty", ``), to("stage.operatingPoints.1.fixedDuty", ``), to("stage.operatingPoints.2.fixedDuty", ``),
		to("stage.operatingPoints.0.heldOn", `{"duration": {"typ": "1 ms"}, "initialVoltage": {"min": "9 V", "typ": "9.2 V", "max": "9.4 V"}}`),
		to("stage.operatingPoints.1.heldOn", `{"duration": {"typ": "0.5 ms"}, "initialVoltage": {"min": "9 V", "typ": "9.2 V", "max": "9.4 V"}}`),
		to("stage.operatingPoints.2.heldOn", `{"duration": {"typ": "0.5 ms"}, "initialVoltage": {"min": "9 V", "typ": "9.2 V", "max": "9.4 V"}}`))
	// withClamp fits a clamp across the floating supply.
	withClamp = list(to("stage.bootstrap.clamp", `{"fit": "FITTED", "voltage": {"min": "13 V", "typ": "13.5 V", "max": "14 V"},
		"leakage": {"max": "5 uA"}, "power": "500 mW"}`))
	// sinking turns the current of an operating point: the low side commutates it.
	sinking = list(to("stage.operatingPoints.1.loadCurrent.typ", `"-20 A"`))
	// lowPrebias is a node that stands a little above COM before the first pulse.
	lowPrebias = list(to("stage.startup.prebias.typ", `"1 V"`))
	// prebiased is a node that stands at the converter's output before the first pulse.
	prebiased = list(to("stage.startup.prebias.typ", `"12 V"`))
	// withNodeResistor puts a resistor into the V_S line.
	withNodeResistor = list(to("stage.layout.nodeResistor.resistance.typ", `"0.33 ohm ±1 %"`))
	// slowOn and slowOff leave the slopes to the estimate, with a gate resistor that keeps them small.
	slowOn  = list(to("stage.layout.measured", ``), to("stage.highSide.gateOn.resistance.typ", `"47R ±1 %"`))
	slowOff = list(to("stage.layout.measured", ``), to("stage.highSide.gateOff.resistance.typ", `"47R ±1 %"`))
	// slow is a stage whose simulated events stay within its ratings.
	slow = list(to("stage.layout.measured", ``), to("stage.highSide.gateOff.resistance.typ", `"22R ±1 %"`), to("stage.highSide.gateOn.resistance.typ", `"22R ±1 %"`),
		to("stage.lowSide.gateOn.resistance.typ", `"22R ±1 %"`), to("stage.driver.railMin", `"-4 V"`),
		to("stage.lowSide.blockingVoltage", `"120 V"`), to("stage.highSide.blockingVoltage", `"120 V"`),
		to("stage.lowSide.plateauVoltage", `{"min": "4.5 V", "typ": "4.8 V", "max": "5.1 V"}`),
		to("stage.lowSide.thresholdVoltage", `{"min": "3 V", "typ": "3.3 V", "max": "3.6 V"}`))
)

func list(e ...edit) []edit { return append([]edit{}, e...) }

// lockout sets both thresholds of the floating lockout, the falling one up to a voltage.
func lockout(volts float64) []edit {
	text := func(v float64) string { return fmt.Sprintf(`"%.3g V"`, v) }
	return list(to("stage.driver.uvloFalling.max", text(volts)), to("stage.driver.uvloRising.max", text(volts+0.4)))
}

var examples = append([]example{
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
		open:          list(to("stage.gateSupply.reservoir.dielectric", ``)),
		neverMarginal: "the guard is the limit, and the ESR of an aluminium capacitor in the cold is judged at C_B alone",
		tried: [][]edit{list(to("stage.gateSupply.reservoir.dielectric", `"ALUMINIUM"`)), list(to("stage.gateSupply.reservoir.dielectric", `"TANTALUM"`)),
			list(to("stage.gateSupply.reservoir.dielectric", `"X5R"`)), list(to("stage.operatingPoints.0.ambientTemperature.max", `"124 degC"`),
				to("stage.operatingPoints.0.junctionTemperature.max", `"140 degC"`))}},
	{rule: "capacitor/effective-value", fail: list(to("stage.bootstrap.capacitor.biasCurve.1.remaining", `"40 %"`),
		to("stage.bootstrap.capacitor.biasCurve.2.remaining", `"30 %"`), to("stage.bootstrap.capacitor.biasCurve.3.remaining", `"20 %"`)),
		marginal: list(to("stage.bootstrap.capacitor.biasCurve.1.remaining", `"49 %"`), to("stage.bootstrap.capacitor.biasCurve.2.remaining", `"48 %"`),
			to("stage.bootstrap.capacitor.biasCurve.3.remaining", `"47 %"`)),
		open: list(to("stage.bootstrap.capacitor.biasCurve", ``))},
	{rule: "capacitor/leakage", fail: list(to("stage.bootstrap.capacitor.leakage", `{"max": "60 uA"}`)),
		marginal: list(to("stage.bootstrap.capacitor.leakage", `{"max": "14 uA"}`)), open: list(to("stage.driver.offsetLeakage", ``))},
	{rule: "capacitor/esr-drop", fail: list(to("stage.bootstrap.capacitor.esr.max", `"150 mohm"`)),
		marginal: list(to("stage.bootstrap.capacitor.esr.max", `"85 mohm"`)), open: list(to("stage.bootstrap.capacitor.esr", ``))},
	{rule: "diode/reverse-voltage", fail: list(to("stage.bootstrap.diode.reverseVoltageMax", `"70 V"`)),
		marginal: list(to("stage.bootstrap.diode.reverseVoltageMax", `"100 V"`)), open: list(to("stage.bootstrap.diode.reverseVoltageMax", ``))},
	{rule: "diode/peak-current", role: "first charge", fail: list(to("stage.bootstrap.diode.surgeCurrentMax", `"4 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"2 A"`)),
		marginal: list(to("stage.bootstrap.diode.surgeCurrentMax", `"4.4 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"2 A"`)),
		open:     list(to("stage.bootstrap.diode.surgeCurrentMax", ``))},
	{rule: "diode/peak-current", role: "repetitive", fail: list(to("stage.bootstrap.diode.averageCurrentMax", `"0.1 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"0.4 A"`)),
		marginal: list(to("stage.bootstrap.diode.averageCurrentMax", `"0.1 A"`), to("stage.bootstrap.diode.repetitivePeakCurrentMax", `"0.45 A"`)),
		open:     list(to("stage.bootstrap.diode.repetitivePeakCurrentMax", ``))},
	{rule: "diode/average-current", fail: list(to("stage.bootstrap.diode.averageCurrentMax", `"15 mA"`)),
		marginal: list(to("stage.bootstrap.diode.averageCurrentMax", `"19 mA"`)), open: list(to("stage.bootstrap.diode.averageCurrentMax", ``))},
	{rule: "diode/recovery", fail: list(to("stage.bootstrap.diode.recoveryCharge", `{"min": "20 nC", "typ": "40 nC", "max": "60 nC"}`)),
		marginal: list(to("stage.bootstrap.diode.recoveryCharge", `{"min": "10 nC", "typ": "25 nC", "max": "31 nC"}`)),
		open:     list(to("stage.bootstrap.diode.recoveryTestCurrent", ``))},
	{rule: "diode/hot-leakage", fail: list(to("stage.bootstrap.diode.reverseLeakage.at.0.max", `"15 mA"`)),
		marginal: list(to("stage.bootstrap.diode.reverseLeakage.at.0.max", `"1.1 mA"`)), open: list(to("stage.bootstrap.diode.thermalResistance", ``))},
	{rule: "resistor/pulse-energy", fail: list(to("stage.bootstrap.resistor.pulseEnergyMax", `"20 uJ"`)),
		marginal: list(to("stage.bootstrap.resistor.pulseEnergyMax", `"27 uJ"`)), open: list(to("stage.bootstrap.resistor.pulseEnergyMax", ``))},
	{rule: "resistor/power", fail: list(to("stage.bootstrap.resistor.power", `"10 mW"`)), marginal: list(to("stage.bootstrap.resistor.power", `"15 mW"`)),
		open: list(to("stage.bootstrap.resistor.power", ``))},
	{rule: "duty/recharge-window", fail: list(to("stage.bootstrap.resistor.resistance.typ", `"100R ±1 %"`)),
		marginal: list(to("stage.bootstrap.resistor.resistance.typ", `"75R ±1 %"`)), open: list(to("stage.driver.minimumPulse", ``))},
	{rule: "duty/largest-duty", fail: list(to("stage.bootstrap.resistor.resistance.typ", `"100R ±1 %"`)),
		marginal: list(to("stage.bootstrap.resistor.resistance.typ", `"82R ±1 %"`)), open: list(to("stage.operatingPoints.0.fixedDuty.duty", ``))},
	{rule: "duty/longest-on-time", base: heldOn, fail: list(to("stage.operatingPoints.0.heldOn.duration.typ", `"20 ms"`)),
		marginal: list(to("stage.operatingPoints.0.heldOn.duration.typ", `"2.25 ms"`)), open: list(to("stage.operatingPoints.0.heldOn.duration", ``))},
	{rule: "charge/lockout-suits-switch", when: "SiC", base: list(to("stage.highSide.kind", `"SIC_MOSFET"`)),
		fail: list(to("stage.highSide.driveVoltageMin", `"8 V"`)), marginal: list(to("stage.highSide.driveVoltageMin", `"6 V"`)),
		open: list(to("stage.driver.uvloFalling", ``))},
	{rule: "supply/reservoir-sag", role: "gateSupply.reservoir",
		fail: list(to("stage.gateSupply.reservoir.capacitance.typ", `"2.2 uF ±10 %"`)), marginal: list(to("stage.gateSupply.reservoir.capacitance.typ", `"2.7 uF ±10 %"`)),
		open: list(to("stage.gateSupply.uvloFalling", ``))},
	{rule: "supply/current",
		fail: list(to("stage.gateSupply.stagesSharing", `4`)), marginal: list(to("stage.gateSupply.currentLimit.min", `"42 mA"`)),
		open: list(to("stage.gateSupply.currentLimit", ``))},
	{rule: "supply/floating-slew", role: "driver",
		fail: list(to("stage.driver.floatingSlewMax", `"11 V/us"`)), marginal: list(to("stage.driver.floatingSlewMax", `"12 V/us"`)),
		open: list(to("stage.driver.floatingSlewMax", ``))},
	{rule: "duty/shortest-pulse", role: "driver",
		fail: list(to("stage.operatingPoints.2.fixedDuty.duty.min", `"0.04"`)), marginal: list(to("stage.operatingPoints.2.fixedDuty.duty.min", `"0.048"`)),
		open: list(to("stage.driver.minimumPulse", ``))},
	{rule: "duty/dead-time",
		fail: list(to("stage.operatingPoints.0.deadTime.min", `"60 ns"`)), marginal: list(to("stage.operatingPoints.0.deadTime.min", `"75 ns"`)),
		open: list(to("stage.highSide.inputCapacitance", ``))},
	{rule: "duty/idle-refresh", base: lowPrebias,
		fail: list(to("stage.startup.prebias.typ", `"12 V"`)), marginal: list(to("stage.startup.prebias.typ", `"1.4 V"`)),
		open: list(to("stage.startup.prebias", ``))},
	{rule: "duty/pre-charge",
		fail: list(to("stage.startup.timeAvailable.typ", `"40 us"`)), marginal: list(to("stage.startup.timeAvailable.typ", `"45 us"`)),
		open: list(to("stage.startup.timeAvailable", ``))},
	{rule: "gate/overvoltage", role: "driver",
		fail: list(to("stage.driver.floatingVoltageMax", `"10.5 V"`)), marginal: list(to("stage.driver.floatingVoltageMax", `"11 V"`)),
		open: list(to("stage.lowSide.reverse", ``))},
	{rule: "gate/overvoltage", role: "highSide",
		fail: list(to("stage.highSide.gateVoltageMax", `"10.5 V"`)), marginal: list(to("stage.highSide.gateVoltageMax", `"11 V"`)),
		open: list(to("stage.bootstrap.clamp", ``))},
	{rule: "gate/clamp-window", role: "standing off", base: withClamp,
		fail: list(to("stage.bootstrap.clamp.voltage.min", `"10 V"`)), marginal: list(to("stage.bootstrap.clamp.voltage.min", `"11 V"`)),
		open: list(to("stage.bootstrap.clamp.voltage", ``))},
	{rule: "gate/clamp-window", role: "protecting", base: withClamp,
		fail: list(to("stage.bootstrap.clamp.voltage.max", `"19 V"`)), marginal: list(to("stage.bootstrap.clamp.voltage.max", `"17 V"`)),
		open: list(to("stage.bootstrap.clamp.power", ``))},
	{rule: "gate/miller-low", role: "lowSide",
		fail: list(to("stage.lowSide.thresholdVoltage.min", `"1.3 V"`)), marginal: list(to("stage.lowSide.gateOff.resistance.typ", `"10R ±1 %"`)),
		open: list(to("stage.lowSide.reverseTransferCapacitance", ``), to("stage.lowSide.gateDrainCharge", ``))},
	{rule: "gate/miller-high", role: "highSide", base: sinking,
		fail: list(to("stage.highSide.thresholdVoltage.min", `"1.3 V"`)), marginal: list(to("stage.highSide.gateOff.resistance.typ", `"10R ±1 %"`)),
		open: list(to("stage.highSide.internalGateResistance", ``))},
	{rule: "gate/miller-high", role: "unpowered high side", base: prebiased,
		fail: list(to("stage.highSide.thresholdVoltage.min", `"1.3 V"`)), marginal: list(to("stage.startup.prebias.typ", `"36 V"`)),
		open: list(to("stage.driver.passivePullDown", ``))},
	{rule: "gate/node-resistor", role: "first charge", base: withNodeResistor,
		fail: list(to("stage.layout.nodeResistor.resistance.typ", `"1 ohm ±1 %"`)), marginal: list(to("stage.layout.nodeResistor.resistance.typ", `"0.39 ohm ±1 %"`)),
		open: list(to("stage.layout.nodeResistor", ``))},
	{rule: "gate/node-resistor", role: "repetitive", base: withNodeResistor,
		fail: list(to("stage.layout.nodeResistor.resistance.typ", `"2.2 ohm ±1 %"`)), marginal: list(to("stage.layout.nodeResistor.resistance.typ", `"1.2 ohm ±1 %"`)),
		open: list(to("stage.layout.nodeResistor", ``))},
	{rule: "gate/negative", role: "highSide",
		fail: list(to("stage.highSide.gateVoltageMin", `"-1.4 V"`)), marginal: list(to("stage.highSide.gateVoltageMin", `"-1.6 V"`)),
		open: list(to("stage.highSide.gateVoltageMin", ``))},
	{rule: "gate/negative", role: "highSide", when: "sinking", base: sinking,
		fail: list(to("stage.highSide.gateVoltageMin", `"-1.4 V"`)), marginal: list(to("stage.highSide.gateVoltageMin", `"-1.6 V"`)),
		open: list(to("stage.layout.highSideCommonSource", ``))},
	{rule: "gate/negative", role: "lowSide",
		fail: list(to("stage.lowSide.gateVoltageMin", `"-1.4 V"`)), marginal: list(to("stage.lowSide.gateVoltageMin", `"-1.5 V"`)),
		open: list(to("stage.lowSide.gateVoltageMin", ``))},
	{rule: "gate/drive-current", role: "highSide turn-on",
		fail: list(to("stage.driver.peakSourceCurrent.min", `"2.8 A"`)), marginal: list(to("stage.driver.peakSourceCurrent.min", `"3 A"`)),
		open: list(to("stage.highSide.gateOn", ``))},
	{rule: "gate/drive-current", role: "highSide turn-off",
		fail: list(to("stage.driver.peakSinkCurrent.min", `"3.1 A"`)), marginal: list(to("stage.driver.peakSinkCurrent.min", `"3.3 A"`)),
		open: list(to("stage.highSide.gateOff", ``))},
	{rule: "gate/drive-current", role: "lowSide turn-on",
		fail: list(to("stage.driver.peakSourceCurrent.min", `"2.5 A"`)), marginal: list(to("stage.driver.peakSourceCurrent.min", `"2.7 A"`)),
		open: list(to("stage.lowSide.gateOn", ``))},
	{rule: "gate/drive-current", role: "lowSide turn-off",
		fail: list(to("stage.driver.peakSinkCurrent.min", `"4.2 A"`)), marginal: list(to("stage.driver.peakSinkCurrent.min", `"4.5 A"`)),
		open: list(to("stage.lowSide.gateOff", ``))},
	{rule: "gate/damping", role: "highSide",
		fail: list(to("stage.highSide.gateLoopInductance.max", `"40 nH"`)), marginal: list(to("stage.highSide.gateLoopInductance.max", `"30 nH"`)),
		open: list(to("stage.highSide.gateLoopInductance", ``))},
	{rule: "gate/damping", role: "lowSide",
		fail: list(to("stage.lowSide.gateLoopInductance.max", `"20 nH"`)), marginal: list(to("stage.lowSide.gateLoopInductance.max", `"14 nH"`)),
		open: list(to("stage.lowSide.gateLoopInductance", ``))},
	{rule: "node/undershoot-static", role: "driver",
		fail: list(to("stage.driver.nodeUndershoot.0.voltage", `"-1.1 V"`)), marginal: list(to("stage.driver.nodeUndershoot.0.voltage", `"-1.2 V"`)),
		open: list(to("stage.driver.nodeUndershoot", ``))},
	{rule: "node/undershoot-pulse", role: "driver",
		fail: list(to("stage.layout.lowSideInductance.max", `"6 nH"`)), marginal: list(to("stage.layout.lowSideInductance.max", `"4.5 nH"`)),
		open: list(to("stage.layout.lowSideInductance", ``))},
	{rule: "node/undershoot-pulse", role: "driver", when: "estimated", base: slowOff,
		fail: list(to("stage.highSide.gateOff.resistance.typ", `"10R ±1 %"`)), marginal: list(to("stage.highSide.gateOff.resistance.typ", `"18R ±1 %"`)),
		open: list(to("stage.highSide.transconductance", ``))},
	{rule: "node/rail-below-com", role: "driver",
		fail: list(to("stage.layout.lowSideInductance.max", `"2.4 nH"`)), marginal: list(to("stage.layout.lowSideInductance.max", `"1.9 nH"`)),
		open: list(to("stage.driver.railMin", ``))},
	{rule: "node/rail-below-com", role: "driver", when: "estimated", base: slowOff,
		fail: list(to("stage.highSide.gateOff.resistance.typ", `"22R ±1 %"`)), marginal: list(to("stage.highSide.gateOff.resistance.typ", `"35.3 ohm ±1 %"`)),
		open: list(to("stage.highSide.transconductance", ``))},
	{rule: "node/operational-range", role: "node",
		fail: list(to("stage.driver.nodeOperationalMin", `"-1 V"`)), marginal: list(to("stage.driver.nodeOperationalMin", `"-1.2 V"`)),
		open: list(to("stage.driver.nodeOperationalMin", ``))},
	{rule: "node/operational-range", role: "rail",
		fail: list(to("stage.driver.railOperationalMin", `"5.2 V"`)), marginal: list(to("stage.driver.railOperationalMin", `"4.8 V"`)),
		open: list(to("stage.driver.railOperationalMin", ``))},
	{rule: "node/rail-overshoot", role: "driver",
		fail: list(to("stage.driver.offsetVoltageMax", `"80 V"`)), marginal: list(to("stage.driver.offsetVoltageMax", `"90 V"`)),
		open: list(to("stage.driver.offsetVoltageMax", ``))},
	{rule: "node/switch-overshoot", role: "highSide",
		fail: list(to("stage.highSide.blockingVoltage", `"60 V"`)), marginal: list(to("stage.highSide.blockingVoltage", `"70 V"`)),
		open: list(to("stage.highSide.blockingVoltage", ``))},
	{rule: "node/switch-overshoot", role: "lowSide",
		fail: list(to("stage.lowSide.blockingVoltage", `"75 V"`)), marginal: list(to("stage.lowSide.blockingVoltage", `"80 V"`)),
		open: list(to("stage.lowSide.blockingVoltage", ``))},
	{rule: "node/switch-overshoot", role: "lowSide", when: "estimated", base: slowOn,
		fail: list(to("stage.highSide.gateOn.resistance.typ", `"2R2 ±1 %"`)), marginal: list(to("stage.lowSide.blockingVoltage", `"78 V"`)),
		open: list(to("stage.highSide.transconductance", ``))},
	{rule: "node/slew", role: "driver",
		fail: list(to("stage.driver.slewMax", `"7 V/ns"`)), marginal: list(to("stage.driver.slewMax", `"10 V/ns"`)),
		open: list(to("stage.driver.slewMax", ``))},
	{rule: "node/slew", role: "driver", when: "estimated", base: slowOn,
		fail: list(to("stage.highSide.gateOn.resistance.typ", `"10R ±1 %"`)), marginal: list(to("stage.highSide.gateOn.resistance.typ", `"33R ±1 %"`)),
		open: list(to("stage.highSide.thresholdVoltage", ``))},
	{rule: "node/undershoot-pulse", role: "driver", simulated: true, base: slow,
		fail:     list(to("stage.driver.nodeUndershoot.0.voltage", `"-4 V"`), to("stage.driver.nodeUndershoot.1.duration", `"2 ns"`)),
		marginal: list(to("stage.driver.nodeUndershoot.1.voltage", `"-9 V"`)), open: list(to("stage.highSide.transconductance", ``))},
	{rule: "node/rail-below-com", role: "driver", simulated: true, base: slow,
		fail: list(to("stage.driver.railMin", `"-300 mV"`)), marginal: list(to("stage.driver.railMin", `"-1.8 V"`)),
		open: list(to("stage.highSide.outputCapacitance", ``))},
	{rule: "node/rail-overshoot", role: "driver", simulated: true, base: slow,
		fail: list(to("stage.driver.offsetVoltageMax", `"85 V"`)), marginal: list(to("stage.driver.offsetVoltageMax", `"90 V"`)),
		open: list(to("stage.layout.busLoopInductance", ``))},
	{rule: "node/switch-overshoot", role: "highSide", simulated: true, base: slow,
		fail: list(to("stage.highSide.blockingVoltage", `"72 V"`)), marginal: list(to("stage.highSide.blockingVoltage", `"80 V"`)),
		open: list(to("stage.highSide.onResistance", ``))},
	{rule: "node/switch-overshoot", role: "lowSide", simulated: true, base: slow,
		fail: list(to("stage.lowSide.blockingVoltage", `"85 V"`)), marginal: list(to("stage.lowSide.blockingVoltage", `"98 V"`)),
		open: list(to("stage.lowSide.reverse.recoveryTime", ``))},
	{rule: "node/slew", role: "driver", simulated: true, base: slow,
		fail: list(to("stage.driver.slewMax", `"30 V/ns"`)), marginal: list(to("stage.driver.slewMax", `"40 V/ns"`)),
		open: list(to("stage.driver.slewMax", ``))},
	{rule: "node/measured-slope", role: "current slope", simulated: true,
		base: append(list(to("stage.layout.measured", `{"turnOffCurrentSlope": {"min": "2 A/ns", "typ": "2.2 A/ns", "max": "2.4 A/ns"}}`)), slow[1:]...),
		fail: list(to("stage.layout.measured.turnOffCurrentSlope", `{"typ": "9 A/ns"}`)), marginal: list(to("stage.layout.measured.turnOffCurrentSlope", `{"typ": "1.5 A/ns"}`)),
		open: list(to("stage.lowSide.outputCapacitance", ``))},
	{rule: "node/measured-slope", role: "voltage slope", simulated: true,
		base: append(list(to("stage.layout.measured", `{"turnOnVoltageSlope": {"typ": "5 V/ns"}, "turnOnCurrentSlope": {"typ": "4 A/ns"}}`)), slow[1:]...),
		fail: list(to("stage.layout.measured.turnOnVoltageSlope.typ", `"12 V/ns"`)), marginal: list(to("stage.layout.measured.turnOnVoltageSlope.typ", `"8 V/ns"`)),
		open: list(to("stage.lowSide.outputCapacitance", ``))},
	{rule: "gate/miller-low", role: "lowSide", simulated: true, base: slow,
		fail: list(to("stage.lowSide.thresholdVoltage.min", `"1.8 V"`)), marginal: list(to("stage.lowSide.thresholdVoltage.min", `"2.3 V"`)),
		open: list(to("stage.lowSide.inputCapacitance", ``))},
	{rule: "gate/miller-high", role: "highSide", simulated: true,
		base: append(append(list(to("stage.highSide.plateauVoltage", `{"min": "4.5 V", "typ": "4.8 V", "max": "5.1 V"}`), to("stage.highSide.thresholdVoltage", `{"min": "3 V", "typ": "3.3 V", "max": "3.6 V"}`)), slow...), append(sinking, to("stage.highSide.gateOff.resistance.typ", `"2R2 ±1 %"`))...),
		fail: list(to("stage.highSide.thresholdVoltage.min", `"2 V"`)), marginal: list(to("stage.highSide.gateOff.resistance.typ", `"22R ±1 %"`)),
		open: list(to("stage.highSide.internalGateResistance", ``))},
	{rule: "gate/negative", role: "lowSide", simulated: true, base: slow,
		fail: list(to("stage.lowSide.gateVoltageMin", `"-1.7 V"`)), marginal: list(to("stage.lowSide.gateVoltageMin", `"-1.9 V"`)),
		open: list(to("stage.layout.lowSideCommonSource", ``))},
	{rule: "gate/overvoltage", role: "driver", simulated: true, base: slow,
		fail: list(to("stage.driver.floatingVoltageMax", `"10 V"`)), marginal: list(to("stage.driver.floatingVoltageMax", `"11 V"`)),
		open: list(to("stage.bootstrap.clamp", ``))},
	{rule: "gate/node-resistor", role: "repetitive", simulated: true, base: append(slow, withNodeResistor...),
		fail: list(to("stage.layout.nodeResistor.resistance.typ", `"1 ohm ±1 %"`)), marginal: list(to("stage.layout.nodeResistor.resistance.typ", `"0.68 ohm ±1 %"`)),
		open: list(to("stage.layout.nodeResistor", ``))},
	{rule: "diode/reverse-voltage", simulated: true, base: slow,
		fail: list(to("stage.bootstrap.diode.reverseVoltageMax", `"75 V"`)), marginal: list(to("stage.bootstrap.diode.reverseVoltageMax", `"100 V"`)),
		open: list(to("stage.bootstrap.diode.reverseVoltageMax", ``))},
	{rule: "node/overload",
		open: list(to("stage.operatingPoints.2.overload", `false`)), neverFails: "an operating point that nobody gave cannot be judged",
		neverMarginal: "one operating point for overload is there or is not",
		tried:         [][]edit{list(to("stage.operatingPoints", ``)), list(to("stage.operatingPoints.0.overload", `true`), to("stage.operatingPoints.1.overload", `true`))}},
	{rule: "thermal/driver", role: "driver",
		fail: list(to("stage.driver.junctionMax", `"90 degC"`)), marginal: list(to("stage.driver.junctionMax", `"100 degC"`)),
		open: list(to("stage.driver.junctionMax", ``))},
	{rule: "thermal/diode", role: "bootstrap.diode",
		fail: list(to("stage.bootstrap.diode.junctionMax", `"90 degC"`)), marginal: list(to("stage.bootstrap.diode.junctionMax", `"100 degC"`)),
		open: list(to("stage.bootstrap.diode.junctionMax", ``))},
	{rule: "data/assumption",
		marginal: list(to("stage.lowSide.reverse.peakForwardRecovery", ``)), open: list(to("stage.driver.slewMax", ``)),
		neverFails: "an assumption proves nothing wrong",
		tried:      [][]edit{list(to("stage.highSide", ``)), list(to("stage.layout", ``))}},
}, modulatedExamples...)

// found is what a rule finds in a role; rules that judge what the others found are run with all of them.
func found(t *testing.T, tree any, rl *rule.Rule, role string, simulated bool) (finding.Finding, *rule.Bench) {
	t.Helper()
	bench, rules := judge(t, bind(t, tree), nil).bench, []*rule.Rule{rl}
	if simulated {
		bench.Simulate()
	}
	if rl.Tally != nil {
		rules = catalog.All()
	}
	findings, broken := bench.Run(rules...)
	if broken > 0 {
		t.Errorf("%d rules panic", broken)
	}
	return *pick(t, &finding.Report{Findings: findings}, rl.ID, role), bench
}

// name of an example among the tests.
func (x *example) name() string {
	name := x.rule + " " + x.role + " " + x.when
	if x.simulated {
		name += " simulated"
	}
	return strings.TrimRight(name, " ")
}

// TestEveryRuleHasEveryOutcome shows each rule, in each role, a stage on which it passes, is marginal, fails and is open.
func TestEveryRuleHasEveryOutcome(t *testing.T) {
	tree := document(t, "buck48")
	seen := map[string]bool{}
	for i := range examples {
		x := &examples[i]
		rl, ok := catalog.Find(x.rule)
		if !ok {
			t.Fatalf("no rule %s", x.rule)
		}
		seen[x.rule+" "+x.role] = true
		t.Run(x.name(), func(t *testing.T) {
			base := with(tree, x.base...)
			stages := []any{base, strained(t), document(t, "gan650"), document(t, "drive400")}
			for _, e := range x.tried {
				stages = append(stages, with(base, e...))
			}
			for _, c := range []struct {
				edits []edit
				want  finding.Outcome
				never string
			}{
				{list(), finding.Pass, ""}, {x.marginal, finding.Marginal, x.neverMarginal}, {x.fail, finding.Fail, x.neverFails}, {x.open, finding.Open, ""},
			} {
				switch {
				case (c.edits == nil) == (c.never == ""):
					t.Errorf("%s needs either an example or a reason why there is none", c.want)
				case c.never != "":
					for _, s := range append(stages, with(base, x.marginal...), with(base, x.fail...), with(base, x.open...)) {
						if f, _ := found(t, s, rl, x.role, x.simulated); f.Outcome == c.want {
							t.Errorf("%s although %s: %s", c.want, c.never, f.Message)
						}
					}
				default:
					if f, _ := found(t, with(base, c.edits...), rl, x.role, x.simulated); f.Outcome != c.want {
						t.Errorf("%s, want %s: value %g, limit %g: %s", f.Outcome, c.want, f.Value.Value, f.Limit.Value, f.Message)
					}
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
