package stage

import (
	"math"
	"slices"
	"testing"

	"floatrail/calc/quantity"
)

// Ends of a spread that are not written come from the class of the value, or stay unknown.
func TestFill(t *testing.T) {
	cases := []struct {
		name     string
		spread   Spread
		oneSided bool
		given    Triple
		want     Triple
		assumed  string // empty: nothing
	}{
		// The factors and shares of design 6.3.
		{"charge", SpreadCharge, false, Triple{nan, 10, nan}, Triple{10 / 1.3, 10, 13}, "min 7.692 V, max 13 V"},
		{"recovery charge", SpreadRecoveryCharge, false, Triple{nan, 10, nan}, Triple{5, 10, 20}, "min 5 V, max 20 V"},
		{"resistance", SpreadResistance, false, Triple{nan, 10, nan}, Triple{10 / 1.5, 10, 15}, "min 6.667 V, max 15 V"},
		{"current", SpreadCurrent, false, Triple{nan, 10, nan}, Triple{5, 10, 20}, "min 5 V, max 20 V"},
		{"semiconductor capacitance", SpreadSemiconductorCapacitance, false, Triple{nan, 10, nan}, Triple{10 / 1.3, 10, 13}, "min 7.692 V, max 13 V"},
		{"transconductance", SpreadTransconductance, false, Triple{nan, 10, nan}, Triple{10 / 1.5, 10, 15}, "min 6.667 V, max 15 V"},
		{"inductance", SpreadInductance, false, Triple{nan, 10, nan}, Triple{7, 10, 13}, "min 7 V, max 13 V"},
		{"drop", SpreadDrop, false, Triple{nan, 10, nan}, Triple{8, 10, 12}, "min 8 V, max 12 V"},
		{"threshold", SpreadThreshold, false, Triple{nan, 10, nan}, Triple{7.5, 10, 12.5}, "min 7.5 V, max 12.5 V"},
		{"delay", SpreadDelay, false, Triple{nan, 10, nan}, Triple{5, 10, 15}, "min 5 V, max 15 V"},
		// Not in the design; common practice.
		{"supply", SpreadSupply, false, Triple{nan, 10, nan}, Triple{9, 10, 11}, "min 9 V, max 11 V"},
		{"lockout", SpreadLockout, false, Triple{nan, 10, nan}, Triple{8.5, 10, 11.5}, "min 8.5 V, max 11.5 V"},
		{"resistor", SpreadResistor, false, Triple{nan, 10, nan}, Triple{9, 10, 11}, "min 9 V, max 11 V"},
		{"capacitor", SpreadCapacitor, false, Triple{nan, 10, nan}, Triple{8, 10, 12}, "min 8 V, max 12 V"},

		{"no class", NoSpread, false, Triple{nan, 10, nan}, Triple{10, 10, 10}, ""},
		{"negative, by share", SpreadSupply, false, Triple{nan, -10, nan}, Triple{-11, -10, -9}, "min -11 V, max -9 V"},
		{"negative, by factor", SpreadResistance, false, Triple{nan, -10, nan}, Triple{-15, -10, -10 / 1.5}, "min -15 V, max -6.667 V"},
		{"zero", SpreadCurrent, false, Triple{nan, 0, nan}, Triple{0, 0, 0}, ""},
		{"typ and max", SpreadCharge, false, Triple{nan, 10, 11}, Triple{10 / 1.3, 10, 11}, "min 7.692 V"},
		{"typ and min", SpreadCharge, false, Triple{9, 10, nan}, Triple{9, 10, 13}, "max 13 V"},
		{"all three", SpreadCharge, false, Triple{9, 10, 14}, Triple{9, 10, 14}, ""},
		{"both ends", SpreadCharge, false, Triple{8, nan, 14}, Triple{8, 11, 14}, ""},
		{"both ends, no class", NoSpread, false, Triple{-14, nan, 8}, Triple{-14, -3, 8}, ""},
		{"max alone", SpreadCurrent, false, Triple{nan, nan, 14}, Triple{14, 14, 14}, ""},
		{"min alone", SpreadCurrent, false, Triple{8, nan, nan}, Triple{8, 8, 8}, ""},
		{"leakage, max alone", SpreadCurrent, true, Triple{nan, nan, 14}, Triple{0, 7, 14}, ""},
		{"leakage, min alone", SpreadCurrent, true, Triple{8, nan, nan}, Triple{8, 8, 8}, ""},
		{"leakage, typ alone", SpreadCurrent, true, Triple{nan, 10, nan}, Triple{5, 10, 20}, "min 5 V, max 20 V"},
		{"leakage, typ and max", SpreadCurrent, true, Triple{nan, 10, 11}, Triple{5, 10, 11}, "min 5 V"},
		{"exact, typ", SpreadExact, false, Triple{nan, 10, nan}, Triple{10, 10, 10}, ""},
		{"exact, zero", SpreadExact, false, Triple{nan, 0, nan}, Triple{0, 0, 0}, ""},
		{"exact, max alone", SpreadExact, false, Triple{nan, nan, 14}, Triple{14, 14, 14}, ""},
		{"exact, min alone", SpreadExact, false, Triple{8, nan, nan}, Triple{8, 8, 8}, ""},
		{"exact, both ends", SpreadExact, false, Triple{8, nan, 14}, Triple{8, 11, 14}, ""},
		{"exact, typ and max", SpreadExact, false, Triple{nan, 10, 14}, Triple{10, 10, 14}, ""},
		{"exact, typ and min", SpreadExact, false, Triple{8, 10, nan}, Triple{8, 10, 10}, ""},
	}
	p := DefaultPolicy()
	for _, c := range cases {
		q := Absent("stage.q", &Declaration{Dimension: V, Spread: c.spread, OneSided: c.oneSided})
		q.Triple = c.given
		q.complete(&p)
		if !same(q.Triple, c.want) {
			t.Errorf("%s: %v, want %v", c.name, q.Triple, c.want)
		}
		checkAssumption(t, c.name, &q, c.assumed, Conservative)
		// A side is open where its end was not given and nothing fills it.
		below, above := open(c.given.Min, c.want.Min, c.want.Typ, c.given), open(c.given.Max, c.want.Max, c.want.Typ, c.given)
		if c.spread == SpreadExact && math.IsNaN(c.given.Min) == math.IsNaN(c.given.Max) || c.spread == SpreadExact && math.IsNaN(c.given.Typ) {
			below, above = false, false
		}
		if q.OpenBelow != below || q.OpenAbove != above {
			t.Errorf("%s: open below %v and above %v, want %v and %v", c.name, q.OpenBelow, q.OpenAbove, below, above)
		}
	}
}

