package study

import (
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// column is one rule in one role at one operating point, with what it found at every draw. Values have six digits, which single precision keeps.
type column struct {
	rule    *rule.Rule
	role    string
	point   int
	value   []float32 // NaN where it cannot be had
	margin  []float32 // NaN where the rule is open
	share   []float32 // of the limit
	outcome []finding.Outcome
}

// columns are the places at which rules apply.
func columns(s *stage.Stage, rules []*rule.Rule, points []*stage.OperatingPoint, draws int) []column {
	var out []column
	for _, r := range rules {
		roles := r.Roles
		if len(roles) == 0 {
			roles = []string{""}
		}
		for _, role := range roles {
			for i, op := range points {
				if r.Inapplicable(s, op, role) == "" {
					out = append(out, column{rule: r, role: role, point: i, value: make([]float32, draws), margin: make([]float32, draws),
						share: make([]float32, draws), outcome: make([]finding.Outcome, draws)})
				}
			}
		}
	}
	return out
}

// worker evaluates draws, one after another.
type worker struct {
	*run
	samplers []*corner.Sampler // of the operating points
	u        []float64         // quantiles of a draw, by ID of the input
	reads    []corner.Reads    // by column
	made     []stage.Assumption
	panicked []bool // by column

	column *column // under evaluation
	check  rule.Check
}

func (r *run) newWorker() *worker {
	w := &worker{run: r, u: make([]float64, len(r.stage.Inputs())), reads: make([]corner.Reads, len(r.columns)), panicked: make([]bool, len(r.columns))}
	for _, op := range r.points {
		w.samplers = append(w.samplers, corner.NewSampler(r.stage, r.policy, op))
	}
	return w
}

// prepare finds the quantiles of a draw.
func (w *worker) prepare(draw int) {
	for i := range w.variates {
		v := &w.variates[i]
		u := v.stream.at(w.seed, uint32(draw))
		w.u[v.input.ID] = u
		if v.twin != nil {
			w.u[v.twin.ID] = u
		}
	}
}

// at is the prepared draw at an operating point.
func (w *worker) at(point int) *corner.Draw {
	junction, ambient := float64(stage.ReferenceTemperature), float64(stage.ReferenceTemperature)
	if op := w.points[point]; op != nil {
		j, a := corner.Temperatures(op)
		junction, ambient = w.temperature(j, op.JunctionTemperature.ID), w.temperature(a, op.AmbientTemperature.ID)
	}
	return w.samplers[point].Draw(junction, ambient, func(id int, r stage.Triple) float64 { return w.distribution.At(r, w.u[id]) })
}

// temperature is the quantile of a temperature; of one without a range its only value.
func (w *worker) temperature(t stage.Triple, id int) float64 {
	if t.Min == t.Max {
		return t.Typ
	}
	return w.distribution.At(t, w.u[id])
}

// evaluate checks every rule at one draw and tells the worst outcome; false where the caller no longer waits.
func (w *worker) evaluate(draw int) (worst finding.Outcome, ok bool) {
	w.prepare(draw)
	for p := range w.points {
		d := w.at(p)
		for _, k := range w.byPoint[p] {
			if w.stopped() {
				return worst, false
			}
			c := &w.columns[k]
			margin, o, t := w.judge(k, d)
			c.outcome[draw] = o
			worst = max(worst, o)
			c.value[draw], c.margin[draw], c.share[draw] = missing, missing, missing
			if o != finding.Open {
				c.value[draw], c.margin[draw] = float32(rule.Significant(w.check.Value)), float32(margin)
				c.share[draw] = float32(c.rule.Margin(margin, w.check.Limit).Relative)
			}
			w.reads[k].Add(t)
			w.note(t.Made())
		}
	}
	return worst, true
}

// judge checks the rule of a column at a draw. A panic leaves the rule open there.
func (w *worker) judge(k int, d *corner.Draw) (margin float64, o finding.Outcome, t *corner.Trace) {
	c := &w.columns[k]
	w.column = c
	defer func() {
		if recover() != nil {
			w.panicked[k] = true
			_, t = corner.Evaluate(d, func(*corner.Draw) float64 { return 0 })
			o = finding.Open
		}
	}()
	_, t = corner.Evaluate(d, w.checked)
	s := w.samplers[c.point]
	switch margin, o = c.rule.Judge(w.check, t.Complete()); {
	case o == finding.Open || o == finding.Fail:
	case s.Beyond(d, c.rule.Worst(c.role)):
		o = finding.Open
	case o == finding.Pass && s.Optimistic(t):
		o = finding.Marginal
	}
	return margin, o, t
}

// checked is the check of the column under evaluation.
func (w *worker) checked(d *corner.Draw) float64 {
	w.check = w.column.rule.Check(circuit.Of(d), w.column.role)
	return 0
}

// note keeps assumptions.
func (w *worker) note(made []stage.Assumption) {
	for i := range made {
		known := false
		for k := range w.made {
			known = known || w.made[k] == made[i]
		}
		if !known {
			w.made = append(w.made, made[i])
		}
	}
}

// explain tells why a column is open at a draw.
func (w *worker) explain(k, draw int) (fields, reasons []string) {
	c := &w.columns[k]
	w.prepare(draw)
	d := w.at(c.point)
	w.panicked[k] = false
	_, o, t := w.judge(k, d)
	if w.panicked[k] {
		return nil, []string{"internal"}
	}
	s := w.samplers[c.point]
	fields = s.Missing(t)
	reasons = append(reasons, t.Reasons()...)
	if o == finding.Open && len(fields) == 0 && len(reasons) == 0 {
		if fields = s.Open(t); len(fields) > 0 {
			return fields, []string{"gets worse beyond an end of a spread that is not given"}
		}
		return nil, []string{"the result is not a number"}
	}
	return fields, reasons
}
