package preferred

// RatedVoltages are the usual rated voltages of capacitors, rising [V]. Common
// practice, no source.
func RatedVoltages() []float64 {
	return []float64{4, 6.3, 10, 16, 25, 35, 50, 63, 80, 100, 160, 200, 250, 400, 450, 500, 630, 1000}
}

// ReverseVoltages are the usual repetitive peak reverse voltages of diodes,
// rising [V]. Common practice, no source.
func ReverseVoltages() []float64 {
	return []float64{20, 30, 40, 60, 80, 100, 150, 200, 300, 400, 600, 800, 1000, 1200, 1700}
}

// RatedVoltageAtLeast is the lowest usual rated voltage of a capacitor that is
// not below v [V]; not ok when there is none or v is not a positive number.
func RatedVoltageAtLeast(v float64) (rating float64, ok bool) { return atLeast(v, RatedVoltages()) }

// ReverseVoltageAtLeast is the lowest usual reverse voltage of a diode that is
// not below v [V]; not ok when there is none or v is not a positive number.
func ReverseVoltageAtLeast(v float64) (rating float64, ok bool) { return atLeast(v, ReverseVoltages()) }

func atLeast(v float64, ratings []float64) (float64, bool) {
	if !(v > 0) {
		return 0, false
	}
	for _, r := range ratings {
		if r >= v*(1-tolerance) {
			return r, true
		}
	}
	return 0, false
}