// open tells whether an end that was not given stands at the value beside it.
func open(given, end, typ float64, t Triple) bool {
	return math.IsNaN(given) && end == typ && typ != 0 && !t.IsComplete()
}

// checkAssumption compares what was assumed; empty: nothing.
func checkAssumption(t *testing.T, name string, q *Quantity, text string, d Direction) {
	t.Helper()
	switch a := q.Assumption; {
	case a == nil && text != "":
		t.Errorf("%s: nothing assumed, want %q", name, text)
	case a != nil && (a.Assumed != text || a.Direction != d || a.Field != q.Field || a.Reason == ""):
		t.Errorf("%s: assumed %+v, want %q, %s", name, *a, text, d)
	}
}

// The numbers are those of the policy at hand.
func TestFillByPolicy(t *testing.T) {
	p := DefaultPolicy()
	p.ChargeSpread, p.DropSpread = 4, 0.5
	charge, drop := Absent("q", &Declaration{Spread: SpreadCharge}), Absent("q", &Declaration{Spread: SpreadDrop})
	charge.Typ, drop.Typ = 8, 8
	charge.complete(&p)
	drop.complete(&p)
	if !same(charge.Triple, Triple{2, 8, 32}) || !same(drop.Triple, Triple{4, 8, 12}) {
		t.Errorf("charge %v, drop %v", charge.Triple, drop.Triple)
	}
}

