package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"fmt"
)

// slewShare is the share of the rated slew up to which an estimate or a measurement on one board is taken to hold for all [common-practice].
const slewShare = 0.7

var nodeSlew = &rule.Rule{
	ID: "node/slew", Title: "Slew of the node", Since: second,
	Equation: "turning on: (V_drive - V_th - I/g_fs)/(R_g·C_gd + C_Σ/g_fs); turning off: (V_th + I/g_fs - V_off)/(R_g·C_gd + C_Σ/g_fs), at most I/C_Σ; " +
		"the largest over the swing, at turn-on with the ringing of the loop and the charging of C_oss by the recovering diode",
	Limit: "rated slew of V_S", Guard: "70 % of the limit", Applies: "operating points with an edge",
	Needs: []string{"driver.slewMax", "layout.measured.turnOnVoltageSlope", "layout.measured.turnOffVoltageSlope", "highSide.gateOn",
		"highSide.gateOff", "highSide.thresholdVoltage", "highSide.transconductance", "highSide.reverseTransferCapacitance", "highSide.outputCapacitance",
		"lowSide.outputCapacitance", "operatingPoints.busVoltage"},
	Events: true, Simulated: everyRole,
	Sources: []string{"an6076", "slup169", "textbook"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Peak slew of the node", Against: "rated slew", Dimension: quantity.VoltageSlew, Sense: rule.AtMost,
	Roles: []string{roleDriver}, Inapplicable: during(noEdge, everyEvent...),
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.SlewMax)
		return rule.Check{Value: largest(c, everyEvent, c.Slew), Limit: limit, Guard: slewShare * limit}
	},
	EventOf: everyEvent,
	Alternatives: each(everyEvent, func(c *circuit.Circuit, _ string, e circuit.Event) float64 {
		return c.Need(&c.Stage.Driver.SlewMax) - c.Slew(e)
	}),
	Explain: func(c *circuit.Circuit, _ string, k rule.Check) []string {
		for _, e := range everyEvent {
			if c.Occurs(e) && c.Slew(e) == k.Value {
				return []string{fmt.Sprintf("%s; from 10 to 90 %% of V_BUS %s", phrase(e), quantity.Format(c.MeanSlew(e), quantity.VoltageSlew))}
			}
		}
		return nil
	},
}
