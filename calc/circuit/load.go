package circuit

import (
	"math"

	"floatrail/calc/capacitor"
	"floatrail/calc/charge"
	"floatrail/calc/corner"
	"floatrail/calc/stage"
)

// Loads are the standing loads of the floating supply.
func (c *Circuit) Loads() charge.Loads {
	return *corner.Memo(c.Draw, slotLoads, false, &c.loadsAt, c.loads)
}

func (c *Circuit) loads() charge.Loads {
	s := c.Stage
	l := charge.Loads{
		Quiescent:        c.Need(&s.Driver.FloatingQuiescentCurrent),
		OffsetLeakage:    c.Need(&s.Driver.OffsetLeakage),
		GateLeakage:      c.Need(&s.HighSide.GateLeakage) * s.HighSide.Count(),
		DiodeLeakage:     c.elementLeakage(),
		CapacitorLeakage: c.CapacitorLeakage(&s.Bootstrap.Capacitor, c.Supply()),
		Other:            c.Need(&s.Bootstrap.OtherLoad),
	}
	switch s.Bootstrap.Clamp.Presence() {
	case stage.Fitted:
		l.ClampLeakage = c.Need(&s.Bootstrap.Clamp.Leakage)
	case stage.PresenceUnknown:
		l.ClampLeakage = c.Want(s.Bootstrap.Clamp.Field)
	}
	switch p := &s.HighSide.GatePullDown; p.Presence() {
	case stage.Fitted:
		l.PullDown = s.HighSide.Count() / c.Need(&p.Resistance)
	case stage.PresenceUnknown:
		l.PullDown = c.Want(p.Field)
	}
	return l
}

// elementLeakage is the reverse leakage of the element [A]; that of an integrated one is part of the driver's offset leakage unless given.
func (c *Circuit) elementLeakage() float64 {
	b := &c.Stage.Bootstrap
	if b.Element == stage.DiscreteDiode {
		return c.Need(&b.Diode.ReverseLeakage)
	}
	if i, ok := c.Has(&b.Diode.ReverseLeakage); ok {
		return i
	}
	return 0
}

// CapacitorLeakage is the leakage of a capacitor at a voltage [A]: as given, from its insulation, or by the rule of its class.
func (c *Circuit) CapacitorLeakage(s *stage.Capacitor, v float64) float64 {
	if i, ok := c.Has(&s.Leakage); ok {
		return i
	}
	value, ok := c.Has(&s.EffectiveCapacitance)
	if !ok {
		value = c.Need(&s.Capacitance)
	}
	rc, given := c.Has(&s.Insulation)
	kind := Kind(s)
	switch {
	case given:
		return c.hotInsulation() * capacitor.InsulationLeakage(value, v, rc)
	case kind == capacitor.Aluminium || kind == capacitor.Tantalum:
		c.Assume(stage.Assumption{Field: s.Leakage.Field, Assumed: "0.01·C·V or 3 µA, the greater", Direction: stage.Optimistic,
			Reason: "the usual limit at 20 °C; no leakage is given"})
		return capacitor.ElectrolyticLeakage(value, v)
	}
	c.Assume(stage.Assumption{Field: s.Leakage.Field, Assumed: "insulation of 500 MΩ·µF or 10 GΩ, the lower", Direction: stage.Conservative,
		Reason: "the usual limit of ceramics; no leakage or insulation is given"})
	return c.hotInsulation() * capacitor.InsulationLeakage(value, v, nan)
}

// hotInsulation is the growth of a ceramic's leakage with temperature: tenfold from 25 to 125 °C, in proportion in the logarithm
// [common-practice].
func (c *Circuit) hotInsulation() float64 {
	return math.Pow(10, math.Max(0, c.Set.Ambient-stage.ReferenceTemperature)/100)
}

// edge is what leaves C_B at the rising edge, as a line over V_BS after the edge.
type edge struct {
	gate        float64 // at no further voltage [C]
	gatePerVolt float64 // [F]
	offBias     float64 // [C]
	levelShift  float64 // [C]
	junction    float64 // [C]
	recovery    float64 // data-sheet recovery charge of the element [C]
	tau         float64 // its time constant [s]
}

func (c *Circuit) edge() *edge { return corner.Memo(c.Draw, slotEdge, false, &c.edgeAt, c.makeEdge) }

