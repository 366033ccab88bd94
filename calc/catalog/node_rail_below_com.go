package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
	"math"
	"slices"
)

var nodeRailBelowCOM = &rule.Rule{
	ID: "node/rail-below-com", Title: "Floating rail V_B against COM", Since: second,
	Equation: "V_B = V_S + V_BS: the undershoot with V_BS at V_UV-, because lockout itself turns the high side off; before the first pulse V_S = 0 V with C_B as at the start",
	Limit:    "lowest permitted V_B to COM", Guard: "10 % above the limit", Applies: "every operating point",
	Needs: []string{"driver.railMin", "driver.uvloFalling", "layout.lowSideInductance", "layout.measured.turnOffCurrentSlope",
		"highSide.gateOff", "lowSide.reverse", "operatingPoints.loadCurrent"},
	Events: true, Simulated: everyRole,
	Sources: []string{"lmg1210", "an6076", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Lowest V_B to COM", Against: "lowest permitted", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles: []string{roleDriver}, Inapplicable: always,
	Check: func(c *circuit.Circuit, _ string) rule.Check {
		limit := c.Need(&c.Stage.Driver.RailMin)
		v := c.Need(&c.Stage.Startup.InitialVoltage)
		for _, e := range falling {
			v = math.Min(v, railAfter(c, e))
		}
		return rule.Check{Value: v, Limit: limit, Guard: raised(c, limit)}
	},
	EventOf: slices.Concat(falling, []circuit.Event{circuit.NoEvent}),
	Alternatives: append(each(falling, func(c *circuit.Circuit, _ string, e circuit.Event) float64 {
		if !c.Occurs(e) { // with the undershoot of normal operation, which is that and not less: no simulation of its own
			return math.Inf(1)
		}
		return c.PinDip(e) + c.Need(&c.Stage.Driver.UVLOFalling) - c.Need(&c.Stage.Driver.RailMin)
	}), func(c *circuit.Circuit, _ string) float64 {
		return c.Need(&c.Stage.Startup.InitialVoltage) - c.Need(&c.Stage.Driver.RailMin)
	}),
}

// railAfter is the lowest V_B to COM in an event at the lowest V_BS at which the driver still commands it [V].
func railAfter(c *circuit.Circuit, e circuit.Event) float64 {
	if !c.Occurs(e) {
		return math.Inf(1)
	}
	return c.RailLow(e)
}
