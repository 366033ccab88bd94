package charge

import "floatrail/calc/recharge"

// Loads are the standing loads of the floating supply: constant currents, which
// flow all the time, and the gate pull-down, which loads V_BS only while the
// high side is on. A load that does not exist is 0, one that is not known NaN.
type Loads struct {
	Quiescent        float64 // I_QBS of the driver's floating section [A]
	OffsetLeakage    float64 // I_LK from V_B to COM [A]
	GateLeakage      float64 // I_GSS, all parallel devices [A]
	DiodeLeakage     float64 // reverse leakage of D_B [A]
	CapacitorLeakage float64 // leakage of C_B [A]
	ClampLeakage     float64 // leakage of the clamp across V_BS or the gate [A]
	Other            float64 // anything else fed from V_BS [A]
	PullDown         float64 // conductance 1/R_GS, 0 when none is fitted [S]
}

// Total returns I_0 [A], the sum of the constant currents. The pull-down is not
// among them.
func (l Loads) Total() float64 {
	return l.Quiescent + l.OffsetLeakage + l.GateLeakage + l.DiodeLeakage +
		l.CapacitorLeakage + l.ClampLeakage + l.Other
}

// Hold is the state from which C_B carries the loads without recharge while the
// high side is on.
type Hold struct {
	Start       float64 // V_BS at the beginning [V]
	Capacitance float64 // effective capacitance of C_B [F]
	Loads       Loads   // loads; PullDown counts for the whole time
}

// Voltage returns V_BS [V] after time t >= 0 [s], the solution of C·dv/dt = -I_0 - G·v:
//
//	v(t) = (v_0 + I_0/G)·exp(-G·t/C) - I_0/G        G → 0: v_0 - I_0·t/C
//
// The law continues below 0 V, where it no longer describes a driver [textbook].
func (h Hold) Voltage(t float64) float64 {
	return recharge.Hold(h.Start, h.Loads.Total(), h.Loads.PullDown, h.Capacitance, t)
}

// Time returns the time [s] for which V_BS stays at or above limit [V], the inverse of Voltage:
//
//	t = (C/G)·ln((v_0 + I_0/G)/(v_limit + I_0/G))    G → 0: C·(v_0 - v_limit)/I_0
//
// It is 0 when V_BS starts at or below the limit and +Inf when the loads never bring it there.
func (h Hold) Time(limit float64) float64 {
	return recharge.HoldTime(h.Start, h.Loads.Total(), h.Loads.PullDown, h.Capacitance, limit)
}
