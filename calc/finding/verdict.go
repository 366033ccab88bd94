package finding

import (
	"slices"

	"floatrail/calc/stage"
)

// Conclude applies waivers and baseline to the findings and draws the verdict [design 6.1, 6.5]. Expiry is compared with asOf, never with a
// clock; both are dates as YYYY-MM-DD, which sort as text.
func Conclude(r *Report, p *stage.Policy, waivers []Waiver, asOf string) {
	used := make([]bool, len(waivers))
	failed, open := false, false
	r.Coverage = Coverage{}
	for i := range r.Findings {
		f := &r.Findings[i]
		f.Known = slices.Contains(p.Baseline, f.Identity)
		waived := applyWaiver(f, p, waivers, used, asOf)
		if f.Outcome == NotApplicable {
			continue
		}
		r.Coverage.Applicable++
		if f.Outcome == Open {
			r.Coverage.Open++
		} else {
			r.Coverage.Evaluated++
		}
		if waived || f.Known {
			continue
		}
		grave := f.Severity >= p.FailAt
		failed = failed || f.Outcome == Fail && grave || f.Outcome == Marginal && p.CountMarginal
		open = open || f.Outcome == Open && grave
	}
	switch {
	case failed:
		r.Verdict = Failed
	case open || float64(r.Coverage.Evaluated) < p.MinimumCoverage*float64(r.Coverage.Applicable):
		r.Verdict = Incomplete
	default:
		r.Verdict = Passed
	}
	r.UnusedWaivers = nil
	for i, w := range waivers {
		if !used[i] {
			r.UnusedWaivers = append(r.UnusedWaivers, w)
		}
	}
}

// applyWaiver attaches the waiver that names the finding and tells whether it covers it.
func applyWaiver(f *Finding, p *stage.Policy, waivers []Waiver, used []bool, asOf string) bool {
	for i := range waivers {
		w := &waivers[i]
		if w.Identity != f.Identity || (f.Outcome != Fail && f.Outcome != Marginal && f.Outcome != Open) {
			continue
		}
		used[i] = true
		f.Waiver = w
		if w.Expiry != "" && asOf > w.Expiry {
			return false
		}
		if w.WorstMargin == w.WorstMargin && !(f.Margin.Relative >= w.WorstMargin) {
			return false
		}
		return f.Severity != stage.Critical || p.CriticalWaivable
	}
	return false
}
