package corner

import (
	"math"

	"floatrail/calc/stage"
)

// Set is one temperature set of an operating point.
type Set struct {
	Name     string
	Junction float64 // of the switches [degC]
	Ambient  float64 // of everything else [degC]
}

// Sets forms the temperature sets of an operating point, without repeating equal ones.
func Sets(p *stage.OperatingPoint) []Set {
	j, a := known(&p.JunctionTemperature), known(&p.AmbientTemperature)
	within := func(t stage.Triple) float64 { return math.Min(math.Max(stage.ReferenceTemperature, t.Min), t.Max) }
	all := []Set{{"cold", j.Min, a.Min}, {"room", within(j), within(a)}, {"hot", j.Max, a.Max}}
	var out []Set
	for i, s := range all {
		same := func(o Set) bool { return o.Junction == s.Junction && o.Ambient == s.Ambient }
		if i == 1 || !same(all[1]) { // the room set stands for its equals
			out = append(out, s)
		}
	}
	return out
}

// known is a temperature's triple, unknown at its open sides.
func known(q *stage.Quantity) stage.Triple {
	t := q.Triple
	if q.OpenBelow {
		t.Min = math.NaN()
	}
	if q.OpenAbove {
		t.Max = math.NaN()
	}
	return t
}

// Space is the ranges of all inputs of a stage at one operating point and set.
type Space struct {
	Stage  *stage.Stage
	Policy *stage.Policy
	Point  *stage.OperatingPoint // nil: none
	Set    Set

	// Model is free for what a model keeps with the space; the spaces that Replace makes share it.
	Model any
	// Frugal tells that evaluations are dear: of each input one end is tried, and the other one taken to act the other way; the worst draw is
	// moved only in the inputs that matter most.
	Frugal bool
	// Dear tells that evaluations take some time: the worst draw is moved only in the inputs that together make nearly all of the effect.
	Dear bool

	low, typ, high []float64
	interior       Bits // inputs in which a turn is looked for between their ends
	inputs         []*stage.Quantity
	probes         map[probe]*Draw
	corners        map[uint64][]*Draw // by the hash of their numbers
	spare          []*Draw            // draws that nobody holds
	scratch        []float64          // where numbers are put together
	words          Bits               // clear memory for traces
	memory         *memory            // shared by the spaces that Replace makes: results do not depend on ranges
	origin         *Space             // of which Replace made this one; nil: none
}

type probe struct {
	id   int
	step int8 // 0: typical; else sample number
}

// NewSpace forms the ranges. The stage is complete.
func NewSpace(s *stage.Stage, p *stage.Policy, op *stage.OperatingPoint, set Set) *Space {
	in := s.Inputs()
	sp := &Space{
		Stage: s, Policy: p, Point: op, Set: set, inputs: in,
		low: make([]float64, len(in)), typ: make([]float64, len(in)), high: make([]float64, len(in)),
		interior: newBits(len(in)), probes: map[probe]*Draw{}, corners: map[uint64][]*Draw{}, memory: &memory{},
	}
	for id, q := range in {
		if id == 0 {
			continue
		}
		t := q.Range(sp.Temperature(q))
		if !t.IsComplete() {
			t = stage.Missing()
		}
		sp.low[id], sp.typ[id], sp.high[id] = t.Min, t.Typ, t.Max
	}
	l := &s.Layout
	for _, q := range []*stage.Quantity{&l.LowSideInductance, &l.BusLoopInductance, &l.LoopInductance, &l.Measured.TurnOffCurrentSlope,
		&l.Measured.TurnOnCurrentSlope, &l.Measured.TurnOffVoltageSlope, &l.Measured.TurnOnVoltageSlope} {
		sp.interior.set(q.ID)
	}
	u := &s.Startup
	sp.interior.set(u.StageInterval.ID)
	if u.Simultaneous > 0 && u.Simultaneous < s.GateSupply.StagesSharing { // a group that waits for the one before finds V_DD as that one's target has it
		sp.interior.set(s.Driver.UVLORising.ID)
	}
	if op != nil {
		for _, q := range []*stage.Quantity{&op.BusVoltage, &op.LoadCurrent, &op.RippleCurrent, &op.SwitchingFrequency, &op.DeadTime} {
			sp.interior.set(q.ID)
		}
		for _, q := range op.ModeInputs() {
			sp.interior.set(q.ID)
		}
	}
	return sp
}

// Temperature is the temperature that an input's part takes in this set [degC].
func (s *Space) Temperature(q *stage.Quantity) float64 {
	if q.Domain == stage.Junction {
		return s.Set.Junction
	}
	return s.Set.Ambient
}

// Range is the smallest, typical and largest of an input in this set.
func (s *Space) Range(q *stage.Quantity) stage.Triple {
	return stage.Triple{Min: s.low[q.ID], Typ: s.typ[q.ID], Max: s.high[q.ID]}
}

// at makes a draw with given numbers, which nobody changes afterwards.
func (s *Space) at(x []float64) *Draw {
	return &Draw{Space: s, x: x, trace: s.newTrace()}
}

