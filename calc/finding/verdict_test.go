package finding_test

import (
	"math"
	"testing"

	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

const asOf = "2027-03-15"

// one is a finding known by its letter.
func one(identity string, o finding.Outcome, s stage.Severity) finding.Finding {
	return finding.Finding{Identity: identity, Outcome: o, Severity: s, Margin: finding.Margin{Absolute: volts(math.NaN()), Relative: math.NaN()}}
}

// short is a finding with a relative margin.
func short(identity string, o finding.Outcome, s stage.Severity, relative float64) finding.Finding {
	f := one(identity, o, s)
	f.Margin.Relative = relative
	return f
}

// accepts is a waiver without bounds.
func accepts(identity string) finding.Waiver {
	return finding.Waiver{Identity: identity, Reason: "measured", Approver: "A. Smith", WorstMargin: math.NaN()}
}

func until(identity, expiry string) finding.Waiver {
	w := accepts(identity)
	w.Expiry = expiry
	return w
}

func covering(identity string, worst float64) finding.Waiver {
	w := accepts(identity)
	w.WorstMargin = worst
	return w
}

// judged is a verdict case: findings under a policy with waivers.
type judged struct {
	name     string
	findings []finding.Finding
	policy   func(*stage.Policy)
	waivers  []finding.Waiver
	want     finding.Verdict
}

func run(c judged) finding.Report {
	p := stage.DefaultPolicy()
	if c.policy != nil {
		c.policy(&p)
	}
	r := finding.Report{Findings: c.findings}
	finding.Conclude(&r, &p, c.waivers, asOf)
	return r
}

func check(t *testing.T, cases []judged) {
	t.Helper()
	for _, c := range cases {
		if r := run(c); r.Verdict != c.want {
			t.Errorf("%s: %s, want %s", c.name, r.Verdict, c.want)
		}
	}
}

func failAt(s stage.Severity) func(*stage.Policy) { return func(p *stage.Policy) { p.FailAt = s } }

func TestVerdict(t *testing.T) {
	F, M, O, P, N := finding.Fail, finding.Marginal, finding.Open, finding.Pass, finding.NotApplicable
	none, note, minor, major, critical := stage.NoSeverity, stage.Note, stage.Minor, stage.Major, stage.Critical
	list := func(f ...finding.Finding) []finding.Finding { return f }
	marginal := func(p *stage.Policy) { p.CountMarginal = true }
	coverage := func(c float64) func(*stage.Policy) { return func(p *stage.Policy) { p.MinimumCoverage = c } }
	check(t, []judged{
		{"nothing", nil, nil, nil, finding.Passed},
		{"pass", list(one("a", P, none)), nil, nil, finding.Passed},
		{"not applicable", list(one("a", N, none)), nil, nil, finding.Passed},
		{"fail at failAt", list(one("a", F, major)), nil, nil, finding.Failed},
		{"fail above failAt", list(one("a", F, critical)), nil, nil, finding.Failed},
		{"fail below failAt", list(one("a", F, minor)), nil, nil, finding.Passed},
		{"fail below a raised failAt", list(one("a", F, major)), failAt(critical), nil, finding.Passed},
		{"fail at a lowered failAt", list(one("a", F, note)), failAt(note), nil, finding.Failed},
		{"open at failAt", list(one("a", O, major)), nil, nil, finding.Incomplete},
		{"open below failAt", list(one("a", O, minor)), nil, nil, finding.Passed},
		{"open at a lowered failAt", list(one("a", O, minor)), failAt(minor), nil, finding.Incomplete},
		{"marginal", list(one("a", M, minor)), nil, nil, finding.Passed},
		{"marginal at failAt", list(one("a", M, major)), nil, nil, finding.Passed},
		{"marginal that counts", list(one("a", M, major)), marginal, nil, finding.Failed},
		{"fail before open", list(one("a", O, critical), one("b", F, major)), nil, nil, finding.Failed},
		{"fail before open, the other way round", list(one("b", F, major), one("a", O, critical)), nil, nil, finding.Failed},
		{"open before pass", list(one("a", P, none), one("b", O, major), one("c", P, none)), nil, nil, finding.Incomplete},
		{"fail before coverage", list(one("a", O, minor), one("b", F, major)), coverage(0.9), nil, finding.Failed},
		{"coverage reached", list(one("a", P, none), one("b", O, minor)), coverage(0.5), nil, finding.Passed},
		{"coverage missed", list(one("a", P, none), one("b", O, minor)), coverage(0.51), nil, finding.Incomplete},
		{"coverage of what applies", list(one("a", P, none), one("b", N, none), one("c", N, none)), coverage(1), nil, finding.Passed},
		{"coverage of nothing", list(one("a", N, none)), coverage(1), nil, finding.Passed},
	})
}

func TestBaseline(t *testing.T) {
	list := []finding.Finding{one("a", finding.Fail, stage.Critical), one("b", finding.Open, stage.Major)}
	baseline := func(ids ...string) func(*stage.Policy) { return func(p *stage.Policy) { p.Baseline = ids } }
	check(t, []judged{
		{"none", list, nil, nil, finding.Failed},
		{"another", list, baseline("z"), nil, finding.Failed},
		{"the failure", list, baseline("a"), nil, finding.Incomplete},
		{"both", list, baseline("b", "a"), nil, finding.Passed},
		{"a marginal that counts", []finding.Finding{one("a", finding.Marginal, stage.Minor)},
			func(p *stage.Policy) { p.CountMarginal, p.Baseline = true, []string{"a"} }, nil, finding.Passed},
	})
	r := run(judged{findings: list, policy: baseline("b")})
	if r.Findings[0].Known || !r.Findings[1].Known {
		t.Errorf("known: %v, %v; want false, true", r.Findings[0].Known, r.Findings[1].Known)
	}
	if r.Coverage != (finding.Coverage{Applicable: 2, Evaluated: 1, Open: 1}) {
		t.Errorf("coverage %+v: a known finding was not counted", r.Coverage)
	}
}

func TestWaivers(t *testing.T) {
	fail := []finding.Finding{short("a", finding.Fail, stage.Major, -0.08)}
	grave := []finding.Finding{short("a", finding.Fail, stage.Critical, -0.08)}
	open := []finding.Finding{one("a", finding.Open, stage.Major)}
	list := func(w ...finding.Waiver) []finding.Waiver { return w }
	waivable := func(p *stage.Policy) { p.CriticalWaivable = true }
	check(t, []judged{
		{"fail", fail, nil, list(accepts("a")), finding.Passed},
		{"another", fail, nil, list(accepts("b")), finding.Failed},
		{"open", open, nil, list(accepts("a")), finding.Passed},
		{"marginal that counts", []finding.Finding{one("a", finding.Marginal, stage.Minor)},
			func(p *stage.Policy) { p.CountMarginal = true }, list(accepts("a")), finding.Passed},
		{"one of two", append([]finding.Finding{one("b", finding.Fail, stage.Major)}, fail...), nil, list(accepts("a")), finding.Failed},
		{"day before expiry", fail, nil, list(until("a", "2027-03-16")), finding.Passed},
		{"day of expiry", fail, nil, list(until("a", asOf)), finding.Passed},
		{"day after expiry", fail, nil, list(until("a", "2027-03-14")), finding.Failed},
		{"year after expiry", fail, nil, list(until("a", "2026-12-31")), finding.Failed},
		{"open after expiry", open, nil, list(until("a", "2027-03-14")), finding.Incomplete},
		{"margin covered", fail, nil, list(covering("a", -0.1)), finding.Passed},
		{"margin at the bound", fail, nil, list(covering("a", -0.08)), finding.Passed},
		{"margin beyond the bound", fail, nil, list(covering("a", -0.0799)), finding.Failed},
		{"no margin against a bound", open, nil, list(covering("a", -1)), finding.Incomplete},
		{"critical", grave, nil, list(accepts("a")), finding.Failed},
		{"critical where waivable", grave, waivable, list(accepts("a")), finding.Passed},
		{"critical where waivable, expired", grave, waivable, list(until("a", "2027-03-14")), finding.Failed},
		{"critical where waivable, beyond the bound", grave, waivable, list(covering("a", -0.05)), finding.Failed},
	})
}

// A waived finding stays visible with its waiver, and waivers that meet nothing are reported in their order.
func TestWaiversShown(t *testing.T) {
	r := run(judged{
		findings: []finding.Finding{
			one("pass", finding.Pass, stage.NoSeverity), one("away", finding.NotApplicable, stage.NoSeverity),
			one("fail", finding.Fail, stage.Major), one("late", finding.Open, stage.Minor), one("bare", finding.Fail, stage.Minor),
		},
		waivers: []finding.Waiver{accepts("gone"), accepts("fail"), until("late", "2020-01-01"), accepts("pass"), accepts("away")},
	})
	if len(r.Findings) != 5 {
		t.Fatalf("%d findings, want 5: a waived finding stays visible", len(r.Findings))
	}
	for i, want := range []string{"", "", "fail", "late", ""} {
		got := ""
		if w := r.Findings[i].Waiver; w != nil {
			got = w.Identity
		}
		if got != want {
			t.Errorf("%s: waiver of %q, want %q", r.Findings[i].Identity, got, want)
		}
	}
	var unused []string
	for _, w := range r.UnusedWaivers {
		unused = append(unused, w.Identity)
	}
	if len(unused) != 3 || unused[0] != "gone" || unused[1] != "pass" || unused[2] != "away" {
		t.Errorf("unused %v, want [gone pass away]", unused)
	}
}

func TestCoverage(t *testing.T) {
	r := finding.Report{
		Coverage:      finding.Coverage{Applicable: 90, Evaluated: 80, Open: 70},
		UnusedWaivers: []finding.Waiver{accepts("old")},
		Findings: []finding.Finding{
			one("a", finding.Pass, stage.NoSeverity), one("b", finding.Marginal, stage.Minor), one("c", finding.Fail, stage.Major),
			one("d", finding.Open, stage.Major), one("e", finding.NotApplicable, stage.NoSeverity), one("f", finding.Open, stage.Note),
		},
	}
	p := stage.DefaultPolicy()
	want := finding.Coverage{Applicable: 5, Evaluated: 3, Open: 2}
	for range 2 { // concluding again starts afresh
		finding.Conclude(&r, &p, []finding.Waiver{accepts("c"), accepts("d")}, asOf)
		if r.Coverage != want {
			t.Errorf("coverage %+v, want %+v: waivers do not change it", r.Coverage, want)
		}
		if len(r.UnusedWaivers) != 0 {
			t.Errorf("unused %v, want none", r.UnusedWaivers)
		}
	}
}
