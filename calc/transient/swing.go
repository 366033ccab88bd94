package transient

import "math"

// Steps is the number of equal steps of voltage into which a Swing is divided.
const Steps = 16

// Swing is the movement of the node from one rail to the other in equal steps of voltage.
type Swing struct {
	Bus  float64        // V_BUS, the whole way [V]
	Slew [Steps]float64 // mean slew of each step, in order of time, never negative [V/s]
}

// TurnOnSwing returns the swing of the node when the active switch takes over the current i [A], at the bus voltage bus [V], eq. (3);
// passive is C_oss of the other switch [F]. Its v_ds rises from 0 to the bus while the active one's falls. NaN throughout where the
// active switch cannot carry i, and for i < 0. Uses of the active switch threshold, transconductance and both curves.
func TurnOnSwing(bus, i float64, active *Switch, passive Curve, g Gate) Swing {
	return gateSwing(bus, positive(g.On-active.Plateau(i)), i, active, passive, g.Resistance, true)
}

// TurnOffSwing returns the swing of the node when the active switch gives up the current i [A], at the bus voltage bus [V], eq. (4);
// passive is C_oss of the other switch [F]. Its v_ds falls from the bus to 0 while the active one's rises. With i = 0 nothing moves
// the node: slew 0. NaN throughout where the off drive is not below the plateau, and for i < 0. Uses of the active switch threshold,
// transconductance and both curves.
func TurnOffSwing(bus, i float64, active *Switch, passive Curve, g Gate) Swing {
	return gateSwing(bus, positive(active.Plateau(i)-g.Off), i, active, passive, g.Resistance, false)
}

// gateSwing is the swing that the gate drives with the voltage drive [V] across the resistance r [ohm], in the first case (on) with
// v_ds of the active switch falling. In each step the charges stand for the capacitances, which makes its time exact.
func gateSwing(bus, drive, i float64, active *Switch, passive Curve, r float64, on bool) Swing {
	if !(i >= 0) {
		drive = math.NaN()
	}
	var at grid
	at.divide(bus)
	transfer, output, other := active.Transfer.steps(&at), active.Output.steps(&at), passive.steps(&at)
	w := Swing{Bus: bus}
	for k := range Steps {
		down := Steps - 1 - k
		dv := bus / Steps
		if on {
			w.Slew[k] = drive * dv / (r*transfer[down] + (output[down]+other[k])/active.Transconductance)
			continue
		}
		sum := output[k] + other[down]
		w.Slew[k] = math.Min(drive*dv/(r*transfer[k]+sum/active.Transconductance), i*dv/sum)
	}
	return w
}

// UniformSwing returns the swing over bus [V] at one slew [V/s], as measured.
func UniformSwing(bus, slew float64) Swing {
	w := Swing{Bus: bus}
	for k := range Steps {
		w.Slew[k] = slew
	}
	return w
}

// Peak returns the steepest slew [V/s].
func (s Swing) Peak() float64 {
	peak := 0.0
	for _, r := range s.Slew {
		peak = math.Max(peak, r)
	}
	return peak
}

// Mean returns the mean slew between 10 and 90 % of the bus voltage [V/s].
func (s Swing) Mean() float64 {
	const margin = 0.1 * Steps // steps
	time := 0.0                // in units of a step over 1 V/s
	for k, r := range s.Slew {
		if part := math.Min(float64(k+1), Steps-margin) - math.Max(float64(k), margin); part > 0 {
			time += part / r
		}
	}
	return (Steps - 2*margin) / time
}

// Time returns the time of the whole swing [s], +Inf if a step does not move.
func (s Swing) Time() float64 {
	time := 0.0
	for _, r := range s.Slew {
		time += s.Bus / Steps / r
	}
	return time
}

// End returns the slew of the last step, with which the voltage arrives [V/s].
func (s Swing) End() float64 { return s.Slew[Steps-1] }
