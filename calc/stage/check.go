package stage

import (
	"math"
	"strconv"
	"strings"

	"floatrail/calc/capacitor"
	"floatrail/calc/quantity"
)

// Fault is one fault of a request: where it stands, what was read and what was expected.
type Fault struct {
	Field       string // path in the request
	Description string
}

// Check finds what contradicts itself across the fields of a stage. It never judges a design: what it refuses no part and no operating
// condition can be. Values that are not given contradict nothing. It is to be called before Complete.
func Check(s *Stage) []Fault {
	var c checker
	c.gateSupply(&s.GateSupply)
	c.driver(&s.Driver)
	c.powerSwitch(&s.HighSide)
	c.powerSwitch(&s.LowSide)
	c.bootstrap(&s.Bootstrap)
	c.layout(&s.Layout)
	c.places(s)
	c.operatingPoints(&s.OperatingPoints)
	c.startup(&s.Startup)
	return c.faults
}

// CheckPart finds what contradicts itself across the fields of one component: a *Driver, *Switch, *Diode, *Capacitor or *Resistor.
func CheckPart(component any) []Fault {
	var c checker
	switch p := component.(type) {
	case *Driver:
		c.driver(p)
	case *Switch:
		c.powerSwitch(p)
	case *Diode:
		c.diode(p)
	case *Capacitor:
		c.capacitor(p)
	case *Resistor: // its values stand alone
	}
	return c.faults
}

// checker collects faults in the order of the fields.
type checker struct{ faults []Fault }

func (c *checker) add(field, read, expected string) {
	c.faults = append(c.faults, Fault{Field: field, Description: "read " + read + ", expected " + expected})
}

// ends are the three values of a triple with their names.
func (t *Triple) ends() [3]float64 { return [3]float64{t.Min, t.Typ, t.Max} }

var endNames = [3]string{"min", "typ", "max"}

func worded(name string, end int, v float64, d quantity.Dimension) string {
	return name + " " + endNames[end] + " " + quantity.Format(v, d)
}

// name is the last part of a path.
func (q *Quantity) name() string { return q.Field[strings.LastIndexByte(q.Field, '.')+1:] }

func (q *Quantity) dimension() quantity.Dimension {
	if q.Declare == nil {
		return quantity.None
	}
	return q.Declare.Dimension
}

// ordered demands small <= large of every one part. Because each part obeys, the smallest, typical and largest values over the parts obey
// too, each against the same or a higher end of the other: those are compared that were given.
func (c *checker) ordered(small, large *Quantity) {
	a, b := small.ends(), large.ends()
	for i := range a {
		for j := i; j < len(b); j++ {
			if a[i] > b[j] {
				c.add(small.Field, worded(small.name(), i, a[i], small.dimension())+" above "+worded(large.name(), j, b[j], large.dimension()),
					small.name()+" at most "+large.name())
				return
			}
		}
	}
}

// sum demands that two shares of every one part are together at most the whole: minima add up to at most any minimum, typical values to
// at most the typical one; maxima need not meet in one part.
func (c *checker) sum(one, two, whole *Quantity) {
	a, b, w := one.ends(), two.ends(), whole.ends()
	for i := range 2 {
		for j := i; j < len(w); j++ {
			if a[i]+b[i] > w[j]*(1+roundoff) {
				c.add(whole.Field, one.name()+" + "+worded(two.name(), i, a[i]+b[i], whole.dimension())+" above "+worded(whole.name(), j, w[j], whole.dimension()),
					one.name()+" + "+two.name()+" at most "+whole.name())
				return
			}
		}
	}
}

// roundoff keeps sums of decimal numbers equal to what they are written as [1].
const roundoff = 1e-12

// least is the smallest value given; NaN where none is.
func (t *Triple) least() float64 { return firstOf(t.Min, firstOf(t.Typ, t.Max)) }

func (c *checker) gateSupply(g *GateSupply) {
	c.ordered(&g.UVLOFalling, &g.UVLORising)
	c.ordered(&g.UVLORising, &g.VoltageMax)
	c.capacitor(&g.Reservoir)
}

func (c *checker) driver(d *Driver) {
	c.ordered(&d.UVLOFalling, &d.UVLORising)
	c.ordered(&d.UVLORising, &d.FloatingVoltageMax)
	c.ordered(&d.FloatingVoltageRecommendedMax, &d.FloatingVoltageMax)
	c.ordered(&d.RailMin, &d.RailOperationalMin)
	c.undershoot(&d.NodeUndershoot)
}

