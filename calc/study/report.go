package study

import (
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

// Request asks for a study. The stage has passed stage.Check and is completed here.
type Request struct {
	Stage        *stage.Stage
	Policy       stage.Policy
	Families     []string // of rules; empty: all
	Draws        int      // from 1 to Most of the stage
	Seed         uint32
	Distribution Distribution
}

// Bounds of a study.
const (
	DefaultDraws = 1000
	mostDraws    = 100_000
	// mostVisits bounds the draws times the operating points, and with them the memory: some 600 bytes for each.
	mostVisits = 300_000
)

// Most is the largest number of draws of a stage with that many operating points.
func Most(points int) int { return min(mostDraws, mostVisits/max(points, 1)) }

// Progress tells how far a study is.
type Progress struct {
	Done, Draws int
	Within      int // draws, of those done, in which every rule is within its limit
}

// Percents are the percentiles of a report, in their order [%].
func Percents() []float64 { return []float64{1, 5, 50, 95, 99} }

// Report is what a study found.
type Report struct {
	StageID      string
	Draws        int
	Seed         uint32
	Distribution Distribution
	Overall      Overall
	Results      []Result // by rule in the order of the catalogue, role and operating point
	Assumptions  []stage.Assumption
	Internal     int // rules of which an evaluation panicked
}

// Overall tells how many draws are within every limit at every operating point.
type Overall struct {
	Yield        Share
	Failed, Open int // draws in which a rule fails; in which none fails but one is open
}

// Result is one rule in one role at one operating point.
type Result struct {
	Rule, Role, Point string
	Yield             Share // draws within the limit
	Guarded           Share // draws within the guard, which are those that pass
	Marginal          int
	Failed            int
	Open              int
	Percentiles       []Percentile // in the order of Percents, of the draws in which the rule could be evaluated; empty where there are none
	Smallest, Largest finding.Measure
	LeastMargin       finding.Margin // the smallest of all draws, as the worst case is taken: by its share of the limit where there is one
	LeastDraw         int            // the first draw in which it was seen
	Extreme           *Extreme       // nil where the worst-case review has no result
	Ranking           []Correlation  // largest first
	Missing, Reasons  []string       // of the first draw that is open

	column *column
}

// Drawn is what the rule found at one draw; numbers are NaN where they cannot be had.
type Drawn struct {
	Outcome              finding.Outcome
	Value, Margin, Share float64 // value, distance to the limit [unit of the rule]; its share of the limit [1]
}

// At is what the rule found at a draw.
func (r *Result) At(draw int) Drawn {
	c := r.column
	return Drawn{c.outcome[draw], float64(c.value[draw]), float64(c.margin[draw]), float64(c.share[draw])}
}

// Percentile of a value with the interval between two order statistics; an end is not set where the draws are too few to have it.
type Percentile struct {
	Percent          float64
	Value, Low, High finding.Measure
}

// Extreme is what the worst-case review finds at the same place.
type Extreme = finding.PointResult

// Correlation is how an input's quantile goes with the margin over the draws.
type Correlation struct {
	Field, Symbol string
	Rho           float64 // Spearman's rank correlation: positive where the margin grows with the input [1]
}
