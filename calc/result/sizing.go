package result

import (
	"math"

	"floatrail/calc/charge"
	"floatrail/calc/circuit"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// Sizing gives the charge budget of the stage and the parts that fit it. The trial is a copy of the stage before Complete; parts that the
// stage does not name yet are put into it.
func Sizing(b *rule.Bench, trial *stage.Stage, p *stage.Policy) *finding.Sizing {
	out := &finding.Sizing{}
	t := newTrial(trial, p)
	t.bench.Interrupted, t.asGiven.Interrupted = b.Interrupted, b.Interrupted
	budget(t.asGiven, out)
	t.recommend(out)
	for _, from := range []*rule.Bench{t.asGiven, t.bench} {
		for _, a := range from.Assumptions() {
			b.Adopt(a)
		}
	}
	return out
}

// budget fills the spans over all operating points.
func budget(b *rule.Bench, out *finding.Sizing) {
	over := func(f rule.Number, d quantity.Dimension) (finding.Span, string) {
		all := finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: d}
		where := ""
		for i := range b.Points {
			p := &b.Points[i]
			if p.Operating == nil {
				continue
			}
			r := b.Range(p, f, d)
			if r.Low.Space == nil {
				return finding.Span{Min: math.NaN(), Typ: math.NaN(), Max: math.NaN(), Dimension: d}, ""
			}
			if where == "" || r.Span.Max > all.Max {
				all.Max, all.Typ, where = r.Span.Max, r.Span.Typ, p.Name()
			}
			if !(all.Min <= r.Span.Min) {
				all.Min = r.Span.Min
			}
		}
		return all, where
	}
	for k, name := range charge.ItemNames() {
		s, where := over(func(c *circuit.Circuit) float64 {
			if c.Point.HeldOn != nil {
				h, t := c.Hold()
				mean := h.Start // mean V_BS over the hold, at which the pull-down takes what the law says
				if h.Loads.PullDown > 0 {
					mean = (c.CycleCharge() - h.Loads.Total()*t) / (h.Loads.PullDown * t)
				}
				return charge.Items(h.Loads, charge.Edge{}, charge.Interval{Period: t, OnTime: t, Voltage: mean})[k].Charge
			}
			return c.Budget()[k].Charge
		}, quantity.Charge)
		out.Budget = append(out.Budget, finding.BudgetItem{Name: name, Charge: s, OperatingPoint: where})
	}
	out.TotalCharge, _ = over(func(c *circuit.Circuit) float64 { return c.CycleCharge() }, quantity.Charge)
	out.VoltageBudget, _ = over(func(c *circuit.Circuit) float64 { return c.Drop(c.Kept()) }, quantity.Voltage)
	out.MinimumCapacitance, _ = over(func(c *circuit.Circuit) float64 { return c.MinimumCapacitance(c.Kept()) }, quantity.Capacitance)
	out.EffectiveCapacitance, _ = over(func(c *circuit.Circuit) float64 { return c.Capacitance() }, quantity.Capacitance)
	out.Ripple, _ = over(func(c *circuit.Circuit) float64 {
		if c.Point.HeldOn != nil {
			h, t := c.Hold()
			return h.Start - h.Voltage(t)
		}
		if c.Steady().Collapses {
			return math.Inf(1)
		}
		return c.Droop()
	}, quantity.Voltage)
}
