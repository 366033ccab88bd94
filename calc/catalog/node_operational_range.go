package catalog

import (
	"floatrail/calc/circuit"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// Roles of the levels that a command must cross.
const (
	roleNode = "node"
	roleRail = "rail"
)

var nodeOperationalRange = &rule.Rule{
	ID: "node/operational-range", Title: "Node and floating rail while the high side is commanded", Since: second,
	Equation: "V_S = -(V_SD(I) + I·R_shunt) at the valley of the current as the high side is commanded on; V_B = V_S + V_UV-",
	Limit:    "lowest V_S, or V_B to COM, at which the driver still obeys", Guard: "10 % above the limit", Applies: "every operating point",
	Needs: []string{"driver.nodeOperationalMin", "driver.railOperationalMin", "driver.uvloFalling", "lowSide.reverse.forwardPoints",
		"operatingPoints.loadCurrent"},
	Events:  true,
	Sources: []string{"lmg1210", "common-practice"},
	Fail:    stage.Critical, Marginal: stage.Major, Open: stage.Major,
	Quantity: "Lowest voltage at a command", Against: "operational minimum", Dimension: quantity.Voltage, Sense: rule.AtLeast,
	Roles: []string{roleNode, roleRail}, Inapplicable: always,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		v, least := c.Commanded(), &c.Stage.Driver.NodeOperationalMin
		if role == roleRail {
			v, least = v+c.Need(&c.Stage.Driver.UVLOFalling), &c.Stage.Driver.RailOperationalMin
		}
		limit := c.Need(least)
		return rule.Check{Value: v, Limit: limit, Guard: raised(c, limit)}
	},
}
