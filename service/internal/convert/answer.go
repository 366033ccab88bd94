package convert

import (
	"math"
	"strconv"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/source"
	"floatrail/calc/stage"
)

// Caution stands in every answer.
const Caution = "High voltages and stored energy can kill. This answer is a design aid: its results must be confirmed by measurement. " +
	"Local codes and licensed practice take precedence."

// Engine is what answered.
type Engine struct {
	Version string // of the build
	RuleSet string // version of the rule catalogue
}

func (e Engine) wire() *pb.Engine {
	return &pb.Engine{Version: label(e.Version), RuleSet: label(e.RuleSet)}
}

// ReviewStageResponse writes a report as the answer of ReviewStage.
func ReviewStageResponse(e Engine, r *finding.Report, readings []Reading) *pb.ReviewStageResponse {
	return &pb.ReviewStageResponse{
		Engine:  e.wire(),
		StageId: label(r.StageID),
		Verdict: pb.Verdict_Value(pb.Verdict_Value_value[r.Verdict.String()]),
		Coverage: &pb.Coverage{
			Applicable: count(r.Coverage.Applicable), Evaluated: count(r.Coverage.Evaluated), Open: count(r.Coverage.Open),
		},
		Findings:      each(r.Findings, wireFinding),
		Assumptions:   each(r.Assumptions, wireAssumption),
		Readings:      each(readings, wireReading),
		UnusedWaivers: each(r.UnusedWaivers, wireWaiver),
		Caution:       proto.String(Caution),
		DutyLimits:    wireDutyLimits(r.DutyLimits),

		TransientStress: wireTransient(r.Transient),
	}
}

// SizeSupplyResponse writes a report as the answer of SizeSupply.
func SizeSupplyResponse(e Engine, r *finding.Report, readings []Reading) *pb.SizeSupplyResponse {
	a := ReviewStageResponse(e, r, readings)
	return &pb.SizeSupplyResponse{
		Engine: a.Engine, StageId: a.StageId, Verdict: a.Verdict, Coverage: a.Coverage, Findings: a.Findings, Assumptions: a.Assumptions,
		Readings: a.Readings, UnusedWaivers: a.UnusedWaivers, Caution: a.Caution, Sizing: wireSizing(r.Sizing),
	}
}

// CheckDutyLimitsResponse writes a report as the answer of CheckDutyLimits.
func CheckDutyLimitsResponse(e Engine, r *finding.Report, readings []Reading) *pb.CheckDutyLimitsResponse {
	a := ReviewStageResponse(e, r, readings)
	return &pb.CheckDutyLimitsResponse{
		Engine: a.Engine, StageId: a.StageId, Verdict: a.Verdict, Coverage: a.Coverage, Findings: a.Findings, Assumptions: a.Assumptions,
		Readings: a.Readings, UnusedWaivers: a.UnusedWaivers, Caution: a.Caution, DutyLimits: a.DutyLimits,
	}
}

// CheckTransientStressResponse writes a report as the answer of CheckTransientStress.
func CheckTransientStressResponse(e Engine, r *finding.Report, readings []Reading) *pb.CheckTransientStressResponse {
	a := ReviewStageResponse(e, r, readings)
	return &pb.CheckTransientStressResponse{
		Engine: a.Engine, StageId: a.StageId, Verdict: a.Verdict, Coverage: a.Coverage, Findings: a.Findings, Assumptions: a.Assumptions,
		Readings: a.Readings, UnusedWaivers: a.UnusedWaivers, Caution: a.Caution, TransientStress: a.TransientStress,
	}
}

// each converts the elements of a list; an empty one stays unset.
func each[A, B any](in []A, to func(*A) B) []B {
	if len(in) == 0 {
		return nil
	}
	out := make([]B, len(in))
	for i := range in {
		out[i] = to(&in[i])
	}
	return out
}

// label is a text, unset where empty.
func label(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}

func count(n int) *int32 { return proto.Int32(int32(min(max(n, math.MinInt32), math.MaxInt32))) }

// Significant is the number of digits of every number of an answer.
const Significant = 6

// Round rounds to the digits of an answer: decimal, ties by the exact binary value, and never -0.
func Round(v float64) float64 {
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return v + 0
	}
	var buf [32]byte
	out, err := strconv.ParseFloat(string(strconv.AppendFloat(buf[:0], v, 'e', Significant-1, 64)), 64)
	if err != nil {
		return v
	}
	return out
}

// number is a number of an answer, unset where there is none.
func number(v float64) *float64 {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return nil
	}
	v = Round(v)
	return &v
}

func measureOf(v float64, d quantity.Dimension) *pb.Measure {
	n := number(v)
	if n == nil {
		return nil
	}
	return &pb.Measure{Value: n, Unit: label(d.Unit()), Text: proto.String(quantity.Format(*n, d))}
}

func wireMeasure(m *finding.Measure) *pb.Measure { return measureOf(m.Value, m.Dimension) }