// undershoot demands rows in the order of depth: the deeper, the shorter.
func (c *checker) undershoot(rows *List[UndershootRow]) {
	for i := range rows.Items {
		r := &rows.Items[i]
		if !r.Voltage.Given() {
			c.add(r.Voltage.Field, "nothing", "the lowest node voltage of the row")
		}
		if i == 0 {
			continue
		}
		before := &rows.Items[i-1]
		if a, b := before.Voltage.Typ, r.Voltage.Typ; b >= a {
			c.add(r.Voltage.Field, quantity.Format(b, quantity.Voltage)+" after "+quantity.Format(a, quantity.Voltage), "rows in the order of depth, each level once")
			continue
		}
		switch {
		case !r.Duration.Given():
			c.add(r.Duration.Field, "nothing (static) in a row below another", "a duration; the static row is the first")
		case r.Duration.Typ >= before.Duration.Typ:
			c.add(r.Duration.Field, quantity.Format(r.Duration.Typ, quantity.Time)+" after "+quantity.Format(before.Duration.Typ, quantity.Time),
				"a shorter duration for a deeper level")
		}
	}
}

func (c *checker) powerSwitch(s *Switch) {
	c.ordered(&s.GateSourceCharge, &s.GateCharge)
	c.ordered(&s.GateDrainCharge, &s.GateCharge)
	c.sum(&s.GateSourceCharge, &s.GateDrainCharge, &s.GateCharge)
	c.ordered(&s.ThresholdVoltage, &s.PlateauVoltage)
	if v, spec := firstOf(s.PlateauVoltage.Min, s.PlateauVoltage.Typ), s.GateChargeVoltage.Typ; v >= spec {
		c.add(s.GateChargeVoltage.Field, quantity.Format(spec, quantity.Voltage)+" with plateauVoltage "+quantity.Format(v, quantity.Voltage),
			"a gate charge taken above the plateau")
	}
	abscissae(c, &s.ReverseTransferCapacitance, capacitanceAbscissa)
	abscissae(c, &s.OutputCapacitance, capacitanceAbscissa)
	for i := range s.ReverseTransferCapacitance.Items {
		r := &s.ReverseTransferCapacitance.Items[i]
		if r.Voltage.Typ == s.InputCapacitanceVoltage.Typ {
			c.ordered(&r.Capacitance, &s.InputCapacitance)
		}
		for j := range s.OutputCapacitance.Items {
			if o := &s.OutputCapacitance.Items[j]; r.Voltage.Typ == o.Voltage.Typ {
				c.ordered(&r.Capacitance, &o.Capacitance)
			}
		}
	}
	if abscissae(c, &s.ChannelPoints, func(p *ChannelPoint) (x, y *Quantity) { return &p.Current, &p.Voltage }) {
		for i := 1; i < len(s.ChannelPoints.Items); i++ {
			c.rising(&s.ChannelPoints.Items[i-1].Voltage, &s.ChannelPoints.Items[i].Voltage)
		}
	}
	c.ordered(&s.DriveVoltageMin, &s.GateVoltageMax)
	c.ordered(&s.GateVoltageRecommendedMax, &s.GateVoltageMax)
	c.forwardPoints(&s.Reverse.ForwardPoints)
}

func capacitanceAbscissa(p *CapacitancePoint) (x, y *Quantity) { return &p.Voltage, &p.Capacitance }

// abscissae demands both coordinates of each point and abscissae that ascend; it tells whether that holds.
func abscissae[T any](c *checker, l *List[T], of func(*T) (x, y *Quantity)) bool {
	before := len(c.faults)
	for i := range l.Items {
		x, y := of(&l.Items[i])
		for _, q := range [2]*Quantity{x, y} {
			if !q.Given() {
				c.add(q.Field, "nothing", "the "+q.name()+" of the point")
			}
		}
		if i == 0 {
			continue
		}
		if last, _ := of(&l.Items[i-1]); x.Typ <= last.Typ {
			c.add(x.Field, quantity.Format(x.Typ, x.dimension())+" after "+quantity.Format(last.Typ, last.dimension()), "ascending values, each once")
		}
	}
	return len(c.faults) == before
}

