package derive_test

import (
	"math"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/derive"
	"floatrail/calc/finding"
	"floatrail/calc/stage"
)

var nan = math.NaN()

func exact(v float64) stage.Quantity { return stage.Exact("", v) }

func absent() stage.Quantity { return stage.Absent("", &stage.Declaration{}) }

// half is a half-bridge at a fixed duty; what is not written here is exactly 0.
func half() *stage.Stage {
	s := &stage.Stage{ID: "s"}
	s.GateSupply.Voltage = exact(12)
	s.GateSupply.Reservoir.Present = true
	d := &s.Driver
	d.UVLOFalling, d.FloatingVoltageMax = exact(8.5), exact(20)
	d.LevelShiftCharge, d.FloatingQuiescentCurrent = exact(2e-9), exact(200e-6)
	d.MinimumPulse, d.EdgeTime = exact(50e-9), exact(20e-9)
	for _, w := range []*stage.Switch{&s.HighSide, &s.LowSide} {
		w.Kind = stage.SiMOSFET
		w.OutputCapacitance.Items = []stage.CapacitancePoint{{Voltage: exact(48), Capacitance: exact(300e-12)}}
		w.Reverse.ForwardPoints.Items = []stage.ForwardPoint{{Current: exact(1), Voltage: exact(0.7)}, {Current: exact(10), Voltage: exact(0.9)}}
	}
	s.LowSide.OnResistance = exact(20e-3)
	h := &s.HighSide
	h.GateCharge, h.GateChargeVoltage, h.DriveVoltageMin, h.GateVoltageMax = exact(60e-9), absent(), exact(8), exact(20)
	h.GatePullDown.Fit = "NOT_FITTED"
	b := &s.Bootstrap
	b.Element = stage.DiscreteDiode
	b.Diode.ForwardPoints.Items = []stage.ForwardPoint{{Current: exact(0.1), Voltage: exact(0.65)}, {Current: exact(1), Voltage: exact(0.85)}}
	b.Diode.SeriesResistance = absent()
	b.Resistor.Resistance = exact(4.7)
	b.Capacitor.EffectiveCapacitance = exact(220e-9)
	b.Clamp.Fit = "NOT_FITTED"
	s.Layout.Shunt.Fit = "NOT_FITTED"
	op := stage.OperatingPoint{Name: "full load", BusVoltage: exact(48), LoadCurrent: exact(5), RippleCurrent: exact(2), SwitchingFrequency: exact(100e3),
		DeadTime: exact(100e-9), JunctionTemperature: exact(25), AmbientTemperature: exact(25),
		FixedDuty: &stage.FixedDuty{Duty: exact(0.6), LowSideOnTime: absent()}}
	s.OperatingPoints.Items = []stage.OperatingPoint{op}
	return s
}

// ideal is a half-bridge whose steady state is known in closed form: C_B gives up a constant charge at each edge and is recharged through a
// resistance while the low side is on.
func ideal() *stage.Stage {
	s := half()
	s.Bootstrap.Element = stage.IntegratedSwitch
	s.Bootstrap.SwitchResistance = exact(5)
	s.Driver.FloatingQuiescentCurrent, s.Driver.MinimumPulse, s.Driver.EdgeTime = exact(0), exact(0), exact(0)
	return s
}

func duty(s *stage.Stage) *stage.FixedDuty { return s.OperatingPoints.Items[0].FixedDuty }

// typical completes a stage and gives its circuit at the typical draw.
func typical(s *stage.Stage) *circuit.Circuit {
	p := stage.DefaultPolicy()
	s.Complete(&p)
	op := &s.OperatingPoints.Items[0]
	return circuit.Of(corner.NewSpace(s, &p, op, corner.Sets(op)[0]).Typical())
}

// moved is the circuit with one input at another value.
func moved(c *circuit.Circuit, q *stage.Quantity, v float64) *circuit.Circuit {
	return circuit.Of(c.Space.With(c.Draw, corner.Change{ID: q.ID, Value: v}))
}

// keeps is what a limit must keep, put together from the circuit: V_BS at what is required and, of a dead time, within the ratings, with
// the pulse still there.
func keeps(c *circuit.Circuit, name string) bool {
	if c.Period().HighVanishes {
		return false
	}
	high := c.High()
	within := high <= c.Value(&c.Stage.Driver.FloatingVoltageMax) && high <= c.Value(&c.Stage.HighSide.GateVoltageMax)
	return c.Low() >= c.Required() && (name != finding.LargestDeadTime || within)
}

