package catalog

import (
	"fmt"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeLockoutSuitsSwitch = &rule.Rule{
	ID: "charge/lockout-suits-switch", Title: "Lockout that protects the switch", Since: first,
	Equation: "V_UV-,min against the drive at which the on-state is specified",
	Limit:    "drive at which the on-state is specified", Guard: "limit + max(0.3 V, 5 % of the limit)", Applies: "every stage",
	Needs:   []string{"driver.uvloFalling", "highSide.driveVoltageMin", "highSide.kind"},
	Sources: []string{"common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	FailSeverity: func(s *stage.Stage, _ string) stage.Severity {
		if s.HighSide.Kind == stage.SiCMOSFET {
			return stage.Critical
		}
		return stage.Major
	},
	Quantity: "Lowest falling lockout threshold", Against: "drive at which the on-state is specified", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		if c.Stage.HighSide.Kind == "" {
			c.Want(c.Stage.HighSide.Field + ".kind")
		}
		v, limit := c.Need(&c.Stage.Driver.UVLOFalling), c.Need(&c.Stage.HighSide.DriveVoltageMin)
		return rule.Check{Value: c.Gate(v), Limit: limit, Guard: limit + c.Margin(limit)}
	},
	Explain: func(_ *circuit.Circuit, _ string, ch rule.Check) []string {
		if ch.Value >= ch.Limit {
			return nil
		}
		return []string{fmt.Sprintf("between %s and %s the driver switches a switch whose on-state is not specified: unprotected",
			quantity.Format(ch.Value, quantity.Voltage), quantity.Format(ch.Limit, quantity.Voltage))}
	},
}