// Entries at temperatures are completed each; a triple beside them counts at 25 °C.
func TestFillAtTemperatures(t *testing.T) {
	cases := []struct {
		name    string
		spread  Spread
		triple  Triple
		at      []AtTemperature
		want    []AtTemperature
		base    Triple // at 25 °C
		assumed string
	}{
		{"entries alone", NoSpread, Missing(), []AtTemperature{{-40, Triple{1, 2, 3}}, {125, Triple{4, 5, 6}}},
			[]AtTemperature{{-40, Triple{1, 2, 3}}, {125, Triple{4, 5, 6}}}, Triple{1 + 3*65/165.0, 2 + 3*65/165.0, 3 + 3*65/165.0}, ""},
		{"triple between entries", NoSpread, Triple{2, 3, 4}, []AtTemperature{{-40, Triple{1, 2, 3}}, {125, Triple{4, 5, 6}}},
			[]AtTemperature{{-40, Triple{1, 2, 3}}, {25, Triple{2, 3, 4}}, {125, Triple{4, 5, 6}}}, Triple{2, 3, 4}, ""},
		{"triple below entries", NoSpread, Triple{2, 3, 4}, []AtTemperature{{85, Triple{3, 4, 5}}, {125, Triple{4, 5, 6}}},
			[]AtTemperature{{25, Triple{2, 3, 4}}, {85, Triple{3, 4, 5}}, {125, Triple{4, 5, 6}}}, Triple{2, 3, 4}, ""},
		{"triple above entries", NoSpread, Triple{2, 3, 4}, []AtTemperature{{-40, Triple{1, 2, 3}}},
			[]AtTemperature{{-40, Triple{1, 2, 3}}, {25, Triple{2, 3, 4}}}, Triple{2, 3, 4}, ""},
		{"ends missing everywhere", SpreadDrop, Triple{nan, 10, nan}, []AtTemperature{{125, Triple{nan, 5, nan}}},
			[]AtTemperature{{25, Triple{8, 10, 12}}, {125, Triple{4, 5, 6}}}, Triple{8, 10, 12},
			"min 8 V at 25 °C, max 12 V at 25 °C, min 4 V at 125 °C, max 6 V at 125 °C"},
		{"one entry without typ", SpreadDrop, Missing(), []AtTemperature{{125, Triple{4, nan, 8}}},
			[]AtTemperature{{125, Triple{4, 6, 8}}}, Triple{4, 6, 8}, ""},
	}
	p := DefaultPolicy()
	for _, c := range cases {
		q := Absent("stage.q", &Declaration{Dimension: V, Spread: c.spread})
		q.Triple, q.At = c.triple, slices.Clone(c.at)
		given := q.At
		q.complete(&p)
		if len(q.At) != len(c.want) {
			t.Errorf("%s: entries %v, want %v", c.name, q.At, c.want)
			continue
		}
		for i, w := range c.want {
			if q.At[i].Temperature != w.Temperature || !same(q.At[i].Triple, w.Triple) {
				t.Errorf("%s: entry %d %v, want %v", c.name, i, q.At[i], w)
			}
		}
		if !same(q.Triple, c.base) {
			t.Errorf("%s: at 25 °C %v, want %v", c.name, q.Triple, c.base)
		}
		checkAssumption(t, c.name, &q, c.assumed, Conservative)
		for i := range given { // what the request holds may stand in other stages too
			if !same(given[i].Triple, c.at[i].Triple) {
				t.Errorf("%s: the entries given were changed: %v", c.name, given)
			}
		}
	}
}

// A declared default is taken where nothing is written, with its direction; without one a value stays unknown.
func TestAssumedDefaults(t *testing.T) {
	declare := func(a Absence, low, typical, high float64, d Direction) *Declaration {
		return &Declaration{Dimension: A, Absence: a, AssumedMin: low, AssumedTyp: typical, AssumedMax: high, Direction: d, Reason: "usual",
			Spread: SpreadCurrent}
	}
	cases := []struct {
		name      string
		d         *Declaration
		given     Triple
		want      Triple
		assumed   string
		direction Direction
	}{
		{"one number", declare(Assumed, nan, 2, nan, Optimistic), Missing(), Triple{2, 2, 2}, "2 A", Optimistic},
		{"range", declare(Assumed, 1, 2, 3, Conservative), Missing(), Triple{1, 2, 3}, "1 A to 3 A", Conservative},
		{"upper end", declare(Assumed, nan, 0, 3, Conservative), Missing(), Triple{0, 0, 3}, "0 A to 3 A", Conservative},
		{"written", declare(Assumed, nan, 2, nan, Optimistic), Triple{5, 6, 7}, Triple{5, 6, 7}, "", Neutral},
		{"unknown", declare(Unknown, nan, 2, nan, Optimistic), Missing(), Missing(), "", Neutral},
		{"replaced by others", declare(None, nan, 2, nan, Optimistic), Missing(), Missing(), "", Neutral},
	}
	p := DefaultPolicy()
	for _, c := range cases {
		q := Absent("stage.q", c.d)
		q.Triple = c.given
		q.complete(&p)
		if !same(q.Triple, c.want) {
			t.Errorf("%s: %v, want %v", c.name, q.Triple, c.want)
		}
		checkAssumption(t, c.name, &q, c.assumed, c.direction)
		if a := q.Assumption; a != nil && a.Reason != "usual" {
			t.Errorf("%s: reason %q", c.name, a.Reason)
		}
	}
}

