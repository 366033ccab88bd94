package stage

import (
	"math"
	"strings"
)

// Stage is one half-bridge with its floating supply and the conditions under which it works.
type Stage struct {
	Header
	ID              string
	FormerID        string
	Title           string
	GateSupply      GateSupply
	Driver          Driver
	HighSide        Switch
	LowSide         Switch
	Bootstrap       Bootstrap
	Layout          Layout
	OperatingPoints List[OperatingPoint]
	Startup         Startup

	inputs []*Quantity // by ID, made by Complete
}

// Inputs are the quantities by ID; the first is nil.
func (s *Stage) Inputs() []*Quantity { return s.inputs }

// OperatingPoint is one operating point; exactly one of the modes is set.
type OperatingPoint struct {
	Header
	Name                string
	BusVoltage          Quantity // [V]
	LoadCurrent         Quantity // out of the node [A]
	RippleCurrent       Quantity // peak to peak [A]
	SwitchingFrequency  Quantity // [Hz]
	DeadTime            Quantity // [s]
	JunctionTemperature Quantity // of the switches [degC]
	AmbientTemperature  Quantity // [degC]
	Overload            bool
	FixedDuty           *FixedDuty
	Sinusoidal          *Sinusoidal
	SixStep             *SixStep
	Burst               *Burst
	HeldOn              *HeldOn
}

// Kinds of mode.
const (
	ModeFixedDuty  = "fixedDuty"
	ModeSinusoidal = "sinusoidal"
	ModeSixStep    = "sixStep"
	ModeBurst      = "burst"
	ModeHeldOn     = "heldOn"
)

// Mode is the kind of mode; empty where none is set.
func (p *OperatingPoint) Mode() string {
	switch {
	case p.FixedDuty != nil:
		return ModeFixedDuty
	case p.Sinusoidal != nil:
		return ModeSinusoidal
	case p.SixStep != nil:
		return ModeSixStep
	case p.Burst != nil:
		return ModeBurst
	case p.HeldOn != nil:
		return ModeHeldOn
	}
	return ""
}

// ModeInputs are the quantities of the mode that is set.
func (p *OperatingPoint) ModeInputs() []*Quantity {
	switch {
	case p.FixedDuty != nil:
		return []*Quantity{&p.FixedDuty.Duty, &p.FixedDuty.LowSideOnTime}
	case p.Sinusoidal != nil:
		m := p.Sinusoidal
		return []*Quantity{&m.ModulationIndex, &m.FundamentalFrequency, &m.DisplacementAngle}
	case p.SixStep != nil:
		return []*Quantity{&p.SixStep.ElectricalFrequency, &p.SixStep.Duty}
	case p.Burst != nil:
		m := p.Burst
		return []*Quantity{&m.Duty, &m.ActiveTime, &m.IdleTime, &m.IdleNodeVoltage}
	case p.HeldOn != nil:
		return []*Quantity{&p.HeldOn.Duration, &p.HeldOn.InitialVoltage}
	}
	return nil
}

// FixedDuty is constant duty.
type FixedDuty struct {
	Header
	Duty          Quantity // commanded [1]
	LowSideOnTime Quantity // [s]
}

// Sinusoidal is sinusoidal modulation of one leg.
type Sinusoidal struct {
	Header
	ModulationIndex      Quantity // amplitude over half the DC-link voltage [1]
	FundamentalFrequency Quantity // [Hz]
	DisplacementAngle    Quantity // [rad]
	ZeroSequence         string
}

// RefreshesAlways tells whether no period leaves the high side on throughout: no clamp to the upper rail, and no index beyond the linear range.
func (m *Sinusoidal) RefreshesAlways() bool {
	most := m.ModulationIndex.Max
	switch m.ZeroSequence {
	case "NONE":
		return most < 1
	case "THIRD_HARMONIC", "MIN_MAX", "CLAMP_120_LOW":
		return most < 2/math.Sqrt(3)
	}
	return false
}

// SixStep is six-step commutation.
type SixStep struct {
	Header
	ElectricalFrequency Quantity // [Hz]
	Chopping            string
	Duty                Quantity // [1]
}

// Burst is bursts of pulses.
type Burst struct {
	Header
	Duty            Quantity // [1]
	ActiveTime      Quantity // [s]
	IdleTime        Quantity // [s]
	IdleNodeVoltage Quantity // [V]
}

// HeldOn holds the high side on.
type HeldOn struct {
	Header
	Duration       Quantity // [s]
	InitialVoltage Quantity // V_BS after the turn-on charge [V]
}

// Startup is the order of events before the first pulse.
type Startup struct {
	Header
	TimeAvailable  Quantity // [s]
	PulseWidth     Quantity // [s]
	PulsePeriod    Quantity // [s]
	InitialVoltage Quantity // [V]
	Prebias        Quantity // node voltage [V]
	Simultaneous   int      // stages of a group; 0: not given
	StageInterval  Quantity // between the starts of groups [s]
}

// Relative cuts the request's prefix (`stage.` or `stages[3].`) off a path.
func Relative(field string) string {
	if head, rest, ok := strings.Cut(field, "."); ok && (head == "stage" || strings.HasPrefix(head, "stages[")) {
		return rest
	}
	return field
}

// Identity is the name under which findings are kept: the former one after a rename.
func (s *Stage) Identity() string {
	if s.FormerID != "" {
		return s.FormerID
	}
	return s.ID
}

// Part gives the header of a component by its path relative to the stage; nil where there is none of that path.
func (s *Stage) Part(path string) *Header {
	switch path {
	case "driver":
		return &s.Driver.Header
	case "highSide":
		return &s.HighSide.Header
	case "lowSide":
		return &s.LowSide.Header
	case "gateSupply.reservoir":
		return &s.GateSupply.Reservoir.Header
	case "bootstrap.capacitor":
		return &s.Bootstrap.Capacitor.Header
	case "bootstrap.diode":
		return &s.Bootstrap.Diode.Header
	case "bootstrap.resistor":
		return &s.Bootstrap.Resistor.Header
	case "bootstrap.clamp":
		return &s.Bootstrap.Clamp.Header
	}
	return nil
}
