package circuit

import (
	"math"

	"floatrail/calc/loss"
	"floatrail/calc/stage"
)

// frequency is the switching frequency [Hz]; 0 where nothing switches.
func (c *Circuit) frequency() float64 {
	switch {
	case c.Point == nil:
		return c.NoPoint()
	case c.Point.HeldOn != nil:
		return 0
	}
	return c.Need(&c.Point.SwitchingFrequency)
}

// gateSwing is the charge of a position's gates over a drive and the swing of their voltage, off bias included [C], [V].
func (c *Circuit) gateSwing(s *stage.Switch, drive float64) (q, swing float64) {
	bias := c.OffBias(s)
	g := c.GateCharge(s)
	if g.SpecifiedAt != g.SpecifiedAt {
		c.Assume(stage.Assumption{Field: s.GateChargeVoltage.Field, Assumed: "the drive in use", Direction: stage.Optimistic,
			Reason: "the gate voltage at which the gate charge was specified is not given"})
		q = g.Specified
	} else {
		q = g.At(drive)
	}
	if bias.Voltage != 0 {
		q += bias.Charge(c.Need(&s.InputCapacitance))
	}
	return q * s.Count(), drive - bias.Voltage
}

// gateLoss is the driver's share of the gate loss of a position [W].
func (c *Circuit) gateLoss(s *stage.Switch) float64 {
	if s.Kind == stage.DiodeOnly {
		return 0
	}
	q, v := c.gateSwing(s, c.driveVoltage(s))
	on, off := c.driverResistance(true, false), c.driverResistance(false, false)
	return loss.DriverGate(q, v, c.frequency(), on, off, c.resistorsOf(s, true), c.resistorsOf(s, false))
}

// DriverPower is the power that the driver dissipates [W]: its share of the gate losses, level shift, leakage and quiescent currents, and an
// integrated element's own.
func (c *Circuit) DriverPower() float64 {
	d, vbs := &c.Stage.Driver, c.Ceiling()
	high, low := c.gateLoss(&c.Stage.HighSide), c.gateLoss(&c.Stage.LowSide)
	bus, f := c.bus(), c.frequency()
	p := high + low + loss.LevelShift(bus, vbs, c.Need(&d.LevelShiftCharge), f) + loss.Leakage(bus, c.Need(&d.OffsetLeakage)) +
		loss.Quiescent(c.Supply(), c.Need(&d.QuiescentCurrent), vbs, c.Need(&d.FloatingQuiescentCurrent))
	if f == 0 {
		return p
	}
	average := c.AverageCurrent()
	switch c.Stage.Bootstrap.Element {
	case stage.IntegratedDiode:
		p += loss.Forward(c.Element().Junction.Voltage(average), average) + loss.Recovery(1, c.recoveredCharge(), bus, f)
	case stage.IntegratedSwitch:
		p += c.elementPower(c.Need(&c.Stage.Bootstrap.SwitchResistance))
	}
	return p
}

// DriverTemperature is the driver's junction temperature [degC].
func (c *Circuit) DriverTemperature() float64 {
	return loss.Junction(c.Set.Ambient, c.Need(&c.Stage.Driver.ThermalResistance), c.DriverPower())
}

// recoveredCharge is what the element recovers in a period [C]; that of its test where there is no steady state.
func (c *Circuit) recoveredCharge() float64 {
	if st := c.Steady(); !st.Collapses {
		return st.Recovery
	}
	return c.Period().RecoverySpec
}

// DiodeRise is how far the bootstrap diode's junction stands above its surroundings [K]; not stable where its leakage heats it faster than it
// cools. Its leakage doubles every 10 K from that at the surroundings' temperature.
func (c *Circuit) DiodeRise() (rise float64, stable bool) {
	d := &c.Stage.Bootstrap.Diode
	leakage, bus, f := c.Need(&d.ReverseLeakage), c.bus(), c.frequency()
	if len(d.ReverseLeakage.At) == 0 && c.Set.Ambient > stage.ReferenceTemperature {
		c.Assume(stage.Assumption{Field: d.ReverseLeakage.Field + ".at", Assumed: "doubling every 10 K", Direction: stage.Optimistic,
			Reason: "the hot leakage decides over runaway and is given at 25 °C only"})
	}
	if f == 0 { // held on: it blocks all the time
		return loss.Rise(c.Need(&d.ThermalResistance), 0, loss.Leakage(bus, leakage))
	}
	p := c.Period()
	average := c.AverageCurrent()
	constant := loss.Forward(p.Element.Junction.Voltage(average), average) + loss.Recovery(1, c.recoveredCharge(), bus, f)
	return loss.Rise(c.Need(&d.ThermalResistance), constant, loss.Leakage(bus, leakage)*p.OnTime/p.T)
}

// DiodeTemperature is the bootstrap diode's junction temperature [degC]; +Inf at thermal runaway.
func (c *Circuit) DiodeTemperature() float64 {
	rise, stable := c.DiodeRise()
	if !stable {
		return math.Inf(1)
	}
	return c.Set.Ambient + rise
}

// SupplyCurrent is the mean current that the stages on the supply take [A]: what recharges C_B, the low side's gates, and quiescent currents.
func (c *Circuit) SupplyCurrent() float64 {
	f := c.frequency()
	i := c.Need(&c.Stage.Driver.QuiescentCurrent)
	if low := &c.Stage.LowSide; low.Kind != stage.DiodeOnly {
		q, _ := c.gateSwing(low, c.driveVoltage(low))
		i += q * f
	}
	if f > 0 {
		i += c.AverageCurrent()
	} else {
		i += c.Loads().Total()
	}
	return i * float64(c.sharing())
}
