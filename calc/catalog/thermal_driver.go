package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// briefly is why a rule about temperatures does not judge an overload: another operating point lasts.
func briefly(s *stage.Stage, op *stage.OperatingPoint, _ string) string {
	if op == nil || !op.Overload {
		return ""
	}
	for i := range s.OperatingPoints.Items {
		if !s.OperatingPoints.Items[i].Overload {
			return "an overload is short against thermal time constants"
		}
	}
	return ""
}

// lasting is a temperature [°C] where the operating point lasts; where all that is given is an overload the circuit is open.
func lasting(c *circuit.Circuit, temperature func() float64) float64 {
	if c.Point != nil && c.Point.Overload {
		return c.Open("every operating point is an overload; one that lasts is needed")
	}
	return temperature()
}

var thermalDriver = &rule.Rule{
	ID: "thermal/driver", Title: "Junction temperature of the driver", Since: second,
	Equation: "T_A + R_th·[½·Q_G·V·f·Σ R_drv/(R_drv + R_g) of both positions + (V_BUS + V_BS)·Q_LS·f + V_BUS·I_LK + V_DD·I_QDD + V_BS·I_QBS]",
	Limit:    "largest junction temperature", Guard: "15 K below the limit", Applies: "operating points that last",
	Needs: []string{"driver.junctionMax", "driver.thermalResistance", "driver.quiescentCurrent", "driver.floatingQuiescentCurrent",
		"driver.levelShiftCharge", "driver.offsetLeakage", "highSide.gateCharge", "lowSide.gateCharge", "operatingPoints.switchingFrequency",
		"operatingPoints.ambientTemperature"},
	Sources: []string{"slusaq3f", "ucc27523", "2ed2109"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Junction temperature of the driver", Against: "largest junction temperature", Dimension: quantity.Temperature, Sense: rule.AtMost,
	Roles: []string{roleDriver}, Inapplicable: briefly,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.JunctionMax)
		return rule.Check{Value: lasting(c, c.DriverTemperature), Limit: limit, Guard: limit - c.Policy.JunctionMargin}
	},
}
