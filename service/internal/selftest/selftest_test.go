package selftest

import (
	"strings"
	"testing"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
)

func TestRun(t *testing.T) {
	if err := Run(); err != nil {
		t.Error(err)
	}
}

func TestVerifyUndershootRefusesOtherNumbers(t *testing.T) {
	answer := func(event pb.TransientEvent_Event_Value, volts float64) *pb.CheckTransientStressResponse {
		return &pb.CheckTransientStressResponse{TransientStress: &pb.TransientStressResult{Events: []*pb.TransientEvent{
			{Event: event, NodeMin: &pb.Span{Min: &pb.Measure{Value: proto.Float64(volts)}}}}}}
	}
	if err := verifyUndershoot(answer(pb.TransientEvent_Event_TURN_OFF, -11.2)); err != nil {
		t.Error(err)
	}
	for want, a := range map[string]*pb.CheckTransientStressResponse{
		"undershoot is":     answer(pb.TransientEvent_Event_TURN_OFF, -11.3),
		"was not evaluated": answer(pb.TransientEvent_Event_TURN_ON, -11.2),
	} {
		if err := verifyUndershoot(a); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v, want %q", err, want)
		}
	}
}

func TestVerifyRefusesOtherNumbers(t *testing.T) {
	answer := func(volts float64, outcome pb.Outcome_Value, margin float64) *pb.CheckDutyLimitsResponse {
		return &pb.CheckDutyLimitsResponse{
			DutyLimits: &pb.DutyLimitsResult{Points: []*pb.DutyPoint{{FloatingVoltageLow: &pb.Span{Min: &pb.Measure{Value: proto.Float64(volts)}}}}},
			Findings: []*pb.Finding{{Rule: proto.String("charge/lowest-voltage"), Outcome: outcome,
				Margin: &pb.Margin{Absolute: &pb.Measure{Value: proto.Float64(margin)}}}},
		}
	}
	if err := verify(answer(8.96876, pb.Outcome_MARGINAL, 0.0687566)); err != nil {
		t.Error(err)
	}
	for want, a := range map[string]*pb.CheckDutyLimitsResponse{
		"lowest V_BS":       answer(8.969, pb.Outcome_MARGINAL, 0.0687566),
		"want MARGINAL":     answer(8.96876, pb.Outcome_PASS, 0.0687566),
		"by":                answer(8.96876, pb.Outcome_MARGINAL, 0.07),
		"operating points":  {},
		"was not evaluated": {DutyLimits: answer(8.96876, 0, 0).GetDutyLimits()},
	} {
		if err := verify(a); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v, want %q", err, want)
		}
	}
}
