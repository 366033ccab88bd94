// Package finding holds what rules found: outcome, severity, margin, corner and evidence, the findings' identities, the verdict over them
// and the report that carries them. It knows neither rules nor models.
package finding

import (
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

// Outcome is what a rule found.
type Outcome uint8

// Outcomes, mildest first.
const (
	NoOutcome     Outcome = iota
	NotApplicable         // nothing to judge
	Pass                  // within the guard
	Marginal              // between guard and limit, or satisfied only under an optimistic assumption
	Open                  // cannot be evaluated; never a pass
	Fail                  // beyond the limit
)

// String gives the contract's name of the outcome.
func (o Outcome) String() string {
	return [...]string{"UNSPECIFIED", "NOT_APPLICABLE", "PASS", "MARGINAL", "OPEN", "FAIL"}[o]
}

// Verdict is the answer in one word.
type Verdict uint8

// Verdicts.
const (
	NoVerdict Verdict = iota
	Passed
	Failed
	Incomplete
)

// String gives the contract's name of the verdict.
func (v Verdict) String() string {
	return [...]string{"UNSPECIFIED", "PASS", "FAIL", "INCOMPLETE"}[v]
}

// Measure is a number with its dimension, in SI base units; NaN: not set.
type Measure struct {
	Value     float64
	Dimension quantity.Dimension
}

// Span is a number over the worst-case sets; NaN: not set.
type Span struct {
	Min, Typ, Max float64
	Dimension     quantity.Dimension
}

// Bound tells where in its range an input stands.
type Bound uint8

// Bounds.
const (
	NoBound Bound = iota
	AtMin
	AtTyp
	AtMax
	Interior
)

// String gives the contract's name of the bound.
func (b Bound) String() string {
	return [...]string{"UNSPECIFIED", "MIN", "TYP", "MAX", "INTERIOR"}[b]
}

// Setting is one input of a corner.
type Setting struct {
	Field string
	Bound Bound
	Value Measure
}

// Corner is a corner of the worst-case sets: which end each input takes, at which temperatures.
type Corner struct {
	Name     string
	Settings []Setting
}

// Input is one input behind a number.
type Input struct {
	Symbol  string
	Measure Measure
	Field   string
	Source  string
}

// Ranking tells how far one input moves a value.
type Ranking struct {
	Field string
	Swing Measure
}

// BreakEven is the value of one input at which a rule turns.
type BreakEven struct {
	Field   string
	Measure Measure
}

// PointResult is one operating point of a finding.
type PointResult struct {
	OperatingPoint string
	Outcome        Outcome
	Value          Measure
	Limit          Measure
	Margin         Margin
}

// Margin is the distance to a limit; negative beyond it.
type Margin struct {
	Absolute Measure
	Relative float64 // of the limit [1]
}

// Waiver accepts one finding.
type Waiver struct {
	Identity, Reason, Approver string
	Expiry                     string  // last day, YYYY-MM-DD; empty: none
	WorstMargin                float64 // worst relative margin covered; NaN: any [1]
}

// Finding is what one rule found for one role and kind of mode.
type Finding struct {
	Rule           string
	Role           string // empty where the rule judges one part only
	Mode           string // kind of mode; empty where the rule does not depend on it
	Outcome        Outcome
	Severity       stage.Severity
	Title          string
	Message        string
	Subjects       []string
	OperatingPoint string
	Corner         Corner
	Value          Measure
	Limit          Measure
	Guard          Measure
	Margin         Margin
	Typical        Measure
	Equation       string
	Inputs         []Input
	Ranking        []Ranking
	BreakEven      []BreakEven
	Sources        []string // keys of the bibliography
	Missing        []string
	Notes          []string
	Points         []PointResult
	Identity       string
	Evidence       string
	Waiver         *Waiver
	Known          bool
}

// Coverage is how much of the catalogue was evaluated.
type Coverage struct{ Applicable, Evaluated, Open int }

// Report is the answer about one stage.
type Report struct {
	StageID       string
	Verdict       Verdict
	Coverage      Coverage
	Findings      []Finding
	Assumptions   []stage.Assumption
	UnusedWaivers []Waiver
	Sizing        *Sizing
	DutyLimits    *DutyLimits
	Transient     *TransientStress
	// Internal counts rules that panicked and are open for that reason.
	Internal int
	// Simulations, SimulationSteps and SimulationFailures count the simulated events behind the report, the integrator's steps in them, and those that
	// did not converge.
	Simulations, SimulationSteps, SimulationFailures int
}

// BudgetItem is one charge of the budget.
type BudgetItem struct {
	Name           string
	Charge         Span
	OperatingPoint string
}

// Window is a range of permitted values.
type Window struct{ Low, High Measure }

// Recommended is parts to fit; NaN where none exists.
type Recommended struct {
	Capacitance          Measure
	CapacitorVoltage     Measure
	Resistance           Measure
	ResistanceWindow     Window
	CapacitanceWindow    Window
	DiodeReverseVoltage  Measure
	DiodeAverageCurrent  Measure
	DiodePeakCurrent     Measure
	ReservoirCapacitance Measure
}

// Sizing is the charge budget and the parts that fit it.
type Sizing struct {
	Budget               []BudgetItem
	TotalCharge          Span
	VoltageBudget        Span
	MinimumCapacitance   Span
	EffectiveCapacitance Span
	Ripple               Span
	Recommended          Recommended
	Notes                []string
}

// DerivedLimit is the value of one quantity at which the floating supply just holds.
type DerivedLimit struct {
	Name    string
	Measure Measure // NaN where the range holds nowhere
	Corner  Corner
	Reason  string
	// OperatingPoint is the one that binds, where the limit is that of all of them.
	OperatingPoint string
}

// Collapse tells that there is no positive steady state, and how fast lockout is reached.
type Collapse struct {
	Periods int
	Corner  Corner
}

// DutyPoint is the floating voltage of one operating point.
type DutyPoint struct {
	OperatingPoint      string
	RechargeWindow      Span
	RechargeRatio       Span
	Deficit             Span
	FloatingVoltageLow  Span
	FloatingVoltageHigh Span
	GateVoltageLow      Span
	Collapses           *Collapse
	CapacitanceCancels  bool
	PeakDetector        bool
	HighInterval        string
	LowAngle, HighAngle Measure        // where in the fundamental V_BS is lowest and highest, at the binding corners; NaN without a fundamental
	WithoutRefresh      Span           // longest time without recharge; unset of a fixed duty
	Restart             Span           // V_BS at the first pulse after the pause of a burst; unset without one
	Limits              []DerivedLimit // in the order of LimitNames
	Missing             []string
	Reason              string
}

// Names of derived limits.
const (
	LargestDuty              = "largest duty"
	LongestOnTime            = "longest on-time"
	ShortestLowSidePulse     = "shortest low-side pulse"
	LargestResistance        = "largest R_B"
	LargestDeadTime          = "largest dead time"
	LowestSwitchingFrequency = "lowest switching frequency"
	HighestSwitchingFreq     = "highest switching frequency"
	LargestIndex             = "largest modulation index"
	LowestFundamental        = "lowest fundamental frequency"
	LongestIdle              = "longest pause between bursts"
	LongestStall             = "longest stall"
)

// DutyLimits is the floating voltage of each operating point, and the first charge.
type DutyLimits struct {
	Points    []DutyPoint
	Precharge *Precharge     // nil: without an operating point
	Limits    []DerivedLimit // the tightest of all operating points, in the order of their first appearance
	Trace     []TracePoint   // where asked for
}

// TracePoint is V_BS at one time, at the corner in which its lowest value binds.
type TracePoint struct {
	OperatingPoint  string
	Kind            string  // one of the Trace constants
	Time            float64 // [s]
	Angle           float64 // of the fundamental; NaN without one [rad]
	FloatingVoltage float64 // [V]
}

// Kinds of trace.
const (
	TracePeriod      = "PERIOD"
	TraceFundamental = "FUNDAMENTAL"
	TraceBurst       = "BURST"
	TraceHold        = "HOLD"
	TracePrecharge   = "PRECHARGE"
)

// Precharge is the first charge of C_B.
type Precharge struct {
	Time           Span // until the last stage is at the rising lockout with margin, enable delay included
	Pulses         int  // most pulses of a pulsed first charge; 0: the low side is held on, or not known
	PeakCurrent    Span
	ResistorEnergy Span
	ReservoirLow   Span
	SettledVoltage Span

	// Both orders of several stages on the supply: at once, and in groups. NaN where there is one stage.
	ReservoirLowSimultaneous, ReservoirLowStaged Span
	TimeSimultaneous, TimeStaged                 Span
}

// TransientStress is the switching events of each operating point.
type TransientStress struct {
	Events    []TransientEvent
	Waveforms []Waveform
}

// Waveform is a signal of a simulated event at its worst draw, time rising, at most 2,000 points with the peaks among them.
type Waveform struct {
	Name  string // operating point, event and signal
	Unit  string
	Time  []float64 // since the command [s]
	Value []float64 // in Unit
}

// Methods by which the numbers of an event were found.
const (
	Estimate   = "ESTIMATE"
	Simulation = "SIMULATION"
)

// Comparison is a number at its worst draw, as simulated and as closed forms estimate it there.
type Comparison struct {
	Name                 string // of the number in the contract
	Simulated, Estimated Measure
	Difference           float64 // of the estimate from the simulation, as a share of that [1]
}

// TransientEvent is one event at one operating point.
type TransientEvent struct {
	Event               string // name in the contract
	OperatingPoint      string
	Method              string
	NodeMin             Span
	PinMin              Span
	RailToCOMMin        Span
	Undershoots         []Undershoot // one for each row of the driver's table
	FloatingVoltageGain Span
	NodeMax             Span
	RailMax             Span
	HighSidePeak        Span
	LowSidePeak         Span
	SlewPeak            Span
	Slew10To90          Span
	MillerLow           Span
	MillerHigh          Span
	GateMin             Span
	CurrentSlope        Span
	RingFrequency       Span
	RingDamping         Span

	// Of a simulation.
	Steps       int     // of the integrator at the worst draw
	Convergence float64 // largest change of an extreme there under a ten times tighter tolerance [1]; NaN: not known
	Comparisons []Comparison
	Missing     []string // what keeps the event from being simulated
	Reason      string
}

// Undershoot is the time below one level.
type Undershoot struct {
	Level    Measure
	Duration Span      // longest time without a break
	Total    Span      // of all dips of the event together; unset where it is not simulated
	Dips     int       // most of them in one event; 0: none, or not simulated
	Each     []Measure // length of each dip at the draw of the deepest one, of which the first are given
}
