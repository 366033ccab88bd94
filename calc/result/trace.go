package result

import (
	"math"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/rule"
	"floatrail/calc/stage"
)

// traceKinds of operating points by their kind of mode.
var traceKinds = map[string]string{stage.ModeFixedDuty: finding.TracePeriod, stage.ModeSinusoidal: finding.TraceFundamental,
	stage.ModeSixStep: finding.TraceFundamental, stage.ModeBurst: finding.TraceBurst, stage.ModeHeldOn: finding.TraceHold}

// traceOf is V_BS over time at the draw at which its lowest value binds; nothing where that is not known.
func traceOf(p *rule.Point, worst *corner.Worst) (out []finding.TracePoint) {
	if worst.Space == nil {
		return nil
	}
	circuit.Of(worst.Draw).Trace(func(t, angle, v float64) {
		out = append(out, finding.TracePoint{OperatingPoint: p.Name(), Kind: traceKinds[p.Mode()], Time: t, Angle: angle, FloatingVoltage: v})
	})
	return out
}

// tracePrecharge is V_BS over the first charge at the draw of all operating points at which it takes longest.
func tracePrecharge(b *rule.Bench) (out []finding.TracePoint) {
	var slowest corner.Worst
	for i := range b.Points {
		r := b.Range(&b.Points[i], func(c *circuit.Circuit) float64 {
			t, _ := c.FirstChargeTime()
			return t
		}, quantity.Time)
		if r.High.Space == nil {
			return nil
		}
		if slowest.Space == nil || r.High.Value < slowest.Value { // negative: the largest time
			slowest = r.High
		}
	}
	circuit.Of(slowest.Draw).TracePrecharge(func(t, v float64) {
		out = append(out, finding.TracePoint{Kind: finding.TracePrecharge, Time: t, Angle: math.NaN(), FloatingVoltage: v})
	})
	return out
}
