package stage

import (
	"math"

	"floatrail/calc/quantity"
)

// Absence tells what a missing value means.
type Absence uint8

// Meanings of absence.
const (
	Unknown Absence = iota // rules that need the value are open
	Assumed                // the declared value is used and listed
	None                   // a label, or a value that others replace
)

// Direction tells which way an assumption errs.
type Direction uint8

// Directions of assumptions.
const (
	Neutral      Direction = iota // not an assumption
	Conservative                  // the truth can only be better
	Optimistic                    // the truth may be worse
)

// String gives the contract's name of the direction.
func (d Direction) String() string {
	return [...]string{"UNSPECIFIED", "CONSERVATIVE", "OPTIMISTIC"}[d]
}

// Law is a known movement of a value with temperature, used where the data sheet does not say better.
type Law uint8

// Temperature laws.
const (
	Constant     Law = iota
	DiodeDrop        // -2 mV/K [common-practice]
	Leakage          // doubles every 10 K [common-practice]
	OnResistance     // the upper end reaches twice its 25 °C value at 150 °C [common-practice]
)

// Declaration is what the contract declares once for a field.
type Declaration struct {
	Symbol        string             // the trade's symbol
	Dimension     quantity.Dimension // of the value
	Low, High     float64            // plausible range [unit of the dimension]
	Absence       Absence
	AssumedMin    float64 // NaN where the assumption does not give it [unit of the dimension]
	AssumedTyp    float64
	AssumedMax    float64
	Direction     Direction // of the assumption
	Reason        string    // of the assumption
	Spread        Spread    // class that fills a missing end
	Law           Law
	OneSided      bool // max alone implies 0 below
	PolicyDefault bool // a number of the policy
}

// undeclared serves quantities that are made without a declaration.
var undeclared = &Declaration{Low: math.Inf(-1), High: math.Inf(1)}

// Domain tells which temperature a part takes.
type Domain uint8

// Temperature domains.
const (
	Surroundings Domain = iota // ambient temperature of the operating point
	Junction                   // junction temperature of the operating point
)

// ReferenceTemperature is the temperature of values given without one [degC].
const ReferenceTemperature = 25

// Triple is the smallest, typical and largest of a value at one temperature; NaN where not given.
type Triple struct{ Min, Typ, Max float64 }

// Missing is a triple of which nothing is given.
func Missing() Triple { return Triple{math.NaN(), math.NaN(), math.NaN()} }

// IsMissing tells whether nothing is given.
func (t Triple) IsMissing() bool {
	return math.IsNaN(t.Min) && math.IsNaN(t.Typ) && math.IsNaN(t.Max)
}

// IsComplete tells whether all three are there.
func (t Triple) IsComplete() bool {
	return !math.IsNaN(t.Min) && !math.IsNaN(t.Typ) && !math.IsNaN(t.Max)
}

// AtTemperature is a triple at one temperature [degC].
type AtTemperature struct {
	Temperature float64 // [degC]
	Triple
}

// Quantity is a value with its spread over parts and temperature. The zero Quantity is not valid: use Absent or Exact, or fill Triple.
type Quantity struct {
	Field   string // path in the request
	Declare *Declaration
	Triple                  // at ReferenceTemperature, or over temperature where At is empty and no law applies
	At      []AtTemperature // ascending in temperature
	Source  string
	// Assumption is set where the value, or an end of its spread, was not given.
	Assumption *Assumption
	// Naive is the value that a calculation at nominal values would use; rankings measure from it. NaN: the better end.
	Naive float64
	// ID numbers the quantity within its stage, from 1 on; 0 before Complete.
	ID     int
	Domain Domain
	// OpenBelow and OpenAbove tell that the end of the spread on that side is unknown: the value stands at what was given, and a result that
	// gets worse beyond it cannot be decided.
	OpenBelow, OpenAbove bool
	// FilledBelow and FilledAbove tell that the end of the spread on that side is the policy's.
	FilledBelow, FilledAbove bool
	// Along is the ID of the position of the curve that the quantity is a point of; 0: it stands alone.
	Along int
}

// Absent is an unknown value.
func Absent(field string, d *Declaration) Quantity {
	return Quantity{Field: field, Declare: d, Triple: Missing(), Naive: math.NaN()}
}

// Exact is a value without spread.
func Exact(field string, v float64) Quantity {
	return Quantity{Field: field, Declare: undeclared, Triple: Triple{v, v, v}, Naive: math.NaN()}
}

// Between is a value with a spread.
func Between(field string, low, typical, high float64) Quantity {
	return Quantity{Field: field, Declare: undeclared, Triple: Triple{low, typical, high}, Naive: math.NaN()}
}

// Known tells whether a number can be had.
func (q *Quantity) Known() bool { return q.IsComplete() }

// Given tells whether anything was written in the request.
func (q *Quantity) Given() bool { return !q.IsMissing() || len(q.At) > 0 }

// Symbol is the trade's symbol, or the last part of the path where none is declared.
func (q *Quantity) Symbol() string {
	if q.Declare != nil && q.Declare.Symbol != "" {
		return q.Declare.Symbol
	}
	for i := len(q.Field) - 1; i >= 0; i-- {
		if q.Field[i] == '.' {
			return q.Field[i+1:]
		}
	}
	return q.Field
}

// Assumption is a value that nobody gave.
type Assumption struct {
	Field     string
	Assumed   string // the value, printed
	Direction Direction
	Reason    string
}

// Range is the triple at a temperature [degC]: interpolated linearly between entries of At and constant outside them, else by the
// declared law. Where At is given, the values beside it count at ReferenceTemperature.
func (q *Quantity) Range(temperature float64) Triple {
	if len(q.At) > 0 {
		return q.interpolate(temperature)
	}
	t := q.Triple
	if q.Declare == nil {
		return t
	}
	dT := temperature - ReferenceTemperature
	switch q.Declare.Law {
	case DiodeDrop:
		shift := -2e-3 * dT
		return Triple{t.Min + shift, t.Typ + shift, t.Max + shift}
	case Leakage:
		f := math.Exp2(dT / 10)
		return Triple{t.Min * f, t.Typ * f, t.Max * f}
	case OnResistance:
		if dT > 0 {
			t.Typ *= 1 + 0.5*dT/125
			t.Max *= 1 + dT/125
		} else {
			t.Min *= math.Max(0.5, 1+0.5*dT/125)
		}
		return t
	}
	return t
}

func (q *Quantity) interpolate(temperature float64) Triple {
	at := q.At
	if temperature <= at[0].Temperature {
		return at[0].Triple
	}
	last := at[len(at)-1]
	if temperature >= last.Temperature {
		return last.Triple
	}
	for i := 1; i < len(at); i++ {
		if temperature > at[i].Temperature {
			continue
		}
		a, b := at[i-1], at[i]
		w := (temperature - a.Temperature) / (b.Temperature - a.Temperature)
		return Triple{a.Min + w*(b.Min-a.Min), a.Typ + w*(b.Typ-a.Typ), a.Max + w*(b.Max-a.Max)}
	}
	return last.Triple
}
