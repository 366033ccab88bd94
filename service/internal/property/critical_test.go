package property

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// excuse tells why a rule whose failure is CRITICAL may pass although a field that it read is not given. Beside the reason one of the
// others holds: a value on the safe side is taken, listed as an assumption of that direction, and the margin is no better; another given field
// decides, and without both the rule does not pass; or, with neither, what the rule takes without the field does not make the margin better.
type excuse struct {
	field   string   // relative to the stage
	assumed string   // field of the assumption
	instead []string // fields that decide in its place
	// within is by how much of the limit the margin may be better: the ends of what is possible are tried, and between them it may be worse [1].
	within float64
	reason string
}

// gateData is what an edge that is not measured is estimated from, beside others: that of the position that switches.
var gateData = []string{"highSide.transconductance", "lowSide.transconductance"}

// between is by how much of the limit a node that commutates within the dead time is worse here than one that does at once, or not at all [1].
const between = 1e-4

var excuses = []excuse{
	{field: "bootstrap.capacitor.insulation", assumed: "bootstrap.capacitor.leakage", reason: "the usual limit of ceramics leaks more"},
	{field: "bootstrap.capacitor.serviceTime", assumed: "bootstrap.capacitor.serviceTime", reason: "a capacitor ages for longer than most serve"},
	{field: "bootstrap.capacitor.biasCurve", assumed: "bootstrap.capacitor.biasCurve", reason: "the policy's share remains of a class 2 ceramic, or all of it"},
	{field: "bootstrap.capacitor.ageingPerDecade", assumed: "bootstrap.capacitor.ageingPerDecade", reason: "the class's largest ageing is taken"},
	{field: "highSide.outputCapacitance", assumed: "highSide.outputCapacitance", within: between,
		reason: "the node commutates at once or not at all, whichever is worse"},
	{field: "lowSide.outputCapacitance", assumed: "lowSide.outputCapacitance", within: between,
		reason: "the node commutates at once or not at all, whichever is worse"},
	{field: "startup.initialVoltage", assumed: "startup.initialVoltage", reason: "an empty capacitor takes the largest current and leaves V_B lowest"},
	{field: "driver.pullUpResistance", assumed: "driver.pullUpResistance", reason: "the steepest edge is that of no resistance"},
	{field: "driver.pullDownResistance", assumed: "driver.pullDownResistance", reason: "none for the steepest edge, V_DD over the peak current for the weakest hold"},
	{field: "layout.highSideCommonSource", assumed: "layout.highSideCommonSource", reason: "nothing slows the steepest current"},
	{field: "layout.measured.turnOnVoltageSlope", instead: gateData, reason: "the gate drive gives the slope"},
	{field: "layout.measured.turnOffVoltageSlope", instead: gateData, reason: "the gate drive gives the slope"},
	{field: "layout.measured.turnOnCurrentSlope", instead: gateData, reason: "the gate drive gives the slope"},
	{field: "layout.measured.turnOffCurrentSlope", instead: gateData, reason: "the gate drive gives the slope"},
	{field: "highSide.gateSourceCharge", reason: "the slope of the gate charge is taken at its worse end"},
	{field: "highSide.gateDrainCharge", reason: "the slope of the gate charge is taken at its worse end"},
	{field: "highSide.plateauVoltage", reason: "the slope of the gate charge is taken at its worse end"},
	{field: "layout.lowSideCommonSource", assumed: "layout.lowSideCommonSource", reason: "nothing slows the steepest current"},
	{field: "layout.loopResistance", assumed: "layout.loopResistance", reason: "nothing damps the ringing"},
	{field: "layout.driverPinCapacitance", assumed: "layout.driverPinCapacitance", reason: "the smallest that drivers have"},
	{field: "layout.ringingQuality", assumed: "layout.ringingQuality", reason: "a wide range is taken"},
	{field: "highSide.inputCapacitance", reason: "it bounds the slope of the gate charge only where Q_GS, Q_GD and V_pl do not give it"},
}

// simulatedWithin is by how much of the limit the margin of a simulated event may be better without a field: its numbers are good to 0.3 % of the bus,
// and its V_BS at the start is that of typical values.
const simulatedWithin = 5e-3

// critical tells whether a failure of a rule is CRITICAL, on some stage at least.
func critical(rl *rule.Rule) bool { return rl.GuardsDestruction() || rl.FailSeverity != nil }

