package stage

// Header stands at the beginning of every component.
type Header struct {
	Field   string // path in the request
	Present bool   // something was written
	Use     string // id of the part it was taken from
	Refdes  string
	Part    string
	Fit     string // FITTED, NOT_FITTED or empty
}

// Presence of a component that may be absent.
type Presence uint8

// Presences.
const (
	PresenceUnknown Presence = iota
	NotFitted
	Fitted
)

// Presence tells whether the component is there.
func (h *Header) Presence() Presence {
	switch {
	case h.Fit == "NOT_FITTED":
		return NotFitted
	case h.Present:
		return Fitted
	}
	return PresenceUnknown
}

// Name is the reference designator, or the role where there is none.
func (h *Header) Name() string {
	if h.Refdes != "" {
		return h.Refdes
	}
	return Relative(h.Field)
}

// List is a repeated field that knows its path.
type List[T any] struct {
	Field string
	Items []T

	// Position is where a part's characteristic lies between the lower (-1), typical (0) and upper (1) curve: the points of one curve move
	// together. Made by Complete.
	Position Quantity
}

// curve gives the position of a characteristic, its path and number of points.
func (l *List[T]) curve() (position *Quantity, field string) { return &l.Position, l.Field }

// GateSupply is the supply of the gate drivers.
type GateSupply struct {
	Header
	ID               string
	Voltage          Quantity // V_DD to COM [V]
	CurrentLimit     Quantity // [A]
	SeriesResistance Quantity // [ohm]
	UVLOFalling      Quantity // lockout on V_DD [V]
	UVLORising       Quantity // [V]
	VoltageMax       Quantity // [V]
	Reservoir        Capacitor
	StagesSharing    int // 0: not given
}

// Driver is the gate driver with its floating channel.
type Driver struct {
	Header
	UVLORising                    Quantity // floating lockout [V]
	UVLOFalling                   Quantity // [V]
	FloatingQuiescentCurrent      Quantity // [A]
	OffsetLeakage                 Quantity // [A]
	LevelShiftCharge              Quantity // [C]
	PullUpResistance              Quantity // [ohm]
	PullDownResistance            Quantity // [ohm]
	PeakSourceCurrent             Quantity // [A]
	PeakSinkCurrent               Quantity // [A]
	PassivePullDown               Quantity // [ohm]
	FloatingVoltageMax            Quantity // [V]
	FloatingVoltageRecommendedMax Quantity // [V]
	OffsetVoltageMax              Quantity // V_B to COM [V]
	RailMin                       Quantity // [V]
	RailOperationalMin            Quantity // [V]
	NodeUndershoot                List[UndershootRow]
	NodeOperationalMin            Quantity // [V]
	SlewMax                       Quantity // [V/s]
	FloatingSlewMax               Quantity // [V/s]
	MinimumPulse                  Quantity // [s]
	EdgeTime                      Quantity // [s]
	TurnOnDelay                   Quantity // [s]
	TurnOffDelay                  Quantity // [s]
	DelayMismatch                 Quantity // [s]
	EnableDelay                   Quantity // [s]
	QuiescentCurrent              Quantity // [A]
	ThermalResistance             Quantity // [K/W]
	JunctionMax                   Quantity // [degC]
}

// UndershootRow is one row of the table of permitted negative node voltages.
type UndershootRow struct {
	Voltage  Quantity // [V]
	Duration Quantity // [s]; absent: static
}

// Technologies of switches.
const (
	SiMOSFET  = "SI_MOSFET"
	SiCMOSFET = "SIC_MOSFET"
	IGBT      = "IGBT"
	GaNHEMT   = "GAN_HEMT"
	DiodeOnly = "DIODE"
)

// Sources of an off bias.
const (
	Separate = "SEPARATE"
	Split    = "SPLIT"
)

// Switch is a power switch; values are for one device.
type Switch struct {
	Header
	Kind                            string
	Parallel                        int      // devices in parallel; 0: not given, counts as one
	GateCharge                      Quantity // [C]
	GateSourceCharge                Quantity // [C]
	GateDrainCharge                 Quantity // [C]
	GateChargeVoltage               Quantity // [V]
	PlateauVoltage                  Quantity // [V]
	ThresholdVoltage                Quantity // [V]
	ThresholdTemperatureCoefficient Quantity // [V/K]
	Transconductance                Quantity // [S]
	InputCapacitance                Quantity // [F]
	InputCapacitanceVoltage         Quantity // [V]
	ReverseTransferCapacitance      List[CapacitancePoint]
	OutputCapacitance               List[CapacitancePoint]
	InternalGateResistance          Quantity // [ohm]
	OnResistance                    Quantity // [ohm]
	ChannelPoints                   List[ChannelPoint]
	DriveVoltageMin                 Quantity // [V]
	GateVoltageMax                  Quantity // [V]
	GateVoltageRecommendedMax       Quantity // [V]
	GateVoltageMin                  Quantity // [V]
	GateLeakage                     Quantity // [A]
	BlockingVoltage                 Quantity // [V]
	CurrentFallTime                 Quantity // [s]
	Reverse                         ReverseConduction
	GateOn                          Resistor
	GateOff                         Resistor
	GatePullDown                    Resistor
	GateLoopInductance              Quantity // [H]
	OffBias                         Quantity // [V]
	OffBiasSource                   string

	// CommutationCharge stands for the charge of an output capacitance that nobody gave; made by Complete [C].
	CommutationCharge Quantity
	// ChargeSlope stands for the slope of a gate charge that its parts do not give, as a share of the largest credible one; made by
	// Complete [1].
	ChargeSlope Quantity
}

