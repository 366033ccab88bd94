package property

// pulsed is the 48 V stage with one operating point, in a mode [JSON].
func pulsed(mode string) []edit {
	return list(to("stage.operatingPoints", `[{"name": "modulated", "busVoltage": {"typ": "48 V"}, "loadCurrent": {"typ": "12 A"},
		"rippleCurrent": {"typ": "2 A"}, "switchingFrequency": {"typ": "50 kHz"}, "deadTime": {"typ": "100 ns"},
		"junctionTemperature": {"min": "-20 degC", "typ": "60 degC", "max": "110 degC"},
		"ambientTemperature": {"min": "-20 degC", "typ": "40 degC", "max": "85 degC"}, `+mode+`}]`))
}

// Modes of one operating point that the rules about modulation pass.
var (
	// clamped is a high side that is held on for a sixth of each fundamental.
	clamped = pulsed(`"sinusoidal": {"modulationIndex": {"typ": "0.8"}, "fundamentalFrequency": {"typ": "1 kHz"}, "displacementAngle": {"typ": "30 deg"},
		"zeroSequence": "CLAMP_60"}`)
	// slowSine stays in full modulation for so long that no supply holds.
	slowSine = pulsed(`"sinusoidal": {"modulationIndex": {"typ": "0.8"}, "fundamentalFrequency": {"typ": "5 Hz"}, "displacementAngle": {"typ": "30 deg"},
		"zeroSequence": "NONE"}`)
	// commutated is a six-step leg whose low side alone is chopped.
	commutated = pulsed(`"sixStep": {"electricalFrequency": {"typ": "3 kHz"}, "chopping": "LOW_SIDE", "duty": {"typ": "0.8"}}`)
	// bursts have pauses in which the node stands high enough to block the recharge.
	bursts = pulsed(`"burst": {"duty": {"typ": "0.5"}, "activeTime": {"typ": "1 ms"}, "idleTime": {"typ": "0.2 ms"}, "idleNodeVoltage": {"typ": "20 V"}}`)
)

// fundamental and electrical set the speed of a modulated operating point, pause the time between bursts, burstDuty their duty and index the
// modulation index.
func fundamental(f string) edit {
	return to("stage.operatingPoints.0.sinusoidal.fundamentalFrequency.typ", `"`+f+`"`)
}
func electrical(f string) edit {
	return to("stage.operatingPoints.0.sixStep.electricalFrequency.typ", `"`+f+`"`)
}
func pause(t string) edit     { return to("stage.operatingPoints.0.burst.idleTime.typ", `"`+t+`"`) }
func burstDuty(d string) edit { return to("stage.operatingPoints.0.burst.duty.typ", `"`+d+`"`) }
func index(m string) edit {
	return to("stage.operatingPoints.0.sinusoidal.modulationIndex.typ", `"`+m+`"`)
}

var modulatedExamples = []example{
	{rule: "charge/droop", when: "clamped", base: clamped, fail: list(fundamental("400 Hz")), marginal: list(fundamental("560 Hz")),
		open: list(to("stage.operatingPoints.0.sinusoidal.zeroSequence", ``))},
	{rule: "charge/droop", when: "six-step", base: commutated, fail: list(electrical("1 kHz")), marginal: list(electrical("2 kHz")),
		open: list(to("stage.operatingPoints.0.sixStep.chopping", ``))},
	{rule: "charge/droop", when: "burst", base: bursts, fail: list(pause("0.7 ms")), marginal: list(pause("0.44 ms")),
		open: list(to("stage.operatingPoints.0.burst.idleNodeVoltage", ``))},
	{rule: "charge/lowest-voltage", when: "clamped", base: clamped, fail: list(fundamental("60 Hz")), marginal: list(fundamental("80 Hz")),
		open: list(to("stage.operatingPoints.0.sinusoidal.displacementAngle", ``))},
	{rule: "charge/lowest-voltage", when: "six-step", base: commutated, fail: list(electrical("200 Hz")), marginal: list(electrical("285 Hz")),
		open: list(to("stage.operatingPoints.0.sixStep.duty", ``))},
	{rule: "charge/lowest-voltage", when: "burst", base: bursts, fail: list(pause("5 ms")), marginal: list(pause("3.9 ms")),
		open: list(to("stage.operatingPoints.0.burst.idleTime", ``))},
	{rule: "charge/gate-sufficiency", when: "clamped", base: clamped, fail: list(to("stage.highSide.driveVoltageMin", `"9.2 V"`)),
		marginal: list(to("stage.highSide.driveVoltageMin", `"8.6 V"`)), open: list(to("stage.highSide.driveVoltageMin", ``))},
	{rule: "charge/gate-sufficiency", when: "six-step", base: commutated, fail: list(electrical("60 Hz")), marginal: list(electrical("77 Hz")),
		open: list(to("stage.operatingPoints.0.sixStep.electricalFrequency", ``))},
	{rule: "charge/gate-sufficiency", when: "burst", base: bursts, fail: list(pause("9.2 ms")), marginal: list(pause("8.4 ms")),
		open: list(to("stage.operatingPoints.0.burst.activeTime", ``))},
	{rule: "duty/longest-on-time", when: "clamped", base: clamped, fail: list(fundamental("60 Hz")), marginal: list(fundamental("73 Hz")),
		open: list(to("stage.operatingPoints.0.sinusoidal.fundamentalFrequency", ``))},
	{rule: "duty/longest-on-time", when: "six-step", base: commutated, fail: list(electrical("200 Hz")), marginal: list(electrical("240 Hz")),
		open: list(to("stage.operatingPoints.0.sixStep.electricalFrequency", ``))},
	{rule: "duty/idle-refresh", when: "burst", base: bursts, fail: list(pause("5 ms")), marginal: list(pause("3.2 ms")),
		open: list(to("stage.operatingPoints.0.burst.idleNodeVoltage", ``))},
	{rule: "duty/largest-duty", when: "sinusoidal", base: slowSine, fail: list(index("1.05")), marginal: list(index("0.95")),
		open: list(to("stage.operatingPoints.0.sinusoidal.modulationIndex", ``))},
	{rule: "duty/shortest-pulse", role: "driver", when: "sinusoidal", base: append(slowSine, fundamental("100 Hz")), marginal: list(index("1.05")),
		open:       list(to("stage.operatingPoints.0.sinusoidal.modulationIndex", ``)),
		neverFails: "pulses shorter than the driver passes do not reach the switch, and those that do are no shorter",
		tried: [][]edit{list(index("1.3")), list(index("0.991")), list(fundamental("50 Hz"), index("1.15"),
			to("stage.operatingPoints.0.sinusoidal.zeroSequence", `"MIN_MAX"`))}},
	{rule: "duty/shortest-pulse", role: "driver", when: "burst", base: bursts, fail: list(burstDuty("0.006")), marginal: list(burstDuty("0.007")),
		open: list(to("stage.operatingPoints.0.burst.duty", ``))},
}
