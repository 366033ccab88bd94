package startup

import (
	"math"

	"floatrail/calc/recharge"
)

// Charge is the first charge of one bootstrap capacitor from a stiff V_DD. A negative load, a capacitance that is not positive and NaN
// give NaN everywhere.
type Charge struct {
	Element     recharge.Element
	Capacitance float64 // C_B, at its largest for times, at its smallest for the slew [F]
	Supply      float64 // V_DD [V]
	Node        float64 // voltage of the switch node while C_B charges, normally 0 [V]
	Load        float64 // I_0, constant load of the floating supply, not negative [A]
	Initial     float64 // V_BS at the start, not negative [V]
}

// drive is E = V_DD - V_node [V].
func (c Charge) drive() float64 { return c.Supply - c.Node }

// valid tells whether there is anything to compute.
func (c Charge) valid() bool {
	return c.Capacitance > 0 && c.Load >= 0 && c.Initial == c.Initial && c.drive() == c.drive()
}

// Time returns the time [s] to the target [V] with the element conducting throughout: 0 when V_BS starts there or above, +Inf when the
// element carries the load alone before. eq. (3) of package recharge.
func (c Charge) Time(target float64) float64 {
	switch {
	case !c.valid() || target != target:
		return math.NaN()
	case c.Initial >= target:
		return 0
	}
	return c.Element.TimeTo(c.Capacitance, c.drive(), c.Load, c.Initial, target)
}

// Reached returns V_BS after the time t [s] with the element conducting throughout [V].
func (c Charge) Reached(t float64) float64 {
	switch {
	case !c.valid() || t != t:
		return math.NaN()
	case math.IsInf(t, 1):
		return c.Settled()
	}
	return c.advance(c.Initial, t)
}

// advance returns V_BS after the element has conducted for the time t [s], from v [V]; a supply that is empty stays at 0 [V].
func (c Charge) advance(v, t float64) float64 {
	v, _ = c.Element.Advance(v, c.conducting(t), c.Capacitance)
	return math.Max(v, 0)
}

func (c Charge) conducting(t float64) recharge.Interval {
	return recharge.Interval{Duration: t, Drive: c.drive(), Conducts: true, Load: c.Load}
}

// Settled returns the V_BS at which the element carries just the load [V], 0 where that would be below 0. For a node that stands at a
// pre-bias without a pulse of the low side, Node is that pre-bias. An integrated switch conducts only while the low side is
// on: without a pulse there is no charge at all, which is not this number.
func (c Charge) Settled() float64 {
	if !c.valid() {
		return math.NaN()
	}
	return math.Max(c.Element.Settled(c.drive(), c.Load), 0)
}

// PeakCurrent returns the element's current at the start, its largest while V_BS rises [A].
func (c Charge) PeakCurrent() float64 {
	if !c.valid() {
		return math.NaN()
	}
	return math.Max(c.Element.Current(c.drive()-c.Initial), 0)
}

// Slew returns the steepest rise of V_BS, i_peak/C; the load would take Load/C off it [V/s].
func (c Charge) Slew() float64 { return c.PeakCurrent() / c.Capacitance }

// ResistorEnergy returns the energy that a resistance [ohm], part of the element's, takes from the start to equilibrium without load
// [J]; C·(E - v_0)²/2 for the whole resistance and no drop [slua887a, eq. 7].
func (c Charge) ResistorEnergy(resistance float64) float64 {
	if !c.valid() {
		return math.NaN()
	}
	return c.Element.ResistorEnergy(c.Capacitance, c.drive(), c.Initial, resistance)
}
