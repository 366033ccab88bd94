package acceptance

import (
	"math"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// traced are the points of a trace.
func traced(a *pb.ReviewStageResponse, kind pb.TracePoint_Kind_Value) (out []*pb.TracePoint) {
	for _, p := range a.GetDutyLimits().GetTrace() {
		if p.GetKind() == kind {
			out = append(out, p)
		}
	}
	return out
}

// Traces over what each mode repeats, and over the first charge, against the exponential of R·C and the line of I·t/C; no trace without the option.
func TestTraces(t *testing.T) {
	c := serve(t)
	// A switch of 40 Ω and a resistor of 60 Ω charge 1 µF: (V_DD - I·R)·(1 - exp(-t/(R·C))).
	switched := edits{"bootstrap.element": `"INTEGRATED_SWITCH"`, "bootstrap.switchResistance": "40 ohm", "bootstrap.resistor.resistance": "60 ohm",
		"driver.uvloRising": "9 V", "driver.floatingQuiescentCurrent": "200 uA"}
	answer := c.review(request(t, switched, held("11 V", "5 ms"), edits{"/options": `{"trace":true}`}))
	charge := traced(answer, pb.TracePoint_Kind_PRECHARGE)
	if len(charge) < 50 {
		t.Fatalf("%d points of the first charge", len(charge))
	}
	for _, p := range charge {
		s := p.GetTime().GetValue()
		settled := 12 - 200e-6*100.0
		near(t, "first charge", p.GetFloatingVoltage(), settled*-math.Expm1(-s/100e-6), 1e-4)
	}
	hold := traced(answer, pb.TracePoint_Kind_HOLD)
	if len(hold) < 20 || hold[0].GetOperatingPoint() != "point" {
		t.Fatalf("%d points of the hold", len(hold))
	}
	for _, p := range hold { // 1 µF, 200 µA [l6386e]
		near(t, "hold", p.GetFloatingVoltage(), 11-200e-6*p.GetTime().GetValue()/1e-6, 1e-4)
	}
	if n := len(c.review(request(t, switched, held("11 V", "5 ms"))).GetDutyLimits().GetTrace()); n != 0 {
		t.Errorf("%d points without the option", n)
	}

	drive := edits{"driver.floatingQuiescentCurrent": "180 uA", "bootstrap.capacitor.effectiveCapacitance": "2.8 uF", "operatingPoints.0.switchingFrequency": "20 kHz",
		"operatingPoints.0.deadTime": "500 ns", "operatingPoints.0.fixedDuty": ``, "driver.uvloRising": "9 V", "/options": `{"trace":true}`}
	for _, z := range []struct {
		mode, body string
		kind       pb.TracePoint_Kind_Value
	}{
		{"sinusoidal", `{"modulationIndex":{"typ":"0.9"},"fundamentalFrequency":{"typ":"5 Hz"},"displacementAngle":{"typ":"30 deg"},"zeroSequence":"CLAMP_60"}`, pb.TracePoint_Kind_FUNDAMENTAL},
		{"sixStep", `{"electricalFrequency":{"typ":"5 Hz"},"chopping":"LOW_SIDE","duty":{"typ":"0.5"}}`, pb.TracePoint_Kind_FUNDAMENTAL},
		{"burst", `{"duty":{"typ":"0.5"},"activeTime":{"typ":"2 ms"},"idleTime":{"typ":"10 ms"},"idleNodeVoltage":{"typ":"24 V"}}`, pb.TracePoint_Kind_BURST},
		{"fixedDuty", `{"duty":{"typ":"0.5"}}`, pb.TracePoint_Kind_PERIOD},
	} {
		mode, kind := z.mode, z.kind
		answer := c.review(request(t, drive, edits{"operatingPoints.0." + mode: z.body}))
		points := traced(answer, kind)
		if len(points) < 20 || len(points) > 2000 {
			t.Fatalf("%s: %d points", mode, len(points))
		}
		low, high, last := math.Inf(1), math.Inf(-1), -1.0
		for _, p := range points {
			v, s := p.GetFloatingVoltage().GetValue(), p.GetTime().GetValue()
			if s < last {
				t.Fatalf("%s: time runs back to %g", mode, s)
			}
			if (p.GetAngle() != nil) != (kind == pb.TracePoint_Kind_FUNDAMENTAL) {
				t.Fatalf("%s: angle %v", mode, p.GetAngle())
			}
			low, high, last = math.Min(low, v), math.Max(high, v), s
		}
		point := answer.GetDutyLimits().GetPoints()[0]
		near(t, mode+": lowest", point.GetFloatingVoltageLow().GetMin(), low, 1e-3)
		near(t, mode+": highest", point.GetFloatingVoltageHigh().GetMax(), high, 1e-3)
	}
}