func (c *Circuit) makeEdge() edge {
	h, b := &c.Stage.HighSide, &c.Stage.Bootstrap
	n := h.Count()
	e := edge{levelShift: c.Need(&c.Stage.Driver.LevelShiftCharge)}
	bias := c.OffBias(h)
	if bias.Voltage != 0 {
		e.offBias = n * bias.Charge(c.Need(&h.InputCapacitance))
	}
	e.gate, e.gatePerVolt = c.gateLine(bias)
	e.gate, e.gatePerVolt = n*e.gate, n*e.gatePerVolt
	if b.Element == stage.IntegratedSwitch {
		return e
	}
	bus := c.bus()
	if b.Element == stage.DiscreteDiode {
		e.junction = c.Need(&b.Diode.JunctionCapacitance) * bus
		e.recovery = c.Need(&b.Diode.RecoveryCharge)
	} else {
		if cj, ok := c.Has(&b.Diode.JunctionCapacitance); ok {
			e.junction = cj * bus
		}
		e.recovery = c.Need(&b.Diode.RecoveryCharge)
	}
	if e.recovery > 0 {
		e.tau = e.recovery / c.Need(&b.Diode.RecoveryTestCurrent)
	}
	return e
}

func (c *Circuit) bus() float64 {
	if c.Point == nil {
		return c.NoPoint()
	}
	return c.Need(&c.Point.BusVoltage)
}

// OffBias is the off bias of a switch.
func (c *Circuit) OffBias(s *stage.Switch) charge.OffBias {
	b := charge.OffBias{Voltage: c.Need(&s.OffBias), Split: s.OffBiasSource == stage.Split}
	if b.Voltage != 0 && b.Voltage == b.Voltage && s.OffBiasSource == "" {
		c.Want(s.Field + ".offBiasSource")
	}
	return b
}

// GateCharge is the gate charge curve of one device of a position.
func (c *Circuit) GateCharge(h *stage.Switch) charge.GateCharge {
	optional := func(q *stage.Quantity) float64 {
		if v, ok := c.Has(q); ok {
			return v
		}
		return nan
	}
	return charge.GateCharge{
		Specified: c.Need(&h.GateCharge), SpecifiedAt: optional(&h.GateChargeVoltage),
		GateSource: optional(&h.GateSourceCharge), GateDrain: optional(&h.GateDrainCharge), Plateau: optional(&h.PlateauVoltage),
		InputCapacitanceMin: optional(&h.InputCapacitance), InputCapacitanceMax: optional(&h.InputCapacitance),
	}
}

// gateLine is the gate charge of one device over V_BS as a line: charge at V_BS = 0 and slope.
func (c *Circuit) gateLine(bias charge.OffBias) (atZero, perVolt float64) {
	g := c.GateCharge(&c.Stage.HighSide)
	if g.SpecifiedAt != g.SpecifiedAt {
		c.Assume(stage.Assumption{Field: c.Stage.HighSide.GateChargeVoltage.Field, Assumed: "the drive in use", Direction: stage.Optimistic,
			Reason: "the gate voltage at which the gate charge was specified is not given"})
		return g.Specified, 0
	}
	// The line may be negative near 0 V, far below the plateau, where it does not describe the curve; what leaves C_B is not less than 0.
	top := bias.Drive(c.Ceiling())
	slope, known := g.Slope(top)
	charge := g.Specified + slope*(top-g.SpecifiedAt) // at the ceiling
	if at, ok := c.Has(&c.Stage.HighSide.ChargeSlope); ok && !known {
		slope, _ = g.Slope(math.Inf(1))
		slope *= at
		charge = g.Specified + slope*(top-g.SpecifiedAt)
	} else if !known { // downward from there the smallest credible slope takes the least off
		slope, _ = g.Slope(math.Min(top, g.SpecifiedAt))
	}
	return charge + slope*(bias.Drive(0)-top), slope
}

// EdgeCharges are the charges of the rising edge at a floating voltage after it [V] and a recovery charge [C].
func (c *Circuit) EdgeCharges(v, recovery float64) charge.Edge {
	e := c.edge()
	return charge.Edge{Gate: math.Max(0, e.gate+e.gatePerVolt*v), OffBias: e.offBias, LevelShift: e.levelShift, Recovery: recovery, Junction: e.junction}
}
