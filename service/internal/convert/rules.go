package convert

import (
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/rule"
)

// ListRulesResponse writes rules of the catalogue, in the order given.
func ListRulesResponse(e Engine, rules []*rule.Rule) *pb.ListRulesResponse {
	out := &pb.ListRulesResponse{Engine: e.wire()}
	for _, r := range rules {
		out.Rules = append(out.Rules, wireRule(r))
	}
	return out
}

// GetRuleResponse writes one rule of the catalogue.
func GetRuleResponse(e Engine, r *rule.Rule) *pb.GetRuleResponse {
	return &pb.GetRuleResponse{Engine: e.wire(), Rule: wireRule(r)}
}

func wireRule(r *rule.Rule) *pb.Rule {
	return &pb.Rule{
		Id:                label(r.ID),
		Title:             label(r.Title),
		Since:             label(r.Since),
		Equation:          label(r.Equation),
		Limit:             label(r.Limit),
		Guard:             label(r.Guard),
		Needs:             r.Needs,
		Sources:           each(r.Sources, wireSource),
		SeverityFail:      severity(r.Fail),
		SeverityMarginal:  severity(r.Marginal),
		SeverityOpen:      severity(r.Open),
		Applies:           label(r.Applies),
		GuardsDestruction: proto.Bool(r.GuardsDestruction()),
	}
}
