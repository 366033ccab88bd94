package modulation

import (
	"math"

	"floatrail/calc/recharge"
)

// Kind tells what an interval of a carrier period is.
type Kind uint8

// Kinds of interval.
const (
	Waiting    Kind = iota // the node is not low
	FirstDead              // dead time after the high side turns off, node low
	LowSide                // the low side is on
	SecondDead             // dead time before the high side turns on, node low
	Freewheel              // the low side's diode carries the current
	Idle                   // between bursts
)

// Leg is a half-bridge and its floating supply at one set of values, without what the modulation decides.
type Leg struct {
	Element     recharge.Element
	Capacitance float64 // C_B, effective [F]
	Supply, Bus float64 // V_DD, V_BUS [V]
	Period      float64 // 1/f_sw [s]
	DeadTime    float64 // of each edge [s]
	Shortest    float64 // shortest pulse that the driver passes whole [s]
	Load        float64 // standing loads [A]
	PullDown    float64 // loads across V_BS while the high side is on [S]
	NodeCharge  float64 // that the load current must carry before the node is low, 2·Q_oss [C]
	Ripple      float64 // of the load current, peak to peak [A]
	LowTime     float64 // longest on-time of the low side, after which the node floats; +Inf: all that is left [s]
	DiodeLow    bool    // the low side is a diode: no dead times, and nothing pulls the node down but the load current
	Nodes       Nodes

	// Leaving at a rising edge of the gate, as a line over V_BS after it, and of the node; Least as recharge.Period's ChargeLeast.
	Charge, ChargePerVolt, Least float64 // [C], [F], [C]
	Junction                     float64 // charge of D_B's junction, which returns as the node falls [C]
	RecoverySpec, RecoveryTau    float64 // [C], [s]
}

// Nodes is the node voltage while it is low, at a current out of the node [A].
type Nodes interface {
	LowOn(current float64) float64        // with the low side on, at a current of either sign [V]
	Freewheeling(current float64) float64 // through its diode alone, at a positive current [V]
}

// mostIntervals is the largest number of intervals in which the high side is off.
const mostIntervals = 4

// layout is one carrier period, from where the high side turns on or would turn on.
type layout struct {
	code      uint8   // of the form: equal codes lie on one smooth law
	time      float64 // length of the period [s]
	on        float64 // the high side is on [s]
	rest      float64 // after the node has risen again, before the next period [s]
	peak      float64 // current at the end of the on-time [A]
	off       [mostIntervals]recharge.Interval
	kinds     [mostIntervals]Kind
	n         int
	commanded float64 // pulse that the high side is commanded for [s]
}

// Bits of a layout's code.
const (
	formFull    uint8 = 1 << iota // the high side is on throughout
	formStay                      // the node is low throughout
	formGap                       // the low side stays off
	fallsOver                     // the current brings the node over within the time it has
	peakSources                   // the current leaves the node as the high side turns off
	heldLow                       // and as it turns on
)

func (y *layout) add(kind Kind, t, drive float64, conducts bool, load float64) {
	if t <= 0 {
		return
	}
	y.off[y.n] = recharge.Interval{Duration: t, Drive: drive, Conducts: conducts, Load: load}
	y.kinds[y.n] = kind
	y.n++
}

// low tells whether the node is low at some time.
func (y *layout) low() bool {
	for k := range y.n {
		if y.kinds[k] != Waiting {
			return true
		}
	}
	return false
}

// startsLow and endsLow tell whether the node is low at the ends of the period.
func (y *layout) startsLow() bool { return y.on == 0 && y.n > 0 && y.kinds[0] != Waiting }
func (y *layout) endsLow() bool   { return y.rest == 0 && y.n > 0 && y.kinds[y.n-1] != Waiting }

// full tells whether the high side is on throughout.
func (y *layout) full() bool { return y.code&formFull != 0 }

// conducts tells whether the element can conduct at some time.
func (y *layout) conducts() bool {
	for k := range y.n {
		if y.off[k].Conducts {
			return true
		}
	}
	return false
}

