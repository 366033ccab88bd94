package render

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/stage"
)

// body indents what belongs to a finding.
const body = "      "

// rank orders outcomes, worst first.
func rank(o pb.Outcome_Value) int {
	return slices.Index([]pb.Outcome_Value{pb.Outcome_FAIL, pb.Outcome_OPEN, pb.Outcome_MARGINAL, pb.Outcome_PASS, pb.Outcome_NOT_APPLICABLE}, o)
}

// quiet tells whether a finding is shown on demand only.
func quiet(f *pb.Finding) bool {
	return f.GetOutcome() == pb.Outcome_PASS || f.GetOutcome() == pb.Outcome_NOT_APPLICABLE
}

// stage writes the answer about one stage.
func (p *page) stage(file string, a *pb.ReviewStageResponse, all bool) {
	name := a.GetStageId()
	if name == "" {
		name = "stage without id"
	}
	p.paragraph(pad(a.GetVerdict().String(), 12), name+" ("+file+")")
	p.paragraph(strings.Repeat(" ", 12), counts(a))
	findings := slices.Clone(a.GetFindings())
	slices.SortStableFunc(findings, func(x, y *pb.Finding) int {
		if d := rank(x.GetOutcome()) - rank(y.GetOutcome()); d != 0 {
			return d
		}
		return int(y.GetSeverity()) - int(x.GetSeverity())
	})
	for _, f := range findings {
		if all || !quiet(f) {
			p.finding(f)
		}
	}
	p.numbers(a)
	p.assumptions(a.GetAssumptions(), all)
	if all {
		p.readings(a.GetReadings())
	}
	for _, w := range a.GetUnusedWaivers() {
		p.paragraph("  waiver without a finding: ", w.GetIdentity()+" ("+w.GetReason()+")")
	}
}

// counts tells how much was evaluated and what came out.
func counts(a *pb.ReviewStageResponse) string {
	number := map[pb.Outcome_Value]int{}
	for _, f := range a.GetFindings() {
		number[f.GetOutcome()]++
	}
	c := a.GetCoverage()
	text := fmt.Sprintf("%d of %d applicable checks decided, %d open:", c.GetEvaluated(), c.GetApplicable(), c.GetOpen())
	for o := pb.Outcome_PASS; o <= pb.Outcome_NOT_APPLICABLE; o++ {
		if number[o] > 0 {
			text += fmt.Sprintf(" %d %s,", number[o], o)
		}
	}
	return text[:len(text)-1]
}

// finding writes one finding.
func (p *page) finding(f *pb.Finding) {
	p.blank()
	lead := "  " + pad(f.GetOutcome().String(), 16) + pad(grade(f), 10)
	head := f.GetRule()
	if f.GetRole() != "" {
		head += " of " + f.GetRole()
	}
	head += point(f)
	if m := f.GetMargin().GetAbsolute(); m != nil {
		head += ", margin " + m.GetText() + relative(f.GetMargin())
	}
	p.paragraph(lead, head+marks(f))
	p.paragraph(body, f.GetMessage())
	if untold := untold(f); len(untold) > 0 {
		p.paragraph(body+"missing: ", strings.Join(untold, ", "))
	}
	for _, b := range f.GetBreakEven() {
		if f.GetOutcome() != pb.Outcome_PASS {
			p.paragraph(body, "turns at "+b.GetField()+" = "+b.GetMeasure().GetText())
		}
	}
	for _, n := range f.GetNotes() {
		p.paragraph(body+"note: ", n)
	}
	for _, o := range f.GetPoints() {
		p.paragraph(body+"also ", pointResult(o))
	}
}

// marks tells why a finding does not count.
func marks(f *pb.Finding) string {
	var marks []string
	if w := f.GetWaiver(); w != nil {
		mark := "waived by " + w.GetApprover()
		if w.GetExpiry() != "" {
			mark += " until " + w.GetExpiry()
		}
		marks = append(marks, mark)
	}
	if f.GetKnown() {
		marks = append(marks, "known")
	}
	if len(marks) == 0 {
		return ""
	}
	return " [" + strings.Join(marks, "; ") + "]"
}

