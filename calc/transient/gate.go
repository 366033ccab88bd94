package transient

import "math"

// Switch is one position of the bridge as a switching event sees it, all parallel devices together.
type Switch struct {
	Threshold               float64 // V_th [V]
	Transconductance        float64 // g_fs, the slope of the channel current over the gate voltage above V_th [S]
	InputCapacitance        float64 // C_iss at its test voltage [F]
	InputCapacitanceVoltage float64 // drain voltage of that test [V]
	CommonSource            float64 // L_cs, inductance that the gate loop shares with the power loop [H]
	Transfer                Curve   // C_rss = C_gd [F]
	Output                  Curve   // C_oss = C_ds + C_gd [F]
}

// Gate is what drives the gate of a Switch.
type Gate struct {
	Resistance float64 // R_g: external, internal and the driver's own in this direction, together [ohm]
	On         float64 // V_on, gate drive while on [V]
	Off        float64 // V_off, gate drive while off, negative with an off bias [V]
}

// Plateau returns V_pl = V_th + i/g_fs, the gate voltage at which the channel carries i [A] and no more, [V].
func (s *Switch) Plateau(i float64) float64 { return s.Threshold + i/s.Transconductance }

// gateSource returns C_gs = C_iss - C_rss, both at the test voltage, [F]. Data that contradict each other give 0.
func (s *Switch) gateSource() float64 {
	return math.Max(s.InputCapacitance-s.Transfer.At(s.InputCapacitanceVoltage), 0)
}

// positive returns x, and NaN where x <= 0: a question without an answer.
func positive(x float64) float64 {
	if x > 0 {
		return x
	}
	return math.NaN()
}

// loopDelay is L_cs + R_g·C_iss/g_fs, the volts that a unit of current slope takes from the gate drive [H], eq. (2).
func (s *Switch) loopDelay(g Gate) float64 {
	return s.CommonSource + g.Resistance*s.InputCapacitance/s.Transconductance
}

// CurrentFall returns the slope at which the channel current starts to fall from i [A], its steepest, [A/s], eq. (2). NaN where
// the off drive is not below the plateau. Uses neither curve.
func CurrentFall(i float64, s *Switch, g Gate) float64 {
	return positive(s.Plateau(i)-g.Off) / s.loopDelay(g)
}

// CurrentRise returns the slope at which the channel current passes i [A] while it rises, [A/s], eq. (2). It was steeper below:
// CurrentRise(0, s, g) is where it starts. NaN where the on drive is not above the plateau: the switch cannot carry i. Uses
// neither curve.
func CurrentRise(i float64, s *Switch, g Gate) float64 {
	return positive(g.On-s.Plateau(i)) / s.loopDelay(g)
}

// TurnOffTime returns the time from the gate command to a channel without current [s], eq. (5), for the current i [A] and the bus
// voltage bus [V]. fall is the time the current is known to take to fall, 0 if it is not known; the longer one counts [s]. NaN where
// the switch cannot carry i or the off drive is not below the threshold. Does not use Output.
func TurnOffTime(i float64, s *Switch, g Gate, bus, fall float64) float64 {
	plateau := s.Plateau(i)
	above, depth, rest := positive(g.On-plateau), positive(plateau-g.Off), positive(s.Threshold-g.Off)
	conducting := s.gateSource() + s.Transfer.At(0)
	delay := g.Resistance * conducting * math.Log1p(above/depth)
	swing := g.Resistance * s.Transfer.Charge(bus) / depth
	decay := s.loopDelay(g) * s.Transconductance * math.Log(depth/rest)
	return delay + swing + math.Max(fall, decay)
}

// GateDamping returns the damping of the gate loop, R/2·sqrt(C_iss/L) [1], for its resistance r [ohm], inductance l [H] and the input
// capacitance ciss [F]. 1 is critical; a series circuit.
func GateDamping(r, l, ciss float64) float64 { return r / 2 * math.Sqrt(ciss/l) }
