package recharge

import "math"

// Period is one switching period, from just before a rising edge of the node to just before the next.
type Period struct {
	Element     Element
	Capacitance float64    // C_B, effective [F]
	On          Interval   // high side on; its Drive, V_DD - V_BUS, normally blocks the element
	Off         []Interval // in order: parts of the dead time, low side on, parts of the dead time

	// Leaving at the rising edge: Charge + ChargePerVolt·v' with v' = V_BS after the edge, as the gate takes more at more
	// drive; so v' = (C·v - Charge - Q_rr)/(C + ChargePerVolt).
	Charge        float64 // part that does not depend on V_BS [C]
	ChargePerVolt float64 // C_on of the gates [F]
	ChargeLeast   float64 // least that leaves, where the line of the gates' charge runs below 0, far under their plateau; not negative [C]
	Return        float64 // returned at the falling edge, junction charge of D_B [C]

	// Before are the intervals that precede the rising edge; nil: those of Off, the periods being alike.
	Before []Interval

	RecoverySpec float64 // Q_rr of D_B in its test, the most it can be; 0: none [C]
	RecoveryTau  float64 // τ = Q_spec/I_test [s]

	Start   float64 // V_BS from which a collapse is counted, V_DD - V_F - V_LS [V]
	Lockout float64 // V_UV-; 0: do not count [V]
}

// Map returns V_BS just before the next rising edge [V] from v, V_BS just before this one [V], and its derivative [1].
func (p Period) Map(v float64) (v1, dv float64) {
	w := p.Element.law()
	return p.pass(&w, v, nil)
}

// trace is what happens within a period.
type trace struct {
	after, low, high float64 // after the rising edge, lowest, highest [V]
	onEnd            float64 // at the end of the on-time [V]
	afterSlope       float64 // their derivatives by v before the edge [1]
	lowSlope         float64
	highSlope        float64
	recoverySlope    float64 // of recovery and drawn [F]
	drawnSlope       float64
	highest          int     // where high is: index into Off, -1: end of the on-time with Return
	recovery         float64 // Q_rr [C]
	drawn            float64 // edges and loads less Return [C]
	carried          float64 // ∫i dt through the element [C]
	conducting       float64 // length of the intervals that recharge [s]
	recharged        float64 // charge in those [C]
}

// rechargeShare is the part of the charge drawn per period from which on an interval counts as one that recharges [1].
const rechargeShare = 0.01

// pass is Map; tr, if any, receives what happened.
func (p *Period) pass(w *law, v float64, tr *trace) (v1, dv float64) {
	c := p.Capacitance
	recovery, falls := p.recovered(w, v)
	after, taken := (c*v-p.Charge-recovery)/(c+p.ChargePerVolt), c+p.ChargePerVolt
	left, perVolt := p.Charge+p.ChargePerVolt*after, p.ChargePerVolt
	if left < p.ChargeLeast {
		after, taken, left, perVolt = v-(p.ChargeLeast+recovery)/c, c, p.ChargeLeast, 0
	}
	dv = (c + falls) / taken
	edge := dv
	if tr != nil {
		w.interval = 1
	}
	v1, slope, carried := w.advance(after, &p.On, c)
	dv *= slope
	if tr == nil {
		v1 += p.Return / c
		for k := range p.Off {
			v1, slope, _ = w.advance(v1, &p.Off[k], c)
			dv *= slope
		}
		return v1, dv
	}
	*tr = trace{after: after, onEnd: v1, low: after, afterSlope: edge, lowSlope: edge, recovery: recovery, recoverySlope: -falls, highest: -1, carried: carried}
	if v1 < after {
		tr.low, tr.lowSlope = v1, dv
	}
	tr.drawn = left + recovery - p.Return + carried - c*(v1-after)
	tr.drawnSlope = perVolt*edge - falls
	if p.On.Conductance > 0 {
		tr.drawnSlope -= c * (dv - edge) // as the element blocks; see shortStep
	}
	for k := range p.Off {
		tr.drawn += p.Off[k].Load * math.Max(p.Off[k].Duration, 0)
	}
	tr.count(carried, p.On.Duration)
	v1 += p.Return / c
	tr.high, tr.highSlope = after, edge
	if v1 > after {
		tr.high, tr.highSlope = v1, dv
	}
	for k := range p.Off {
		iv := &p.Off[k]
		start := v1
		if w.interval = k + 2; w.interval >= len(w.before) {
			w.interval = 0
		}
		v1, slope, carried = w.advance(start, iv, c)
		dv *= slope
		tr.carried += carried
		if iv.Conductance > 0 {
			tr.drawn += carried - c*(v1-start) - iv.Load*iv.Duration
		}
		tr.count(carried, iv.Duration)
		if v1 < tr.low {
			tr.low, tr.lowSlope = v1, dv
		}
		if v1 > tr.high {
			tr.high, tr.highSlope, tr.highest = v1, dv, k
		}
	}
	w.interval = 0
	return v1, dv
}