// With makes a draw that differs from another in some inputs.
func (s *Space) With(d *Draw, changes ...Change) *Draw {
	x := d.numbers()
	for _, c := range changes {
		x[c.ID] = c.Value
	}
	return s.at(x)
}

// Try runs f at a draw that differs from another in some inputs. The draw is used again afterwards: f must not keep it.
func (s *Space) Try(d *Draw, f func(*Draw), changes ...Change) {
	n := s.take(d, changes...)
	defer s.give(n)
	f(n)
}

// take is With for a draw that the space may use again after give.
func (s *Space) take(d *Draw, changes ...Change) *Draw {
	n := len(s.spare)
	if n == 0 {
		return s.With(d, changes...)
	}
	out := s.spare[n-1]
	s.spare = s.spare[:n-1]
	copy(out.x, d.x)
	out.x[d.moved] = d.get(d.moved)
	for _, c := range changes {
		out.x[c.ID] = c.Value
	}
	for _, c := range out.memo {
		if c != nil {
			c.valid = false
		}
	}
	return out
}

// give returns a draw that nobody holds.
func (s *Space) give(d *Draw) { s.spare = append(s.spare, d) }

// Change sets one input of a draw.
type Change struct {
	ID    int
	Value float64
}

// Typical is the draw with every input at its typical value.
func (s *Space) Typical() *Draw { return s.probe(0, 0, 0) }

// Origin is the space of which Replace made this one, else the space itself.
func (s *Space) Origin() *Space {
	if s.origin != nil {
		return s.origin
	}
	return s
}

// probe is the typical draw with one input moved; kept, so that functions share what models compute there.
func (s *Space) probe(id int, step int8, v float64) *Draw {
	key := probe{id, step}
	if d, ok := s.probes[key]; ok {
		return d
	}
	d := s.at(s.typ)
	d.moved, d.to = id, v
	s.probes[key] = d
	return d
}

// samples are the numbers at which an input is tried: its ends, and its interior where asked.
func (s *Space) sample(id int, step int8) float64 {
	lo, hi := s.low[id], s.high[id]
	switch step {
	case 1:
		return lo
	case 2:
		return hi
	}
	// Interior: nine points evenly between the ends; geometric where the range spans decades.
	w := float64(step-firstInterior+1) / (interiorSamples + 1)
	if lo > 0 && hi > 8*lo {
		return lo * math.Pow(hi/lo, w)
	}
	return lo + w*(hi-lo)
}

// Sample numbers: the ends are 1 and 2, the interior follows; two of it serve to look for a turn.
const (
	firstInterior   = 3
	interiorSamples = 9
	lookLow         = 5
	lookHigh        = 9
	middle          = firstInterior + interiorSamples/2
)

// Replace is the space with other ranges of some inputs.
func (s *Space) Replace(changes ...Replacement) *Space {
	o := *s
	o.origin = s.Origin()
	o.low, o.typ, o.high = append([]float64(nil), s.low...), append([]float64(nil), s.typ...), append([]float64(nil), s.high...)
	for _, c := range changes {
		o.low[c.ID], o.typ[c.ID], o.high[c.ID] = c.Min, c.Typ, c.Max
	}
	o.probes, o.corners, o.spare, o.scratch, o.words = map[probe]*Draw{}, map[uint64][]*Draw{}, nil, nil, nil
	return &o
}

// Twin is the same space with a model of its own. It knows what the space keeps, which itself is not worked on as long as twins of it are.
func (s *Space) Twin(model any) *Space {
	o := s.Replace()
	o.Model, o.origin, o.memory = model, nil, &memory{known: []*memory{s.memory}}
	return o
}

// Adopt makes what a twin has come to keep known to the space. The twin is not used any more.
func (s *Space) Adopt(twin *Space) {
	s.memory.known = append(s.memory.known, &memory{slots: twin.memory.slots})
}

// On is the worst draw in a twin of its space.
func (w Worst) On(twin *Space) Worst {
	w.Space, w.Draw = twin, twin.at(w.Draw.numbers())
	return w
}

// Survey evaluates a function where a search will: at the typical draw, and one of several parts of the draws with one input at an end; at both ends
// unless the space is frugal.
func (s *Space) Survey(f Function, part, parts int) {
	_, t := Evaluate(s.Typical(), f)
	k := 0
	t.clone().used.each(func(id int) {
		if s.low[id] < s.high[id] {
			if k++; k%parts != part {
				return
			}
			far := s.farEnd(id)
			Evaluate(s.probe(id, far, s.sample(id, far)), f)
			if !s.Frugal {
				Evaluate(s.probe(id, 3-far, s.sample(id, 3-far)), f)
			}
		}
	})
}

// Home is the one of an operating point's spaces at which directions are found.
func Home(sets []*Space) *Space { return sets[homeOf(sets)] }

// Replacement is another range of one input.
type Replacement struct {
	ID int
	stage.Triple
}