// criticalExamples are the examples of a rule in a role.
func criticalExamples(rl *rule.Rule, role string) []*example {
	var out []*example
	for i := range examples {
		if x := &examples[i]; x.rule == rl.ID && x.role == role {
			out = append(out, x)
		}
	}
	return out
}

// eachCritical runs a test for every rule whose failure is CRITICAL.
func eachCritical(t *testing.T, f func(t *testing.T, rl *rule.Rule)) {
	for _, rl := range catalog.All() {
		if critical(rl) {
			t.Run(rl.ID, func(t *testing.T) { f(t, rl) })
		}
	}
}

// TestCriticalRulesTurn shows, for every rule whose failure is CRITICAL and every role of it, a stage that passes and that one changed
// parameter makes fail, at CRITICAL.
func TestCriticalRulesTurn(t *testing.T) {
	tree := document(t, "buck48")
	eachCritical(t, func(t *testing.T, rl *rule.Rule) {
		for _, role := range rolesOf(rl) {
			turned := false
			for _, x := range criticalExamples(rl, role) {
				base := with(tree, x.base...)
				if f, _ := found(t, base, rl, role, x.simulated); f.Outcome != finding.Pass {
					t.Errorf("%s: %s before anything is changed: %s", x.name(), f.Outcome, f.Message)
				}
				f, _ := found(t, with(base, x.fail...), rl, role, x.simulated)
				if rl.GuardsDestruction() && x.neverFails == "" && f.Severity != stage.Critical {
					t.Errorf("%s: fails at %s", x.name(), f.Severity)
				}
				turned = turned || len(x.fail) == 1 && f.Outcome == finding.Fail && f.Severity == stage.Critical
			}
			if !turned {
				t.Errorf("no single parameter turns the role %q to FAIL at CRITICAL", role)
			}
		}
	})
}

// field is the path of a field that a finding names, "stage.operatingPoints[2].busVoltage", in the request.
func field(name string) path {
	return at(strings.NewReplacer("[", ".", "]", "").Replace(name))
}

// given tells whether a path leads to something.
func given(node any, p path) bool {
	for _, k := range p {
		switch k := k.(type) {
		case string:
			m, _ := node.(map[string]any)
			if node = m[k]; node == nil {
				return false
			}
		case int:
			l, _ := node.([]any)
			if k >= len(l) {
				return false
			}
			node = l[k]
		}
	}
	return true
}

// cut is a deletion from the stage of an example.
type cut struct {
	field  string // as findings name it
	tree   any
	before finding.Finding
	// simulated tells that the events are.
	simulated bool
}

// excuseOf gives the excuse of a field; nil where it has none.
func excuseOf(field string) *excuse {
	i := slices.IndexFunc(excuses, func(e excuse) bool { return e.field == stage.Relative(field) })
	if i < 0 {
		return nil
	}
	return &excuses[i]
}

// deletionLedger counts what deletions did, and which excuses were needed.
type deletionLedger struct {
	mu   sync.Mutex
	used map[string]bool
}

func (l *deletionLedger) use(field string) {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.used[field] = true
}

// judgeCut tells whether the rule is open without the field, and what is wrong with its answer; nothing where the request is refused.
func (l *deletionLedger) judgeCut(t *testing.T, rl *rule.Rule, role string, c cut) (open bool, wrong string) {
	if r, err := request(c.tree); r == nil {
		if err != nil {
			t.Error(err)
		}
		return false, ""
	}
	f, bench := found(t, c.tree, rl, role, c.simulated)
	switch f.Outcome {
	case finding.Fail:
		return false, ""
	case finding.Open:
		if f.Severity < stage.Major {
			return true, "is OPEN at " + f.Severity.String()
		}
		return true, ""
	case finding.Marginal:
		text := f.Message + strings.Join(f.Notes, " ")
		if excuseOf(c.field) == nil && !strings.Contains(text, "optimistic assumption") && !strings.Contains(text, "policy's spread") {
			return false, "is MARGINAL and does not tell why: " + text
		}
		return false, ""
	case finding.Pass:
		return false, l.excused(t, rl, role, c, &f, bench)
	}
	return false, fmt.Sprintf("is %s: %s", f.Outcome, f.Message)
}

