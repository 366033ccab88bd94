package charge

import "math"

// GateCharge describes the gate charge of one device as a function of the drive
// voltage. The data sheet states the total at one voltage; what the drive adds
// or saves from there follows from the slope above the plateau.
type GateCharge struct {
	Specified           float64 // total gate charge Q_spec at SpecifiedAt [C]
	SpecifiedAt         float64 // drive voltage V_spec of the specification, NaN when unknown [V]
	GateSource          float64 // Q_GS, NaN when unknown [C]
	GateDrain           float64 // Q_GD, NaN when unknown [C]
	Plateau             float64 // plateau voltage V_pl, NaN when unknown [V]
	InputCapacitanceMin float64 // smallest credible C_iss, NaN when unknown [F]
	InputCapacitanceMax float64 // largest credible C_iss, NaN when unknown [F]
}

// Slope returns dQ_G/dV at the given drive voltage [V], an effective capacitance
// perVolt [F]:
//
//	C_on = (Q_spec - Q_GS - Q_GD)/(V_spec - V_pl)
//
// known reports that the data sheet's split gives this slope. Without the split
// the slope is the credible one that gives the larger Q_G: above V_spec the
// largest of C_iss and Q_spec/V_spec, at and below it the smallest. A split
// that contradicts itself in this corner (V_spec not above V_pl, or parts
// larger than the total) counts as not given. Without V_spec, Q_spec or drive
// the slope is NaN. The equation follows from the gate-charge curve, a straight
// line above the plateau [slup169].
func (g GateCharge) Slope(drive float64) (perVolt float64, known bool) {
	qg, vspec, vpl := g.Specified, g.SpecifiedAt, g.Plateau
	if !(vspec > 0) || math.IsNaN(qg) || math.IsNaN(drive) {
		return math.NaN(), false
	}
	if rest := qg - g.GateSource - g.GateDrain; rest >= 0 && vspec > vpl {
		return rest / (vspec - vpl), true
	}
	perVolt = qg / vspec
	if drive > vspec {
		if g.InputCapacitanceMax > perVolt {
			perVolt = g.InputCapacitanceMax
		}
	} else if g.InputCapacitanceMin < perVolt {
		perVolt = g.InputCapacitanceMin
	}
	return perVolt, false
}

// At returns the gate charge [C] of one device between 0 V and the drive
// voltage [V]:
//
//	Q_G(V) = Q_spec + C_on·(V - V_spec)
//
// with the slope of Slope. It is never negative. Below a known plateau, where
// the line no longer describes the curve, it does not fall below Q_GS·V/V_pl.
// Without V_spec it is NaN: a charge whose test voltage is not known does not
// fix the charge at another voltage, and logic-level and 10 V specifications
// differ twofold. A caller that takes Q_spec as valid at the drive itself sets
// SpecifiedAt to drive and lists the assumption.
func (g GateCharge) At(drive float64) float64 {
	perVolt, known := g.Slope(drive)
	qg := g.Specified + perVolt*(drive-g.SpecifiedAt)
	floor := 0.0
	if known && g.Plateau > 0 && drive > 0 {
		floor = g.GateSource * math.Min(drive, g.Plateau) / g.Plateau
	}
	return math.Max(qg, floor) // NaN stays NaN
}

// OffBias is the negative bias at which the gate rests while it is off.
type OffBias struct {
	Voltage float64 // gate voltage in the off state, 0 or negative [V]
	Split   bool    // the bias is taken out of V_BS instead of a separate source
}

// Drive returns the on-state drive voltage [V] of a floating supply vbs [V]:
// V_BS + V_off when the bias is split out of it, otherwise V_BS.
func (b OffBias) Drive(vbs float64) float64 {
	if b.Split {
		return vbs + b.Voltage
	}
	return vbs
}

// Charge returns the charge C_iss·|V_off| [C] that lifts the gate of one device
// from the off bias to 0 V, for the input capacitance [F] in the off state. With
// no bias it is 0 whatever the capacitance.
func (b OffBias) Charge(inputCapacitance float64) float64 {
	if b.Voltage == 0 {
		return 0
	}
	return inputCapacitance * math.Abs(b.Voltage)
}
