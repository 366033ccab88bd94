package stage

// Spread is a class of values whose missing ends the policy fills alike.
type Spread uint8

// Classes of spread.
const (
	NoSpread Spread = iota // a missing end stays unknown
	SpreadCharge
	SpreadResistance
	SpreadCurrent
	SpreadSemiconductorCapacitance
	SpreadTransconductance
	SpreadInductance
	SpreadDrop
	SpreadThreshold
	SpreadDelay
	SpreadSupply
	SpreadLockout
	SpreadResistor
	SpreadCapacitor
	SpreadRecoveryCharge
	SpreadExact // typ alone is min and max too
)

// Severity grades a finding.
type Severity uint8

// Severities: the defect classes of inspection practice.
const (
	NoSeverity Severity = iota
	Note
	Minor
	Major
	Critical
)

// String gives the contract's name of the severity.
func (s Severity) String() string {
	return [...]string{"UNSPECIFIED", "NOTE", "MINOR", "MAJOR", "CRITICAL"}[s]
}

// SeverityOverride sets the severity of one rule's FAIL.
type SeverityOverride struct {
	Rule     string
	Severity Severity
}

// Policy is the numbers by which a stage is judged.
type Policy struct {
	Name, Version                  string
	LockoutMargin                  float64 // [V]
	LockoutMarginRatio             float64 // [1]
	GuardRatio                     float64 // [1]
	RippleRatio                    float64 // of V_BS [1]
	CeramicVoltageRatio            float64 // [1]
	FilmVoltageRatio               float64 // [1]
	AluminiumVoltageRatio          float64 // [1]
	TantalumVoltageRatio           float64 // [1]
	DiodeReverseRatio              float64 // [1]
	ResistorPowerRatio             float64 // [1]
	GateVoltageRatio               float64 // [1]
	JunctionMargin                 float64 // [K]
	ReservoirRatio                 float64 // [1]
	ClassTwoRemaining              float64 // [1]
	ChargeSpread                   float64 // factor [1]
	RecoveryChargeSpread           float64 // factor [1]
	ResistanceSpread               float64 // factor [1]
	CurrentSpread                  float64 // factor [1]
	SemiconductorCapacitanceSpread float64 // factor [1]
	TransconductanceSpread         float64 // factor [1]
	InductanceSpread               float64 // share [1]
	DropSpread                     float64 // share [1]
	ThresholdSpread                float64 // share [1]
	DelaySpread                    float64 // share [1]
	SupplySpread                   float64 // share [1]
	LockoutSpread                  float64 // share [1]
	ResistorSpread                 float64 // share [1]
	CapacitorSpread                float64 // share [1]
	Severities                     []SeverityOverride
	FailAt                         Severity
	CountMarginal                  bool
	MinimumCoverage                float64 // [1]
	Baseline                       []string
	CriticalWaivable               bool
}

// DefaultPolicy is the policy of a request that gives none. Derating fractions: NASA EEE-INST-002, from memory [nasa-eee-inst-002]; spreads
// and margins: common practice.
func DefaultPolicy() Policy {
	return Policy{
		LockoutMargin: 0.3, LockoutMarginRatio: 0.05, GuardRatio: 0.10, RippleRatio: 0.05,
		CeramicVoltageRatio: 0.6, FilmVoltageRatio: 0.8, AluminiumVoltageRatio: 0.8, TantalumVoltageRatio: 0.5,
		DiodeReverseRatio: 0.7, ResistorPowerRatio: 0.6, GateVoltageRatio: 0.9, JunctionMargin: 15, ReservoirRatio: 10,
		ClassTwoRemaining: 0.3,
		ChargeSpread:      1.3, RecoveryChargeSpread: 2, ResistanceSpread: 1.5, CurrentSpread: 2,
		SemiconductorCapacitanceSpread: 1.3, TransconductanceSpread: 1.5,
		InductanceSpread: 0.3, DropSpread: 0.2, ThresholdSpread: 0.25, DelaySpread: 0.5,
		SupplySpread: 0.1, LockoutSpread: 0.15, ResistorSpread: 0.1, CapacitorSpread: 0.2,
		FailAt: Major,
	}
}

// ends gives the factors that lead from typ to min and to max, or false where the class leaves a missing end unknown.
func (p *Policy) ends(s Spread) (low, high float64, ok bool) {
	factor := func(f float64) (float64, float64, bool) { return 1 / f, f, true }
	share := func(r float64) (float64, float64, bool) { return 1 - r, 1 + r, true }
	switch s {
	case SpreadCharge:
		return factor(p.ChargeSpread)
	case SpreadRecoveryCharge:
		return factor(p.RecoveryChargeSpread)
	case SpreadResistance:
		return factor(p.ResistanceSpread)
	case SpreadCurrent:
		return factor(p.CurrentSpread)
	case SpreadSemiconductorCapacitance:
		return factor(p.SemiconductorCapacitanceSpread)
	case SpreadTransconductance:
		return factor(p.TransconductanceSpread)
	case SpreadInductance:
		return share(p.InductanceSpread)
	case SpreadDrop:
		return share(p.DropSpread)
	case SpreadThreshold:
		return share(p.ThresholdSpread)
	case SpreadDelay:
		return share(p.DelaySpread)
	case SpreadSupply:
		return share(p.SupplySpread)
	case SpreadLockout:
		return share(p.LockoutSpread)
	case SpreadResistor:
		return share(p.ResistorSpread)
	case SpreadCapacitor:
		return share(p.CapacitorSpread)
	case SpreadExact:
		return 1, 1, true
	}
	return 1, 1, false
}
