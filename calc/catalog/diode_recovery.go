package catalog

import (
	"fmt"

	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// recoveryShare is the share of the gate charge that the diode's recovery may take [common-practice].
const recoveryShare = 0.3

var diodeRecovery = &rule.Rule{
	ID: "diode/recovery", Title: "Recovery of the bootstrap diode", Since: first,
	Equation: "Q_rr = min(Q_spec, τ·i·(1 - exp(-t_on/τ))) at the current still flowing when the node rises; τ = Q_spec/I_test",
	Limit:    "0.3·Q_G", Guard: "10 % below the limit", Applies: "stages with a diode, switching",
	Needs:   []string{"bootstrap.diode.recoveryCharge", "bootstrap.diode.recoveryTestCurrent", "highSide.gateCharge"},
	Sources: []string{"lauritzen-ma-1991", "common-practice"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Recovery charge of the bootstrap diode", Against: "permitted share of the gate charge", Dimension: quantity.Charge, Sense: rule.AtMost,
	Inapplicable: func(s *stage.Stage, op *stage.OperatingPoint, role string) string {
		if s.Bootstrap.Element == stage.IntegratedSwitch {
			return "an integrated switch has no recovery"
		}
		return switching(s, op, role)
	},
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		st, p := c.Steady(), c.Period()
		v := st.Recovery
		if st.Collapses {
			v = p.RecoverySpec
		}
		limit := recoveryShare * c.EdgeGate()
		return rule.Check{Value: v, Limit: limit, Guard: below(c, limit)}
	},
	Explain: func(c *circuit.Circuit, _ string, ch rule.Check) []string {
		if ch.Value < ch.Limit/2 {
			return nil
		}
		return []string{fmt.Sprintf("recovery power in the diode at most %s",
			quantity.Format(ch.Value*c.Need(&c.Point.BusVoltage)/c.Period().T, quantity.Power))}
	},
}
