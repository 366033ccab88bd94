package modulation

// kept is the steps of a solution in little memory: a search keeps thousands of solutions.
type kept struct {
	steps  []keptStep
	values []keptValue // of the positions of all steps
}

type keptStep struct {
	from, to, first int // periods; first of its values
	run             int32
	merged          bool
}

// keptValue is V_BS before the edge of a period and at the end of its on-time, and what drives the element then [V].
type keptValue struct{ before, onEnd, across float64 }

func keep(steps []step) kept {
	n := 0
	for i := range steps {
		n += len(steps[i].order())
	}
	k := kept{steps: make([]keptStep, len(steps)), values: make([]keptValue, 0, n)}
	for i := range steps {
		s := &steps[i]
		k.steps[i] = keptStep{from: s.from, to: s.to, first: len(k.values), run: int32(s.run), merged: s.merged}
		for _, j := range s.order() {
			k.values = append(k.values, keptValue{s.v[j], s.seen[j].onEnd, s.seen[j].across})
		}
	}
	return k
}

// all gives the steps back, with what is kept of the periods seen.
func (k *kept) all() []step {
	out := make([]step, len(k.steps))
	for i := range k.steps {
		q := &k.steps[i]
		s := &out[i]
		*s = step{run: int(q.run), from: q.from, to: q.to, merged: q.merged}
		for _, j := range s.order() {
			v := &k.values[q.first+j]
			s.v[j], s.seen[j].onEnd, s.seen[j].across = v.before, v.onEnd, v.across
		}
	}
	return out
}
