package catalog

import (
	"slices"

	"floatrail/calc/capacitor"
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

var capacitorVoltage = &rule.Rule{
	ID: "capacitor/voltage", Title: "Voltage of the capacitors against their rating", Since: first,
	Equation: "highest V_BS of the periodic steady state; reservoir: highest V_DD",
	Limit:    "rated voltage", Guard: "rated voltage derated by the policy: ceramic 60 %, film and aluminium 80 %, tantalum 50 %",
	Applies: "C_B, and the reservoir where one is fitted",
	Needs:   []string{"bootstrap.capacitor.voltageRating", "bootstrap.capacitor.dielectric", "gateSupply.reservoir.voltageRating", "gateSupply.voltage"},
	Sources: []string{"nasa-eee-inst-002", "src-derating"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Highest voltage across the capacitor", Against: "rated voltage", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Roles: []string{roleCapacitor, roleReservoir}, Stagewide: true,
	Inapplicable: fittedCapacitor,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		s := component(c, role)
		if !present(c, s) {
			return rule.Check{Value: nan}
		}
		v := c.Supply()
		if role == roleCapacitor {
			v = c.High()
		}
		limit := c.Need(&s.VoltageRating)
		return rule.Check{Value: v, Limit: limit, Guard: capacitor.DeratedVoltage(limit, kind(c, s), VoltagePolicy(c.Policy))}
	},
	Explain: func(c *circuit.Circuit, role string, _ rule.Check) []string {
		if role != roleCapacitor {
			return nil
		}
		return slices.Concat(collapseNote(c), pumpNote(c))
	},
}

// VoltagePolicy is the policy's derating of capacitor voltages.
func VoltagePolicy(p *stage.Policy) capacitor.VoltagePolicy {
	return capacitor.VoltagePolicy{Ceramic: p.CeramicVoltageRatio, Film: p.FilmVoltageRatio, Aluminium: p.AluminiumVoltageRatio, Tantalum: p.TantalumVoltageRatio}
}
