package convert

import (
	"math"
	"reflect"
	"slices"
	"strings"
	"time"

	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// ReviewStage binds a request of ReviewStage.
func (b *Binder) ReviewStage(r *pb.ReviewStageRequest) (calc.Request, []Reading, []Fault) {
	return b.request(r.ProtoReflect(), common{r.GetParts(), r.GetPolicy(), r.GetWaivers(), r.AsOf, r.GetOptions()}, r.GetStage())
}

// SizeSupply binds a request of SizeSupply.
func (b *Binder) SizeSupply(r *pb.SizeSupplyRequest) (calc.Request, []Reading, []Fault) {
	return b.request(r.ProtoReflect(), common{parts: r.GetParts(), policy: r.GetPolicy(), options: r.GetOptions()}, r.GetStage())
}

// CheckDutyLimits binds a request of CheckDutyLimits.
func (b *Binder) CheckDutyLimits(r *pb.CheckDutyLimitsRequest) (calc.Request, []Reading, []Fault) {
	return b.request(r.ProtoReflect(), common{parts: r.GetParts(), policy: r.GetPolicy(), options: r.GetOptions()}, r.GetStage())
}

// CheckTransientStress binds a request of CheckTransientStress.
func (b *Binder) CheckTransientStress(r *pb.CheckTransientStressRequest) (calc.Request, []Reading, []Fault) {
	return b.request(r.ProtoReflect(), common{parts: r.GetParts(), policy: r.GetPolicy(), options: r.GetOptions()}, r.GetStage())
}

// ListDataGaps binds a request of ListDataGaps.
func (b *Binder) ListDataGaps(r *pb.ListDataGapsRequest) (calc.Request, []Reading, []Fault) {
	return b.request(r.ProtoReflect(), common{parts: r.GetParts(), policy: r.GetPolicy()}, r.GetStage())
}

// common is what requests have beside their stage.
type common struct {
	parts   []*pb.Part
	policy  *pb.Policy
	waivers []*pb.Waiver
	asOf    *string
	options *pb.Options
}

// request binds a request about one stage.
func (b *Binder) request(m protoreflect.Message, c common, st *pb.Stage) (calc.Request, []Reading, []Fault) {
	w := &walk{Binder: b}
	w.unknown(m, "request")
	w.bindParts(c.parts)
	s := w.stageAt(st, "stage")
	out := w.common(c)
	out.Stage = s
	return out, w.readings, report(w.faults)
}

// common binds all of a request but its stages.
func (w *walk) common(c common) calc.Request {
	out := calc.Request{Policy: w.policyAt(c.policy, "policy")}
	if c.asOf != nil {
		out.AsOf = *c.asOf
		w.date(out.AsOf, "asOf")
	}
	out.Waivers = w.waiversAt(c.waivers, out.AsOf, "waivers")
	out.Options = w.optionsAt(c.options, "options")
	return out
}

// stageAt binds a stage and checks it across its fields.
func (w *walk) stageAt(st *pb.Stage, path string) *stage.Stage {
	s := new(stage.Stage)
	if st == nil {
		w.fault(path, refusal("nothing", "a stage", ""))
	}
	w.message(w.stage, st.ProtoReflect(), reflect.Value{}, reflect.ValueOf(s).Elem(), path)
	if st != nil {
		w.checked(stage.Check(s), w.uses)
	}
	return s
}

// policyAt binds a policy over the default one.
func (w *walk) policyAt(p *pb.Policy, path string) stage.Policy {
	out := stage.DefaultPolicy()
	if p == nil {
		return out
	}
	w.message(w.policy, p.ProtoReflect(), reflect.Value{}, reflect.ValueOf(&out).Elem(), path)
	seen := make(map[string]bool, len(out.Severities))
	for i, o := range out.Severities {
		own := w.paths.element(path+".severities", i)
		switch {
		case o.Rule == "":
			w.fault(own+".rule", refusal("nothing", "the id of a rule", ""))
		case seen[o.Rule]:
			w.fault(own+".rule", refusal(quote(o.Rule), "each rule once", ""))
		case w.rules != nil && !slices.Contains(w.rules, o.Rule):
			w.fault(own+".rule", refusal(quote(o.Rule), "the id of a rule", suggestion(o.Rule, w.rules)))
		}
		seen[o.Rule] = true
		if o.Severity == stage.NoSeverity {
			w.fault(own+".severity", refusal("nothing", "one of NOTE, MINOR, MAJOR, CRITICAL", ""))
		}
	}
	for i, id := range out.Baseline {
		if !isIdentity(id) {
			w.fault(w.paths.element(path+".baseline", i), refusal(quote(id), identityText, ""))
		}
	}
	return out
}

const identityText = "the identity of a finding, 32 hexadecimal digits in lower case"

// isIdentity tells whether a text can name a finding.
func isIdentity(s string) bool {
	return len(s) == 32 && strings.Trim(s, "0123456789abcdef") == ""
}

// waiversAt binds waivers.
func (w *walk) waiversAt(in []*pb.Waiver, asOf, path string) []finding.Waiver {
	if len(in) > maxWaivers {
		w.fault(path, tooMany(len(in), maxWaivers))
		return nil
	}
	out := make([]finding.Waiver, len(in))
	seen := make(map[string]bool, len(in))
	for i := range in {
		own := w.paths.element(path, i)
		o := &out[i]
		o.WorstMargin = math.NaN()
		w.message(w.waiver, in[i].ProtoReflect(), reflect.Value{}, reflect.ValueOf(o).Elem(), own)
		switch {
		case !isIdentity(o.Identity):
			w.fault(own+".identity", refusal(quote(o.Identity), identityText, ""))
		case seen[o.Identity]:
			w.fault(own+".identity", refusal(quote(o.Identity), "one waiver for a finding", ""))
		}
		seen[o.Identity] = true
		w.required(o.Reason, own+".reason", "the reason for which the finding is accepted")
		w.required(o.Approver, own+".approver", "who accepted the finding")
		if o.Expiry != "" && w.date(o.Expiry, own+".expiry") && asOf == "" {
			w.fault(own+".expiry", refusal(quote(o.Expiry)+" without asOf", "the day at which waivers are judged in asOf", ""))
		}
	}
	if len(out) == 0 {
		return nil
	}
	return out
}

// optionsAt binds the options.
func (w *walk) optionsAt(in *pb.Options, path string) calc.Options {
	if in == nil {
		return calc.Options{}
	}
	m := in.ProtoReflect()
	w.unknown(m, path)
	out := calc.Options{PerPoint: in.GetPerPoint(), Simulate: in.GetSimulate(), Waveforms: in.GetWaveforms(), Trace: in.GetTrace()}
	if out.Waveforms && !out.Simulate {
		w.fault(path+".waveforms", refusal("true without simulate", "waveforms of simulated events alone: true in "+path+".simulate, or false or absent here", ""))
	}
	own := path + ".families"
	d := m.Descriptor().Fields().ByName("families")
	out.Families = w.labels(m.Get(d).List(), maxFamilies, own)
	for i, f := range out.Families {
		switch {
		case w.families != nil && !slices.Contains(w.families, f):
			w.fault(w.paths.element(own, i), refusal(quote(f), "one of "+strings.Join(w.families, ", "), suggestion(f, w.families)))
		case slices.Contains(out.Families[:i], f):
			w.fault(w.paths.element(own, i), refusal(quote(f), "each family once", ""))
		}
	}
	return out
}

// Options binds what the answer shall contain.
func (b *Binder) Options(in *pb.Options) (calc.Options, []Fault) {
	w := &walk{Binder: b}
	out := w.optionsAt(in, "options")
	return out, report(w.faults)
}

// families are the heads of the ids of rules, each once and in the order of the catalogue.
func families(ids []string) []string {
	var out []string
	for _, id := range ids {
		if head, _, _ := strings.Cut(id, "/"); !slices.Contains(out, head) {
			out = append(out, head)
		}
	}
	return out
}

// date checks a day.
func (w *walk) date(text, path string) bool {
	if _, err := time.Parse(time.DateOnly, text); err != nil {
		w.fault(path, refusal(quote(text), "a day as YYYY-MM-DD", ""))
		return false
	}
	return true
}
