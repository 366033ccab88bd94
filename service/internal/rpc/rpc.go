// Package rpc answers the calls of the contract: it binds a request, has it computed and writes the report as the answer. It computes
// nothing itself.
package rpc

import (
	"context"
	"slices"
	"strconv"
	"strings"

	"google.golang.org/grpc"
	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc"
	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/study"
	"floatrail/service/internal/convert"
	"floatrail/service/internal/wire"
)

// Handlers are the methods of the contract.
type Handlers struct {
	pb.UnimplementedFloatRailServer
	engine  convert.Engine
	binder  *convert.Binder
	rules   []*rule.Rule
	ids     []string
	observe func(*finding.Report)
	studied func(*study.Report)
	carried func(context.Context) *wire.Report
}

// Options of the handlers.
type Options struct {
	// Version of the build.
	Version string
	// Observe is told of every report; nil: nobody.
	Observe func(*finding.Report)
	// Studied is told of every study; nil: nobody.
	Studied func(*study.Report)
	// Carried gives what the REST interface found wrong with the body of a call; nil: nothing ever.
	Carried func(context.Context) *wire.Report
}

// New returns the handlers.
func New(o Options) *Handlers {
	h := &Handlers{engine: convert.Engine{Version: o.Version, RuleSet: catalog.RuleSet}, rules: catalog.All(), observe: o.Observe,
		studied: o.Studied, carried: o.Carried}
	for _, r := range h.rules {
		h.ids = append(h.ids, r.ID)
	}
	h.binder = convert.New().WithRules(h.ids)
	if h.observe == nil {
		h.observe = func(*finding.Report) {}
	}
	if h.studied == nil {
		h.studied = func(*study.Report) {}
	}
	if h.carried == nil {
		h.carried = func(context.Context) *wire.Report { return nil }
	}
	return h
}

// SizeSupply answers with the charge budget and the parts that fit it.
func (h *Handlers) SizeSupply(ctx context.Context, r *pb.SizeSupplyRequest) (*pb.SizeSupplyResponse, error) {
	request, readings, faults := h.binder.SizeSupply(r)
	own(&request, "charge", "capacitor", "diode", "resistor")
	report, err := h.review(ctx, request, append(faults, notOffered(r.GetOptions(), noEvents, noFloating)...), calc.WithSizing)
	if err != nil {
		return nil, err
	}
	return convert.SizeSupplyResponse(h.engine, report, readings), nil
}

// CheckDutyLimits answers with the floating voltage of each operating point.
func (h *Handlers) CheckDutyLimits(ctx context.Context, r *pb.CheckDutyLimitsRequest) (*pb.CheckDutyLimitsResponse, error) {
	request, readings, faults := h.binder.CheckDutyLimits(r)
	own(&request, "charge", "supply", "duty")
	report, err := h.review(ctx, request, append(faults, notOffered(r.GetOptions(), noEvents, "")...), calc.WithDutyLimits)
	if err != nil {
		return nil, err
	}
	return convert.CheckDutyLimitsResponse(h.engine, report, readings), nil
}

// CheckTransientStress answers with the switching events of each operating point.
func (h *Handlers) CheckTransientStress(ctx context.Context, r *pb.CheckTransientStressRequest) (*pb.CheckTransientStressResponse, error) {
	request, readings, faults := h.binder.CheckTransientStress(r)
	own(&request, "gate", "node")
	report, err := h.review(ctx, request, append(faults, notOffered(r.GetOptions(), "", noFloating)...), calc.WithTransient)
	if err != nil {
		return nil, err
	}
	return convert.CheckTransientStressResponse(h.engine, report, readings), nil
}

// ReviewStage answers with every rule on one stage.
func (h *Handlers) ReviewStage(ctx context.Context, r *pb.ReviewStageRequest) (*pb.ReviewStageResponse, error) {
	request, readings, faults := h.binder.ReviewStage(r)
	report, err := h.review(ctx, request, append(faults, notOffered(r.GetOptions(), "", "")...), calc.WithDutyLimits|calc.WithTransient)
	if err != nil {
		return nil, err
	}
	return convert.ReviewStageResponse(h.engine, report, readings), nil
}

