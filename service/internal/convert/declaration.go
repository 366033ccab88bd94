package convert

import (
	"fmt"
	"math"

	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protoreflect"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

// dimension is the domain's name of a declared dimension.
func dimension(d pb.Declaration_Dimension) quantity.Dimension {
	switch d {
	case pb.Declaration_VOLTAGE:
		return quantity.Voltage
	case pb.Declaration_CURRENT:
		return quantity.Current
	case pb.Declaration_RESISTANCE:
		return quantity.Resistance
	case pb.Declaration_CAPACITANCE:
		return quantity.Capacitance
	case pb.Declaration_INDUCTANCE:
		return quantity.Inductance
	case pb.Declaration_CHARGE:
		return quantity.Charge
	case pb.Declaration_TIME:
		return quantity.Time
	case pb.Declaration_FREQUENCY:
		return quantity.Frequency
	case pb.Declaration_TEMPERATURE:
		return quantity.Temperature
	case pb.Declaration_TEMPERATURE_DIFFERENCE:
		return quantity.TemperatureDifference
	case pb.Declaration_RATIO:
		return quantity.Ratio
	case pb.Declaration_POWER:
		return quantity.Power
	case pb.Declaration_ENERGY:
		return quantity.Energy
	case pb.Declaration_CONDUCTANCE:
		return quantity.Conductance
	case pb.Declaration_VOLTAGE_SLEW:
		return quantity.VoltageSlew
	case pb.Declaration_CURRENT_SLEW:
		return quantity.CurrentSlew
	case pb.Declaration_THERMAL_RESISTANCE:
		return quantity.ThermalResistance
	case pb.Declaration_ANGLE:
		return quantity.Angle
	case pb.Declaration_VOLTAGE_PER_TEMPERATURE:
		return quantity.VoltagePerTemperature
	}
	return quantity.None
}

// spread is the domain's name of a declared class of spread.
func spread(s pb.Declaration_Spread) stage.Spread {
	switch s {
	case pb.Declaration_SPREAD_CHARGE:
		return stage.SpreadCharge
	case pb.Declaration_SPREAD_RESISTANCE:
		return stage.SpreadResistance
	case pb.Declaration_SPREAD_CURRENT:
		return stage.SpreadCurrent
	case pb.Declaration_SPREAD_SEMICONDUCTOR_CAPACITANCE:
		return stage.SpreadSemiconductorCapacitance
	case pb.Declaration_SPREAD_TRANSCONDUCTANCE:
		return stage.SpreadTransconductance
	case pb.Declaration_SPREAD_INDUCTANCE:
		return stage.SpreadInductance
	case pb.Declaration_SPREAD_DROP:
		return stage.SpreadDrop
	case pb.Declaration_SPREAD_THRESHOLD:
		return stage.SpreadThreshold
	case pb.Declaration_SPREAD_DELAY:
		return stage.SpreadDelay
	case pb.Declaration_SPREAD_SUPPLY:
		return stage.SpreadSupply
	case pb.Declaration_SPREAD_LOCKOUT:
		return stage.SpreadLockout
	case pb.Declaration_SPREAD_RESISTOR:
		return stage.SpreadResistor
	case pb.Declaration_SPREAD_CAPACITOR:
		return stage.SpreadCapacitor
	case pb.Declaration_SPREAD_RECOVERY_CHARGE:
		return stage.SpreadRecoveryCharge
	case pb.Declaration_SPREAD_EXACT:
		return stage.SpreadExact
	}
	return stage.NoSpread
}

// law is the domain's name of a declared movement with temperature.
func law(l pb.Declaration_TemperatureLaw) stage.Law {
	switch l {
	case pb.Declaration_LAW_DIODE_DROP:
		return stage.DiodeDrop
	case pb.Declaration_LAW_LEAKAGE:
		return stage.Leakage
	case pb.Declaration_LAW_ON_RESISTANCE:
		return stage.OnResistance
	}
	return stage.Constant
}

// absence is the domain's meaning of absence; policy tells a number of the policy.
func absence(a pb.Declaration_Absence) (meaning stage.Absence, policy bool) {
	switch a {
	case pb.Declaration_ASSUMED:
		return stage.Assumed, false
	case pb.Declaration_NONE:
		return stage.None, false
	case pb.Declaration_POLICY:
		return stage.None, true
	}
	return stage.Unknown, false
}

// direction is the domain's name of the direction of an assumption.
func direction(d pb.Declaration_Direction) stage.Direction {
	switch d {
	case pb.Declaration_CONSERVATIVE:
		return stage.Conservative
	case pb.Declaration_OPTIMISTIC:
		return stage.Optimistic
	}
	return stage.Neutral
}

// option is the declaration that the contract gives a field; nil for labels.
func option(d protoreflect.FieldDescriptor) *pb.Declaration {
	if !proto.HasExtension(d.Options(), pb.E_Value) {
		return nil
	}
	return proto.GetExtension(d.Options(), pb.E_Value).(*pb.Declaration)
}

// declaration reads the option of a field. A contract that is incomplete or that does not parse is a bug of the build and panics.
func declaration(d protoreflect.FieldDescriptor) *stage.Declaration {
	o := option(d)
	if o == nil {
		return nil
	}
	dim := dimension(o.GetDimension())
	if dim == quantity.None {
		panic(fmt.Sprintf("convert: %s declares no dimension", d.FullName()))
	}
	parse := func(what, text string) float64 {
		v, _, err := quantity.Parse(text, dim)
		if err != nil {
			panic(fmt.Sprintf("convert: %s of %s: %v", what, d.FullName(), err))
		}
		return v
	}
	optional := func(what string, text *string) float64 {
		if text == nil {
			return math.NaN()
		}
		return parse(what, *text)
	}
	assumed := o.GetAssumed()
	out := &stage.Declaration{
		Symbol:     o.GetSymbol(),
		Dimension:  dim,
		Low:        parse("low", o.GetLow()),
		High:       parse("high", o.GetHigh()),
		AssumedMin: math.NaN(),
		AssumedTyp: math.NaN(),
		AssumedMax: math.NaN(),
		Direction:  direction(o.GetDirection()),
		Reason:     o.GetReason(),
		Spread:     spread(o.GetSpread()),
		Law:        law(o.GetTemperatureLaw()),
		OneSided:   o.GetOneSided(),
	}
	out.Absence, out.PolicyDefault = absence(o.GetAbsent())
	if assumed != nil {
		out.AssumedMin = optional("assumed min", assumed.Min)
		out.AssumedTyp = optional("assumed typ", assumed.Typ)
		out.AssumedMax = optional("assumed max", assumed.Max)
	}
	return out
}

// rangeText says what a value of the declaration is expected to be: "charge from 10 pC to 100 µC".
func rangeText(d *stage.Declaration) string {
	return d.Dimension.String() + " from " + quantity.Format(d.Low, d.Dimension) + " to " + quantity.Format(d.High, d.Dimension)
}