// rising demands a < b of every one part, where b belongs to the larger current.
func (c *checker) rising(a, b *Quantity) {
	x, y := a.ends(), b.ends()
	for i := range x {
		for j := i; j < len(y); j++ {
			if x[i] >= y[j] {
				c.add(b.Field, worded(b.name(), j, y[j], b.dimension())+" after "+worded(a.name(), i, x[i], a.dimension())+" at a smaller current",
					"a voltage that rises with current")
				return
			}
		}
	}
}

// forwardPoints demands points that a junction can have: V rises with I, so that the slope ΔV/ln(I2/I1) is above 0.
func (c *checker) forwardPoints(l *List[ForwardPoint]) {
	if !abscissae(c, l, func(p *ForwardPoint) (x, y *Quantity) { return &p.Current, &p.Voltage }) {
		return
	}
	for i := 1; i < len(l.Items); i++ {
		c.rising(&l.Items[i-1].Voltage, &l.Items[i].Voltage)
	}
}

func (c *checker) bootstrap(b *Bootstrap) {
	c.diode(&b.Diode)
	c.capacitor(&b.Capacitor)
}

func (c *checker) diode(d *Diode) {
	c.forwardPoints(&d.ForwardPoints)
	c.seriesResistance(d)
	c.ordered(&d.AverageCurrentMax, &d.RepetitivePeakCurrentMax)
	c.ordered(&d.RepetitivePeakCurrentMax, &d.SurgeCurrentMax)
}

// seriesResistance demands that the drop of the series resistance leaves a junction whose voltage rises: r·(I2 - I1) < V2 - V1, of the
// typical part and of the most favourable one.
func (c *checker) seriesResistance(d *Diode) {
	r := &d.SeriesResistance
	for i := 1; i < len(d.ForwardPoints.Items); i++ {
		a, b := &d.ForwardPoints.Items[i-1], &d.ForwardPoints.Items[i]
		span := b.Current.Typ - a.Current.Typ
		for _, part := range [...]struct{ r, rise float64 }{
			{r.Typ, b.Voltage.Typ - a.Voltage.Typ}, {r.Min, b.Voltage.Max - a.Voltage.Min},
		} {
			if part.rise > 0 && part.r*span >= part.rise {
				c.add(r.Field, quantity.Format(part.r, quantity.Resistance)+" where the points allow "+quantity.Format(part.rise/span, quantity.Resistance),
					"a series resistance that leaves a junction in the forward points")
				return
			}
		}
	}
}

// biasRise is how far a capacitance under bias may stand above its value at a lower bias: what the curves of real parts show [1].
const biasRise = 0.1

func (c *checker) capacitor(p *Capacitor) {
	if p.Dielectric != "" {
		if _, ok := capacitor.ParseClass(p.Dielectric); !ok {
			c.add(p.Field+".dielectric", strconv.Quote(p.Dielectric), "a class code such as X7R, C0G or Y5V, or FILM, ALUMINIUM, TANTALUM")
		}
	}
	if v, most := p.EffectiveCapacitance.least(), p.Capacitance.Max; v > most {
		c.add(p.EffectiveCapacitance.Field, quantity.Format(v, quantity.Capacitance)+" above capacitance max "+quantity.Format(most, quantity.Capacitance),
			"an effective capacitance within the nominal one")
	}
	if !abscissae(c, &p.BiasCurve, func(b *BiasPoint) (x, y *Quantity) { return &b.Voltage, &b.Remaining }) {
		return
	}
	least := math.Inf(1)
	for i := range p.BiasCurve.Items {
		b := &p.BiasCurve.Items[i]
		if b.Remaining.Typ > least+biasRise {
			c.add(b.Remaining.Field, quantity.Format(b.Remaining.Typ, quantity.Ratio)+" after "+quantity.Format(least, quantity.Ratio)+" at a lower voltage",
				"a capacitance that falls with direct voltage")
		}
		least = math.Min(least, firstOf(b.Remaining.Typ, least))
	}
}

func (c *checker) layout(l *Layout) {
	c.ordered(&l.LowSideInductance, &l.LoopInductance)
	c.ordered(&l.BusLoopInductance, &l.LoopInductance)
	c.sum(&l.LowSideInductance, &l.BusLoopInductance, &l.LoopInductance)
	c.ordered(&l.HighSideCommonSource, &l.BusLoopInductance)
	c.ordered(&l.LowSideCommonSource, &l.LowSideInductance)
	c.diode(&l.NodeClamp)
}