// untold are the missing fields that the message does not name.
func untold(f *pb.Finding) []string {
	var rest []string
	for _, field := range f.GetMissing() {
		if !strings.Contains(f.GetMessage(), stage.Relative(field)) {
			rest = append(rest, field)
		}
	}
	return rest
}

func grade(f *pb.Finding) string {
	if f.GetSeverity() == pb.Severity_UNSPECIFIED {
		return "-"
	}
	return f.GetSeverity().String()
}

func relative(m *pb.Margin) string {
	if m.Relative == nil {
		return ""
	}
	return " (" + strconv.FormatFloat(100*m.GetRelative(), 'g', 3, 64) + " %)"
}

func point(f *pb.Finding) string {
	if f.GetOperatingPoint() == "" {
		return ""
	}
	at := ` at "` + f.GetOperatingPoint() + `"`
	if c := f.GetCorner().GetName(); c != "" {
		at += ", " + c
	}
	return at
}

func pointResult(o *pb.PointResult) string {
	text := `"` + o.GetOperatingPoint() + `": ` + o.GetOutcome().String()
	if v := o.GetValue(); v != nil {
		text += ", " + v.GetText()
		if l := o.GetLimit(); l != nil {
			text += " against " + l.GetText()
		}
		if m := o.GetMargin().GetAbsolute(); m != nil {
			text += ", margin " + m.GetText()
		}
	}
	return text
}

// numbers writes the floating voltage of each operating point.
func (p *page) numbers(a *pb.ReviewStageResponse) {
	points := a.GetDutyLimits().GetPoints()
	longest := 0
	for _, o := range points {
		longest = max(longest, min(utf8.RuneCountInString(o.GetOperatingPoint()), 24))
	}
	if len(points) > 0 {
		p.blank()
		p.line("  V_BS at each operating point (worst case)")
	}
	for _, o := range points {
		p.paragraph("    "+pad(o.GetOperatingPoint(), longest)+"  ", voltages(o))
	}
}

func voltages(o *pb.DutyPoint) string {
	if o.GetCollapses() != nil {
		return fmt.Sprintf("collapses: lockout after %d periods", o.GetCollapses().GetPeriods())
	}
	low, high := o.GetFloatingVoltageLow().GetMin(), o.GetFloatingVoltageHigh().GetMax()
	if low == nil && high == nil {
		text := "not evaluated"
		if o.GetReason() != "" {
			text += ": " + o.GetReason()
		}
		if len(o.GetMissing()) > 0 {
			text += "; missing " + strings.Join(o.GetMissing(), ", ")
		}
		return text
	}
	text := orUnknown(low) + " to " + orUnknown(high)
	if t := o.GetRechargeWindow().GetMin(); t != nil {
		text += ", recharge window " + t.GetText()
	}
	return text
}

func orUnknown(m *pb.Measure) string {
	if m == nil {
		return "unknown"
	}
	return m.GetText()
}

// assumptions counts what was assumed and lists what may be optimistic.
func (p *page) assumptions(assumed []*pb.Assumption, all bool) {
	if len(assumed) == 0 {
		return
	}
	optimistic := 0
	for _, a := range assumed {
		if a.GetDirection() == pb.Assumption_Direction_OPTIMISTIC {
			optimistic++
		}
	}
	p.blank()
	p.line(fmt.Sprintf("  Assumed: %d values, %d of them optimistic", len(assumed), optimistic))
	for _, a := range assumed {
		if all || a.GetDirection() == pb.Assumption_Direction_OPTIMISTIC {
			p.paragraph("    "+pad(strings.ToLower(a.GetDirection().String()), 14), a.GetField()+" = "+a.GetAssumed()+" ("+a.GetReason()+")")
		}
	}
}

// readings tells how texts were read.
func (p *page) readings(readings []*pb.Reading) {
	if len(readings) == 0 {
		return
	}
	p.blank()
	p.line("  Read as")
	for _, r := range readings {
		p.paragraph("    ", r.GetField()+` "`+r.GetText()+`": `+r.GetMeaning())
	}
}