// of gives the input that a limit moves, and where it is exceeded: above or below.
func of(c *circuit.Circuit, name string) (q *stage.Quantity, above bool) {
	op := c.Point
	switch name {
	case finding.LargestResistance:
		return &c.Stage.Bootstrap.Resistor.Resistance, true
	case finding.LargestDeadTime:
		return &op.DeadTime, true
	case finding.LowestSwitchingFrequency:
		return &op.SwitchingFrequency, false
	case finding.HighestSwitchingFreq:
		return &op.SwitchingFrequency, true
	}
	return &op.FixedDuty.Duty, true
}

func TestHoldAndStand(t *testing.T) {
	cases := []struct {
		name        string
		change      func(*stage.Stage)
		hold, stand float64
	}{
		// E = 12 V + 5 A·20 mΩ while the low side is on, 62 nC of 220 nF at the edge; the recharge window is 88 R·C.
		{"lockout above the drive", func(*stage.Stage) {}, 12.1 - 62./220 - 8.5, 20 - 12.1},
		{"drive above the lockout", func(s *stage.Stage) { s.HighSide.DriveVoltageMin = exact(10) }, 12.1 - 62./220 - 10, 20 - 12.1},
		{"drive without forward current", func(s *stage.Stage) {
			op := &s.OperatingPoints.Items[0]
			s.HighSide.DriveVoltageMin, op.LoadCurrent, op.RippleCurrent = exact(10), exact(-5), exact(0)
		}, 11.9 - 62./220 - 8.5, 20 - 11.9},
		{"rating of the driver", func(s *stage.Stage) { s.Driver.FloatingVoltageMax = exact(12) }, 12.1 - 62./220 - 8.5, -0.1},
		{"rating of the gate", func(s *stage.Stage) { s.HighSide.GateVoltageMax = exact(12) }, 12.1 - 62./220 - 8.5, -0.1},
	}
	for _, c := range cases {
		s := ideal()
		s.Bootstrap.Resistor.Resistance, s.Bootstrap.SwitchResistance = exact(0), exact(0.2)
		c.change(s)
		k := typical(s)
		if got := derive.Hold(k); math.Abs(got-c.hold) > 1e-6 {
			t.Errorf("%s: hold %.9g V, want %.9g V", c.name, got, c.hold)
		}
		if got := derive.Stand(k); math.Abs(got-c.stand) > 1e-6 {
			t.Errorf("%s: stand %.9g V, want %.9g V", c.name, got, c.stand)
		}
	}
}

// With a constant charge Q at the edge and recharge through R toward E for t_c, the steady state loses Q/C/(1 - exp(-t_c/(R·C))) against E.
// It holds while t_c >= R·C·ln(1/(1 - x)), x = Q/(C·(E - V)), from which every limit follows.
func TestLimitsInClosedForm(t *testing.T) {
	const (
		charge, capacitance, resistance = 62e-9, 220e-9, 4.7 + 5
		f, d, dead                      = 100e3, 0.6, 100e-9
		room                            = 12.1 - 8.5 // E - V [V]
	)
	lost := math.Log(1 / (1 - charge/capacitance/room)) // t_c/(R·C) at the limit
	window := resistance * capacitance * lost
	cases := []struct {
		name string
		want float64
	}{
		{finding.LargestDuty, 1 - (window+dead)*f},
		{finding.LongestOnTime, 1/f - window - 2*dead},
		{finding.ShortestLowSidePulse, window},
		{finding.LargestResistance, ((1-d)/f-dead)/(capacitance*lost) - 5},
		{finding.LargestDeadTime, (1-d)/f - window},
		{finding.HighestSwitchingFreq, (1 - d) / (window + dead)},
	}
	c := typical(ideal())
	for _, k := range cases {
		r := derive.Limit(c, k.name)
		if !r.Found || r.Whole || math.Abs(r.Value-k.want) > 1e-5*k.want {
			t.Errorf("%s: %.9g (%+v), want %.9g", k.name, r.Value, r, k.want)
		}
	}
	// Nothing is drawn while the high side is on, so that no frequency is too low: the end of the range is given.
	if r := derive.Limit(c, finding.LowestSwitchingFrequency); r.Found || !r.Whole || r.Value != 10 {
		t.Errorf("%s: %+v, want the whole range down to 10 Hz", finding.LowestSwitchingFrequency, r)
	}
}

