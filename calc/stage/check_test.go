package stage

import (
	"math"
	"strings"
	"testing"

	"floatrail/calc/quantity"
)

// value is a quantity of a dimension; NaN ends are not given.
func value(field string, d quantity.Dimension, low, typical, high float64) Quantity {
	q := Absent(field, &Declaration{Dimension: d, Low: math.Inf(-1), High: math.Inf(1)})
	q.Triple = Triple{low, typical, high}
	return q
}

func typ(field string, d quantity.Dimension, v float64) Quantity {
	return value(field, d, math.NaN(), v, math.NaN())
}

func exact(field string, d quantity.Dimension, v float64) Quantity { return value(field, d, v, v, v) }

// empty is a stage of which nothing is given.
func empty() *Stage {
	s := &Stage{}
	none := func(qs ...*Quantity) {
		for _, q := range qs {
			*q = Absent("", &Declaration{})
		}
	}
	g, d, b, l, u := &s.GateSupply, &s.Driver, &s.Bootstrap, &s.Layout, &s.Startup
	none(&g.UVLOFalling, &g.UVLORising, &g.VoltageMax, &d.UVLOFalling, &d.UVLORising, &d.FloatingVoltageMax, &d.FloatingVoltageRecommendedMax,
		&d.RailMin, &d.RailOperationalMin, &b.Diode.AverageCurrentMax, &b.Diode.RepetitivePeakCurrentMax, &b.Diode.SurgeCurrentMax,
		&l.LowSideInductance, &l.BusLoopInductance, &l.LoopInductance, &l.HighSideCommonSource, &l.LowSideCommonSource, &u.PulseWidth, &u.PulsePeriod)
	for _, c := range []*Capacitor{&g.Reservoir, &b.Capacitor} {
		none(&c.Capacitance, &c.EffectiveCapacitance)
	}
	for _, w := range []*Switch{&s.HighSide, &s.LowSide} {
		none(&w.GateCharge, &w.GateSourceCharge, &w.GateDrainCharge, &w.GateChargeVoltage, &w.PlateauVoltage, &w.ThresholdVoltage, &w.InputCapacitance,
			&w.InputCapacitanceVoltage, &w.DriveVoltageMin, &w.GateVoltageMax, &w.GateVoltageRecommendedMax)
	}
	return s
}

func point(mode func(*OperatingPoint)) OperatingPoint {
	p := OperatingPoint{Header: Header{Field: "stage.operatingPoints[0]"}, Name: "a",
		SwitchingFrequency: Absent("f", &Declaration{}), DeadTime: Absent("dt", &Declaration{})}
	mode(&p)
	return p
}

func held(p *OperatingPoint) { p.HeldOn = &HeldOn{} }

// V and the like keep the table readable.
const (
	V   = quantity.Voltage
	C   = quantity.Charge
	F   = quantity.Capacitance
	A   = quantity.Current
	H   = quantity.Inductance
	sec = quantity.Time
	Hz  = quantity.Frequency
	one = quantity.Ratio
)

func forward(values ...float64) []ForwardPoint {
	var out []ForwardPoint
	for i := 0; i < len(values); i += 2 {
		out = append(out, ForwardPoint{exact("i", A, values[i]), typ("v", V, values[i+1])})
	}
	return out
}

func rows(values ...float64) []UndershootRow {
	var out []UndershootRow
	for i := 0; i < len(values); i += 2 {
		out = append(out, UndershootRow{exact("v", V, values[i]), exact("t", sec, values[i+1])})
	}
	return out
}

func bias(values ...float64) []BiasPoint {
	var out []BiasPoint
	for i := 0; i < len(values); i += 2 {
		out = append(out, BiasPoint{exact("v", V, values[i]), exact("k", one, values[i+1])})
	}
	return out
}

