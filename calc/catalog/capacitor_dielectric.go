package catalog

import (
	"fmt"
	"math"

	"floatrail/calc/capacitor"
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// widestChange is the change of capacitance over temperature beyond which a class 2 ceramic is no bootstrap capacitor [common-practice].
const widestChange = 0.22

var capacitorDielectric = &rule.Rule{
	ID: "capacitor/dielectric", Title: "Dielectric class and temperature range", Since: first,
	Equation: "distance of the capacitor's temperature to the nearer end of its class's range",
	Limit:    "the range of the class; a class that changes by more than 22 % fails", Guard: "the limit",
	Applies: "C_B, and the reservoir where one is fitted",
	Needs:   []string{"bootstrap.capacitor.dielectric", "gateSupply.reservoir.dielectric", "operatingPoints.ambientTemperature"},
	Sources: []string{"eia-198", "iec-60384-22", "slaa701b"},
	Fail:    stage.Major, Marginal: stage.Minor, Open: stage.Major,
	Quantity: "Distance to the end of the temperature range", Against: "end of the range", Dimension: quantity.TemperatureDifference, Sense: rule.AtLeast,
	Roles: []string{roleCapacitor, roleReservoir}, Stagewide: true,
	Inapplicable: fittedCapacitor,
	Check: func(c *circuit.Circuit, role string) rule.Check {
		s := component(c, role)
		if !present(c, s) {
			return rule.Check{Value: nan}
		}
		class, ok := capacitor.ParseClass(s.Dielectric)
		if !ok {
			return rule.Check{Value: c.Want(s.Field + ".dielectric")}
		}
		t, given := c.Has(&s.Temperature)
		if !given {
			t = c.Set.Ambient
			if c.Point != nil && t != t {
				c.Want(c.Point.AmbientTemperature.Field)
			}
		}
		ch := rule.Check{Value: math.Min(t-class.TemperatureLow, class.TemperatureHigh-t)}
		if class.Kind == capacitor.ClassTwo && math.Max(-class.ChangeLow, class.ChangeHigh) > widestChange+1e-9 {
			ch.Floor = finding.Fail
		}
		if class.Kind == capacitor.Aluminium && role == roleCapacitor && c.Set.Ambient < 0 {
			ch.Floor = max(ch.Floor, finding.Marginal)
		}
		return ch
	},
	Explain: func(c *circuit.Circuit, role string, ch rule.Check) []string {
		class, _ := capacitor.ParseClass(component(c, role).Dielectric)
		switch {
		case ch.Floor == finding.Fail:
			return []string{fmt.Sprintf("class %s changes by %+.4g %% to %+.4g %% over its range", class.Code,
				100*class.ChangeLow, 100*class.ChangeHigh)}
		case ch.Floor == finding.Marginal:
			return []string{"the ESR of an aluminium capacitor rises manifold in the cold"}
		}
		return nil
	},
}
