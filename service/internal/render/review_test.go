package render

import (
	"bytes"
	"context"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf8"

	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/wire"
)

// scripted answers by the id of the stage.
type scripted struct{ requests []*pb.ReviewStageRequest }

func (s *scripted) ReviewStage(ctx context.Context, q *pb.ReviewStageRequest) (*pb.ReviewStageResponse, error) {
	if r := wire.ReportOf(ctx); len(r.Faults) > 0 {
		return nil, status.Error(codes.InvalidArgument, r.Faults[0].Description)
	}
	s.requests = append(s.requests, proto.CloneOf(q))
	a := &pb.ReviewStageResponse{StageId: q.GetStage().Id, Caution: proto.String("Mind the volts.")}
	switch q.GetStage().GetId() {
	case "pass":
		a.Verdict = pb.Verdict_PASS
	case "fail":
		a.Verdict = pb.Verdict_FAIL
	case "incomplete":
		a.Verdict = pb.Verdict_INCOMPLETE
	case "panic":
		panic("broken")
	default:
		return nil, errors.New("broken")
	}
	return a, nil
}

func review(t *testing.T, o Options) (exit int, out, errs string, requests []*pb.ReviewStageRequest) {
	t.Helper()
	var stdout, stderr bytes.Buffer
	o.Stdout, o.Stderr = &stdout, &stderr
	s := &scripted{}
	exit = Review(context.Background(), s, o)
	return exit, stdout.String(), stderr.String(), s.requests
}