// Count is the number of devices in parallel.
func (s *Switch) Count() float64 { return float64(max(1, s.Parallel)) }

// CapacitancePoint is a capacitance at one drain voltage.
type CapacitancePoint struct {
	Voltage     Quantity // [V]
	Capacitance Quantity // [F]
}

// ChannelPoint is an on-state voltage at one current.
type ChannelPoint struct {
	Current Quantity // [A]
	Voltage Quantity // [V]
}

// ForwardPoint is a forward voltage at one current.
type ForwardPoint struct {
	Current Quantity // [A]
	Voltage Quantity // [V]
}

// ReverseConduction is the body diode, an antiparallel diode or the reverse conduction of a HEMT.
type ReverseConduction struct {
	Header
	ForwardPoints              List[ForwardPoint]
	GateVoltage                Quantity // [V]
	RecoveryCharge             Quantity // [C]
	RecoveryTime               Quantity // [s]
	RecoveryTestCurrent        Quantity // [A]
	RecoveryTestSlope          Quantity // [A/s]
	PeakForwardRecovery        Quantity // [V]
	ForwardRecoveryTime        Quantity // [s]
	ForwardRecoveryTestCurrent Quantity // [A]
	ForwardRecoveryTestSlope   Quantity // [A/s]
}

// Elements that recharge C_B.
const (
	DiscreteDiode    = "DISCRETE_DIODE"
	IntegratedDiode  = "INTEGRATED_DIODE"
	IntegratedSwitch = "INTEGRATED_SWITCH"
)

// Bootstrap is the branch that recharges C_B.
type Bootstrap struct {
	Header
	Element          string
	Diode            Diode
	SwitchResistance Quantity // [ohm]
	Resistor         Resistor
	Capacitor        Capacitor
	Clamp            Clamp
	OtherLoad        Quantity // [A]
}

// Diode is a diode.
type Diode struct {
	Header
	ForwardPoints            List[ForwardPoint]
	SeriesResistance         Quantity // [ohm]
	ReverseLeakage           Quantity // [A]
	RecoveryCharge           Quantity // [C]
	RecoveryTime             Quantity // [s]
	RecoveryTestCurrent      Quantity // [A]
	RecoveryTestSlope        Quantity // [A/s]
	JunctionCapacitance      Quantity // [F]
	ReverseVoltageMax        Quantity // [V]
	AverageCurrentMax        Quantity // [A]
	RepetitivePeakCurrentMax Quantity // [A]
	SurgeCurrentMax          Quantity // [A]
	ThermalResistance        Quantity // [K/W]
	JunctionMax              Quantity // [degC]
}

// Clamp is a clamp across the floating supply.
type Clamp struct {
	Header
	Voltage Quantity // [V]
	Leakage Quantity // [A]
	Power   Quantity // [W]
}

// Resistor is a resistor.
type Resistor struct {
	Header
	Resistance     Quantity // [ohm]
	Power          Quantity // [W]
	PulseEnergyMax Quantity // [J]
}

// Capacitor is a capacitor.
type Capacitor struct {
	Header
	Marking              string
	Capacitance          Quantity // [F]
	EffectiveCapacitance Quantity // [F]
	VoltageRating        Quantity // [V]
	Dielectric           string
	CaseSize             string
	BiasCurve            List[BiasPoint]
	AgeingPerDecade      Quantity // [1]
	ServiceTime          Quantity // [s]
	Leakage              Quantity // [A]
	Insulation           Quantity // [s]
	ESR                  Quantity // [ohm]
	Temperature          Quantity // [degC]

	// Made by Complete.
	TemperatureChange Quantity // change of capacitance over temperature [1]
	Bias              Quantity // share of the bias curve that counts, or the remaining fraction where there is no curve [1]
}

// BiasPoint is the remaining capacitance at one direct voltage.
type BiasPoint struct {
	Voltage   Quantity // [V]
	Remaining Quantity // [1]
}

// Layout is the inductances and what hangs on the switch node.
type Layout struct {
	Header
	LowSideInductance    Quantity // L2 [H]
	BusLoopInductance    Quantity // L1 [H]
	LoopInductance       Quantity // L1 + L2 [H]
	HighSideCommonSource Quantity // [H]
	LowSideCommonSource  Quantity // [H]
	Shunt                Resistor
	LoopResistance       Quantity // [ohm]
	RingingQuality       Quantity // [1]
	NodeResistor         Resistor
	NodeClamp            Diode
	DriverPinCapacitance Quantity // [F]
	Measured             MeasuredSlopes
}

// MeasuredSlopes are slopes measured on the board, as magnitudes.
type MeasuredSlopes struct {
	Header
	TurnOffCurrentSlope Quantity // [A/s]
	TurnOnCurrentSlope  Quantity // [A/s]
	TurnOffVoltageSlope Quantity // [V/s]
	TurnOnVoltageSlope  Quantity // [V/s]
}
