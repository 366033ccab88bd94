package transient

// Range is the least and the greatest value of a voltage in an event, and when.
type Range struct {
	Min, Max         float64 // [V]
	MinTime, MaxTime float64 // [s]
}

// Dips is how long a voltage is at or below a level.
type Dips struct {
	Level   float64   // [V]
	Total   float64   // in all [s]
	Longest float64   // the longest time without a break [s]
	Start   float64   // when that one began [s]
	Count   int       // number of times
	Each    []float64 // how long each of them lasted, in their order, the first mostDips; of the pin [s]
	Lasting bool      // the last of them still went on at the end of the window
}

// Signal names a waveform.
type Signal int

// The waveforms.
const (
	Node            Signal        = iota // switch node to COM [V]
	Pin                                  // driver's V_S pin to COM [V]
	Rail                                 // floating rail V_B to COM [V]
	Floating                             // V_BS [V]
	HighDrain                            // v_ds of the high side [V]
	LowDrain                             // v_ds of the low side [V]
	HighGate                             // v_gs of the high side at the die [V]
	LowGate                              // v_gs of the low side at the die [V]
	HighCurrent                          // current from the bus into the node [A]
	LowCurrent                           // current from COM into the node [A]
	HighGateCurrent                      // gate current into the high side [A]
	LowGateCurrent                       // gate current into the low side [A]
	ElementCurrent                       // current of the bootstrap element into the floating rail [A]
	signals                              // their number
	ranged          = HighCurrent        // the signals before have a Range
)

// Waveform is a signal over time, at most 2000 points with its extremes and both ends among them, time rising strictly.
type Waveform struct {
	Signal Signal
	Time   []float64 // [s]
	Value  []float64 // [V] or [A]
}

// Still is the states of the circuit at one time.
type Still struct {
	HighCurrent, LowCurrent float64 // of L1 from the bus, of L2 from COM, into the node [A]
	HighGate, LowGate       float64 // v_gs [V]
	HighDrain, LowDrain     float64 // v_ds [V]
	Pin, Floating           float64 // [V]
	HighCharge, LowCharge   float64 // q_M of the reverse paths [C]
	HighForward, LowForward float64 // current of L_fr of the reverse paths [A]
}

// Course is what an event did, from the command to End.
type Course struct {
	Settled bool    // the current has commutated and the ringing has died away; else the window ended before
	End     float64 // end of the window [s]

	Ranges                         [ranged]Range // of Node to LowGate
	BelowNode, BelowPin, BelowRail []Dips        // at the levels asked for, in their order

	NodeSlew, PinSlew            float64 // largest |dv/dt| while the node is between 10 and 90 % of V_BUS, 0: never there [V/s]
	Slew                         float64 // of the node from 10 to 90 % of V_BUS in the event's direction, 0: not passed [V/s]
	HighSlope, LowSlope          float64 // largest |di/dt| of L1 and of L2 [A/s]
	ChannelSlope                 float64 // of the commanded switch's channel current between 10 and 90 % of |I|, 0: not passed [A/s]
	Lift                         float64 // v_gs at which R_VS holds the gate of a high side that turns off, at most, once the node has gone over [V]
	ChannelTime                  float64 // last fall (off) or first rise (on) of that switch's v_gs through V_th, 0: none [s]
	Gain                         float64 // V_BS at the end less V_BS at the start [V]
	ElementCharge                float64 // through the bootstrap element into the floating rail [C]
	RingFrequency, RingDamping   float64 // of v_ds of the switch that blocks at the end, 0: no ringing of 0.2 % of V_BUS; [Hz], damping ratio [1]
	Last                         Still   // at the end
	Steps, Rejected, Evaluations int     // of the integrator
	Waveforms                    []Waveform
}
