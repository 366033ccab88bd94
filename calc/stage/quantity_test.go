package stage

import (
	"math"
	"testing"
)

// same compares triples; NaN equals NaN, numbers agree to a part in 10^12.
func same(a, b Triple) bool {
	x, y := a.ends(), b.ends()
	for i := range x {
		if (x[i] != x[i]) != (y[i] != y[i]) || math.Abs(x[i]-y[i]) > 1e-12*math.Abs(y[i]) {
			return false
		}
	}
	return true
}

var nan = math.NaN()

func TestRange(t *testing.T) {
	at := func(entries ...float64) []AtTemperature { // temperature, min, typ, max
		var out []AtTemperature
		for i := 0; i < len(entries); i += 4 {
			out = append(out, AtTemperature{entries[i], Triple{entries[i+1], entries[i+2], entries[i+3]}})
		}
		return out
	}
	three := at(-40, 1, 2, 3, 25, 2, 4, 8, 125, 12, 24, 48)
	one := Triple{1, 2, 3}
	cases := []struct {
		name        string
		law         Law
		at          []AtTemperature
		triple      Triple
		temperature float64
		want        Triple
	}{
		{"constant, cold", Constant, nil, one, -40, one},
		{"constant, hot", Constant, nil, one, 150, one},
		{"at an entry", Constant, three, one, 25, Triple{2, 4, 8}},
		{"at the first entry", Constant, three, one, -40, Triple{1, 2, 3}},
		{"at the last entry", Constant, three, one, 125, Triple{12, 24, 48}},
		{"between entries", Constant, three, one, 75, Triple{7, 14, 28}},
		{"between lower entries", Constant, three, one, -27, Triple{1.2, 2.4, 4}},
		{"below all entries", Constant, three, one, -55, Triple{1, 2, 3}},
		{"above all entries", Constant, three, one, 175, Triple{12, 24, 48}},
		{"one entry, elsewhere", Constant, at(125, 5, 6, 7), one, -40, Triple{5, 6, 7}},
		{"entries before a law", Leakage, three, one, 75, Triple{7, 14, 28}},
		{"entries before a law, beyond them", Leakage, three, one, 175, Triple{12, 24, 48}},
		// Silicon V_F about -2 mV/K: from memory [common-practice].
		{"diode at reference", DiodeDrop, nil, Triple{0.6, 0.7, 0.8}, 25, Triple{0.6, 0.7, 0.8}},
		{"diode hot", DiodeDrop, nil, Triple{0.6, 0.7, 0.8}, 125, Triple{0.4, 0.5, 0.6}},
		{"diode cold", DiodeDrop, nil, Triple{0.6, 0.7, 0.8}, -40, Triple{0.73, 0.83, 0.93}},
		// Leakage doubles about every 10 K, from 25 to 125 °C ×1024: from memory [common-practice].
		{"leakage at reference", Leakage, nil, Triple{0, 1e-6, 2e-6}, 25, Triple{0, 1e-6, 2e-6}},
		{"leakage ten kelvin up", Leakage, nil, Triple{0, 1e-6, 2e-6}, 35, Triple{0, 2e-6, 4e-6}},
		{"leakage at 125 °C", Leakage, nil, Triple{1e-9, 2e-9, 3e-9}, 125, Triple{1024e-9, 2048e-9, 3072e-9}},
		{"leakage cold", Leakage, nil, Triple{1e-6, 2e-6, 4e-6}, 5, Triple{0.25e-6, 0.5e-6, 1e-6}},
		{"on-resistance at reference", OnResistance, nil, Triple{8, 10, 12}, 25, Triple{8, 10, 12}},
		{"on-resistance at 150 °C", OnResistance, nil, Triple{8, 10, 12}, 150, Triple{8, 15, 24}},
		{"on-resistance half the way", OnResistance, nil, Triple{8, 10, 12}, 87.5, Triple{8, 12.5, 18}},
		{"on-resistance cold", OnResistance, nil, Triple{8, 10, 12}, -37.5, Triple{6, 10, 12}},
		{"on-resistance coldest", OnResistance, nil, Triple{8, 10, 12}, -200, Triple{4, 10, 12}},
		{"unknown, with a law", Leakage, nil, Missing(), 85, Missing()},
		{"no temperature, with a law", DiodeDrop, nil, one, nan, Missing()},
		{"no temperature, entries", Constant, three, one, nan, Missing()},
	}
	for _, c := range cases {
		q := Absent("q", &Declaration{Law: c.law})
		q.Triple, q.At = c.triple, c.at
		if got := q.Range(c.temperature); !same(got, c.want) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
	bare := Quantity{Triple: one}
	if got := bare.Range(125); !same(got, one) {
		t.Errorf("without a declaration: %v, want %v", got, one)
	}
}

func TestGiven(t *testing.T) {
	entry := Absent("q", &Declaration{})
	entry.At = []AtTemperature{{125, Triple{nan, 1, nan}}}
	cases := []struct {
		name         string
		q            Quantity
		given, known bool
	}{
		{"absent", Absent("q", &Declaration{}), false, false},
		{"exact", Exact("q", 5), true, true},
		{"exact 0", Exact("q", 0), true, true},
		{"range", Between("q", 1, 2, 3), true, true},
		{"max alone", Between("q", nan, nan, 3), true, false},
		{"min alone", Between("q", 1, nan, nan), true, false},
		{"typ alone", Between("q", nan, 2, nan), true, false},
		{"at one temperature", entry, true, false},
	}
	for _, c := range cases {
		if got := c.q.Given(); got != c.given {
			t.Errorf("%s: given %v", c.name, got)
		}
		if got := c.q.Known(); got != c.known {
			t.Errorf("%s: known %v", c.name, got)
		}
		if c.q.Naive == c.q.Naive {
			t.Errorf("%s: naive value %g, want none", c.name, c.q.Naive)
		}
	}
}

func TestSymbol(t *testing.T) {
	cases := []struct {
		q    Quantity
		want string
	}{
		{Absent("stage.driver.uvloFalling", &Declaration{Symbol: "V_UV-"}), "V_UV-"},
		{Absent("stage.driver.uvloFalling", &Declaration{}), "uvloFalling"},
		{Quantity{Field: "stage.highSide.gateCharge"}, "gateCharge"},
		{Quantity{Field: "gateCharge"}, "gateCharge"},
		{Quantity{}, ""},
	}
	for _, c := range cases {
		if got := c.q.Symbol(); got != c.want {
			t.Errorf("%q: symbol %q, want %q", c.q.Field, got, c.want)
		}
	}
}

func TestRelative(t *testing.T) {
	for path, want := range map[string]string{
		"stage.driver.uvloFalling": "driver.uvloFalling", "stages[3].driver": "driver", "driver.uvloFalling": "driver.uvloFalling",
		"stage": "stage", "": "", "stageless.driver": "stageless.driver", "parts[0].diode": "parts[0].diode", "stage.operatingPoints[0].name": "operatingPoints[0].name",
	} {
		if got := Relative(path); got != want {
			t.Errorf("%q: %q, want %q", path, got, want)
		}
	}
}

func TestPresence(t *testing.T) {
	cases := []struct {
		name string
		h    Header
		want Presence
	}{
		{"nothing written", Header{}, PresenceUnknown},
		{"written", Header{Present: true}, Fitted},
		{"not fitted", Header{Present: true, Fit: "NOT_FITTED"}, NotFitted},
		{"fitted", Header{Present: true, Fit: "FITTED"}, Fitted},
	}
	for _, c := range cases {
		if got := c.h.Presence(); got != c.want {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}

func TestMode(t *testing.T) {
	cases := []struct {
		p    OperatingPoint
		want string
	}{
		{OperatingPoint{}, ""}, {OperatingPoint{FixedDuty: &FixedDuty{}}, "fixedDuty"}, {OperatingPoint{Sinusoidal: &Sinusoidal{}}, "sinusoidal"},
		{OperatingPoint{SixStep: &SixStep{}}, "sixStep"}, {OperatingPoint{Burst: &Burst{}}, "burst"}, {OperatingPoint{HeldOn: &HeldOn{}}, "heldOn"},
	}
	for _, c := range cases {
		if got := c.p.Mode(); got != c.want {
			t.Errorf("mode %q, want %q", got, c.want)
		}
	}
}

func TestStageIdentity(t *testing.T) {
	s := Stage{ID: "new"}
	if got := s.Identity(); got != "new" {
		t.Errorf("identity %q, want new", got)
	}
	s.FormerID = "old"
	if got := s.Identity(); got != "old" {
		t.Errorf("identity %q after a rename, want old", got)
	}
}

// Every part that a rule may judge is found by its path, and is the one that the stage holds.
func TestPart(t *testing.T) {
	s := &Stage{}
	for path, h := range map[string]*Header{
		"driver": &s.Driver.Header, "highSide": &s.HighSide.Header, "lowSide": &s.LowSide.Header,
		"gateSupply.reservoir": &s.GateSupply.Reservoir.Header, "bootstrap.capacitor": &s.Bootstrap.Capacitor.Header,
		"bootstrap.diode": &s.Bootstrap.Diode.Header, "bootstrap.resistor": &s.Bootstrap.Resistor.Header,
		"bootstrap.clamp": &s.Bootstrap.Clamp.Header, "bootstrap": nil, "": nil,
	} {
		if got := s.Part(path); got != h {
			t.Errorf("%q: another part", path)
		}
	}
}

func TestNames(t *testing.T) {
	for i, want := range []string{"UNSPECIFIED", "NOTE", "MINOR", "MAJOR", "CRITICAL"} {
		if got := Severity(i).String(); got != want {
			t.Errorf("severity %d: %s, want %s", i, got, want)
		}
	}
	for i, want := range []string{"UNSPECIFIED", "CONSERVATIVE", "OPTIMISTIC"} {
		if got := Direction(i).String(); got != want {
			t.Errorf("direction %d: %s, want %s", i, got, want)
		}
	}
}

// The numbers of design 6.3.
func TestDefaultPolicy(t *testing.T) {
	p := DefaultPolicy()
	cases := []struct {
		name      string
		got, want float64
	}{
		{"lockout margin", p.LockoutMargin, 0.3}, {"lockout margin ratio", p.LockoutMarginRatio, 0.05}, {"guard", p.GuardRatio, 0.10},
		{"ripple", p.RippleRatio, 0.05}, {"ceramic", p.CeramicVoltageRatio, 0.60}, {"film", p.FilmVoltageRatio, 0.80},
		{"aluminium", p.AluminiumVoltageRatio, 0.80}, {"tantalum", p.TantalumVoltageRatio, 0.50}, {"diode reverse", p.DiodeReverseRatio, 0.70},
		{"resistor power", p.ResistorPowerRatio, 0.60}, {"gate voltage", p.GateVoltageRatio, 0.90}, {"junction", p.JunctionMargin, 15},
		{"reservoir", p.ReservoirRatio, 10}, {"class 2 remaining", p.ClassTwoRemaining, 0.30}, {"charge", p.ChargeSpread, 1.3},
		{"recovery charge", p.RecoveryChargeSpread, 2}, {"resistance", p.ResistanceSpread, 1.5}, {"current", p.CurrentSpread, 2},
		{"semiconductor capacitance", p.SemiconductorCapacitanceSpread, 1.3}, {"transconductance", p.TransconductanceSpread, 1.5},
		{"inductance", p.InductanceSpread, 0.30}, {"drop", p.DropSpread, 0.20}, {"threshold", p.ThresholdSpread, 0.25},
		{"delay", p.DelaySpread, 0.50}, {"coverage", p.MinimumCoverage, 0},
	}
	for _, c := range cases {
		if c.got != c.want {
			t.Errorf("%s: %g, want %g", c.name, c.got, c.want)
		}
	}
	if p.FailAt != Major || p.CountMarginal || p.CriticalWaivable || len(p.Baseline) > 0 || len(p.Severities) > 0 {
		t.Errorf("verdict: %+v", p)
	}
}
