package result

import (
	"fmt"
	"math"

	"floatrail/calc/catalog"
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/preferred"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// trial is a stage in which C_B and R_B take trial values.
type trial struct {
	stage   *stage.Stage
	policy  *stage.Policy
	bench   *rule.Bench // with a resistor that can be scaled
	asGiven *rule.Bench // with the resistor as given, a link included
	c, r    *stage.Quantity
	judges  []judge
	notes   []string
	lacks   []string // what keeps an essential rule from being evaluated
}

// judge is one rule at one operating point and set, with its worst draw.
type judge struct {
	rule *rule.Rule
	role string
	draw *corner.Draw
}

// Rules that the parts must hold with their guards. Those that only judge ratings may lack data; the essential ones may not.
var sized = []struct {
	id        string
	essential bool
}{
	{"charge/lowest-voltage", true}, {"charge/droop", true}, {"charge/gate-sufficiency", true}, {"charge/capacitance", true},
	{"duty/recharge-window", true}, {"duty/longest-on-time", true}, {"duty/largest-duty", true}, {"gate/overvoltage", false},
	{"charge/oversize", false}, {"diode/peak-current", false}, {"resistor/pulse-energy", false}, {"resistor/power", false},
}

// Values of parts that the stage does not name yet.
const (
	trialCapacitance = 1e-6 // [F]
	trialResistance  = 10.0 // [ohm]
)

func newTrial(s *stage.Stage, p *stage.Policy) *trial {
	t := &trial{stage: s, policy: p, c: &s.Bootstrap.Capacitor.Capacitance, r: &s.Bootstrap.Resistor.Resistance}
	cb := &s.Bootstrap.Capacitor
	if cb.EffectiveCapacitance.Given() {
		t.c = &cb.EffectiveCapacitance
	} else {
		if !t.c.Given() {
			t.c.Typ, t.c.Min, t.c.Max = trialCapacitance, trialCapacitance*0.9, trialCapacitance*1.1
			t.notes = append(t.notes, "C_B is not given: sized as a class 2 ceramic with a tolerance of 10 %")
		}
		if cb.Dielectric == "" {
			cb.Dielectric = "X7R"
			t.notes = append(t.notes, "the dielectric of C_B is not given: sized for X7R")
		}
	}
	cb.Present, cb.Fit = true, ""
	if !t.r.Given() {
		t.r.Typ, t.r.Min, t.r.Max = trialResistance, trialResistance*0.99, trialResistance*1.01
		t.notes = append(t.notes, "R_B is not given: sized with a tolerance of 1 %")
	}
	s.Bootstrap.Resistor.Present, s.Bootstrap.Resistor.Fit = true, ""
	s.Complete(p)
	t.asGiven = rule.NewBench(s, p)
	t.bench = t.asGiven
	if t.r.Typ == 0 { // a link has no spread to scale
		t.r.Triple = stage.Triple{Min: trialResistance * 0.99, Typ: trialResistance, Max: trialResistance * 1.01}
		t.r.At = nil
		t.bench = rule.NewBench(s, p)
	}
	return t
}

// prepare finds the worst draw of every rule with given parts.
func (t *trial) prepare(c, r float64) {
	t.judges, t.lacks = t.judges[:0], t.lacks[:0]
	for _, z := range sized {
		rl, ok := catalog.Find(z.id)
		if !ok {
			panic("result: no rule " + z.id)
		}
		roles := rl.Roles
		if len(roles) == 0 {
			roles = []string{""}
		}
		for _, role := range roles {
			lack := t.enlist(rl, role, c, r)
			if lack == "" {
				continue
			}
			if z.essential {
				t.lacks = append(t.lacks, lack)
			}
		}
	}
}

// enlist adds the worst draws of a rule; it returns what keeps the rule from being evaluated.
func (t *trial) enlist(rl *rule.Rule, role string, c, r float64) string {
	for i := range t.bench.Points {
		p := &t.bench.Points[i]
		if t.bench.Stopped() {
			return "the caller no longer waits"
		}
		if rl.Inapplicable(t.stage, p.Operating, role) != "" {
			continue
		}
		for _, f := range rl.Searches(role) {
			for _, w := range corner.SearchSets(t.spaces(p, c, r), f) {
				s := w.Space
				if !w.Decided() {
					what := append(s.Missing(w.Trace), w.Trace.Reasons()...)
					what = append(what, "not a number")
					return fmt.Sprintf("%s: %s", rl.ID, stage.Relative(what[0]))
				}
				t.judges = append(t.judges, judge{rl, role, w.Draw})
			}
		}
	}
	return ""
}

// spaces are those of an operating point with other parts.
func (t *trial) spaces(p *rule.Point, c, r float64) []*corner.Space {
	out := make([]*corner.Space, len(p.Spaces))
	for i, s := range p.Spaces {
		out[i] = s.Replace(t.scaled(t.c, c), t.scaled(t.r, r))
	}
	return out
}

// scaled is an input's range moved to another nominal value.
func (t *trial) scaled(q *stage.Quantity, v float64) corner.Replacement {
	return corner.Replacement{ID: q.ID, Triple: stage.Triple{Min: q.Min / q.Typ * v, Typ: v, Max: q.Max / q.Typ * v}}
}

// holds tells whether every guard holds with given parts, each judge standing at the corner it was found at.
func (t *trial) holds(c, r float64) bool {
	if t.bench.Stopped() {
		return false
	}
	for i := range t.judges {
		j := &t.judges[i]
		if !t.agrees(j, c, r) {
			t.judges[0], t.judges[i] = t.judges[i], t.judges[0] // who refused is asked first the next time
			return false
		}
	}
	return true
}

// agrees tells whether one judge's guard holds with given parts.
func (t *trial) agrees(j *judge, c, r float64) (ok bool) {
	j.draw.Space.Try(j.draw, func(d *corner.Draw) { ok = j.rule.Holds(circuit.Of(d), j.role) }, t.moved(j.draw, t.c, c), t.moved(j.draw, t.r, r))
	return ok
}

// moved keeps an input's distance from its nominal value.
func (t *trial) moved(d *corner.Draw, q *stage.Quantity, v float64) corner.Change {
	return corner.Change{ID: q.ID, Value: d.Value(q) / d.Space.Range(q).Typ * v}
}

// proven repeats the whole search with the parts.
func (t *trial) proven(c, r float64) bool {
	t.prepare(c, r)
	return len(t.lacks) == 0 && t.holds(c, r)
}

var (
	capacitances = ladder(preferred.E6, 1e-9, 1e-3)
	resistances  = ladder(preferred.E12, 0.1, 1e4)
)

// ladder lists the preferred values between two.
func ladder(s preferred.Series, low, high float64) []float64 {
	var out []float64
	for v := preferred.AtLeast(low, s); v <= high*(1+1e-9); v = preferred.AtLeast(v*1.0001, s) {
		out = append(out, v)
	}
	return out
}

// window finds the ends of the run of values that hold around one that does, by halving toward the ends.
func window(values []float64, at int, holds func(float64) bool) (low, high int) {
	low, high = at, at
	for reach := at; reach > 0; reach /= 2 {
		for low-reach >= 0 && holds(values[low-reach]) {
			low -= reach
		}
	}
	for reach := len(values) - 1 - at; reach > 0; reach /= 2 {
		for high+reach < len(values) && holds(values[high+reach]) {
			high += reach
		}
	}
	return low, high
}

func (t *trial) recommend(out *finding.Sizing) {
	out.Notes = t.notes
	rec := &out.Recommended
	*rec = finding.Recommended{
		Capacitance: none(quantity.Capacitance), CapacitorVoltage: none(quantity.Voltage), Resistance: none(quantity.Resistance),
		ResistanceWindow:    finding.Window{Low: none(quantity.Resistance), High: none(quantity.Resistance)},
		CapacitanceWindow:   finding.Window{Low: none(quantity.Capacitance), High: none(quantity.Capacitance)},
		DiodeReverseVoltage: none(quantity.Voltage), DiodeAverageCurrent: none(quantity.Current), DiodePeakCurrent: none(quantity.Current),
		ReservoirCapacitance: none(quantity.Capacitance),
	}
	t.prepare(t.c.Typ, t.r.Typ)
	if len(t.lacks) > 0 {
		for _, l := range t.lacks {
			out.Notes = append(out.Notes, "no parts can be recommended: "+l)
		}
		return
	}
	ci, ri, ok := t.choose()
	if !ok {
		out.Notes = append(out.Notes, "no preferred values of C_B and R_B hold every guard")
		return
	}
	c, r := capacitances[ci], resistances[ri]
	set := func(m *finding.Measure, v float64) { m.Value = rule.Significant(v) }
	set(&rec.Capacitance, c)
	set(&rec.Resistance, r)
	low, high := window(capacitances, ci, func(v float64) bool { return t.holds(v, r) })
	set(&rec.CapacitanceWindow.Low, capacitances[low])
	set(&rec.CapacitanceWindow.High, capacitances[high])
	low, high = window(resistances, ri, func(v float64) bool { return t.holds(c, v) })
	set(&rec.ResistanceWindow.Low, resistances[low])
	set(&rec.ResistanceWindow.High, resistances[high])
	t.ratings(out, c, r)
}

func none(d quantity.Dimension) finding.Measure {
	return finding.Measure{Value: math.NaN(), Dimension: d}
}

// choose picks the smallest capacitance that holds every guard at some resistance, and of the resistances that hold there the middle one. What
// is chosen at the corners of the first guess is proven by a search of its own; where that fails the corners are taken from there.
func (t *trial) choose() (ci, ri int, ok bool) {
	for range 4 {
		ci, ri, ok = t.smallest()
		if !ok {
			return 0, 0, false
		}
		if t.proven(capacitances[ci], resistances[ri]) {
			return ci, ri, true
		}
		if len(t.lacks) > 0 {
			return 0, 0, false
		}
	}
	// The corners keep moving: take the next larger values that are proven.
	for k := ci; k < len(capacitances); k++ {
		if t.proven(capacitances[k], resistances[ri]) {
			return k, ri, true
		}
	}
	return 0, 0, false
}

// smallest searches the plane of preferred values at the judges' corners.
func (t *trial) smallest() (ci, ri int, ok bool) {
	for ci = range capacitances {
		c := capacitances[ci]
		if !t.possible(c) {
			continue
		}
		for step := 0; step < len(resistances); step++ {
			if !t.holds(c, resistances[step]) {
				continue
			}
			low, high := window(resistances, step, func(v float64) bool { return t.holds(c, v) })
			return ci, (low + high) / 2, true
		}
	}
	return 0, 0, false
}

// possible tells whether a capacitance could hold at all: the ripple does not depend on the resistance.
func (t *trial) possible(c float64) bool {
	for i := range t.judges {
		j := &t.judges[i]
		if j.rule.ID != "charge/droop" {
			continue
		}
		if !t.agrees(j, c, resistances[0]) {
			return false
		}
	}
	return true
}

// ratings finds standard ratings of the parts around the chosen values.
func (t *trial) ratings(out *finding.Sizing, c, r float64) {
	rec := &out.Recommended
	largest := func(f rule.Number) float64 {
		v := math.Inf(-1)
		for i := range t.bench.Points {
			p := &t.bench.Points[i]
			for _, w := range corner.SearchSets(t.spaces(p, c, r), func(d *corner.Draw) float64 { return -f(circuit.Of(d)) }) {
				if !w.Decided() {
					return math.NaN()
				}
				v = math.Max(v, -w.Value)
			}
		}
		return v
	}
	pol := t.policy
	top := largest(func(c *circuit.Circuit) float64 { return math.Max(c.High(), c.Supply()) })
	ratio := catalog.VoltagePolicy(pol).Fraction(circuit.Kind(&t.stage.Bootstrap.Capacitor))
	if t.c == &t.stage.Bootstrap.Capacitor.EffectiveCapacitance && ratio != ratio {
		ratio = pol.CeramicVoltageRatio
	}
	if v, ok := preferred.RatedVoltageAtLeast(top / ratio); ok {
		rec.CapacitorVoltage.Value = v
	}
	reverse := largest(func(c *circuit.Circuit) float64 { return c.Need(&c.Point.BusVoltage) + c.High() - c.Supply() })
	if v, ok := preferred.ReverseVoltageAtLeast(reverse / pol.DiodeReverseRatio); ok && t.stage.Bootstrap.Element == stage.DiscreteDiode {
		rec.DiodeReverseVoltage.Value = v
		out.Notes = append(out.Notes, "the diode's reverse voltage is sized for the static voltage; the node's overshoot comes on top")
	}
	guard := 1 - pol.GuardRatio
	average := largest(func(c *circuit.Circuit) float64 {
		if c.Point.HeldOn != nil {
			return 0
		}
		return c.AverageCurrent()
	})
	if t.stage.Bootstrap.Element == stage.DiscreteDiode {
		rec.DiodeAverageCurrent.Value = preferred.AtLeast(average/guard, preferred.E6)
		rec.DiodePeakCurrent.Value = preferred.AtLeast(largest(func(c *circuit.Circuit) float64 { return c.FirstPeak() })/guard, preferred.E6)
	}
	fresh := largest(func(c *circuit.Circuit) float64 { return c.Fresh() })
	remaining := -largest(func(c *circuit.Circuit) float64 { return -c.Capacitance() }) / c
	rec.ReservoirCapacitance.Value = preferred.AtLeast(pol.ReservoirRatio*fresh/remaining/guard, preferred.E6)
}
