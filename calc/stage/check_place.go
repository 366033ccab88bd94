package stage

import (
	"strconv"

	"floatrail/calc/quantity"
)

// places finds components that cannot be where they are.
func (c *checker) places(s *Stage) {
	if s.HighSide.Kind == DiodeOnly {
		c.add(s.HighSide.Field+".kind", DiodeOnly, "a switch: only the low side may be a diode")
	}
	b := &s.Bootstrap
	if b.Diode.Presence() == NotFitted && (b.Element == DiscreteDiode || b.Element == IntegratedDiode) {
		c.add(b.Diode.Field+".fit", "NOT_FITTED", "a diode where element is "+b.Element)
	}
	if b.Capacitor.Presence() == NotFitted {
		c.add(b.Capacitor.Field+".fit", "NOT_FITTED", "a bootstrap capacitor; without one there is no floating supply")
	}
	for _, r := range [...]*Resistor{
		&s.HighSide.GateOn, &s.HighSide.GateOff, &s.LowSide.GateOn, &s.LowSide.GateOff, &b.Resistor, &s.Layout.Shunt, &s.Layout.NodeResistor,
	} {
		if r.Presence() == NotFitted {
			c.add(r.Field+".fit", "NOT_FITTED", "resistance 0R where a series resistor is bridged; without it the path is open")
		}
	}
}

func (c *checker) operatingPoints(l *List[OperatingPoint]) {
	first := make(map[string]string, len(l.Items))
	for i := range l.Items {
		p := &l.Items[i]
		switch other, taken := first[p.Name]; {
		case p.Name == "":
			c.add(p.Field+".name", "nothing", "a name, unique in the stage")
		case taken:
			c.add(p.Field+".name", strconv.Quote(p.Name), "a name of its own; "+other+" has it already")
		default:
			first[p.Name] = Relative(p.Field)
		}
		if p.Mode() == "" {
			c.add(p.Field, "no mode", "one of fixedDuty, sinusoidal, sixStep, burst, heldOn")
		}
		c.times(p)
	}
}

// times finds times of an operating point that no period can hold, each value at its smallest and the period at its longest.
func (c *checker) times(p *OperatingPoint) {
	f := &p.SwitchingFrequency
	period := 1 / f.least()
	if dead := p.DeadTime.least(); 2*dead > period*(1+roundoff) {
		c.add(p.DeadTime.Field, "twice "+quantity.Format(dead, quantity.Time)+" in a period of "+quantity.Format(period, quantity.Time),
			"two dead times that fit into one period")
	}
	if m := p.FixedDuty; m != nil {
		rest := (1 - firstOf(m.Duty.least(), 0)) * period
		if on := m.LowSideOnTime.least(); on > rest*(1+roundoff) {
			c.add(m.LowSideOnTime.Field, quantity.Format(on, quantity.Time)+" where "+quantity.Format(rest, quantity.Time)+" of the period remain",
				"an on-time within the rest of the period")
		}
	}
	if m := p.Sinusoidal; m != nil {
		c.slower(&m.FundamentalFrequency, f)
	}
	if m := p.SixStep; m != nil {
		c.slower(&m.ElectricalFrequency, f)
	}
}

// slower demands that a fundamental stays below the switching frequency.
func (c *checker) slower(fundamental, switching *Quantity) {
	a, b := fundamental.least(), firstOf(switching.Max, firstOf(switching.Typ, switching.Min))
	if a >= b {
		c.add(fundamental.Field, quantity.Format(a, quantity.Frequency)+" with a switchingFrequency of "+quantity.Format(b, quantity.Frequency),
			"a frequency below the switching frequency")
	}
}

func (c *checker) startup(s *Startup) {
	switch width, period := &s.PulseWidth, &s.PulsePeriod; {
	case width.Given() && !period.Given():
		c.add(period.Field, "nothing beside pulseWidth", "both of a pulsed first charge")
	case period.Given() && !width.Given():
		c.add(width.Field, "nothing beside pulsePeriod", "both of a pulsed first charge")
	default:
		c.ordered(width, period)
	}
}
