package catalog

import (
	"floatrail/calc/capacitor"
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// esrShare is the share of V_BS that the peak gate current may drop in the capacitor's ESR [common-practice].
const esrShare = 0.05

var capacitorESRDrop = &rule.Rule{
	ID: "capacitor/esr-drop", Title: "Drop of the gate current in the capacitor's series resistance", Since: first,
	Equation: "I_peak·ESR, I_peak the driver's peak source current, or V_DD/(R_OH + R_G,on + R_G,int)",
	Limit:    "5 % of V_DD", Guard: "10 % below the limit", Applies: "every stage",
	Needs:   []string{"bootstrap.capacitor.esr", "driver.peakSourceCurrent", "gateSupply.voltage"},
	Sources: []string{"sluscj9", "common-practice"},
	Fail:    stage.Minor, Marginal: stage.Note, Open: stage.Minor,
	Quantity: "Drop in the series resistance of C_B", Against: "permitted drop", Dimension: quantity.Voltage, Sense: rule.AtMost,
	Stagewide: true, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		s := &c.Stage.Bootstrap.Capacitor
		h := &c.Stage.HighSide
		esr := c.Need(&s.ESR)
		peak, ok := c.Has(&c.Stage.Driver.PeakSourceCurrent)
		if !ok {
			n := h.Count()
			peak = c.Supply() / (c.Need(&c.Stage.Driver.PullUpResistance) + (c.Need(&h.GateOn.Resistance)+c.Need(&h.InternalGateResistance))/n)
		}
		limit := esrShare * c.Supply()
		ch := rule.Check{Value: peak * esr, Limit: limit, Guard: below(c, limit)}
		if k := circuit.Kind(s); (k == capacitor.Aluminium || k == capacitor.Tantalum) && c.Set.Ambient < stage.ReferenceTemperature && len(s.ESR.At) == 0 {
			c.Assume(stage.Assumption{Field: s.ESR.Field, Assumed: "the value at 25 °C", Direction: stage.Optimistic,
				Reason: "the ESR of an electrolytic rises in the cold and is given at one temperature only"})
		}
		return ch
	},
}
