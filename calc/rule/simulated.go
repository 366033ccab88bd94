package rule

import (
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
)

// Lanes of work on one point.
const (
	laneMain = iota
	laneEvents
	laneSimulated
	lanes
)

// lane is that in which a rule of a role is searched.
func (b *Bench) lane(r *Rule, role string) int {
	switch {
	case b.simulated && r.Simulated != nil && r.Simulated(role):
		return laneSimulated
	case r.Events:
		return laneEvents
	}
	return laneMain
}

// spaces are those that a rule of a role is searched in.
func (b *Bench) spaces(p *Point, r *Rule, role string) []*corner.Space {
	return [lanes][]*corner.Space{p.Spaces, p.Events, p.Simulated}[b.lane(r, role)]
}

// Simulate makes the rules and results that know how judge simulated events. It is called before anything runs.
func (b *Bench) Simulate() {
	b.simulated = true
	for i := range b.Points {
		p := &b.Points[i]
		for _, s := range p.Spaces {
			n := corner.NewSpace(b.Stage, b.Policy, p.Operating, s.Set)
			n.Frugal, n.Model = true, b.simulation()
			p.Simulated = append(p.Simulated, n)
		}
	}
}

// Twins are twins of the simulated spaces of a point.
func (b *Bench) Twins(p *Point) *Point {
	out := Point{Operating: p.Operating}
	for _, s := range p.Simulated {
		out.Spaces = append(out.Spaces, s.Twin(b.simulation()))
	}
	return &out
}

// Simulates tells whether events are simulated.
func (b *Bench) Simulates() bool { return b.simulated }

// simulation is a model that simulates events.
func (b *Bench) simulation() *circuit.Simulation {
	return &circuit.Simulation{Interrupted: b.Interrupted, Counts: &b.counts}
}

// Counts is what the simulations took so far.
func (b *Bench) Counts() *circuit.Counts { return &b.counts }

// adopt brings what was simulated for single findings back to the spaces.
func (b *Bench) adopt(jobs []*job) {
	for _, j := range jobs {
		if j.twin != nil {
			j.home.Adopt(j.twin)
			j.twin = nil
		}
	}
}

// surveyParts is the number of parts in which the draws of one event, or of one modulated operating point, are surveyed.
const surveyParts = 3

// survey evaluates what is dear where the searches will look first: the events of all operating points where they are simulated, and the periodic solutions
// of modulated points. As any of these draws may be taken by any processor, none of them waits for a point that takes long.
func (b *Bench) survey() {
	type task struct {
		homes []*corner.Space // which come to know what the twin does
		twin  *corner.Space
		what  corner.Function
		part  int
	}
	var tasks []task
	add := func(what corner.Function, model func() any, homes ...*corner.Space) {
		for part := range surveyParts {
			tasks = append(tasks, task{homes, homes[0].Twin(model()), what, part})
		}
	}
	for i := range b.Points {
		p := &b.Points[i]
		if home := corner.Home(p.Spaces); home.Dear {
			add(func(d *corner.Draw) float64 { return circuit.Of(d).Cycle().Low.Value }, func() any { return nil }, home, corner.Home(p.Events))
		}
		if !b.simulated {
			continue
		}
		for _, e := range circuit.Events() {
			if circuit.Occurs(b.Stage, p.Operating, e) {
				add(func(d *corner.Draw) float64 { return circuit.Of(d).Survey(e) }, func() any { return b.simulation() }, corner.Home(p.Simulated))
			}
		}
	}
	SideBySide(len(tasks), func(i int) {
		t := &tasks[i]
		if b.Stopped() {
			return
		}
		b.guarded(&job{}, func() { t.twin.Survey(t.what, t.part, surveyParts) })
	})
	for i := range tasks {
		for _, home := range tasks[i].homes {
			home.Adopt(tasks[i].twin)
		}
	}
}