func TestCheck(t *testing.T) {
	nan := math.NaN()
	cases := []struct {
		name  string
		give  func(*Stage)
		field string // of the one fault; empty: none
		words string
	}{
		{"nothing given", func(*Stage) {}, "", ""},
		{"lockout crossed at typ", func(s *Stage) {
			s.Driver.UVLOFalling, s.Driver.UVLORising = typ("uvloFalling", V, 9), typ("uvloRising", V, 8.9)
		}, "uvloFalling", "uvloFalling typ 9 V above uvloRising typ 8.9 V, expected uvloFalling at most uvloRising"},
		{"lockout equal", func(s *Stage) { s.Driver.UVLOFalling, s.Driver.UVLORising = typ("f", V, 9), typ("r", V, 9) }, "", ""},
		{"lockout ranges overlap", func(s *Stage) {
			s.Driver.UVLOFalling, s.Driver.UVLORising = value("f", V, 7, 8, 9), value("r", V, 7.5, 8.5, 9.5)
		}, "", ""},
		{"lockout crossed at max only", func(s *Stage) {
			s.Driver.UVLOFalling, s.Driver.UVLORising = value("f", V, 7, 8, 9.6), value("r", V, 7.5, 8.5, 9.5)
		}, "f", "max 9.6 V above r max 9.5 V"},
		{"lockout min above max", func(s *Stage) {
			s.Driver.UVLOFalling, s.Driver.UVLORising = value("f", V, 10, nan, nan), value("r", V, nan, nan, 9.5)
		}, "f", "min 10 V above r max 9.5 V"},
		{"falling max beside rising min", func(s *Stage) {
			s.Driver.UVLOFalling, s.Driver.UVLORising = value("f", V, nan, nan, 10), value("r", V, 9.5, nan, nan)
		}, "", ""},
		{"supply lockout crossed", func(s *Stage) {
			s.GateSupply.UVLOFalling, s.GateSupply.UVLORising = typ("f", V, 9), typ("r", V, 8.9)
		}, "f", ""},
		{"lockout above the rating", func(s *Stage) {
			s.Driver.UVLORising, s.Driver.FloatingVoltageMax = typ("r", V, 21), exact("m", V, 20)
		}, "r", "above m"},
		{"recommended above absolute", func(s *Stage) {
			s.Driver.FloatingVoltageRecommendedMax, s.Driver.FloatingVoltageMax = exact("r", V, 21), exact("m", V, 20)
		}, "r", ""},
		{"charges above the total", func(s *Stage) {
			w := &s.HighSide
			w.GateSourceCharge, w.GateDrainCharge, w.GateCharge = typ("gs", C, 40e-9), typ("gd", C, 30e-9), typ("g", C, 63e-9)
		}, "g", "gs + gd typ 70 nC above g typ 63 nC"},
		{"charges equal to the total", func(s *Stage) {
			w := &s.HighSide
			w.GateSourceCharge, w.GateDrainCharge, w.GateCharge = typ("gs", C, 0.1e-9), typ("gd", C, 0.2e-9), typ("g", C, 0.3e-9)
		}, "", ""},
		{"maxima of charges need not meet", func(s *Stage) {
			w := &s.LowSide
			w.GateSourceCharge, w.GateDrainCharge, w.GateCharge = value("gs", C, nan, 14e-9, 40e-9), value("gd", C, nan, 22e-9, 60e-9), value("g", C, nan, 63e-9, 90e-9)
		}, "", ""},
		{"one charge above the total", func(s *Stage) {
			s.LowSide.GateDrainCharge, s.LowSide.GateCharge = value("gd", C, nan, nan, 70e-9), value("g", C, nan, nan, 63e-9)
		}, "gd", "max 70 nC"},
		{"plateau below threshold", func(s *Stage) {
			s.HighSide.ThresholdVoltage, s.HighSide.PlateauVoltage = typ("th", V, 4), typ("pl", V, 3.5)
		}, "th", "th typ 4 V above pl typ 3.5 V"},
		{"gate charge below the plateau", func(s *Stage) {
			s.HighSide.PlateauVoltage, s.HighSide.GateChargeVoltage = typ("pl", V, 12), exact("spec", V, 10)
		}, "spec", "plateau"},
		{"drive above the gate rating", func(s *Stage) {
			s.HighSide.DriveVoltageMin, s.HighSide.GateVoltageMax = exact("d", V, 15), exact("m", V, 12)
		}, "d", ""},
		{"recommended gate above absolute", func(s *Stage) {
			s.HighSide.GateVoltageRecommendedMax, s.HighSide.GateVoltageMax = exact("r", V, 15), exact("m", V, 12)
		}, "r", ""},
		{"two points a diode has", func(s *Stage) { s.Bootstrap.Diode.ForwardPoints.Items = forward(0.01, 0.3999, 1, 0.4001) }, "", ""},
		{"currents descend", func(s *Stage) { s.Bootstrap.Diode.ForwardPoints.Items = forward(1, 0.4, 0.01, 0.9) }, "i", "10 mA after 1 A, expected ascending"},
		{"a current twice", func(s *Stage) { s.Bootstrap.Diode.ForwardPoints.Items = forward(1, 0.4, 1, 0.9) }, "i", "ascending values, each once"},
		{"voltage falls", func(s *Stage) { s.Bootstrap.Diode.ForwardPoints.Items = forward(0.01, 0.9, 1, 0.4) }, "v", "rises with current"},
		{"voltage stands still", func(s *Stage) { s.HighSide.Reverse.ForwardPoints.Items = forward(0.01, 0.9, 1, 0.9) }, "v", "rises with current"},
		{"series resistance takes the whole slope", func(s *Stage) {
			s.Bootstrap.Diode.ForwardPoints.Items, s.Bootstrap.Diode.SeriesResistance = forward(0.5, 0.9, 1, 1), typ("rs", quantity.Resistance, 0.2)
		}, "rs", "200 mΩ where the points allow 200 mΩ"},
		{"series resistance leaves a junction", func(s *Stage) {
			s.Bootstrap.Diode.ForwardPoints.Items, s.Bootstrap.Diode.SeriesResistance = forward(0.5, 0.9, 1, 1), typ("rs", quantity.Resistance, 0.19)
		}, "", ""},
		{"series resistance of the best part", func(s *Stage) {
			s.Bootstrap.Diode.ForwardPoints.Items = []ForwardPoint{{exact("i", A, 0.5), value("v", V, 0.8, nan, nan)}, {exact("i", A, 1), value("v", V, nan, nan, 1)}}
			s.Bootstrap.Diode.SeriesResistance = value("rs", quantity.Resistance, 0.5, nan, 0.6)
		}, "rs", "500 mΩ where the points allow 400 mΩ"},
		{"node clamp", func(s *Stage) { s.Layout.NodeClamp.ForwardPoints.Items = forward(0.01, 0.9, 1, 0.8) }, "v", "rises with current"},
		{"a point without its voltage", func(s *Stage) {
			s.Bootstrap.Diode.ForwardPoints.Items = []ForwardPoint{{exact("i", A, 1), Absent("v", &Declaration{})}}
		}, "v", "read nothing, expected the v of the point"},
		{"channel voltage falls", func(s *Stage) {
			s.LowSide.ChannelPoints.Items = []ChannelPoint{{exact("i", A, 1), typ("v", V, 2)}, {exact("i", A, 2), typ("v", V, 1)}}
		}, "v", "rises"},
		{"capacitance points descend", func(s *Stage) {
			s.LowSide.OutputCapacitance.Items = []CapacitancePoint{{exact("u", V, 25), typ("c", F, 1e-9)}, {exact("u", V, 1), typ("c", F, 2e-9)}}
		}, "u", "1 V after 25 V"},
		{"C_rss above C_oss", func(s *Stage) {
			s.LowSide.OutputCapacitance.Items = []CapacitancePoint{{exact("u", V, 25), typ("coss", F, 1e-9)}}
			s.LowSide.ReverseTransferCapacitance.Items = []CapacitancePoint{{exact("u", V, 25), typ("crss", F, 2e-9)}}
		}, "crss", "crss typ 2 nF above coss typ 1 nF"},
		{"bias curve rises", func(s *Stage) { s.Bootstrap.Capacitor.BiasCurve.Items = bias(0, 1, 5, 0.5, 10, 0.7) }, "k", "0.7 after 0.5"},
		{"bias curve of a real part", func(s *Stage) { s.Bootstrap.Capacitor.BiasCurve.Items = bias(0, 1, 1, 1.02, 10, 0.7) }, "", ""},
		{"bias curve unsorted", func(s *Stage) { s.GateSupply.Reservoir.BiasCurve.Items = bias(5, 1, 0, 0.9) }, "v", "0 V after 5 V"},
		{"dielectric", func(s *Stage) { s.Bootstrap.Capacitor.Dielectric = "X7Q9" }, ".dielectric", `"X7Q9"`},
		{"effective above nominal", func(s *Stage) {
			s.Bootstrap.Capacitor.EffectiveCapacitance, s.Bootstrap.Capacitor.Capacitance = typ("e", F, 2e-6), value("c", F, 0.9e-6, 1e-6, 1.1e-6)
		}, "e", "above capacitance max 1.1 µF"},
		{"diode currents", func(s *Stage) {
			s.Bootstrap.Diode.AverageCurrentMax, s.Bootstrap.Diode.RepetitivePeakCurrentMax = exact("a", A, 2), exact("p", A, 1)
		}, "a", ""},
		{"undershoot table", func(s *Stage) {
			s.Driver.NodeUndershoot.Items = rows(-5, nan, -12, 100e-9, -20, 20e-9)
			s.Driver.NodeUndershoot.Items[0].Duration = Absent("t", &Declaration{})
		}, "", ""},
		{"undershoot table upside down", func(s *Stage) { s.Driver.NodeUndershoot.Items = rows(-20, 20e-9, -12, 100e-9) }, "v", "-12 V after -20 V"},
		{"deeper for longer", func(s *Stage) { s.Driver.NodeUndershoot.Items = rows(-12, 20e-9, -20, 100e-9) }, "t", "shorter duration for a deeper level"},
		{"static below a pulse", func(s *Stage) { s.Driver.NodeUndershoot.Items = rows(-12, 20e-9, -20, nan) }, "t", "static"},
		{"L2 above the loop", func(s *Stage) {
			s.Layout.LowSideInductance, s.Layout.LoopInductance = typ("l2", H, 30e-9), typ("loop", H, 25e-9)
		}, "l2", ""},
		{"L1 + L2 above the loop", func(s *Stage) {
			s.Layout.LowSideInductance, s.Layout.BusLoopInductance, s.Layout.LoopInductance = typ("l2", H, 20e-9), typ("l1", H, 20e-9), typ("loop", H, 25e-9)
		}, "loop", "40 nH"},
		{"common source above L1", func(s *Stage) {
			s.Layout.HighSideCommonSource, s.Layout.BusLoopInductance = typ("cs", H, 30e-9), typ("l1", H, 25e-9)
		}, "cs", ""},
		{"diode as high side", func(s *Stage) { s.HighSide.Kind, s.HighSide.Field = DiodeOnly, "stage.highSide" }, "stage.highSide.kind", "only the low side"},
		{"diode as low side", func(s *Stage) { s.LowSide.Kind = DiodeOnly }, "", ""},
		{"integrated switch with diode points", func(s *Stage) {
			s.Bootstrap.Element, s.Bootstrap.Diode.ForwardPoints.Items = IntegratedSwitch, forward(1, 1)
		}, "", ""},
		{"integrated switch without diode", func(s *Stage) { s.Bootstrap.Element, s.Bootstrap.Diode.Fit = IntegratedSwitch, "NOT_FITTED" }, "", ""},
		{"no diode where one is the element", func(s *Stage) { s.Bootstrap.Element, s.Bootstrap.Diode.Fit = DiscreteDiode, "NOT_FITTED" }, ".fit", DiscreteDiode},
		{"no bootstrap capacitor", func(s *Stage) { s.Bootstrap.Capacitor.Fit = "NOT_FITTED" }, ".fit", "no floating supply"},
		{"no gate resistor", func(s *Stage) { s.LowSide.GateOff.Fit = "NOT_FITTED" }, ".fit", "0R"},
		{"no pull-down, clamps, reservoir", func(s *Stage) {
			s.LowSide.GatePullDown.Fit, s.Bootstrap.Clamp.Fit, s.Layout.NodeClamp.Fit, s.GateSupply.Reservoir.Fit = "NOT_FITTED", "NOT_FITTED", "NOT_FITTED", "NOT_FITTED"
		}, "", ""},
		{"pulse longer than its period", func(s *Stage) {
			s.Startup.PulseWidth, s.Startup.PulsePeriod = typ("w", sec, 2e-4), typ("p", sec, 1e-4)
		}, "w", ""},
		{"pulse without period", func(s *Stage) {
			s.Startup.PulseWidth, s.Startup.PulsePeriod = typ("w", sec, 2e-4), Absent("p", &Declaration{})
		}, "p", "both of a pulsed first charge"},
		{"operating point without a name", func(s *Stage) {
			s.OperatingPoints.Items = []OperatingPoint{point(held)}
			s.OperatingPoints.Items[0].Name = ""
		}, "stage.operatingPoints[0].name", "unique in the stage"},
		{"operating points of one name", func(s *Stage) {
			s.OperatingPoints.Items = []OperatingPoint{point(held), point(held)}
			s.OperatingPoints.Items[1].Field = "stage.operatingPoints[1]"
		}, "stage.operatingPoints[1].name", `"a", expected a name of its own; operatingPoints[0] has it already`},
		{"operating point without a mode", func(s *Stage) {
			s.OperatingPoints.Items = []OperatingPoint{point(func(*OperatingPoint) {})}
		}, "stage.operatingPoints[0]", "no mode"},
		{"dead times longer than the period", func(s *Stage) {
			p := point(held)
			p.SwitchingFrequency, p.DeadTime = typ("f", Hz, 1e6), typ("dt", sec, 600e-9)
			s.OperatingPoints.Items = []OperatingPoint{p}
		}, "dt", "twice 600 ns in a period of 1 µs"},
		{"dead times that just fit", func(s *Stage) {
			p := point(held)
			p.SwitchingFrequency, p.DeadTime = value("f", Hz, 0.8e6, 1e6, 2e6), value("dt", sec, 500e-9, 600e-9, 700e-9)
			s.OperatingPoints.Items = []OperatingPoint{p}
		}, "", ""},
		{"low side on for longer than the rest", func(s *Stage) {
			p := point(func(p *OperatingPoint) {
				p.FixedDuty = &FixedDuty{Duty: typ("d", one, 0.9), LowSideOnTime: typ("on", sec, 2e-6)}
			})
			p.SwitchingFrequency = typ("f", Hz, 100e3)
			s.OperatingPoints.Items = []OperatingPoint{p}
		}, "on", "1 µs of the period remain"},
		{"fundamental above the switching frequency", func(s *Stage) {
			p := point(func(p *OperatingPoint) { p.Sinusoidal = &Sinusoidal{FundamentalFrequency: typ("f1", Hz, 50e3)} })
			p.SwitchingFrequency = typ("f", Hz, 20e3)
			s.OperatingPoints.Items = []OperatingPoint{p}
		}, "f1", "50 kHz with a switchingFrequency of 20 kHz"},
	}
	for _, c := range cases {
		t.Run(c.name, func(t *testing.T) {
			s := empty()
			c.give(s)
			faults := Check(s)
			if c.field == "" {
				if len(faults) > 0 {
					t.Errorf("unexpected: %v", faults)
				}
				return
			}
			if len(faults) != 1 || faults[0].Field != c.field || !strings.Contains(faults[0].Description, c.words) {
				t.Errorf("got %v, want one at %s with %q", faults, c.field, c.words)
			}
		})
	}
}

func TestCheckPart(t *testing.T) {
	w := &empty().HighSide
	w.GateDrainCharge, w.GateCharge = typ("gd", C, 70e-9), typ("g", C, 63e-9)
	d := &empty().Driver
	d.UVLOFalling, d.UVLORising = typ("f", V, 9), typ("r", V, 8)
	e := &empty().Bootstrap.Diode
	e.ForwardPoints.Items = forward(1, 1, 2, 0.5)
	c := &empty().Bootstrap.Capacitor
	c.Dielectric = "QQQ"
	for want, part := range map[string]any{"gd": w, "f": d, "v": e, ".dielectric": c} {
		if faults := CheckPart(part); len(faults) != 1 || faults[0].Field != want {
			t.Errorf("%T: %v, want one at %s", part, faults, want)
		}
	}
	if faults := CheckPart(&Resistor{}); faults != nil {
		t.Errorf("resistor: %v", faults)
	}
}
