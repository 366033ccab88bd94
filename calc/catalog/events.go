package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/stage"
	"math"
)

// Roles of rules that judge a position, or the driver beside it.
const (
	roleLowSide   = "lowSide"
	roleUnpowered = "unpowered high side"
)

// position is the switch of a role.
func position(c *circuit.Circuit, role string) *stage.Switch {
	if role == roleLowSide {
		return &c.Stage.LowSide
	}
	return &c.Stage.HighSide
}

// withSwitch applies to positions that have a gate.
func withSwitch(s *stage.Stage, _ *stage.OperatingPoint, role string) string {
	if role == roleLowSide && s.LowSide.Kind == stage.DiodeOnly {
		return "the low side is a diode; it has no gate"
	}
	return ""
}

// during applies where one of the events can occur.
func during(reason string, events ...circuit.Event) func(*stage.Stage, *stage.OperatingPoint, string) string {
	return func(s *stage.Stage, op *stage.OperatingPoint, _ string) string {
		for _, e := range events {
			if circuit.Occurs(s, op, e) {
				return ""
			}
		}
		return reason
	}
}

// largest is the largest of a number over events.
func largest(c *circuit.Circuit, events []circuit.Event, f func(circuit.Event) float64) float64 {
	v := math.Inf(-1)
	for _, e := range events {
		if c.Occurs(e) {
			v = math.Max(v, f(e))
		}
	}
	return v
}

// each makes one alternative of every event: a margin that is +Inf where the event cannot occur.
func each(events []circuit.Event, margin func(c *circuit.Circuit, role string, e circuit.Event) float64) []func(*circuit.Circuit, string) float64 {
	out := make([]func(*circuit.Circuit, string) float64, len(events))
	for i, e := range events {
		out[i] = func(c *circuit.Circuit, role string) float64 {
			if !c.Occurs(e) {
				return math.Inf(1)
			}
			return margin(c, role, e)
		}
	}
	return out
}

// everyRole is for rules that judge simulated events in all of their roles.
func everyRole(string) bool { return true }

// Lists of events.
var (
	everyEvent = []circuit.Event{circuit.TurnOff, circuit.TurnOn, circuit.SinkingTurnOff, circuit.SinkingTurnOn}
	falling    = []circuit.Event{circuit.TurnOff, circuit.SinkingTurnOn}
	rising     = []circuit.Event{circuit.TurnOn, circuit.SinkingTurnOff}
)

// noEdge is why a rule about events has nothing to judge.
const noEdge = "no such edge occurs at this current and duty"

// raised is the guard of a limit from below, which may be negative: the policy's share above it.
func raised(c *circuit.Circuit, limit float64) float64 {
	return limit + c.Policy.GuardRatio*math.Abs(limit)
}

// heldOff is the share of the threshold up to which a gate that is off may be lifted [common-practice].
const heldOff = 0.8
