package corner

import "floatrail/calc/stage"

// Sampler draws the inputs of a stage at one operating point again and again, each draw at temperatures of its own, in the same memory: a draw
// is good until the next one is made. What is found at a draw depends on its numbers and temperatures and on no draw before it. A sampler serves
// one goroutine.
type Sampler struct {
	space      *Space
	draw       *Draw
	moving     []*stage.Quantity // inputs that temperature moves
	varied     []int             // inputs that have a range at some temperature; points of curves follow their position
	open       []int             // inputs of which a side of the spread is not known
	optimistic Bits              // inputs that rest on an optimistic assumption
}

// NewSampler makes a sampler. The stage is complete; op is nil where it has no operating point.
func NewSampler(s *stage.Stage, p *stage.Policy, op *stage.OperatingPoint) *Sampler {
	home := Set{Name: "room", Junction: stage.ReferenceTemperature, Ambient: stage.ReferenceTemperature}
	if op != nil {
		sets := Sets(op)
		home = sets[0]
		for _, set := range sets {
			if set.Name == "room" {
				home = set
			}
		}
	}
	// Where a search for a root begins is taken from the typical draw of the origin, which is always that at the home set.
	space := NewSpace(s, p, op, home).Replace()
	space.Set.Name = "draw"
	m := &Sampler{space: space, optimistic: newBits(len(space.inputs))}
	for id, q := range space.inputs {
		if id == 0 {
			continue
		}
		if len(q.At) > 0 || q.Declare != nil && q.Declare.Law != stage.Constant {
			m.moving = append(m.moving, q)
		}
		if Varies(q) {
			m.varied = append(m.varied, id)
		}
		if q.OpenBelow || q.OpenAbove {
			m.open = append(m.open, id)
		}
		if q.Assumption != nil && q.Assumption.Direction == stage.Optimistic {
			m.optimistic.set(id)
		}
	}
	m.draw = space.at(append([]float64(nil), space.typ...))
	space.memory = &memory{of: m.draw} // draws that a model makes about this one share what it does not move
	return m
}

// Varies tells whether an input moves between parts or conditions on its own: it has a range at some temperature and is no point of a curve.
func Varies(q *stage.Quantity) bool {
	if q.Along != 0 {
		return false
	}
	for _, a := range q.At {
		if a.Min < a.Max {
			return true
		}
	}
	return q.IsComplete() && q.Min < q.Max
}

// Temperatures are those of the switches and of everything else at an operating point, unknown at sides that nobody gave [degC].
func Temperatures(p *stage.OperatingPoint) (junction, ambient stage.Triple) {
	return known(&p.JunctionTemperature), known(&p.AmbientTemperature)
}

// Draw makes a draw at the temperature of the switches and that of everything else [degC]. An input that varies stands where place puts it
// within its range at that temperature; of all others the range is their only value.
func (m *Sampler) Draw(junction, ambient float64, place func(id int, r stage.Triple) float64) *Draw {
	s, d := m.space, m.draw
	s.Set.Junction, s.Set.Ambient = junction, ambient
	for _, q := range m.moving {
		t := q.Range(s.Temperature(q))
		if !t.IsComplete() {
			t = stage.Missing()
		}
		s.low[q.ID], s.typ[q.ID], s.high[q.ID] = t.Min, t.Typ, t.Max
		d.x[q.ID] = t.Typ
	}
	for _, id := range m.varied {
		d.x[id] = place(id, stage.Triple{Min: s.low[id], Typ: s.typ[id], Max: s.high[id]})
	}
	for _, c := range d.memo {
		if c != nil {
			c.valid = false
		}
	}
	d.Slot = nil
	for _, n := range s.spare { // what models keep with them belongs to the temperatures of another draw
		n.Slot = nil
	}
	s.memory.forget()
	return d
}

// Optimistic tells whether what was read at a draw rests on an optimistic assumption.
func (m *Sampler) Optimistic(t *Trace) bool {
	for i, o := range m.optimistic {
		if (t.used[i]|t.shown[i])&o != 0 {
			return true
		}
	}
	for i := range t.assumptions {
		if t.assumptions[i].Direction == stage.Optimistic {
			return true
		}
	}
	return false
}

// Beyond tells whether a function gets worse beyond a side of an input's spread that nobody gave: where the input stands is then not known.
func (m *Sampler) Beyond(d *Draw, f Function) bool {
	if len(m.open) == 0 {
		return false
	}
	here, t := Evaluate(d, f)
	if !usable(here, t) {
		return true
	}
	w := Worst{Trace: t.clone()}
	for _, id := range m.open {
		if w.Trace.used.has(id) {
			m.space.beyond(&w, d, f, here, id)
		}
	}
	return w.Partial
}

// Missing lists the paths of what was missing at a draw.
func (m *Sampler) Missing(t *Trace) []string { return m.space.Missing(t) }

// Open lists the sides that nobody gave of the inputs that were read.
func (m *Sampler) Open(t *Trace) []string {
	all := t.clone()
	for _, id := range m.open {
		if all.used.has(id) {
			all.missing.set(id)
		}
	}
	return m.space.Missing(all)
}

// Made lists what the evaluation assumed, beside the assumptions of inputs.
func (t *Trace) Made() []stage.Assumption { return t.assumptions }

// Reads is the inputs that evaluations have read; of a point of a curve the curve's position.
type Reads struct{ ids Bits }

// Add adds what was read.
func (r *Reads) Add(t *Trace) {
	if r.ids == nil {
		r.ids = make(Bits, len(t.used))
	}
	r.ids.or(t.used)
}

// Join adds what others have read.
func (r *Reads) Join(o *Reads) {
	if o.ids != nil {
		r.Add(&Trace{used: o.ids})
	}
}

// Has tells whether an input was read.
func (r *Reads) Has(id int) bool { return r.ids != nil && r.ids.has(id) }