// Of two assumptions behind one value the optimistic one prevails, whichever came first.
func TestAssumeTwice(t *testing.T) {
	for _, d := range [][2]Direction{{Optimistic, Conservative}, {Conservative, Optimistic}} {
		q := Absent("stage.q", &Declaration{})
		q.assume("a", d[0], "r")
		q.assume("b", d[1], "s")
		if *q.Assumption != (Assumption{"stage.q", "a, b", Optimistic, "r"}) {
			t.Errorf("%v: %+v", d, *q.Assumption)
		}
	}
}

// capacitorOf is a capacitor of which only the dielectric is written.
func capacitorOf(dielectric string) Capacitor {
	a := func(name string) Quantity {
		return Absent("stage.c."+name, &Declaration{Dimension: quantity.Ratio, Low: math.Inf(-1), High: math.Inf(1)})
	}
	return Capacitor{Header: Header{Field: "stage.c", Present: true}, Dielectric: dielectric, Capacitance: a("capacitance"),
		EffectiveCapacitance: a("effectiveCapacitance"), AgeingPerDecade: a("ageingPerDecade"), ServiceTime: a("serviceTime"),
		Leakage: a("leakage"), Insulation: a("insulation"), Temperature: a("temperature")}
}

// What the class of a capacitor implies: EIA-198 class 2 code [slaa701b, holy-stone]; ageing of X7R and X5R up to 3 %, of Y5V 7 % per
// decade hour, none of C0G [holy-stone].
func TestCapacitorClass(t *testing.T) {
	curve := []BiasPoint{{Exact("v", 0), Exact("k", 1)}, {Exact("v", 25), Exact("k", 0.4)}}
	zero, whole := Triple{0, 0, 0}, Triple{1, 1, 1}
	cases := []struct {
		name, dielectric     string
		curve                []BiasPoint
		ageing               Triple
		change, bias, decade Triple
		biasAssumed, ageText string
	}{
		{"X7R", "X7R", nil, Missing(), Triple{-0.15, 0, 0.15}, Triple{0, 1, 1}, Triple{0.03, 0.03, 0.03}, "0.3 to 1 remaining", "0.03 per decade"},
		{"X7R with a curve", "X7R", curve, Missing(), Triple{-0.15, 0, 0.15}, whole, Triple{0.03, 0.03, 0.03}, "", "0.03 per decade"},
		{"Y5V", "Y5V", nil, Missing(), Triple{-0.82, 0, 0.22}, Triple{0, 1, 1}, Triple{0.07, 0.07, 0.07}, "0.3 to 1 remaining", "0.07 per decade"},
		{"X7R with ageing", "X7R", curve, Triple{0.01, 0.02, 0.025}, Triple{-0.15, 0, 0.15}, whole, Triple{0.01, 0.02, 0.025}, "", ""},
		{"X7R with typical ageing", "X7R", curve, Triple{0.01, 0.02, nan}, Triple{-0.15, 0, 0.15}, whole, Triple{0.01, 0.02, 0.02}, "", ""},
		{"C0G", "C0G", nil, Missing(), Triple{-0.003, 0, 0.003}, zero, zero, "", ""},
		{"C0G with a curve", "C0G", curve, Missing(), Triple{-0.003, 0, 0.003}, whole, zero, "", ""},
		{"film", "FILM", nil, Missing(), Triple{-0.06, 0, 0.06}, zero, zero, "", ""},
		{"no class", "", nil, Missing(), Missing(), Missing(), Missing(), "", ""},
		{"no class, with a curve", "", curve, Missing(), Missing(), whole, Missing(), "", ""},
		{"unknown class", "Q9Z", nil, Missing(), Missing(), Missing(), Missing(), "", ""},
	}
	p := DefaultPolicy()
	for _, c := range cases {
		k := capacitorOf(c.dielectric)
		k.BiasCurve.Items = c.curve
		k.AgeingPerDecade.Triple = c.ageing
		k.complete(&p)
		for _, x := range []struct {
			what      string
			got, want Triple
		}{{"change", k.TemperatureChange.Triple, c.change}, {"bias", k.Bias.Triple, c.bias}, {"ageing", k.AgeingPerDecade.Triple, c.decade}} {
			if !same(x.got, x.want) {
				t.Errorf("%s: %s %v, want %v", c.name, x.what, x.got, x.want)
			}
		}
		checkAssumption(t, c.name, &k.Bias, c.biasAssumed, Conservative)
		checkAssumption(t, c.name, &k.AgeingPerDecade, c.ageText, Conservative)
		if k.Bias.Naive != 0 || k.TemperatureChange.Naive != 0 {
			t.Errorf("%s: a nominal calculation leaves out bias and temperature: %g, %g", c.name, k.Bias.Naive, k.TemperatureChange.Naive)
		}
		if k.Bias.Field != "stage.c.biasCurve" || k.TemperatureChange.Field != "stage.c.dielectric" {
			t.Errorf("%s: paths %q, %q", c.name, k.Bias.Field, k.TemperatureChange.Field)
		}
	}
}

