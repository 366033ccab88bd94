package capacitor

import "math"

// Limits of the insulation resistance of class 2 ceramics at 25 °C, the lower of
// the two [kemet-c1002]; at the upper end of the temperature range about a tenth
// of it is usual [common-practice].
const (
	insulationProduct    = 500  // resistance times capacitance, 500 MΩ·µF [s]
	insulationResistance = 10e9 // resistance of small capacitors [ohm]
)

// InsulationLeakage returns the leakage current I = V/R_ins [A] of a ceramic or
// film capacitor c [F] at voltage v [V]. insulation is its product R_ins·C [s];
// NaN takes the limit for class 2 ceramics, 500 Ω·F or 10 GΩ, the lower
// [kemet-c1002].
func InsulationLeakage(c, v, insulation float64) float64 {
	resistance := insulation / c
	if math.IsNaN(insulation) {
		resistance = math.Min(insulationProduct/c, insulationResistance)
	}
	return v / resistance
}

// ElectrolyticLeakage returns the leakage current [A] of an aluminium
// electrolytic capacitor c [F] at voltage v [V]: 0.01·C·V, with C in µF giving
// µA, or 3 µA, the greater. It is the usual limit after two minutes at rated
// voltage and 20 °C [aluminium-makers].
func ElectrolyticLeakage(c, v float64) float64 {
	const perFaradVolt, least = 0.01, 3e-6 // [1/s], [A]
	return math.Max(perFaradVolt*c*v, least)
}
