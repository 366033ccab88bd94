package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"math"
)

const roleDiode = "bootstrap.diode"

var thermalDiode = &rule.Rule{
	ID: "thermal/diode", Title: "Junction temperature of the bootstrap diode", Since: second,
	Equation: "T_j = T_A + R_th·[V_F·I_av + Q_rr·V_R·f + V_R·I_R(T_j)·t_on/T], I_R doubling every 10 K",
	Limit:    "largest junction temperature; no solution is thermal runaway and fails", Guard: "15 K below the limit",
	Applies: "operating points that last; a discrete bootstrap diode",
	Needs: []string{"bootstrap.diode.junctionMax", "bootstrap.diode.thermalResistance", "bootstrap.diode.reverseLeakage", "bootstrap.diode.recoveryCharge",
		"operatingPoints.busVoltage", "operatingPoints.ambientTemperature", "highSide.gateCharge"},
	Sources: []string{"textbook", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Junction temperature of the bootstrap diode", Against: "largest junction temperature", Dimension: quantity.Temperature, Sense: rule.AtMost,
	Roles: []string{roleDiode},
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if r := discrete(s, op, role); r != "" {
			return r
		}
		return briefly(s, op, role)
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Bootstrap.Diode.JunctionMax)
		return rule.Check{Value: lasting(c, c.DiodeTemperature), Limit: limit, Guard: limit - c.Policy.JunctionMargin}
	},
	Explain: func(_ *circuit.Circuit, _ string, k rule.Check) []string {
		if math.IsInf(k.Value, 1) {
			return []string{"thermal runaway: the leakage heats the diode faster than it cools"}
		}
		return nil
	},
}
