package acceptance

import (
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// both asks for the findings of a request by ReviewStage and by CheckTransientStress; both must answer alike.
func both(t *testing.T, c client, body string, check func(t *testing.T, findings []*pb.Finding, verdict pb.Verdict_Value)) {
	t.Helper()
	t.Run("review", func(t *testing.T) {
		a := c.of(t).review(body)
		check(t, a.GetFindings(), a.GetVerdict())
	})
	t.Run("transient stress", func(t *testing.T) {
		a := c.of(t).stress(body)
		check(t, a.GetFindings(), a.GetVerdict())
	})
}

// Case 5: L2 10 nH, 30 A, 1 A/ns measured, V_F 1.2 V; rows -5 V static, -12 V for 100 ns, -20 V for 20 ns. The naive answer compares with
// -20 V; but the undershoot lasts for 30 A/(1 A/ns) = 30 ns and falls in the row of 100 ns. Forward recovery is not given.
func TestUndershootFallsInTheLongerRow(t *testing.T) {
	c := serve(t)
	stage := func(more ...edits) string {
		return request(t, join(append([]edits{switching("100 kHz", "50 %", "100 ns"), {
			"layout.lowSideInductance": "10 nH", "operatingPoints.0.loadCurrent": "30 A", "layout.measured.turnOffCurrentSlope": "1 A/ns",
			"lowSide.reverse.forwardPoints": drops(1.2), "driver.nodeUndershoot": rows, "lowSide.reverse.peakForwardRecovery": "",
		}}, more...)...))
	}
	body := stage()
	both(t, c, body, func(t *testing.T, findings []*pb.Finding, _ pb.Verdict_Value) {
		f := find(t, findings, "node/undershoot-pulse", "driver")
		judged(t, f, marginal, major)
		near(t, "undershoot", f.GetValue(), -11.2, 2e-4)
		near(t, "limit", f.GetLimit(), -12, 0)
		near(t, "guard", f.GetGuard(), -10.8, 1e-6)
		near(t, "margin", f.GetMargin().GetAbsolute(), 0.8, 2e-4)
		says(t, f, "-11.2 V for 30 ns")
	})
	assumed := false
	for _, a := range c.stress(body).GetAssumptions() {
		assumed = assumed || a.GetField() == "stage.lowSide.reverse.peakForwardRecovery" && a.GetDirection() == pb.Assumption_Direction_OPTIMISTIC
	}
	if !assumed {
		t.Errorf("no assumption about forward recovery: %v", c.stress(body).GetAssumptions())
	}
	e := c.event(body, pb.TransientEvent_Event_TURN_OFF)
	all(t, "node", e.GetNodeMin(), -11.2, 2e-4)
	all(t, "pin", e.GetPinMin(), -11.2, 2e-4)
	all(t, "slope", e.GetCurrentSlope(), 1e9, 0)
	undershoots(t, e, []float64{-5, -12, -20}, []float64{30e-9, 0, 0})

	// The same depth for 20 ns may be as deep as -20 V, for 101 ns as little as -5 V. With forward recovery known there is nothing optimistic.
	known := edits{"lowSide.reverse.peakForwardRecovery": "0 V"}
	f := find(t, c.review(stage(known, edits{"operatingPoints.0.loadCurrent": "20 A"})).GetFindings(), "node/undershoot-pulse", "driver")
	judged(t, f, pass, none)
	near(t, "limit for 20 ns", f.GetLimit(), -20, 0)
	f = find(t, c.review(stage(known, edits{"operatingPoints.0.loadCurrent": "101 A"})).GetFindings(), "node/undershoot-pulse", "driver")
	judged(t, f, fail, critical)
	near(t, "limit for 101 ns", f.GetLimit(), -5, 0)
}

// undershoots demands levels [V] and the times below them [s] of an event.
func undershoots(t *testing.T, e *pb.TransientEvent, levels, durations []float64) {
	t.Helper()
	got := e.GetUndershoots()
	if len(got) != len(levels) {
		t.Fatalf("%d levels, want %d", len(got), len(levels))
	}
	for i, u := range got {
		near(t, "level", u.GetLevel(), levels[i], 0)
		all(t, "time below "+u.GetLevel().GetText(), u.GetDuration(), durations[i], 1e-15)
	}
}

// Case 6: a spike of -7 V, V_BS 12 V running, V_UV-,min 6.5 V, railMin -0.3 V. The naive answer is V_B = 12 V - 7 V = +5 V; but lockout itself
// turns the high side off, with 6.5 V left.
func TestLockoutTurnsOffBelowCOM(t *testing.T) {
	c := serve(t)
	stage := func(more ...edits) string {
		return request(t, join(append([]edits{switching("100 kHz", "50 %", "100 ns"), {
			"gateSupply.voltage": "12.4 V", "driver.uvloFalling": `{"min":"6.5 V","typ":"7 V","max":"7.5 V"}`, "driver.railMin": `"-0.3 V"`, "driver.railOperationalMin": `"-0.3 V"`,
			"layout.lowSideInductance": "6 nH", "layout.measured.turnOffCurrentSlope": "1 A/ns", "operatingPoints.0.loadCurrent": "10 A",
			"lowSide.reverse.forwardPoints": drops(1), "bootstrap.resistor.resistance": "0.1 ohm",
		}}, more...)...))
	}
	body := stage()
	running := c.duty(stage(edits{"operatingPoints.0.loadCurrent": "0 A"})).GetFloatingVoltageHigh()
	all(t, "V_BS running", running, 12, 4e-4)
	both(t, c, body, func(t *testing.T, findings []*pb.Finding, verdict pb.Verdict_Value) {
		f := find(t, findings, "node/rail-below-com", "driver")
		judged(t, f, fail, critical)
		near(t, "V_B", f.GetValue(), -0.5, 2e-4)
		near(t, "limit", f.GetLimit(), -0.3, 0)
		near(t, "margin", f.GetMargin().GetAbsolute(), -0.2, 2e-4)
		if verdict != pb.Verdict_FAIL {
			t.Errorf("verdict %v", verdict)
		}
	})
	e := c.event(body, pb.TransientEvent_Event_TURN_OFF)
	all(t, "spike", e.GetNodeMin(), -7, 2e-4)
	near(t, "V_B, lowest", e.GetRailToComMin().GetMin(), -0.5, 2e-4)
	near(t, "V_B, typical", e.GetRailToComMin().GetTyp(), 0, 2e-4)
	near(t, "V_B, highest", e.GetRailToComMin().GetMax(), 0.5, 2e-4)
	// A lockout at 7 V leaves V_B at COM.
	f := find(t, c.review(stage(edits{"driver.uvloFalling": "7 V"})).GetFindings(), "node/rail-below-com", "driver")
	judged(t, f, pass, none)
	near(t, "V_B with a lockout at 7 V", f.GetValue(), 0, 2e-4)
}

// Case 9: a stage of which every rule passes, and the same without L2. The naive answer passes it still.
func TestUnknownInductanceIsNotNone(t *testing.T) {
	c := serve(t)
	body := overloaded(t, request(t, switching("100 kHz", "50 %", "100 ns"), sound()))
	both(t, c, body, func(t *testing.T, findings []*pb.Finding, verdict pb.Verdict_Value) {
		if verdict != pb.Verdict_PASS {
			t.Errorf("verdict of the whole stage %v", verdict)
		}
		for _, f := range findings {
			if o := f.GetOutcome(); o != pass && o != pb.Outcome_NOT_APPLICABLE {
				t.Errorf("%s %s of the whole stage: %v %s", f.GetRule(), f.GetRole(), o, f.GetMessage())
			}
		}
	})
	const field = "stage.layout.lowSideInductance"
	both(t, c, edit(t, body, edits{"layout.lowSideInductance": ""}), func(t *testing.T, findings []*pb.Finding, verdict pb.Verdict_Value) {
		if verdict != pb.Verdict_INCOMPLETE {
			t.Errorf("verdict %v", verdict)
		}
		for _, z := range []struct {
			rule, role string
			henry      float64 // at which the rule turns [H]
		}{
			{"node/undershoot-pulse", "driver", (12 - 1.2) / 1e9}, // the row of 100 ns
			{"node/rail-below-com", "driver", (5 + 3 - 1.2) / 1e9},
		} {
			f := find(t, findings, z.rule, z.role)
			judged(t, f, open, major)
			if m := f.GetMissing(); len(m) != 1 || m[0] != field {
				t.Errorf("%s: missing %v", z.rule, m)
			}
			says(t, f, "layout.lowSideInductance")
			if b := f.GetBreakEven(); len(b) != 1 || b[0].GetField() != field {
				t.Errorf("%s: break-even %v", z.rule, b)
			} else {
				near(t, z.rule+": break-even", b[0].GetMeasure(), z.henry, 1e-12)
			}
		}
		judged(t, find(t, findings, "gate/overvoltage", "driver"), open, major)
	})
	for _, e := range c.stress(edit(t, body, edits{"layout.lowSideInductance": ""})).GetTransientStress().GetEvents() {
		if e.GetNodeMin().GetMin() != nil || e.GetPinMin().GetTyp() != nil {
			t.Errorf("%v without L2: %v", e.GetEvent(), e.GetNodeMin())
		}
	}
}
