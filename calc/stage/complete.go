package stage

import (
	"fmt"
	"math"
	"reflect"

	"floatrail/calc/capacitor"
	"floatrail/calc/quantity"
)

// Complete fills missing ends of spreads by the policy, applies declared assumptions, adds what classes of parts imply and numbers the
// quantities. It is to be called once, on a stage that passed Check.
func (s *Stage) Complete(p *Policy) {
	s.inputs = append(s.inputs[:0], nil)
	s.GateSupply.Reservoir.complete(p)
	s.Bootstrap.Capacitor.complete(p)
	s.HighSide.complete()
	s.LowSide.complete()
	s.number(reflect.ValueOf(s).Elem(), Surroundings, p)
}

var (
	quantityType = reflect.TypeFor[Quantity]()
	switchType   = reflect.TypeFor[Switch]()
	pointsType   = reflect.TypeFor[List[OperatingPoint]]() // a list that is no curve
)

// number walks the stage in the order of its fields.
func (s *Stage) number(v reflect.Value, d Domain, p *Policy) {
	switch v.Kind() {
	case reflect.Pointer:
		if !v.IsNil() {
			s.number(v.Elem(), d, p)
		}
	case reflect.Slice:
		for i := range v.Len() {
			s.number(v.Index(i), d, p)
		}
	case reflect.Struct:
		if v.Type() == quantityType {
			q := v.Addr().Interface().(*Quantity)
			q.Domain = d
			q.complete(p)
			q.ID = len(s.inputs)
			s.inputs = append(s.inputs, q)
			return
		}
		if v.Type() == switchType {
			d = Junction
		}
		if c, ok := v.Addr().Interface().(interface{ curve() (*Quantity, string) }); ok && v.Type() != pointsType {
			s.numberCurve(v, c, d, p)
			return
		}
		for i := range v.NumField() {
			if f := v.Field(i); f.CanSet() {
				s.number(f, d, p)
			}
		}
	}
}

// numberCurve numbers the position of a characteristic and its points, which follow the position.
func (s *Stage) numberCurve(v reflect.Value, c interface{ curve() (*Quantity, string) }, d Domain, p *Policy) {
	q, field := c.curve()
	*q = Absent(field, &Declaration{Dimension: quantity.Ratio, Low: math.Inf(-1), High: math.Inf(1)})
	q.ID, q.Domain = len(s.inputs), d
	s.inputs = append(s.inputs, q)
	first := len(s.inputs)
	s.number(v.FieldByName("Items"), d, p)
	q.Triple = Triple{0, 0, 0}
	for _, point := range s.inputs[first:] {
		if point.hasSpread() {
			point.Along = q.ID
			q.FilledBelow, q.FilledAbove = q.FilledBelow || point.FilledBelow, q.FilledAbove || point.FilledAbove
			q.Triple = Triple{-1, 0, 1}
		}
	}
}

// hasSpread tells whether a completed quantity has a range at some temperature.
func (q *Quantity) hasSpread() bool {
	if q.Min < q.Max {
		return true
	}
	for _, a := range q.At {
		if a.Min < a.Max {
			return true
		}
	}
	return false
}

func (q *Quantity) complete(p *Policy) {
	if q.Declare == nil {
		q.Declare = undeclared
	}
	if !q.Given() {
		if q.Declare.Absence != Assumed {
			return
		}
		typ := q.Declare.AssumedTyp
		q.Triple = Triple{firstOf(q.Declare.AssumedMin, typ), typ, firstOf(q.Declare.AssumedMax, typ)}
		q.assume(describe(q.Triple, q.Declare.Dimension), q.Declare.Direction, q.Declare.Reason)
		return
	}
	if len(q.At) == 0 {
		q.fill(&q.Triple, p, "")
		return
	}
	q.At = withReference(q.At, q.Triple)
	for i := range q.At {
		q.fill(&q.At[i].Triple, p, fmt.Sprintf(" at %s", quantity.Format(q.At[i].Temperature, quantity.Temperature)))
	}
	q.Triple = q.interpolate(ReferenceTemperature)
}