// At every limit the supply just holds; a little beyond it does not. Stages that hold and stages that do not are both solved.
func TestLimitsTurn(t *testing.T) {
	integrated := func(s *stage.Stage) {
		s.Bootstrap.Element, s.Bootstrap.SwitchResistance = stage.IntegratedSwitch, exact(20)
	}
	cases := []struct {
		name   string
		change func(*stage.Stage)
	}{
		{"as drawn", func(*stage.Stage) {}},
		{"integrated switch", integrated},
		{"duty too large", func(s *stage.Stage) {
			integrated(s)
			duty(s).Duty = exact(0.985)
		}},
		{"resistance too large", func(s *stage.Stage) { s.Bootstrap.Resistor.Resistance = exact(500) }},
		{"frequency too high", func(s *stage.Stage) {
			integrated(s)
			s.OperatingPoints.Items[0].SwitchingFrequency = exact(1.5e6)
		}},
		{"frequency too low", func(s *stage.Stage) { s.OperatingPoints.Items[0].SwitchingFrequency = exact(50) }},
		{"gate rating near", func(s *stage.Stage) { s.HighSide.GateVoltageMax = exact(11.9) }},
		{"leaky", func(s *stage.Stage) { s.Bootstrap.Diode.ReverseLeakage = exact(1e-3) }},
		{"current into the node", func(s *stage.Stage) { s.OperatingPoints.Items[0].LoadCurrent = exact(-5) }},
	}
	solved := map[string]string{ // the way back to where the supply holds
		"duty too large": finding.LargestDuty, "resistance too large": finding.LargestResistance,
		"frequency too high": finding.HighestSwitchingFreq, "frequency too low": finding.LowestSwitchingFrequency,
	}
	found := map[string]int{}
	for _, k := range cases {
		s := half()
		k.change(s)
		c := typical(s)
		for _, name := range derive.Names(stage.ModeFixedDuty) {
			r := derive.Limit(c, name)
			q, above := of(c, name)
			if solved[k.name] == name && (keeps(c, name) || !r.Found) {
				t.Errorf("%s, %s: holds as drawn %v, found %+v", k.name, name, keeps(c, name), r)
			}
			switch {
			case r.Found:
				found[name]++
				step := 1e-5 * r.Input
				if !above {
					step = -step
				}
				if !keeps(moved(c, q, r.Input-step), name) {
					t.Errorf("%s, %s: does not hold at %.8g, within the limit %.8g", k.name, name, r.Input-step, r.Input)
				}
				if keeps(moved(c, q, r.Input+step), name) {
					t.Errorf("%s, %s: holds at %.8g, beyond the limit %.8g", k.name, name, r.Input+step, r.Input)
				}
				if !derive.Holds(c, name, r.Input) || derive.Holds(c, name, r.Input+step) {
					t.Errorf("%s, %s: Holds does not turn at %.8g", k.name, name, r.Input)
				}
			case r.Whole:
				if !keeps(c, name) || !keeps(moved(c, q, r.Input), name) {
					t.Errorf("%s, %s: the whole range to %g is said to hold and does not", k.name, name, r.Input)
				}
			case keeps(c, name):
				t.Errorf("%s, %s: holds as drawn, and no limit is found: %+v", k.name, name, r)
			case r.Value == r.Value:
				t.Errorf("%s, %s: a value without a limit: %+v", k.name, name, r)
			}
		}
	}
	for _, name := range derive.Names(stage.ModeFixedDuty) {
		if found[name] < 3 {
			t.Errorf("%s: found in %d of %d stages", name, found[name], len(cases))
		}
	}
}

// Times follow from the largest duty: on-time d·T less the dead time, low-side pulse (1 - d)·T less the dead time.
func TestTimesOfDuty(t *testing.T) {
	c := typical(ideal())
	d := derive.Limit(c, finding.LargestDuty)
	for _, k := range []struct {
		name string
		want float64
	}{
		{finding.LargestDuty, d.Input}, {finding.LongestOnTime, d.Input/100e3 - 100e-9}, {finding.ShortestLowSidePulse, (1-d.Input)/100e3 - 100e-9},
	} {
		r := derive.Limit(c, k.name)
		if math.Abs(r.Value-k.want) > 1e-9*k.want || r.Input != d.Input || !r.Found {
			t.Errorf("%s: %+v, want %g at duty %g", k.name, r, k.want, d.Input)
		}
		if !derive.OfDuty(c.Point, k.name) || derive.From(c, k.name, d) != r {
			t.Errorf("%s: %+v from the largest duty, want %+v", k.name, derive.From(c, k.name, d), r)
		}
	}
	// Where freewheeling alone recharges C_B no low-side pulse is needed; a time is not negative.
	if r := derive.Limit(typical(half()), finding.ShortestLowSidePulse); !r.Found || r.Value != 0 {
		t.Errorf("%s: %+v, want 0", finding.ShortestLowSidePulse, r)
	}
	for _, name := range derive.Names(stage.ModeFixedDuty)[3:] {
		if derive.OfDuty(c.Point, name) {
			t.Errorf("%s is said to follow from the duty", name)
		}
	}
}

