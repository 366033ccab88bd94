package catalog

import (
	"slices"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var chargeGateSufficiency = &rule.Rule{
	ID: "charge/gate-sufficiency", Title: "Drive of the high side while it carries forward current", Since: first,
	Equation: "V_GS,low = V_BS,low, less a bias taken out of V_BS",
	Limit:    "drive at which the on-state is specified", Guard: "limit + max(0.3 V, 5 % of the limit)",
	Applies: "operating points in which the high-side channel carries forward current",
	Needs:   []string{"highSide.driveVoltageMin", "gateSupply.voltage", "bootstrap.capacitor", "highSide.gateCharge", "operatingPoints"},
	Sources: []string{"hip4086", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	FailSeverity: func(s *stage.Stage, _ string) stage.Severity {
		if s.Driver.UVLOFalling.Min < s.HighSide.DriveVoltageMin.Max {
			return stage.Critical
		}
		return stage.Major
	},
	Quantity: "Lowest gate drive of the high side", Against: "drive at which the on-state is specified", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Inapplicable: func(_ *stage.Stage, op *stage.OperatingPoint, _ string) string {
		if op == nil || !op.LoadCurrent.Known() || !op.RippleCurrent.Known() {
			return ""
		}
		most := op.LoadCurrent.Max
		if op.Sinusoidal != nil { // of either sign, an amplitude
			if op.LoadCurrent.OpenBelow || op.LoadCurrent.OpenAbove {
				return ""
			}
			most = max(most, -op.LoadCurrent.Min)
		}
		if most+op.RippleCurrent.Max/2 <= 0 {
			return "the high-side channel carries no forward current"
		}
		return ""
	},
	Proxy: func(c *circuit.Circuit, _ string) float64 {
		return c.Gate(c.LowForward()) - c.Need(&c.Stage.HighSide.DriveVoltageMin)
	},
	ProxyDimension: quantity.Voltage,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.HighSide.DriveVoltageMin)
		return rule.Check{Value: circuit.Empty(c.Gate(c.LowForward())), Limit: limit, Guard: limit + c.Margin(limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, _ rule.Check) []string {
		return slices.Concat(collapseNote(c), cancelNote(c), forwardNote(c))
	},
}
