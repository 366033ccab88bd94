package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
)

var dutyDeadTime = &rule.Rule{
	ID: "duty/dead-time", Title: "Dead time against the time that a switch takes to turn off", Since: second,
	Equation: "t_off,d + [R_g·C_on·ln((V_drive - V_off)/(V_pl - V_off)) + R_g·Q_gd/(V_pl - V_off) + t_f] - t_on,d + MT, the longer of both positions; " +
		"t_f at least the gate's own time from V_pl to V_th",
	Limit: "time from the command until the channel's current has ceased, less the other's turn-on delay", Guard: "10 % above the limit",
	Applies: "half-bridges with a switch on both sides",
	Needs: []string{"operatingPoints.deadTime", "driver.turnOffDelay", "driver.turnOnDelay", "driver.delayMismatch", "driver.pullDownResistance",
		"highSide.gateOff", "lowSide.gateOff", "highSide.internalGateResistance", "lowSide.internalGateResistance", "highSide.inputCapacitance",
		"lowSide.inputCapacitance", "highSide.inputCapacitanceVoltage", "lowSide.inputCapacitanceVoltage", "highSide.thresholdVoltage", "lowSide.thresholdVoltage", "highSide.currentFallTime", "lowSide.currentFallTime"},
	Sources: []string{"an6076", "slup169", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Dead time", Against: "time to turn off", Dimension: quantity.Time, Sense: rule.AtLeast,
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, _ string) string {
		switch {
		case s.LowSide.Kind == stage.DiodeOnly:
			return "the low side is a diode; nothing can shoot through"
		case op != nil && op.HeldOn != nil:
			return "the high side is held on; there is no switching period"
		case op != nil && op.SixStep != nil:
			return "in six-step operation an open sixth of a revolution separates both switches"
		}
		return ""
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Point == nil {
			return rule.Check{Value: c.NoPoint()}
		}
		limit := max(turnOff(c, circuit.TurnOff), turnOff(c, circuit.SinkingTurnOff))
		return rule.Check{Value: c.Need(&c.Point.DeadTime), Limit: limit, Guard: above(c, limit)}
	},
	Alternatives: []func(*circuit.Circuit, string) float64{
		func(c *circuit.Circuit, _ string) float64 { return slack(c, circuit.TurnOff) },
		func(c *circuit.Circuit, _ string) float64 { return slack(c, circuit.SinkingTurnOff) },
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		return []string{fmt.Sprintf("high side %s, low side %s", quantity.Format(turnOff(c, circuit.TurnOff), quantity.Time),
			quantity.Format(turnOff(c, circuit.SinkingTurnOff), quantity.Time))}
	},
}

// turnOff is the time from the command until the channel of the switch that turns off carries nothing, less the other's turn-on delay [s].
func turnOff(c *circuit.Circuit, e circuit.Event) float64 {
	d := &c.Stage.Driver
	return c.Need(&d.TurnOffDelay) + c.TurnOffTime(e) - c.Need(&d.TurnOnDelay) + c.Need(&d.DelayMismatch)
}

func slack(c *circuit.Circuit, e circuit.Event) float64 {
	if c.Point == nil {
		return c.NoPoint()
	}
	return c.Need(&c.Point.DeadTime) - turnOff(c, e)
}
