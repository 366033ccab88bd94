package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
)

var gateMillerHigh = &rule.Rule{
	ID: "gate/miller-high", Title: "Gate of the high side while the low side turns on", Since: second,
	Equation: "v_GS = V_off + R_g·C_gd·dv/dt through the gate's time constant over the fall of the node, and L_cs·I_RM/τ_rr while the diode recovers; " +
		"unpowered: R_g through the passive pull-down, the node falling from its pre-bias",
	Limit: "smallest threshold at the junction temperature", Guard: "80 % of the limit",
	Applies: "operating points in which the low side turns on a sinking current; unpowered: a node that stands at a voltage before the first pulse",
	Needs: []string{"highSide.thresholdVoltage", "highSide.thresholdTemperatureCoefficient", "highSide.inputCapacitance",
		"highSide.reverseTransferCapacitance", "highSide.gateOff", "highSide.internalGateResistance", "driver.pullDownResistance",
		"driver.passivePullDown", "highSide.gatePullDown", "startup.prebias", "layout.measured.turnOnVoltageSlope", "operatingPoints.busVoltage",
		"highSide.reverse.recoveryCharge", "layout.highSideCommonSource"},
	Events: true, Simulated: func(role string) bool { return role == roleHighSide },
	Sources: []string{"slup169", "an6076", "lauritzen-ma-1991", "textbook"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Gate voltage induced in the high side", Against: "smallest threshold", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{roleHighSide, roleUnpowered},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if role == roleHighSide {
			return during(noEdge, circuit.SinkingTurnOn)(s, op, role)
		}
		if s.LowSide.Kind == stage.DiodeOnly {
			return "the low side is a diode; it does not pull the node down"
		}
		if p := &s.Startup.Prebias; p.Known() && p.Max == 0 {
			return "the node is not pre-biased; nothing moves it before the floating supply stands"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, role string) rule.Check {
		limit := c.Threshold(&c.Stage.HighSide)
		if role == roleHighSide {
			return induced(c, circuit.SinkingTurnOn, limit)
		}
		return rule.Check{Value: c.UnpoweredInduced(), Limit: limit, Guard: heldOff * limit}
	},
	Explain: func(c *circuit.Circuit, role string, k rule.Check) []string {
		if role == roleHighSide {
			return swingNote(c, circuit.SinkingTurnOn, k)
		}
		return nil
	},
}

// induced is the check of a gate voltage that an event induces. An estimate that may be too small by more than is left is not a pass.
func induced(c *circuit.Circuit, e circuit.Event, limit float64) rule.Check {
	k := rule.Check{Value: c.Induced(e), Limit: limit, Guard: heldOff * limit}
	if c.Doubtful(e, k.Value, limit) {
		k.Floor = finding.Marginal
	}
	return k
}

// swingNote tells how fast the node moves in an event, and where the estimate alone keeps the rule from passing.
func swingNote(c *circuit.Circuit, e circuit.Event, k rule.Check) []string {
	if c.Simulates(e) {
		return []string{"the node moves with " + quantity.Format(c.Slew(e), quantity.VoltageSlew) + " at its fastest, " +
			quantity.Format(c.MeanSlew(e), quantity.VoltageSlew) + " from 10 to 90 % of V_BUS"}
	}
	w := c.Swing(e)
	notes := []string{fmt.Sprintf("the node moves with %s at its fastest, in %s from rail to rail", quantity.Format(w.Peak(), quantity.VoltageSlew),
		quantity.Format(w.Time(), quantity.Time))}
	if k.Value < k.Guard && c.Doubtful(e, k.Value, k.Limit) {
		notes = append([]string{"an estimate of this kind may be too small by more than is left; layout.measured.turnOnVoltageSlope decides"}, notes...)
	}
	return notes
}