// carrier lays out a carrier period of both switches at a duty and a load current out of the node [1], [A].
func (l *Leg) carrier(d, current float64, y *layout) {
	peak, valley := current+l.Ripple/2, current-l.Ripple/2
	free := !l.Element.Switch // a diode conducts whenever the node is low
	*y = layout{time: l.Period, peak: peak}
	if peak > 0 {
		y.code |= peakSources
	}
	if d >= 1 {
		y.code |= formFull
		y.on, y.commanded = l.Period, l.Period
		return
	}
	on, low := d*l.Period, (1-d)*l.Period
	if d > 0 && !l.DiodeLow {
		on, low = math.Max(0, on-l.DeadTime), low-l.DeadTime
	}
	y.commanded = on
	floats := 0.0 // neither switch conducts, and the node is not low
	if l.LowTime < low {
		floats, low = low-l.LowTime, l.LowTime
	}
	switch {
	case d <= 0 || on <= 0 || on < l.Shortest: // the low side stays on, or its diode carries what flows
		y.code |= formStay
		if l.DiodeLow {
			l.gap(l.Period, peak, current, y)
			return
		}
		y.add(LowSide, l.Period, l.Supply-l.Nodes.LowOn(current), true, l.Load)
		return
	case l.DiodeLow || low <= 0 || low < l.Shortest:
		y.code |= formGap
		y.on, y.rest = on, floats
		l.gap(l.Period-on-floats, peak, current, y)
		return
	}
	y.on = on
	if peak > 0 {
		wait := math.Min(l.NodeCharge/peak, l.DeadTime)
		if wait < l.DeadTime {
			y.code |= fallsOver
		}
		y.add(Waiting, wait, 0, false, l.Load)
		y.add(FirstDead, l.DeadTime-wait, l.Supply-l.Nodes.Freewheeling(peak), free, l.Load)
	} else {
		y.add(Waiting, l.DeadTime, 0, false, l.Load)
	}
	y.add(LowSide, low, l.Supply-l.Nodes.LowOn(current), true, l.Load)
	if valley > 0 && floats == 0 {
		y.code |= heldLow
		y.add(SecondDead, l.DeadTime, l.Supply-l.Nodes.Freewheeling(valley), free, l.Load)
	} else {
		y.rest = floats + l.DeadTime
	}
}

// gap is a time with both switches off [s]: the peak of the current brings the node over, its mean holds it there [A].
func (l *Leg) gap(t, peak, current float64, y *layout) {
	if !(current > 0) {
		y.add(Waiting, t, 0, false, l.Load)
		return
	}
	wait := 0.0
	if y.on > 0 {
		wait = math.Min(l.NodeCharge/peak, t)
	}
	if wait < t {
		y.code |= fallsOver
	}
	y.add(Waiting, wait, 0, false, l.Load)
	y.add(Freewheel, t-wait, l.Supply-l.Nodes.Freewheeling(current), !l.Element.Switch, l.Load)
}

// period is a layout as the recharge law takes it, after another one: from just before the node rises, if it does. What the loads take in the rest of
// the one before is drawn with the edges.
func (l *Leg) period(before, y *layout) recharge.Period {
	gate := y.on > 0 && !before.full()
	rises := before.low() && (before.rest > 0 || !y.startsLow())
	falls := y.low() && !(y.startsLow() && before.endsLow())
	p := recharge.Period{
		Element: l.Element, Capacitance: l.Capacitance,
		On:  recharge.Interval{Duration: y.on, Drive: l.Supply - l.Bus, Conducts: !l.Element.Switch && l.Bus < l.Supply, Load: l.Load, Conductance: l.PullDown},
		Off: y.off[:y.n],
	}
	blocked := l.Load * before.rest
	p.Charge, p.ChargeLeast = blocked, blocked
	if gate {
		p.Charge += l.Charge
		p.ChargePerVolt = l.ChargePerVolt
		p.ChargeLeast += l.Least
	}
	if rises {
		p.Charge += l.Junction
		p.ChargeLeast += l.Junction
		p.RecoverySpec, p.RecoveryTau = l.RecoverySpec, l.RecoveryTau
		p.Before = before.off[:before.n]
	}
	if falls {
		p.Return = l.Junction
	}
	return p
}
