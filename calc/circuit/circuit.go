// Package circuit reads a stage at one draw of its inputs and makes of it what the models take: the recharge element, the loads, the
// charges of an edge, the intervals of a period. It is the only place where a stage meets the models; it decides nothing.
//
// Whatever is missing makes the result NaN and is noted in the draw, so that the rule that asked is open and names it.
package circuit

import (
	"math"

	"floatrail/calc/capacitor"
	"floatrail/calc/charge"
	"floatrail/calc/corner"
	"floatrail/calc/modulation"
	"floatrail/calc/recharge"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// Circuit is a stage at one draw.
type Circuit struct {
	*corner.Draw
	Stage  *stage.Stage
	Policy *stage.Policy
	Point  *stage.OperatingPoint
	Set    corner.Set

	// Results kept with the draw.
	elementAt     recharge.Element
	periodAt      Period
	steadyAt      recharge.Steady
	loadsAt       charge.Loads
	capacitanceAt float64
	edgeAt        edge
	budgetAt      []charge.Item
	legAt         modulation.Leg
	bufferAt      modulation.Buffer
	cycleAt       Cycle
	planAt        *modulation.Plan

	DutyAt     any // the largest duty, kept for the package that derives it
	namesAt    [8]string
	curveAt    [curves][]transient.CurvePoint
	ordersAt   [2]charged
	events     *events // nil: none asked for yet
	estimating bool    // events by closed forms, whatever the space says
	focus      *Event  // the event that alone counts as occurring; nil: all that can
}

// events are the results about switching events.
type events struct {
	swing       [eventCount]transient.Swing
	slope       [eventCount]float64
	recovery    [2]transient.Recovery // of the high side, the low side
	pumped      Period
	crest       Period // of a modulated operating point
	steady      recharge.Steady
	pumpedOff   [10]recharge.Interval
	pumpedNames [10]string
	course      [charges][eventCount]*transient.Course
}

// kept is where results about switching events are kept.
func (c *Circuit) kept() *events {
	if c.events == nil {
		c.events = &events{}
	}
	return c.events
}

// Of gives the circuit at a draw, made once per draw.
func Of(d *corner.Draw) *Circuit {
	if c, ok := d.Slot.(*Circuit); ok {
		return c
	}
	c := &Circuit{Draw: d, Stage: d.Space.Stage, Policy: d.Space.Policy, Point: d.Space.Point, Set: d.Space.Set}
	d.Slot = c
	return c
}

// Slots of results kept with a draw.
const (
	slotElement = iota
	slotPeriod
	slotSteady
	slotLoads
	slotCapacitance
	slotEdge
	slotBudget
	slotPumped
	slotPumpedSteady
	slotSwing    // one for each event
	slotSlope    = slotSwing + int(eventCount)
	slotRecovery = slotSlope + int(eventCount)
	slotCourse   = slotRecovery + 2                          // one for each event and state of charge
	slotOrders   = slotCourse + int(charges)*int(eventCount) // of the first charge: as requested, the other one
	slotCycle    = slotOrders + 2
	slotPlan     = slotCycle + 1
	SlotDuty     = slotPlan + 1 // of the largest duty, which is derived
)

var nan = math.NaN()

// NoPoint notes that the stage has no operating point.
func (c *Circuit) NoPoint() float64 { return c.Want(c.Stage.OperatingPoints.Field) }

// Supply is V_DD [V].
func (c *Circuit) Supply() float64 { return c.Need(&c.Stage.GateSupply.Voltage) }

// series is the resistance of a resistor in series [ohm]; where there is none it is written as 0 Ω.
func (c *Circuit) series(r *stage.Resistor) float64 {
	if r.Presence() == stage.NotFitted {
		return c.Open(stage.Relative(r.Field) + " is in series and not fitted: the branch is open; a link is written as 0R")
	}
	return c.Need(&r.Resistance)
}

// Element is the recharge branch at the temperature of the set. Resistances: R_B, what the element itself has, R_VS, and the supply's own
// where no reservoir stands behind it.
func (c *Circuit) Element() recharge.Element {
	return *corner.Memo(c.Draw, slotElement, true, &c.elementAt, c.element)
}

func (c *Circuit) element() recharge.Element {
	b := &c.Stage.Bootstrap
	r := c.series(&b.Resistor) + c.series(&c.Stage.Layout.NodeResistor)
	switch c.Stage.GateSupply.Reservoir.Presence() {
	case stage.NotFitted:
		r += c.Need(&c.Stage.GateSupply.SeriesResistance)
	case stage.PresenceUnknown:
		r += c.Want(c.Stage.GateSupply.Reservoir.Field)
	}
	switch b.Element {
	case stage.IntegratedSwitch:
		return recharge.Element{Resistance: r + c.Need(&b.SwitchResistance), Switch: true}
	case stage.DiscreteDiode, stage.IntegratedDiode:
		j := c.junction(&b.Diode)
		return recharge.Element{Junction: j, Resistance: r + j.Resistance}
	}
	return recharge.Element{Resistance: c.Want(b.Field + ".element")}
}

// junction fits the diode's static law to its forward points and moves it to the temperature of the set.
func (c *Circuit) junction(d *stage.Diode) recharge.Junction {
	bad := recharge.Junction{Slope: nan, LogSaturation: nan, Resistance: nan}
	points := d.ForwardPoints.Items
	if len(points) == 0 {
		c.Want(d.ForwardPoints.Field)
		return bad
	}
	var buf [8]recharge.DiodePoint
	fit := buf[:0]
	taken := float64(stage.ReferenceTemperature)
	for i := range points {
		p := &points[i]
		v := c.Need(&p.Voltage)
		if len(p.Voltage.At) > 0 {
			taken = c.Set.Ambient
		} else {
			v += 2e-3 * (c.Set.Ambient - stage.ReferenceTemperature) // back to the temperature of the points: the fit moves them itself
		}
		fit = append(fit, recharge.DiodePoint{Current: c.Need(&p.Current), Voltage: v})
	}
	if len(points) == 1 {
		c.Assume(stage.Assumption{Field: d.ForwardPoints.Field, Assumed: "emission coefficient 1.5", Direction: stage.Optimistic,
			Reason: "one forward point alone does not tell how the drop falls toward small currents"})
	}
	rs, ok := c.Has(&d.SeriesResistance)
	if !ok {
		rs = nan
	}
	for _, p := range fit {
		if p.Voltage != p.Voltage || p.Current != p.Current {
			return bad
		}
	}
	j, err := recharge.FitJunction(fit, rs, taken)
	if err != nil {
		c.Open(stage.Relative(d.ForwardPoints.Field) + ": " + err.Error())
		return bad
	}
	if taken != c.Set.Ambient {
		j = j.AtTemperature(c.Set.Ambient, taken, fit[len(fit)-1])
	}
	return j
}

// Kind is the family of a capacitor's dielectric.
func Kind(s *stage.Capacitor) capacitor.Kind {
	class, ok := capacitor.ParseClass(s.Dielectric)
	if !ok {
		return capacitor.Unspecified
	}
	return class.Kind
}

// Ceiling is a voltage that V_BS does not exceed: V_DD and the drop of the low side in reverse conduction [V]. Bias curves are read there.
func (c *Circuit) Ceiling() float64 {
	v := c.Supply()
	if c.Point == nil || c.Point.HeldOn != nil || c.Stage.Bootstrap.Element == stage.IntegratedSwitch {
		return v
	}
	if i := c.peakCurrent(); i > 0 {
		v -= c.freewheelNode(i)
	}
	return v
}

// Capacitance is the effective capacitance of C_B at working voltage [F].
func (c *Circuit) Capacitance() float64 {
	return *corner.Memo(c.Draw, slotCapacitance, false, &c.capacitanceAt, func() float64 { return c.Effective(&c.Stage.Bootstrap.Capacitor, c.Ceiling) })
}

// Fresh is the capacitance of C_B when new and at no bias, as at first charge [F].
func (c *Circuit) Fresh() float64 {
	s := &c.Stage.Bootstrap.Capacitor
	if v, ok := c.Has(&s.EffectiveCapacitance); ok {
		return v
	}
	return c.Need(&s.Capacitance) * (1 + c.Need(&s.TemperatureChange))
}

// Effective is the effective capacitance of a capacitor at a direct voltage [F]: nominal, tolerance, temperature, bias and ageing
// multiplied [design 4.2].
func (c *Circuit) Effective(s *stage.Capacitor, voltage func() float64) float64 {
	if v, ok := c.Has(&s.EffectiveCapacitance); ok {
		return v
	}
	nominal := c.Need(&s.Capacitance)
	change := c.Need(&s.TemperatureChange)
	return capacitor.Effective(nominal, 0, change, c.Bias(s, voltage), c.Ageing(s))
}

// Bias is the share of the capacitance that remains under direct voltage [1].
func (c *Circuit) Bias(s *stage.Capacitor, voltage func() float64) float64 {
	weight := c.Need(&s.Bias)
	if weight == 0 || weight != weight {
		return 1 + weight
	}
	remaining := c.Policy.ClassTwoRemaining
	if points := s.BiasCurve.Items; len(points) > 0 {
		var buf [16]capacitor.BiasPoint
		curve := buf[:0]
		for i := range points {
			curve = append(curve, capacitor.BiasPoint{Voltage: c.Need(&points[i].Voltage), Remaining: c.Need(&points[i].Remaining)})
		}
		var beyond bool
		remaining, beyond = capacitor.BiasRemaining(curve, voltage())
		if beyond {
			c.Assume(stage.Assumption{Field: s.BiasCurve.Field, Assumed: "the last slope continues", Direction: stage.Conservative,
				Reason: "the curve ends below the working voltage"})
		}
	}
	return 1 - weight*(1-remaining)
}

// Ageing is the share of the capacitance that remains after the service time [1].
func (c *Circuit) Ageing(s *stage.Capacitor) float64 {
	k := c.Need(&s.AgeingPerDecade)
	if k == 0 {
		return 1
	}
	return capacitor.Ageing(k, c.Need(&s.ServiceTime))
}
