package catalog

import (
	"fmt"
	"math"

	"floatrail/calc/capacitor"
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// Rule sets in which rules appeared.
const (
	first  = "2026.12"
	second = "2026.12.2"
	third  = "2026.12.3"
)

// Roles: paths of parts relative to the stage.
const (
	roleDriver    = "driver"
	roleHighSide  = "highSide"
	roleCapacitor = "bootstrap.capacitor"
	roleReservoir = "gateSupply.reservoir"
)

var nan = math.NaN()

// always applies.
func always(*stage.Stage, *stage.OperatingPoint, string) string { return "" }

// switching applies to operating points that have switching periods.
func switching(_ *stage.Stage, op *stage.OperatingPoint, _ string) string {
	if op != nil && op.HeldOn != nil {
		return "the high side is held on; there is no switching period"
	}
	return ""
}

// withDiode applies where a discrete diode recharges C_B in switching periods.
func withDiode(s *stage.Stage, op *stage.OperatingPoint, role string) string {
	if r := discrete(s, op, role); r != "" {
		return r
	}
	return switching(s, op, role)
}

// discrete applies where a discrete diode recharges C_B.
func discrete(s *stage.Stage, _ *stage.OperatingPoint, _ string) string {
	switch s.Bootstrap.Element {
	case stage.IntegratedDiode, stage.IntegratedSwitch:
		return "the element is integrated; the driver's own ratings cover it"
	}
	return ""
}

// withResistor applies where R_B is not a link.
func withResistor(s *stage.Stage, _ *stage.OperatingPoint, _ string) string {
	if r := &s.Bootstrap.Resistor; r.Presence() == stage.NotFitted || r.Resistance.Max == 0 {
		return "no bootstrap resistor is fitted"
	}
	return ""
}

// component gives the capacitor of a role.
func component(c *circuit.Circuit, role string) *stage.Capacitor {
	if role == roleReservoir {
		return &c.Stage.GateSupply.Reservoir
	}
	return &c.Stage.Bootstrap.Capacitor
}

// fittedCapacitor applies unless the capacitor of the role is not fitted.
func fittedCapacitor(s *stage.Stage, _ *stage.OperatingPoint, role string) string {
	if role == roleReservoir && s.GateSupply.Reservoir.Presence() == stage.NotFitted {
		return "no reservoir is fitted"
	}
	return ""
}

// present notes a capacitor of which nothing is known.
func present(c *circuit.Circuit, s *stage.Capacitor) bool {
	if s.Presence() == stage.PresenceUnknown {
		c.Want(s.Field)
		return false
	}
	return true
}

// kind of dielectric; a missing or unknown code is noted.
func kind(c *circuit.Circuit, s *stage.Capacitor) capacitor.Kind {
	k := circuit.Kind(s)
	if k == capacitor.Unspecified {
		c.Want(s.Field + ".dielectric")
	}
	return k
}

// above adds the guard to a limit that must be exceeded, below subtracts it from one that must not.
func above(c *circuit.Circuit, limit float64) float64 { return limit * (1 + c.Policy.GuardRatio) }
func below(c *circuit.Circuit, limit float64) float64 { return limit * (1 - c.Policy.GuardRatio) }

// worst is that check of several whose margin is the smallest. Where another one breaks its guard, the outcome is at best MARGINAL all the same.
func worst(s rule.Sense, checks ...rule.Check) rule.Check {
	margin := func(k rule.Check) (limit, guard float64) {
		if s == rule.AtMost {
			return k.Limit - k.Value, k.Guard - k.Value
		}
		return k.Value - k.Limit, k.Value - k.Guard
	}
	var out rule.Check
	least, floor := math.Inf(1), finding.NoOutcome
	for i, k := range checks {
		m, g := margin(k)
		if g < 0 {
			floor = finding.Marginal
		}
		if i == 0 || m < least || m != m {
			out, least = k, m
		}
		if m != m {
			break
		}
	}
	out.Floor = max(out.Floor, floor)
	return out
}

// cancelNote tells, where it holds, that a larger capacitor does not help: the window is short against R·C.
func cancelNote(c *circuit.Circuit) []string {
	if !c.CapacitanceCancels() {
		return nil
	}
	p := c.Period()
	return []string{fmt.Sprintf("the recharge window of %s is short against R·C = %s: the deficit tends to Q_B·R/t_c and C cancels; a larger capacitor is no fix",
		quantity.Format(p.Window, quantity.Time), quantity.Format(p.Element.Resistance*p.Capacitance, quantity.Time))}
}

// PeakDetector tells whether V_BS is pumped above what recharge with the low side on would give.
func PeakDetector(c *circuit.Circuit) bool {
	_, n := pumping(c)
	return n != ""
}

// pumping is the period in which V_BS is highest and the name of the interval that pumps it there; empty where that is the low side's on-time.
func pumping(c *circuit.Circuit) (node float64, name string) {
	if c.Point == nil || c.Point.HeldOn != nil {
		return nan, ""
	}
	p, k := c.HighPeriod()
	if v := c.Steady().High; v != v || k < 0 || k >= len(p.Names) {
		return nan, ""
	}
	switch n := p.Names[k]; n {
	case circuit.IntervalFirstDead, circuit.IntervalSecondDead, circuit.IntervalFreewheel:
		return p.Off[k].Drive - c.Supply(), n
	}
	return nan, ""
}

// pumpNote names the interval that makes the highest V_BS, where it is not the low side's on-time.
func pumpNote(c *circuit.Circuit) []string {
	node, name := pumping(c)
	if name == "" {
		return nil
	}
	where := ""
	if a := c.HighAngle(); a == a {
		where = " at " + quantity.Format(a, quantity.Angle) + " of the fundamental"
	}
	return []string{fmt.Sprintf("the network is a peak detector: the %s%s, with the node %s below COM, pumps V_BS above what the low side's on-time gives",
		name, where, quantity.Format(node, quantity.Voltage))}
}

// collapseNote tells that the supply collapses, and how fast.
func collapseNote(c *circuit.Circuit) []string {
	if c.Point == nil || c.Point.HeldOn != nil || !c.Steady().Collapses {
		return nil
	}
	text := "no positive steady state: the supply collapses"
	if n := c.PeriodsToLockout(); n > 0 {
		text += fmt.Sprintf(" and reaches lockout after %d periods", n)
	}
	if c.Period().Window == 0 {
		text += "; nothing recharges C_B"
	}
	return []string{text}
}

// heldNote tells for how long a modulated leg is without recharge, where that is longer than a period, and where V_BS is lowest.
func heldNote(c *circuit.Circuit) []string {
	if c.Point == nil || c.Point.Sinusoidal == nil && c.Point.SixStep == nil && c.Point.Burst == nil {
		return nil
	}
	var out []string
	if t := c.Unrefreshed(); t > 1/c.Need(&c.Point.SwitchingFrequency) && !math.IsInf(t, 1) {
		out = append(out, "without recharge for "+quantity.Format(t, quantity.Time))
	}
	if a := c.LowAngle(); a == a {
		out = append(out, "lowest at "+quantity.Format(a, quantity.Angle)+" of the fundamental")
	}
	return out
}

// forwardNote tells where in the fundamental V_BS is lowest while the high-side channel carries forward current.
func forwardNote(c *circuit.Circuit) []string {
	if a := c.OnLowAngle(); a == a {
		return []string{"lowest with forward current in the channel at " + quantity.Format(a, quantity.Angle) + " of the fundamental"}
	}
	return nil
}

// pauseNote tells what a pause between bursts leaves.
func pauseNote(c *circuit.Circuit) string {
	m := c.Point.Burst
	text := "after a pause of " + quantity.Format(c.Need(&m.IdleTime), quantity.Time)
	switch node := c.Need(&m.IdleNodeVoltage); {
	case c.Stage.Bootstrap.Element == stage.IntegratedSwitch:
		text += ", in which the integrated switch does not conduct"
	case c.Element().Settled(c.Supply()-node, c.Loads().Total()) > 0:
		text += fmt.Sprintf(", in which the node at %s lets V_BS settle at %s at best", quantity.Format(node, quantity.Voltage),
			quantity.Format(c.Element().Settled(c.Supply()-node, c.Loads().Total()), quantity.Voltage))
	default:
		text += fmt.Sprintf(", in which the node at %s blocks the recharge", quantity.Format(node, quantity.Voltage))
	}
	return text
}

// vanishNotes tells which pulses do not reach the switches.
func vanishNotes(c *circuit.Circuit) []string {
	if c.Point != nil && c.Point.Sinusoidal != nil {
		return vanishOverAngles(c)
	}
	if c.Point == nil || c.Point.HeldOn != nil {
		return nil
	}
	p := c.Period()
	var out []string
	if p.LowVanishes {
		out = append(out, "the low-side pulse is shorter than the driver passes and vanishes")
	}
	if p.HighVanishes {
		out = append(out, "the high-side pulse is shorter than the driver passes and vanishes; the low side stays on")
	}
	return out
}

// vanishOverAngles is vanishNotes of a sinusoidal modulation.
func vanishOverAngles(c *circuit.Circuit) (out []string) {
	t := c.Timing()
	if t == nil {
		return nil
	}
	if t.LowVanishes {
		out = append(out, "at some angles the low-side pulse is shorter than the driver passes and vanishes")
	}
	if t.HighVanishes {
		out = append(out, "at some angles the high-side pulse is shorter than the driver passes and vanishes; the low side stays on")
	}
	return out
}