// A pulse that does not reach the switch takes no charge, and V_BS stands; that is no way to hold.
func TestHighVanishes(t *testing.T) {
	s := half()
	s.HighSide.GateCharge = exact(900e-9) // one edge alone takes more than there is
	c := typical(s)
	short := moved(c, &c.Point.FixedDuty.Duty, 0.01)
	if !short.Period().HighVanishes || derive.Hold(short) < 0 {
		t.Fatalf("the case is none: pulse vanishes %v, hold %g V", short.Period().HighVanishes, derive.Hold(short))
	}
	if derive.Holds(c, finding.LargestDuty, 0.01) {
		t.Error("a vanished pulse counts as holding")
	}
	for _, name := range derive.Names(stage.ModeFixedDuty) {
		if r := derive.Limit(c, name); r.Found || r.Whole || r.Value == r.Value {
			t.Errorf("%s: %+v, want none", name, r)
		}
	}

	// Where the supply would hold at any frequency, the highest is that at which the pulse vanishes: d/f - t_dt = 70 ns.
	s = half()
	duty(s).Duty = exact(0.2)
	s.Bootstrap.Resistor.Resistance, s.Bootstrap.Capacitor.EffectiveCapacitance = exact(0), exact(10e-6)
	s.HighSide.GateCharge, s.Driver.LevelShiftCharge = exact(0.1e-9), exact(0)
	if r, want := derive.Limit(typical(s), finding.HighestSwitchingFreq), 0.2/170e-9; !r.Found || math.Abs(r.Value-want) > 1e-5*want {
		t.Errorf("%s: %+v, want %g Hz", finding.HighestSwitchingFreq, r, want)
	}
}

// Without a number at the draw there is no limit, and where the supply is below what is required there is none either.
func TestNoLimit(t *testing.T) {
	cases := []struct {
		name   string
		change func(*stage.Stage)
	}{
		{"lockout unknown", func(s *stage.Stage) { s.Driver.UVLOFalling = absent() }},
		{"duty unknown", func(s *stage.Stage) { duty(s).Duty = absent() }},
		{"frequency not a number", func(s *stage.Stage) { s.OperatingPoints.Items[0].SwitchingFrequency = exact(nan) }},
		{"supply below lockout", func(s *stage.Stage) { s.GateSupply.Voltage = exact(8) }},
		{"load beyond what recharge gives", func(s *stage.Stage) { s.Driver.FloatingQuiescentCurrent = exact(5) }},
	}
	for _, k := range cases {
		s := half()
		k.change(s)
		c := typical(s)
		for _, name := range derive.Names(stage.ModeFixedDuty) {
			if r := derive.Limit(c, name); r.Found || r.Whole || r.Value == r.Value || r.Input == r.Input {
				t.Errorf("%s, %s: %+v, want none", k.name, name, r)
			}
		}
	}
}

// The binding one of two draws: the smallest where the quantity is limited from above, the largest where from below, and none before all.
func TestTightest(t *testing.T) {
	at := func(v float64) derive.Result { return derive.Result{Value: v} }
	for _, name := range derive.Names(stage.ModeFixedDuty) {
		below := name == finding.ShortestLowSidePulse || name == finding.LowestSwitchingFrequency
		for _, k := range []struct {
			a, b float64
			want bool
		}{
			{1, 2, !below}, {2, 1, below}, {1, 1, false}, {nan, 1, true}, {1, nan, false}, {nan, nan, false},
			{1, math.Inf(1), !below}, {math.Inf(1), 1, below},
		} {
			if got := derive.Tightest(name, at(k.a), at(k.b)); got != k.want {
				t.Errorf("%s: %g before %g is %v, want %v", name, k.a, k.b, got, k.want)
			}
		}
	}
}
