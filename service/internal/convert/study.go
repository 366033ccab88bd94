package convert

import (
	"strconv"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
	"floatrail/calc/study"
)

// StudyNote stands in every answer of StudyTolerances.
const StudyNote = "A study decides nothing that extreme values decide: absolute maxima, lockout, latch-up and shoot-through are judged by ReviewStage over " +
	"the worst case, which stands in extreme. Shares and percentiles hold for the distribution that was drawn, which no data sheet promises."

// StudyTolerances binds a request of StudyTolerances.
func (b *Binder) StudyTolerances(r *pb.StudyTolerancesRequest) (study.Request, []Reading, []Fault) {
	w := &walk{Binder: b}
	w.unknown(r.ProtoReflect(), "request")
	w.bindParts(r.GetParts())
	out := study.Request{Stage: w.stageAt(r.GetStage(), "stage"), Draws: study.DefaultDraws, Seed: r.GetSeed()}
	common := w.common(common{policy: r.GetPolicy(), options: r.GetOptions()})
	out.Policy, out.Families = common.Policy, common.Options.Families
	if r.Draws != nil {
		out.Draws = w.draws(r.GetDraws(), len(out.Stage.OperatingPoints.Items))
	}
	switch d := r.GetDistribution(); d {
	case pb.StudyTolerancesRequest_Distribution_UNSPECIFIED, pb.StudyTolerancesRequest_Distribution_UNIFORM:
	case pb.StudyTolerancesRequest_Distribution_NORMAL:
		out.Distribution = study.Normal
	default:
		w.fault("distribution", refusal("the number "+strconv.Itoa(int(d)), "one of "+choices(enumNames(d.Descriptor())), ""))
	}
	return out, w.readings, report(w.faults)
}

// draws checks the number of draws for a number of operating points.
func (w *walk) draws(n uint32, points int) int {
	most, reason := study.Most(points), ""
	if most < study.Most(1) {
		reason = "the stage has " + strconv.Itoa(points) + " operating points, and the work is bounded"
	}
	if n < 1 || n > uint32(most) {
		w.fault("draws", refusal(strconv.FormatUint(uint64(n), 10), "a number of draws from 1 to "+strconv.Itoa(most), reason))
	}
	return int(n)
}

// StudyProgress writes the progress of a study.
func StudyProgress(e Engine, r *study.Request, p study.Progress) *pb.StudyTolerancesResponse {
	out := studyHead(e, r.Stage.ID, r.Draws, r.Seed, r.Distribution)
	out.Done, out.Within = natural(p.Done), natural(p.Within)
	return out
}

// studyHead is what every message of a study has.
func studyHead(e Engine, id string, draws int, seed uint32, d study.Distribution) *pb.StudyTolerancesResponse {
	return &pb.StudyTolerancesResponse{
		Engine: e.wire(), StageId: label(id), Draws: natural(draws), Seed: proto.Uint32(seed),
		Distribution: pb.StudyTolerancesRequest_Distribution_Value(pb.StudyTolerancesRequest_Distribution_Value_value[d.String()]),
	}
}

// StudyTolerancesResponse writes the report of a study as the last message.
func StudyTolerancesResponse(e Engine, r *study.Report, readings []Reading) *pb.StudyTolerancesResponse {
	out := studyHead(e, r.StageID, r.Draws, r.Seed, r.Distribution)
	o := &r.Overall
	out.Done, out.Within = natural(r.Draws), natural(o.Yield.Count)
	out.Overall = &pb.OverallYield{Share: number(o.Yield.Value), Interval: wireInterval(&o.Yield), Within: natural(o.Yield.Count),
		Failed: natural(o.Failed), Open: natural(o.Open)}
	out.Yields = each(r.Results, wireYield)
	out.Percents, out.Confidence = study.Percents(), number(study.Confidence)
	out.Assumptions, out.Readings = each(r.Assumptions, wireAssumption), each(readings, wireReading)
	out.Note, out.Caution = proto.String(StudyNote), proto.String(Caution)
	return out
}

func natural(n int) *uint32 { return proto.Uint32(uint32(max(n, 0))) }

func wireInterval(s *study.Share) *pb.ShareInterval {
	if s.Of == 0 {
		return nil
	}
	return &pb.ShareInterval{Low: number(s.Low), High: number(s.High)}
}

func wireYield(r *study.Result) *pb.RuleYield {
	out := &pb.RuleYield{
		Rule: label(r.Rule), Role: label(r.Role), OperatingPoint: label(r.Point),
		Share: number(r.Yield.Value), Interval: wireInterval(&r.Yield),
		GuardShare: number(r.Guarded.Value), GuardInterval: wireInterval(&r.Guarded),
		Passed: natural(r.Guarded.Count), Marginal: natural(r.Marginal), Failed: natural(r.Failed), Open: natural(r.Open),
		Percentiles: each(r.Percentiles, func(p *study.Percentile) *pb.Measure { return wireElement(p.Value.Value, p.Value.Dimension) }),
		PercentileIntervals: each(r.Percentiles, func(p *study.Percentile) *pb.Window {
			return &pb.Window{Low: wireMeasure(&p.Low), High: wireMeasure(&p.High)}
		}),
		Smallest: wireMeasure(&r.Smallest), Largest: wireMeasure(&r.Largest), LeastMargin: wireMargin(&r.LeastMargin),
		Ranking: each(r.Ranking, func(c *study.Correlation) *pb.Correlation {
			return &pb.Correlation{Field: label(c.Field), Symbol: label(c.Symbol), Rho: number(c.Rho), Squared: number(c.Rho * c.Rho)}
		}),
		Missing: r.Missing, Reasons: r.Reasons,
	}
	if r.Extreme != nil {
		out.Extreme = wirePoint(r.Extreme)
	}
	return out
}

// wireElement is a measure that keeps its place in a list even where it has no number.
func wireElement(v float64, d quantity.Dimension) *pb.Measure {
	if m := measureOf(v, d); m != nil {
		return m
	}
	return &pb.Measure{Unit: label(d.Unit())}
}