// withReference adds the triple that stands beside the entries as the entry at the reference temperature.
func withReference(at []AtTemperature, t Triple) []AtTemperature {
	out := make([]AtTemperature, 0, len(at)+1)
	placed := t.IsMissing()
	for _, a := range at {
		if !placed && a.Temperature >= ReferenceTemperature {
			placed = true
			if a.Temperature > ReferenceTemperature {
				out = append(out, AtTemperature{ReferenceTemperature, t})
			}
		}
		out = append(out, a)
	}
	if !placed {
		out = append(out, AtTemperature{ReferenceTemperature, t})
	}
	return out
}

// assume records an assumption; a second one is added to the first, and an optimistic one prevails.
func (q *Quantity) assume(text string, d Direction, reason string) {
	if a := q.Assumption; a != nil {
		a.Assumed += ", " + text
		a.Direction = max(a.Direction, d)
		return
	}
	q.Assumption = &Assumption{Field: q.Field, Assumed: text, Direction: d, Reason: reason}
}

// fill completes one triple: ends from typ by the class of spread, 0 below a one-sided maximum, typ in the middle of given ends. What is not
// known even then stands at what is given, and the quantity is open on that side.
func (q *Quantity) fill(t *Triple, p *Policy, where string) {
	if t.IsComplete() || t.IsMissing() {
		return
	}
	noMin, noTyp, noMax := math.IsNaN(t.Min), math.IsNaN(t.Typ), math.IsNaN(t.Max)
	exact := q.Declare.Spread == SpreadExact
	if exact && noTyp && noMin != noMax { // exactly as written, whichever end was written
		v := firstOf(t.Min, t.Max)
		*t = Triple{v, v, v}
		return
	}
	if noTyp {
		if noMin && !noMax && q.Declare.OneSided {
			t.Min, noMin = 0, false
		}
		if !noMin && !noMax {
			t.Typ = t.Min/2 + t.Max/2
			return
		}
		q.stand(t, firstOf(t.Min, t.Max), noMin, noMax)
		return
	}
	low, high, ok := p.ends(q.Declare.Spread)
	if !ok || exact && noMin != noMax { // of an exact value with one end beside typ the other end is unknown
		q.stand(t, t.Typ, noMin, noMax)
		return
	}
	a, b := t.Typ*low, t.Typ*high
	a, b = math.Min(a, b), math.Max(a, b)
	dim := q.Declare.Dimension
	if noMin {
		t.Min = a
		if !exact && a != t.Typ {
			q.FilledBelow = true
			q.assume("min "+quantity.Format(a, dim)+where, Conservative, "no such end of the spread is given; the policy's spread is taken")
		}
	}
	if noMax {
		t.Max = b
		if !exact && b != t.Typ {
			q.FilledAbove = true
			q.assume("max "+quantity.Format(b, dim)+where, Conservative, "no such end of the spread is given; the policy's spread is taken")
		}
	}
}

// stand puts what is not known at a given value and notes the sides that are open.
func (q *Quantity) stand(t *Triple, v float64, noMin, noMax bool) {
	*t = Triple{firstOf(t.Min, v), firstOf(t.Typ, v), firstOf(t.Max, v)}
	q.OpenBelow, q.OpenAbove = q.OpenBelow || noMin, q.OpenAbove || noMax
}

func describe(t Triple, d quantity.Dimension) string {
	if t.Min == t.Max {
		return quantity.Format(t.Typ, d)
	}
	return quantity.Format(t.Min, d) + " to " + quantity.Format(t.Max, d)
}

// largestCommutationCharge is more than any output capacitance holds: the node then never commutates within the dead time [C].
const largestCommutationCharge = 1e-3

