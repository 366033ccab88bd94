package transient

import (
	"errors"
	"fmt"
	"math"

	"floatrail/calc/recharge"
)

// Event is one switching event of a half-bridge. The load current counts positive out of the node.
type Event int

// The events. In each of them one switch obeys the command at t = 0 and the other one stays off.
const (
	TurnOff        Event = iota // high side off, I > 0: the low side's reverse path takes over
	TurnOn                      // high side on, I > 0, into the low side's reverse path
	SinkingTurnOff              // low side off, I < 0: the high side's reverse path takes over
	SinkingTurnOn               // low side on, I < 0, into the high side's reverse path
)

// high tells whether the high side obeys the command, off whether the command is off, falls whether the node falls.
func (e Event) high() bool  { return e == TurnOff || e == TurnOn }
func (e Event) off() bool   { return e == TurnOff || e == SinkingTurnOff }
func (e Event) falls() bool { return e == TurnOff || e == SinkingTurnOn }

// Cell is one position of the bridge in a simulated event: all parallel devices together, at one temperature.
type Cell struct {
	GateSource       float64           // C_gs, C_iss less C_rss at its test voltage [F]
	Transfer         Curve             // C_rss = C_gd over v_ds - v_gs [F]
	Output           Curve             // C_oss = C_ds + C_gd over v_ds [F]
	Transconductance float64           // g_fs [S]
	Threshold        float64           // V_th [V]
	OnResistance     float64           // R_on, slope of the channel at v_ds = 0 [ohm]
	Unidirectional   bool              // IGBT: the channel carries nothing for v_ds < 0
	GateResistance   float64           // R_g for what the gate does in this event: external, internal and the driver's own [ohm]
	OffBias          float64           // gate drive while off, 0 or negative [V]
	Reverse          recharge.Junction // static law of the reverse path
	Offset           float64           // constant part of its drop, of a HEMT that its off bias holds off [V]
	FollowsGate      bool              // a HEMT opens backwards with v_gs: Offset holds at OffBias, less what v_gs is above that, up to V_th
	Recovery         Recovery          // zero: its charge follows at once
	Forward          ForwardRecovery   // zero: none
	Diode            bool              // no switch, a diode: Output is its capacitance; what belongs to channel and gate is not used
}

// Bridge is one half-bridge in one event, as the simulation takes it. High and low side, inductances and currents are those of all
// parallel devices together. Document: Simulation.
type Bridge struct {
	Event    Event
	Bus      float64 // V_BUS [V]
	Load     float64 // I, out of the node, constant [A]
	Supply   float64 // V_DD [V]
	LowDrive float64 // gate drive of the low side while it is on [V]
	Floating float64 // V_BS at t = 0 [V]
	Split    float64 // what the high side's on drive lies above V_BS: 0, or the off bias where that is taken out of V_BS [V]

	L1                float64 // bus to high side to node, HighCommonSource included [H]
	L2                float64 // COM pin to the node's tap, LowCommonSource included [H]
	R1, R2            float64 // resistance in the same branches, shunt included [ohm]
	HighCommonSource  float64 // L_cs1, part of L1 that the gate loop shares [H]
	LowCommonSource   float64 // L_cs2, part of L2 that the gate loop shares [H]
	RingingResistance float64 // R_p beside L1 + L2, split in their proportion; 0: none [ohm]

	NodeResistor         float64          // R_VS between the node and the driver's V_S pin [ohm]
	PinCapacitance       float64          // C_pin of that pin to COM [F]
	BootstrapCapacitance float64          // C_B [F]
	Element              recharge.Element // from V_DD to the floating rail, without R_VS
	Clamped              bool             // a diode from COM to the pin is fitted
	Clamp                recharge.Junction

	High, Low Cell
}

// What ends a simulation without a result, errors.Is tells them apart.
var (
	ErrInterrupted = errors.New("the simulation was interrupted")
	ErrOutside     = errors.New("the event cannot be simulated")
	ErrUnsolved    = errors.New("the simulation did not converge")
)

func outside(format string, args ...any) error {
	return fmt.Errorf("%w: %s", ErrOutside, fmt.Sprintf(format, args...))
}

// quantity is a parameter with its least value.
type quantity struct {
	name  string
	value float64
	above bool    // must be above least, not only not below it
	least float64 // in the value's unit
}

func checked(place string, all []quantity) error {
	for _, q := range all {
		switch {
		case q.value != q.value || math.IsInf(q.value, 0):
			return outside("%s%s is not known", place, q.name)
		case q.above && !(q.value > q.least):
			return outside("%s%s is %g, not above %g", place, q.name, q.value, q.least)
		case q.value < q.least:
			return outside("%s%s is %g, below %g", place, q.name, q.value, q.least)
		}
	}
	return nil
}