// The remaining fraction assumed is the policy's.
func TestClassTwoRemaining(t *testing.T) {
	p := DefaultPolicy()
	p.ClassTwoRemaining = 0.45
	k := capacitorOf("X5R")
	k.complete(&p)
	checkAssumption(t, "X5R", &k.Bias, "0.45 to 1 remaining", Conservative)
}

// Ageing counts from an hour after the last heat to the service time.
func TestServiceTime(t *testing.T) {
	const hour, decade = 3600.0, 3.156e8
	cases := []struct {
		name    string
		given   Triple
		want    Triple
		assumed string
	}{
		{"exact", Triple{decade, decade, decade}, Triple{hour, decade, decade}, ""},
		{"typ alone", Triple{nan, decade, nan}, Triple{hour, decade, decade}, ""},
		{"max alone", Triple{nan, nan, decade}, Triple{hour, decade, decade}, ""},
		{"shorter than an hour", Triple{60, 60, 60}, Triple{hour, hour, hour}, ""},
		{"absent", Missing(), Triple{hour, 2 * decade, 2 * decade}, "175300 h"},
	}
	p := DefaultPolicy()
	for _, c := range cases {
		k := capacitorOf("X7R")
		k.ServiceTime = Absent("stage.c.serviceTime", &Declaration{Dimension: sec, Absence: Assumed, AssumedMin: nan, AssumedTyp: 2 * decade,
			AssumedMax: nan, Direction: Conservative, Reason: "usual"})
		k.ServiceTime.Triple = c.given
		k.complete(&p)
		if !same(k.ServiceTime.Triple, c.want) {
			t.Errorf("%s: %v, want %v", c.name, k.ServiceTime.Triple, c.want)
		}
		if k.ServiceTime.Naive != hour {
			t.Errorf("%s: a nominal calculation takes %g s, want %g", c.name, k.ServiceTime.Naive, hour)
		}
		checkAssumption(t, c.name, &k.ServiceTime, c.assumed, Conservative)
	}
}

// Where no output capacitance is given the node commutates at once or not at all.
func TestCommutationCharge(t *testing.T) {
	s := Switch{OutputCapacitance: List[CapacitancePoint]{Field: "stage.lowSide.outputCapacitance"}}
	s.complete()
	if !same(s.CommutationCharge.Triple, Triple{0, 0, 1e-3}) {
		t.Errorf("%v, want 0 to 1 mC", s.CommutationCharge.Triple)
	}
	checkAssumption(t, "none given", &s.CommutationCharge, "any charge", Conservative)
	s.OutputCapacitance.Items = []CapacitancePoint{{Exact("v", 0), Exact("c", 1e-9)}}
	s.complete()
	if s.CommutationCharge.Given() || s.CommutationCharge.Assumption != nil {
		t.Errorf("beside an output capacitance: %+v", s.CommutationCharge)
	}
}