func (s *Switch) complete() {
	field := s.OutputCapacitance.Field
	s.CommutationCharge = Absent(field, &Declaration{Symbol: "Q_oss", Dimension: quantity.Charge, Low: 0, High: largestCommutationCharge})
	if len(s.OutputCapacitance.Items) == 0 {
		s.CommutationCharge.Triple = Triple{0, 0, largestCommutationCharge}
		s.CommutationCharge.assume("any charge", Conservative,
			"no output capacitance is given; the node may commutate at once or not within the dead time")
	}
	s.ChargeSlope = Absent(s.GateSourceCharge.Field, &Declaration{Symbol: "dQ_G/dV", Dimension: quantity.Ratio, Low: 0, High: 1})
	if s.GateCharge.Given() && s.GateChargeVoltage.Given() && !(s.GateSourceCharge.Given() && s.GateDrainCharge.Given() && s.PlateauVoltage.Given()) {
		s.ChargeSlope.Triple = Triple{0, 0.5, 1}
		s.ChargeSlope.assume("a gate charge that is level, to one that grows by the larger of C_iss and Q_G/V", Conservative,
			"Q_GS, Q_GD and the plateau voltage, which tell how the gate charge moves with the drive, are not all given")
	}
}

// freshTime is the time at which ageing begins [s].
const freshTime = 3600

func (c *Capacitor) complete(p *Policy) {
	ratio := func(symbol string) *Declaration {
		return &Declaration{Symbol: symbol, Dimension: quantity.Ratio, Low: -1, High: 1}
	}
	c.TemperatureChange = Absent(c.Field+".dielectric", ratio("ΔC/C(T)"))
	c.Bias = Absent(c.Field+".biasCurve", ratio("bias"))
	c.Bias.Naive = 0
	c.TemperatureChange.Naive = 0
	if d := c.ServiceTime.Declare; d == nil || !c.ServiceTime.Given() {
		c.ServiceTime.complete(p)
	}
	t := &c.ServiceTime.Triple
	if math.IsNaN(t.Max) {
		t.Max = t.Typ
	}
	if !math.IsNaN(t.Max) {
		t.Max = math.Max(t.Max, freshTime)
		t.Min, t.Typ = freshTime, math.Max(freshTime, firstOf(t.Typ, t.Max))
	}
	c.ServiceTime.Naive = freshTime
	class, ok := capacitor.ParseClass(c.Dielectric)
	if !ok {
		if len(c.BiasCurve.Items) > 0 {
			c.Bias.Triple = Triple{1, 1, 1}
		}
		return
	}
	c.TemperatureChange.Triple = Triple{class.ChangeLow, 0, class.ChangeHigh}
	if class.Kind != capacitor.ClassTwo {
		c.Bias.Triple = Triple{0, 0, 0}
		if len(c.BiasCurve.Items) > 0 {
			c.Bias.Triple = Triple{1, 1, 1}
		}
		if !c.AgeingPerDecade.Given() {
			c.AgeingPerDecade.Triple = Triple{0, 0, 0}
		}
		return
	}
	switch {
	case len(c.BiasCurve.Items) > 0:
		c.Bias.Triple = Triple{1, 1, 1}
	default:
		c.Bias.Triple = Triple{0, 1, 1}
		c.Bias.assume(quantity.Format(p.ClassTwoRemaining, quantity.Ratio)+" to 1 remaining", Conservative,
			"no bias curve of a class 2 ceramic is given")
	}
	if !c.AgeingPerDecade.Given() {
		k := class.AgeingHigh
		c.AgeingPerDecade.Triple = Triple{k, k, k}
		c.AgeingPerDecade.assume(quantity.Format(k, quantity.Ratio)+" per decade", Conservative, "the usual ageing of class "+class.Code)
	}
	if math.IsNaN(c.AgeingPerDecade.Max) {
		c.AgeingPerDecade.Max = c.AgeingPerDecade.Typ
	}
}

func firstOf(a, b float64) float64 {
	if math.IsNaN(a) {
		return b
	}
	return a
}