// check refuses what the equations do not hold for, with the reason.
func (b *Bridge) check() error {
	any := math.Inf(-1)
	if b.Event < TurnOff || b.Event > SinkingTurnOn {
		return outside("there is no event %d", b.Event)
	}
	err := checked("", []quantity{
		{"the bus voltage", b.Bus, true, 0}, {"the load current", b.Load, false, any}, {"the gate supply", b.Supply, false, any},
		{"the low side's drive", b.LowDrive, false, any}, {"the floating voltage", b.Floating, false, any},
		{"the bias taken out of V_BS", b.Split, false, any},
		{"L1", b.L1, true, 0}, {"L2", b.L2, true, 0}, {"R1", b.R1, false, 0}, {"R2", b.R2, false, 0},
		{"the high side's common source inductance", b.HighCommonSource, false, 0}, {"the low side's common source inductance", b.LowCommonSource, false, 0},
		{"the ringing resistance", b.RingingResistance, false, 0}, {"the node resistor", b.NodeResistor, false, 0},
		{"the driver's pin capacitance", b.PinCapacitance, true, 0}, {"the bootstrap capacitance", b.BootstrapCapacitance, true, 0},
		{"the bootstrap element's resistance", b.Element.Resistance, false, 0},
	})
	if err != nil {
		return err
	}
	switch {
	case b.HighCommonSource > b.L1*(1+1e-9):
		return outside("the high side's common source inductance exceeds L1, which contains it")
	case b.LowCommonSource > b.L2*(1+1e-9):
		return outside("the low side's common source inductance exceeds L2, which contains it")
	case b.Load > 0 && !b.Event.high(), b.Load < 0 && b.Event.high():
		return outside("a load current of %g A does not flow in this event's direction", b.Load)
	case b.Element.Switch && b.Event == SinkingTurnOn && b.Element.Resistance == 0:
		return outside("the integrated switch has no resistance")
	case b.High.Diode, b.Low.Diode && !b.Event.high():
		return outside("a diode obeys no command")
	}
	if !b.Element.Switch {
		if err := checkJunction("the bootstrap element's ", b.Element.Junction); err != nil {
			return err
		}
	}
	if b.Clamped {
		if err := checkJunction("the node clamp's ", b.Clamp); err != nil {
			return err
		}
	}
	if err := b.High.check("the high side's "); err != nil {
		return err
	}
	return b.Low.check("the low side's ")
}

func checkJunction(place string, j recharge.Junction) error {
	return checked(place, []quantity{
		{"n·V_T", j.Slope, false, 0}, {"ln I_S", j.LogSaturation, false, math.Inf(-1)}, {"series resistance", j.Resistance, false, 0},
	})
}

func (c *Cell) check(place string) error {
	any := math.Inf(-1)
	if !c.Diode {
		if err := checked(place, []quantity{
			{"C_gs", c.GateSource, true, 0}, {"transconductance", c.Transconductance, true, 0}, {"threshold", c.Threshold, false, any},
			{"on-resistance", c.OnResistance, true, 0}, {"gate resistance", c.GateResistance, true, 0}, {"off bias", c.OffBias, false, any},
		}); err != nil {
			return err
		}
		if err := c.Transfer.check(place + "C_rss"); err != nil {
			return err
		}
	}
	if err := c.Output.check(place + "C_oss"); err != nil {
		return err
	}
	if err := checkJunction(place+"reverse path's ", c.Reverse); err != nil {
		return err
	}
	if f := c.Forward; math.IsInf(f.Resistance, 1) && f.Inductance > 0 {
		f.Resistance = 0
		return checked(place, []quantity{{"L_fr", f.Inductance, false, 0}, {"reverse offset", c.Offset, false, any}})
	}
	return checked(place, []quantity{
		{"reverse offset", c.Offset, false, any}, {"τ", c.Recovery.Tau, false, 0}, {"T_M", c.Recovery.Transit, false, 0},
		{"L_fr", c.Forward.Inductance, false, 0}, {"R_fr", c.Forward.Resistance, false, 0},
	})
}

func (c *Curve) check(name string) error {
	if len(c.Points) == 0 {
		return outside("%s is not known", name)
	}
	before := math.Inf(-1)
	for _, p := range c.Points {
		if !(p.Voltage >= before) || !(p.Voltage > -1) || !(p.Capacitance*c.scale() > 0) || math.IsInf(p.Voltage+p.Capacitance*c.scale(), 0) {
			return outside("%s is no curve of positive capacitances over rising voltages", name)
		}
		before = p.Voltage
	}
	return nil
}