func wireSpan(s *finding.Span) *pb.Span {
	out := &pb.Span{Min: measureOf(s.Min, s.Dimension), Typ: measureOf(s.Typ, s.Dimension), Max: measureOf(s.Max, s.Dimension)}
	if out.Min == nil && out.Typ == nil && out.Max == nil {
		return nil
	}
	return out
}

func severity(s stage.Severity) pb.Severity_Value {
	return pb.Severity_Value(pb.Severity_Value_value[s.String()])
}

func outcome(o finding.Outcome) pb.Outcome_Value {
	return pb.Outcome_Value(pb.Outcome_Value_value[o.String()])
}

func wireFinding(f *finding.Finding) *pb.Finding {
	out := &pb.Finding{
		Rule:           label(f.Rule),
		Outcome:        outcome(f.Outcome),
		Severity:       severity(f.Severity),
		Title:          label(f.Title),
		Message:        label(f.Message),
		Subjects:       f.Subjects,
		OperatingPoint: label(f.OperatingPoint),
		Corner:         wireCorner(&f.Corner),
		Value:          wireMeasure(&f.Value),
		Limit:          wireMeasure(&f.Limit),
		Guard:          wireMeasure(&f.Guard),
		Margin:         wireMargin(&f.Margin),
		Typical:        wireMeasure(&f.Typical),
		Equation:       label(f.Equation),
		Inputs: each(f.Inputs, func(i *finding.Input) *pb.Input {
			return &pb.Input{Symbol: label(i.Symbol), Measure: wireMeasure(&i.Measure), Field: label(i.Field), Source: label(i.Source)}
		}),
		Ranking: each(f.Ranking, func(r *finding.Ranking) *pb.Ranking {
			return &pb.Ranking{Field: label(r.Field), Swing: wireMeasure(&r.Swing)}
		}),
		BreakEven: each(f.BreakEven, func(b *finding.BreakEven) *pb.BreakEven {
			return &pb.BreakEven{Field: label(b.Field), Measure: wireMeasure(&b.Measure)}
		}),
		Sources:  each(f.Sources, wireSource),
		Identity: label(f.Identity),
		Evidence: label(f.Evidence),
		Role:     label(f.Role),
		Missing:  f.Missing,
		Notes:    f.Notes,
		Points:   each(f.Points, wirePoint),
		Known:    proto.Bool(f.Known),
	}
	if f.Waiver != nil {
		out.Waiver = wireWaiver(f.Waiver)
	}
	return out
}

func wirePoint(p *finding.PointResult) *pb.PointResult {
	return &pb.PointResult{
		OperatingPoint: label(p.OperatingPoint), Outcome: outcome(p.Outcome), Value: wireMeasure(&p.Value), Limit: wireMeasure(&p.Limit),
		Margin: wireMargin(&p.Margin),
	}
}

func wireCorner(c *finding.Corner) *pb.Corner {
	if c.Name == "" && len(c.Settings) == 0 {
		return nil
	}
	return &pb.Corner{Name: label(c.Name), Settings: each(c.Settings, func(s *finding.Setting) *pb.Setting {
		return &pb.Setting{Field: label(s.Field), Bound: pb.Setting_Bound_Value(pb.Setting_Bound_Value_value[s.Bound.String()]), Value: wireMeasure(&s.Value)}
	})}
}

func wireMargin(m *finding.Margin) *pb.Margin {
	out := &pb.Margin{Absolute: wireMeasure(&m.Absolute), Relative: number(m.Relative)}
	if out.Absolute == nil && out.Relative == nil {
		return nil
	}
	return out
}

// wireSource spells out one key of the bibliography.
func wireSource(key *string) *pb.Reference {
	s, ok := source.Lookup(*key)
	if !ok {
		return &pb.Reference{Key: key}
	}
	title := s.Title
	for _, part := range [...]string{s.Publisher, s.Document, s.Year} {
		if part != "" {
			title += ", " + part
		}
	}
	return &pb.Reference{Key: &s.Key, Title: &title, Provenance: label(s.Provenance)}
}

func wireAssumption(a *stage.Assumption) *pb.Assumption {
	return &pb.Assumption{
		Field: label(a.Field), Assumed: label(a.Assumed), Reason: label(a.Reason),
		Direction: pb.Assumption_Direction_Value(pb.Assumption_Direction_Value_value[a.Direction.String()]),
	}
}

func wireReading(r *Reading) *pb.Reading {
	return &pb.Reading{Field: label(r.Field), Text: label(r.Text), Meaning: label(r.Meaning)}
}

func wireWaiver(w *finding.Waiver) *pb.Waiver {
	out := &pb.Waiver{Identity: label(w.Identity), Reason: label(w.Reason), Approver: label(w.Approver), Expiry: label(w.Expiry)}
	if n := number(w.WorstMargin); n != nil {
		out.WorstMargin = proto.String(quantity.Format(*n, quantity.Ratio))
	}
	return out
}