// excused tells what is wrong with a PASS.
func (l *deletionLedger) excused(t *testing.T, rl *rule.Rule, role string, c cut, f *finding.Finding, bench *rule.Bench) string {
	e := excuseOf(c.field)
	if e == nil {
		return "is PASS: " + f.Message
	}
	l.use(e.field)
	within := e.within
	if c.simulated {
		within += simulatedWithin
	}
	was, is := c.before.Margin.Absolute.Value, f.Margin.Absolute.Value-within*math.Abs(f.Limit.Value)
	switch {
	case len(e.instead) > 0:
		bare := c.tree
		for _, other := range e.instead {
			bare = without(bare, field("stage."+other))
		}
		if g, _ := found(t, bare, rl, role, c.simulated); g.Outcome == finding.Pass {
			return fmt.Sprintf("is PASS without %s too: %s", e.instead, g.Message)
		}
		return ""
	case e.assumed != "" && !slices.ContainsFunc(bench.Assumptions(), func(a stage.Assumption) bool {
		return stage.Relative(a.Field) == e.assumed && a.Direction == stage.Conservative
	}):
		return "is PASS and lists no conservative assumption of " + e.assumed
	case is > was:
		return fmt.Sprintf("is PASS with a margin of %g, above %g with it, although %s", f.Margin.Absolute.Value, was, e.reason)
	}
	return ""
}

// TestCriticalRulesOpen takes the fields that the binding numbers of a passing rule came from out of the stage, one at a time, and the fields
// that the rule's documentation names. The rule must not pass for want of data; an answer that still passes is excused by name. A request that
// is refused has no answer.
func TestCriticalRulesOpen(t *testing.T) {
	tree := document(t, "buck48")
	ledger := &deletionLedger{used: map[string]bool{}}
	eachCritical(t, func(t *testing.T, rl *rule.Rule) {
		needed := map[string]bool{} // documented fields without which some role does not pass
		for _, role := range rolesOf(rl) {
			opened := 0
			for _, x := range criticalExamples(rl, role) {
				base := with(tree, x.base...)
				before, _ := found(t, base, rl, role, x.simulated)
				if len(before.Inputs) == 0 {
					t.Fatalf("%s read nothing", x.name())
				}
				for i, in := range before.Inputs {
					if i%every != 0 || x.simulated && i%everySimulated != 0 {
						continue
					}
					if p := field(in.Field); given(base, p) {
						open, wrong := ledger.judgeCut(t, rl, role, cut{in.Field, without(base, p), before, x.simulated})
						if open {
							opened++
						}
						if wrong != "" {
							t.Errorf("%s without %s %s", x.name(), in.Field, wrong)
						}
					}
				}
				for _, need := range rl.Needs {
					if every > 1 || x.simulated {
						break
					}
					tree, ok := withoutEverywhere(base, need)
					if !ok {
						continue
					}
					if r, _ := request(tree); r == nil { // needed so badly that nothing is answered
						needed[need] = true
						continue
					}
					f, bench := found(t, tree, rl, role, x.simulated)
					needed[need] = needed[need] || f.Outcome != finding.Pass ||
						ledger.excused(t, rl, role, cut{"stage." + need, tree, before, x.simulated}, &f, bench) == ""
				}
			}
			if opened == 0 && every == 1 {
				t.Errorf("no deletion opens the role %q", role)
			}
		}
		for _, need := range rl.Needs {
			if !needed[need] && every == 1 {
				t.Errorf("passes without %s, which it documents as needed", need)
			}
		}
	})
	for _, e := range excuses {
		if !ledger.used[e.field] && every == 1 {
			t.Errorf("nothing passes without %s: its excuse is not needed", e.field)
		}
	}
}

// withoutEverywhere is a copy of a tree that lacks a field of the stage, at every operating point where it is one of theirs; false where the
// tree lacks it already.
func withoutEverywhere(tree any, need string) (out any, ok bool) {
	fields := []string{"stage." + need}
	if rest, of := strings.CutPrefix(need, "operatingPoints."); of {
		fields = nil
		for i := range lookup(tree, at("stage.operatingPoints")).([]any) {
			fields = append(fields, fmt.Sprintf("stage.operatingPoints.%d.%s", i, rest))
		}
	}
	for _, f := range fields {
		if p := at(f); given(tree, p) {
			tree, ok = without(tree, p), true
		}
	}
	return tree, ok
}