// StudyTolerances answers with the progress of a study and at last the study.
func (h *Handlers) StudyTolerances(r *pb.StudyTolerancesRequest, stream grpc.ServerStreamingServer[pb.StudyTolerancesResponse]) error {
	ctx := stream.Context()
	request, readings, faults := h.binder.StudyTolerances(r)
	if err := refusal(h.carried(ctx), append(faults, notOffered(r.GetOptions(), closedForm, noFloating)...)); err != nil {
		return err
	}
	report, err := study.Run(ctx, request, func(p study.Progress) error {
		return stream.Send(convert.StudyProgress(h.engine, &request, p))
	})
	if err != nil {
		return err
	}
	h.studied(&report)
	return stream.Send(convert.StudyTolerancesResponse(h.engine, &report, readings))
}

// own limits a check to the families it is about, where the request names none.
func own(r *calc.Request, families ...string) {
	if len(r.Options.Families) == 0 {
		r.Options.Families = families
	}
}

// review computes a request that has no faults.
func (h *Handlers) review(ctx context.Context, request calc.Request, faults []convert.Fault, parts int) (*finding.Report, error) {
	if err := refusal(h.carried(ctx), faults); err != nil {
		return nil, err
	}
	report, err := calc.Review(ctx, request, parts)
	if err != nil {
		return nil, err
	}
	// A report that was cut short by the end of the call is no answer.
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	h.observe(&report)
	return &report, nil
}

// ListRules answers with the rules of the named families, or all.
func (h *Handlers) ListRules(ctx context.Context, r *pb.ListRulesRequest) (*pb.ListRulesResponse, error) {
	faults := unknownFields(r)
	known := catalog.Families()
	for i, f := range r.GetFamilies() {
		if !slices.Contains(known, f) {
			faults = append(faults, convert.Fault{Field: "families[" + strconv.Itoa(i) + "]",
				Description: "read " + quote(f) + ", expected one of " + strings.Join(known, ", ") + nearest(f, known)})
		}
	}
	if err := refusal(h.carried(ctx), faults); err != nil {
		return nil, err
	}
	var rules []*rule.Rule
	for _, candidate := range h.rules {
		if len(r.GetFamilies()) == 0 || slices.Contains(r.GetFamilies(), candidate.Family()) {
			rules = append(rules, candidate)
		}
	}
	return convert.ListRulesResponse(h.engine, rules), nil
}

// GetRule answers with one rule.
func (h *Handlers) GetRule(ctx context.Context, r *pb.GetRuleRequest) (*pb.GetRuleResponse, error) {
	faults := unknownFields(r)
	if r.GetId() == "" {
		faults = append(faults, convert.Fault{Field: "id", Description: "read nothing, expected the id of a rule, such as " + h.ids[0]})
	}
	if err := refusal(h.carried(ctx), faults); err != nil {
		return nil, err
	}
	found, ok := catalog.Find(r.GetId())
	if !ok {
		return nil, status.Error(codes.NotFound, "there is no rule "+quote(r.GetId())+nearest(r.GetId(), h.ids))
	}
	return convert.GetRuleResponse(h.engine, found), nil
}

// Rules are all rules as the contract writes them.
func (h *Handlers) Rules() []*pb.Rule { return convert.ListRulesResponse(h.engine, h.rules).GetRules() }

// Engine is what answers.
func (h *Handlers) Engine() convert.Engine { return h.engine }

// unknownFields is the fault of a request of the catalogue that carries fields which the contract does not have.
func unknownFields(m proto.Message) []convert.Fault {
	if len(m.ProtoReflect().GetUnknown()) == 0 {
		return nil
	}
	return []convert.Fault{{Field: wire.Body, Description: "read a field that the contract does not have, expected only fields of " +
		string(m.ProtoReflect().Descriptor().Name())}}
}

func nearest(name string, known []string) string {
	if near := wire.Nearest(name, known); near != "" {
		return "; the nearest is " + quote(near)
	}
	return ""
}

// quote is a text of a client, cut to what a reader needs.
func quote(text string) string {
	const most = 64
	if runes := []rune(text); len(runes) > most {
		text = string(runes[:most]) + "…"
	}
	return strconv.Quote(text)
}