// count adds an interval of length t [s] that carried a charge [C] to those that recharge if it matters.
func (tr *trace) count(charge, t float64) {
	if charge > 0 && charge >= rechargeShare*tr.drawn {
		tr.conducting += t
		tr.recharged += charge
	}
}

// recovered returns the recovery charge Q_rr [C] of D_B that leaves C_B when the node rises at V_BS = v [V], and -dQ_rr/dv [F].
//
// For a current i at the edge that has flowed for t_on it is min(Q_spec, τ·i·(1 - e^(-t_on/τ))): the charge stored by dq/dt = i - q/τ. Which of
// the last intervals belong to t_on depends on v: a low-side-on interval may block behind a dead time that conducts. To
// keep Q_rr continuous the intervals are taken backwards from the edge, each adding
//
//	τ·i_k·(e^(-t_k/τ) - e^(-(t_k + D_k)/τ))      t_k: from its end to the edge, D_k: its length
//
// with i_k the current at v in that interval, no more than that of the intervals after it, until it blocks. Equal or stronger
// drives before the last one give the formula with their common t_on, a blocked one gives it with t_on of the last.
// Every i_k falls with v, so Q_rr falls with v and the map stays increasing. An interval at the edge that blocks, or a
// disconnected element, leaves nothing to recover.
func (p *Period) recovered(w *law, v float64) (charge, falls float64) {
	tau := p.RecoveryTau
	if !(p.RecoverySpec > 0) || !(tau > 0) || w.linear {
		return 0 * v, 0
	}
	least, slope, left, weakest := math.Inf(1), 0.0, 1.0, math.Inf(1)
	before := p.Before
	if before == nil {
		before = p.Off
	}
	for k := len(before) - 1; k >= 0; k-- {
		iv := &before[k]
		if iv.Duration <= 0 {
			continue
		}
		if !iv.Conducts || v >= iv.Drive {
			break
		}
		if iv.Drive < weakest { // current rises with drive
			weakest = iv.Drive
			least, slope = w.current(weakest - v)
		}
		passed := -math.Expm1(-iv.Duration / tau)
		charge += tau * least * left * passed
		falls += tau * slope * left * passed
		left *= 1 - passed
	}
	if charge >= p.RecoverySpec {
		return p.RecoverySpec, 0
	}
	return charge, falls
}

// PeriodsUntil counts the periods from V_BS = start [V], just before a rising edge, up to and including the first in which V_BS falls
// below level [V]; -1 when that does not happen within most periods or ever.
func (p Period) PeriodsUntil(start, level float64, most int) int {
	w := p.Element.law()
	var tr trace
	for n := 1; n <= most; n++ {
		next, _ := p.pass(&w, start, &tr)
		if tr.low < level {
			return n
		}
		if !(next < start) { // the map is increasing: it never comes down from here
			return -1
		}
		start = next
	}
	return -1
}