func files(t *testing.T, texts ...string) []string {
	t.Helper()
	var names []string
	dir := t.TempDir()
	for i, text := range texts {
		name := filepath.Join(dir, string(rune('a'+i))+".json")
		if err := os.WriteFile(name, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		names = append(names, name)
	}
	return names
}

func TestExitStatus(t *testing.T) {
	const pass, fail, incomplete = `{"id":"pass"}`, `{"stage":{"id":"fail"}}`, `{"id":"incomplete"}`
	for _, c := range []struct {
		exit  int
		texts []string
	}{
		{ExitPass, []string{pass, pass}},
		{ExitFail, []string{pass, fail, incomplete}},
		{ExitIncomplete, []string{incomplete, pass}},
		{ExitFault, []string{fail, `{`}},
		{ExitInternal, []string{`{"id":"?"}`, `{`, fail}},
		{ExitInternal, []string{`{"id":"panic"}`, pass}},
		{ExitFail, []string{`{"stages":[{"id":"pass"},{"id":"fail"}]}`}},
		{ExitFault, []string{`{"stages":[{"id":"pass"},{"id":"pass"}]}`}},
		{ExitFault, []string{`{"stages":[]}`}},
	} {
		if exit, out, errs, _ := review(t, Options{Files: files(t, c.texts...)}); exit != c.exit {
			t.Errorf("%q: %d, want %d\n%s%s", c.texts, exit, c.exit, out, errs)
		}
	}
}

func TestFlagsReplaceWhatFilesSay(t *testing.T) {
	policy := files(t, `{"name":"house","guardRatio":"20 %"}`)[0]
	names := files(t, `{"stage":{"id":"pass"},"policy":{"name":"own"},"options":{"families":["duty"]}}`, `{"id":"pass"}`)
	_, _, errs, requests := review(t, Options{Files: names, Policy: policy, Families: []string{"charge", "gate"}, PerPoint: true, Simulate: true})
	if errs != "" || len(requests) != 2 {
		t.Fatal(errs, requests)
	}
	for _, q := range requests {
		if q.GetPolicy().GetName() != "house" || strings.Join(q.GetOptions().GetFamilies(), " ") != "charge gate" || !q.GetOptions().GetPerPoint() || !q.GetOptions().GetSimulate() {
			t.Errorf("%v", q)
		}
	}
	_, _, _, requests = review(t, Options{Files: names[:1]})
	if q := requests[0]; q.GetPolicy().GetName() != "own" || q.GetOptions().GetFamilies()[0] != "duty" || q.GetOptions().GetPerPoint() || q.GetOptions().GetSimulate() {
		t.Errorf("%v", q)
	}
	exit, _, errs, _ := review(t, Options{Files: names, Policy: files(t, `{"gaurdRatio":"20 %"}`)[0]})
	if exit != ExitFault || !strings.Contains(errs, "gaurdRatio: read the unknown field") {
		t.Error(exit, errs)
	}
}

func TestBoard(t *testing.T) {
	text := `{"parts":[{"id":"r1","resistor":{}}],"asOf":"2026-01-01","policy":{"name":"p"},"stages":[
		{"id":"pass","gateSupply":{"id":"vdd","voltage":{"typ":"12 V"}}},
		{"id":"fail","gateSupply":{"id":"vdd","voltage":{"typ":"12 V"}}},
		{"id":"incomplete","gateSupply":{"id":"other"}}]}`
	exit, out, errs, requests := review(t, Options{Files: []string{"-"}, Stdin: strings.NewReader(text)})
	if exit != ExitFail || errs != "" || len(requests) != 3 || strings.Count(out, "(-)") != 3 || strings.Count(out, "Mind the volts.") != 1 {
		t.Fatalf("%d %s %s", exit, out, errs)
	}
	for i, sharing := range []int32{2, 2, 0} {
		q := requests[i]
		if q.GetStage().GetGateSupply().GetStagesSharing() != sharing || q.GetParts()[0].GetId() != "r1" || q.GetAsOf() != "2026-01-01" || q.GetPolicy().GetName() != "p" {
			t.Errorf("%d: %v", i, q)
		}
	}
	text = strings.Replace(text, `"12 V"}}},
		{"id":"fail"`, `"15 V"}}},
		{"id":"pass"`, 1)
	exit, _, errs, _ = review(t, Options{Files: []string{"-"}, Stdin: strings.NewReader(text)})
	if exit != ExitFault || !strings.Contains(errs, "-: stages[1].id: read the id of stages[0] again") ||
		!strings.Contains(errs, "-: stages[1].gateSupply: read other values than in stages[0] under the same id") {
		t.Errorf("%d %s", exit, errs)
	}
}

func TestTextIsWrapped(t *testing.T) {
	m := func(text string) *pb.Measure { return &pb.Measure{Value: proto.Float64(1), Text: &text} }
	long := strings.Repeat("The lowest V_BS of 8.97 V stays above V_UV- at ΔV ", 8)
	p := &page{}
	p.stage("x.json", &pb.ReviewStageResponse{
		StageId: proto.String(strings.Repeat("x", 260)), Verdict: pb.Verdict_FAIL, Coverage: &pb.Coverage{Applicable: proto.Int32(3), Evaluated: proto.Int32(2), Open: proto.Int32(1)},
		Findings: []*pb.Finding{
			{Rule: proto.String("c/pass"), Outcome: pb.Outcome_PASS, Message: &long},
			{Rule: proto.String("b/marginal"), Outcome: pb.Outcome_MARGINAL, Severity: pb.Severity_CRITICAL, Message: &long, Margin: &pb.Margin{Absolute: m("3 mV"), Relative: proto.Float64(0.0123)}},
			{Rule: proto.String("b/open"), Outcome: pb.Outcome_OPEN, Severity: pb.Severity_MAJOR, Message: proto.String("Cannot be evaluated: missing driver.a."), Missing: []string{"stage.driver.a", "stage.driver.b"}},
			{Rule: proto.String("a/minor"), Outcome: pb.Outcome_FAIL, Severity: pb.Severity_MINOR, Message: &long, OperatingPoint: proto.String("hot"),
				Waiver: &pb.Waiver{Approver: proto.String("M. Rivera"), Expiry: proto.String("2027-01-31")}, Known: proto.Bool(true)},
			{Rule: proto.String("a/critical"), Role: proto.String("highSide"), Outcome: pb.Outcome_FAIL, Severity: pb.Severity_CRITICAL, Message: &long,
				Points: []*pb.PointResult{{OperatingPoint: proto.String("cold"), Outcome: pb.Outcome_FAIL, Value: m("7 V"), Limit: m("9 V"), Margin: &pb.Margin{Absolute: m("-2 V")}}}},
		},
		Assumptions: []*pb.Assumption{{Field: proto.String("stage.a"), Assumed: proto.String("1 A"), Reason: proto.String("not given"), Direction: pb.Assumption_Direction_OPTIMISTIC},
			{Field: proto.String("stage.b"), Assumed: proto.String("2 A"), Reason: proto.String("not given"), Direction: pb.Assumption_Direction_CONSERVATIVE}},
	}, false)
	text := p.String()
	last := -1
	for _, want := range []string{"FAIL        xxx", "2 of 3 applicable checks decided, 1 open: 1 PASS, 1 MARGINAL, 2 FAIL, 1 OPEN", "CRITICAL  a/critical of highSide",
		`also "cold": FAIL, 7 V against 9 V, margin -2 V`, `MINOR     a/minor at "hot" [waived by M. Rivera until 2027-01-31; known]`, "MAJOR     b/open", "missing: stage.driver.b\n",
		"CRITICAL  b/marginal, margin 3 mV (1.23 %)", "Assumed: 2 values, 1 of them optimistic", "optimistic    stage.a = 1 A (not given)"} {
		at := strings.Index(text, want)
		if at < 0 || at < last {
			t.Errorf("%q is missing or out of order in\n%s", want, text)
		}
		last = max(at, last)
	}
	if strings.Contains(text, "c/pass") || strings.Contains(text, "stage.b") {
		t.Error("what is quiet is shown")
	}
	for _, line := range strings.Split(text, "\n") {
		if utf8.RuneCountInString(line) > width || strings.TrimRight(line, " ") != line {
			t.Errorf("%q", line)
		}
	}
}
