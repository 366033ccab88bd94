// Package calc reviews bootstrapped floating supplies of high-side gate drivers. It is pure: no input or output, no clock, no randomness, no
// map order; the same request gives the same report on every machine.
//
// The pipeline, in this order:
//
//	stage     the request as a valid stage: every value with its spread, its source, and its path
//	corner    worst-case sets per operating point and temperature; the search for the worst draw
//	circuit   the stage at one draw, as the models take it
//	models    charge, capacitor, recharge, modulation, startup, transient, loss: equations with their sources
//	derive    inverse problems on the same models: derived limits
//	rule      value against limit and guard; outcome, message, corner, ranking, break-even
//	catalog   the rules, one a file
//	result    what the methods return beside findings
//	finding   findings, identities, waivers, verdict
//
// Dependencies point downwards in style and one way in code: models know no rules, rules solve nothing, nothing here knows the wire.
package calc

import (
	"context"
	"slices"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
	"floatrail/calc/result"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// Options is what an answer shall contain.
type Options struct {
	PerPoint  bool     // every operating point of a finding
	Families  []string // families of rules; empty: all
	Simulate  bool     // judge simulated switching events
	Waveforms bool     // give the waveforms of simulated events
	Trace     bool     // give V_BS over time
}

// Request is a stage with the policy and the waivers under which it is judged. The stage has passed stage.Check and is completed here.
type Request struct {
	Stage   *stage.Stage
	Policy  stage.Policy
	Waivers []finding.Waiver
	AsOf    string // YYYY-MM-DD; empty: not given
	Options Options
}

// Parts of an answer.
const (
	WithSizing     = 1 << iota // charge budget and parts to fit
	WithDutyLimits             // floating voltage and derived limits
	WithTransient              // switching events
)

// Review evaluates the rules on one stage. It returns an error only when the context ends first.
func Review(ctx context.Context, r Request, parts int) (finding.Report, error) {
	policy := r.Policy
	var trial *stage.Stage
	if parts&WithSizing != 0 {
		trial = r.Stage.Clone()
	}
	r.Stage.Complete(&policy)
	bench := rule.NewBench(r.Stage, &policy)
	bench.EveryPoint = r.Options.PerPoint
	bench.Interrupted = func() bool { return ctx.Err() != nil }
	if r.Options.Simulate {
		bench.Simulate()
	}
	out := finding.Report{StageID: r.Stage.ID}
	asked := func(id string) bool {
		return len(r.Options.Families) == 0 || slices.Contains(r.Options.Families, rule.FamilyOf(id))
	}
	rules := catalog.All()
	if !slices.ContainsFunc(rules, func(rl *rule.Rule) bool { return rl.Tally != nil && asked(rl.ID) }) { // one that judges all others needs them
		rules = slices.DeleteFunc(rules, func(rl *rule.Rule) bool { return !asked(rl.ID) })
	}
	out.Findings, out.Internal = bench.Run(rules...)
	out.Findings = slices.DeleteFunc(out.Findings, func(f finding.Finding) bool { return !asked(f.Rule) })
	if !r.Options.PerPoint {
		for i := range out.Findings {
			out.Findings[i].Points = nil
		}
	}
	if ctx.Err() == nil {
		out.DutyLimits, out.Transient = result.OfPoints(bench, parts&WithDutyLimits != 0, parts&WithTransient != 0, r.Options.Waveforms, r.Options.Trace)
	}
	if parts&WithSizing != 0 && ctx.Err() == nil {
		out.Sizing = result.Sizing(bench, trial, &policy)
	}
	if err := ctx.Err(); err != nil {
		return finding.Report{}, err
	}
	out.Assumptions = bench.Assumptions()
	n := bench.Counts()
	out.Simulations, out.SimulationSteps, out.SimulationFailures = int(n.Runs.Load()), int(n.Steps.Load()), int(n.Failures.Load())
	finding.Conclude(&out, &policy, r.Waivers, r.AsOf)
	return out, nil
}
