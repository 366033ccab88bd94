package property

import "testing"

// driveModes is the drive stage in the modes of a drive: driving and regenerating with a clamped phase, six-step at low speed, bursts in standby.
func driveModes(t testing.TB) any {
	t.Helper()
	tree := document(t, "drive400")
	points := lookup(tree, at("stage.operatingPoints")).([]any)
	of := func(k int, name, mode, text string) any {
		out := without(points[k], path{"fixedDuty"}).(map[string]any)
		out["name"] = name
		return with(out, to(mode, text))
	}
	return with(tree, edit{at("stage.operatingPoints"), []any{
		of(0, "driving", "sinusoidal", `{"modulationIndex": {"min": "0.1", "typ": "0.8", "max": "1.1"}, "fundamentalFrequency": {"min": "9 Hz", "typ": "50 Hz", "max": "80 Hz"},
			"displacementAngle": {"min": "20 deg", "typ": "30 deg", "max": "45 deg"}, "zeroSequence": "CLAMP_60"}`),
		of(0, "regenerating", "sinusoidal", `{"modulationIndex": {"min": "0.1", "typ": "0.7", "max": "0.95"}, "fundamentalFrequency": {"typ": "40 Hz"},
			"displacementAngle": {"min": "150 deg", "typ": "160 deg", "max": "170 deg"}, "zeroSequence": "MIN_MAX"}`),
		of(0, "six steps", "sixStep", `{"electricalFrequency": {"min": "35 Hz", "typ": "60 Hz", "max": "100 Hz"}, "chopping": "LOW_SIDE", "duty": {"min": "0.2", "typ": "0.5", "max": "0.8"}}`),
		of(0, "standby", "burst", `{"duty": {"min": "0.3", "typ": "0.4", "max": "0.5"}, "activeTime": {"min": "0.9 ms", "typ": "1 ms", "max": "1.1 ms"},
			"idleTime": {"min": "4 ms", "typ": "5 ms", "max": "6 ms"}, "idleNodeVoltage": {"min": "0 V", "typ": "1 V", "max": "60 V"}}`),
	}})
}
