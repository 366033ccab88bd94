package transient

import "math"

// TurnOffSlope is the steepest slope of the loop current as a switch turns off the current i [A] [A/s]: that of its channel, slope [A/s], but no
// more than the loop of the inductance l [H] and the capacitance c [F] of that switch at V_BUS can follow a current that is cut at once,
//
//	min(slope, i/sqrt(l·c))
//
// The ramp of the channel current makes the loop ring, by which its slope may reach twice the channel's; the Miller current of the rising
// voltage damps that and slows the channel. Over the simulated stages of testdata/reference/event.json the two nearly cancel: l times this slope
// is at least 0.95 times the simulated overshoot, and several times it where the node arrives with the channel already off.
func TurnOffSlope(slope, i, l, c float64) float64 {
	if i == 0 {
		return 0 * (slope + l + c)
	}
	return math.Min(slope, i/math.Sqrt(l*c))
}

// FallWidth is the time for which the loop current moves from a switch that turns off the current i [A] at the slope of CurrentFall [s]: i over
// the slope, stretched by the Miller current of the voltage that the inductance l [H] adds (G·l of a conductance G = g_fs·C_gd/C_iss beside it),
// and at least half a period of ringing with c [F]. The active switch gives transconductance, C_iss and C_gd at the bus voltage bus [V].
func FallWidth(slope, i, l, c, bus float64, active *Switch) float64 {
	if i == 0 {
		return 0 * (slope + l + c)
	}
	stretch := l * active.Transconductance * active.Transfer.At(bus) / active.InputCapacitance
	return math.Max(i/slope+stretch, math.Pi*math.Sqrt(l*c))
}

// Recovering is a diode that loses its reverse current into the capacitance of its own switch, behind the inductance of the loop.
type Recovering struct {
	Peak       float64 // I_RM, 0 without recovery [A]
	TauRR      float64 // time constant of its decay [s]
	Rise       float64 // slope at which the other switch takes over the current [A/s]
	Inductance float64 // L1 + L2 [H]
	Output     Curve   // C_oss of its switch
}

// effective is the capacitance that takes the same charge up to the bus [F].
func (r *Recovering) effective(bus float64) float64 { return r.Output.Charge(bus) / bus }

// Overshoot is by how much the voltage of the diode's switch exceeds V_BUS as the other one turns on with the swing w [V]: the square root of
// the sum of squares of two parts,
//
//	a bus that is applied as a ramp over the time t of the swing makes L and C_oss ring by V_BUS·|sin(ωt/2)|/(ωt/2), at most V_BUS·min(1, 2/(ωt));
//	a reverse current that decays as I_RM·e^(-t/τ) adds RecoveryOvershoot, eq. (8)-(10).
//
// The first takes C_oss by its charge, the second at V_BUS. Undamped. Where L·di/dt of the rising current takes more than half of the bus from
// the switch that turns on before the diode recovers, the diode's switch sees the bus almost at once, and twice the sum is taken. Over the
// simulated stages the estimate is at least 0.88 times the simulated overshoot.
func (r *Recovering) Overshoot(w Swing) float64 {
	ramp, _ := r.ramp(w)
	return r.ahead(w.Bus) * math.Hypot(ramp, r.decay(w.Bus))
}

// ahead is the factor of an estimate where the bus is applied ahead of the swing.
func (r *Recovering) ahead(bus float64) float64 {
	if r.Inductance*r.Rise > bus/2 {
		return 2
	}
	return 1
}

// ramp is the first part of Overshoot [V], and the angle ωt [1].
func (r *Recovering) ramp(w Swing) (v, angle float64) {
	angle = w.Time() / math.Sqrt(r.Inductance*r.effective(w.Bus))
	return w.Bus * math.Min(1, 2/angle), angle
}

// decay is the second part of Overshoot [V].
func (r *Recovering) decay(bus float64) float64 {
	if r.Peak == 0 {
		return 0
	}
	return RecoveryOvershoot(r.Peak, r.TauRR, r.Inductance, r.Output.At(bus), 0)
}

// Dip is by how much the node falls below COM as the low side turns on with the swing w [V], share being the part of the loop's inductance that
// lies below the node [1]: that share of the parts of Overshoot, of which the first counts min(1, 4/(ωt)), because the switch that turns on
// still stands at part of the bus while the loop rings. Over the simulated stages it is at least 0.97 times the simulated dip.
func (r *Recovering) Dip(w Swing, share float64) float64 {
	ramp, angle := r.ramp(w)
	return share * r.ahead(w.Bus) * math.Hypot(ramp*math.Min(1, 4/angle), r.decay(w.Bus))
}

// Slew is the fastest movement of the node as the other switch turns on with the swing w [V/s]: the square root of the sum of squares of
//
//	the gate's own slew, raised by the ringing of the loop to r·2·sin(min(ωt, π)/2), at most ω·V_BUS;
//	the charging of C_oss by the reverse current, C·v = I_RM·(t - τ·(1 - e^(-t/τ))): for t < τ v grows as I_RM·t²/(2τC), so that the slew at
//	V_BUS is sqrt(2·I_RM·V_BUS/(τ·C)), at most I_RM/C.
//
// Over the simulated stages it lies between 0.63 and 2.8 times the simulated peak.
func (r *Recovering) Slew(w Swing) float64 {
	c := r.effective(w.Bus)
	omega := 1 / math.Sqrt(r.Inductance*c)
	gate := math.Min(w.Peak()*2*math.Sin(math.Min(omega*w.Time(), math.Pi)/2), omega*w.Bus)
	return math.Hypot(gate, r.charging(c, w.Bus))
}

// charging is the slew by which the reverse current brings the capacitance c [F] to the bus [V/s].
func (r *Recovering) charging(c, bus float64) float64 {
	if r.Peak == 0 {
		return 0
	}
	most := r.Peak / c
	if r.TauRR == 0 {
		return most
	}
	return math.Min(most, math.Sqrt(2*r.Peak*bus/(r.TauRR*c)))
}

// Swing is the swing w as the gate of the diode's switch sees it: to the overshoot, and with the mean slew of w and of the charging by the
// reverse current together.
func (r *Recovering) Swing(w Swing) Swing {
	mean := r.charging(r.effective(w.Bus), w.Bus) / 2
	return UniformSwing(w.Bus+r.Overshoot(w), math.Hypot(w.Mean(), mean))
}
