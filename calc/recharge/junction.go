package recharge

import "math"

const (
	thermalVoltagePerKelvin = 1.380649e-23 / 1.602176634e-19 // k/q, exact SI constants [V/K]
	zeroCelsius             = 273.15                         // [K]
	dropPerKelvin           = -2e-3                          // silicon forward drop at constant current, from memory [V/K]

	// A smaller n·V_T is taken as that of an ideal diode, which drops below 1 µV and leaks nothing.
	idealSlope         = 1e-9 // [V]
	idealLogSaturation = -700 // [1]
)

// DiodePoint is one point of a forward characteristic.
type DiodePoint struct {
	Current float64 // forward current [A]
	Voltage float64 // forward voltage at that current [V]
}

// Junction is the static law of a diode, v = n·V_T·ln(1 + i/I_S) + r_D·i [V], at one temperature.
type Junction struct {
	Slope         float64 // n·V_T; below 1 nV: an ideal diode, no drop and no leakage [V]
	LogSaturation float64 // ln(I_S/1 A); I_S itself underflows for sharp characteristics [1]
	Resistance    float64 // r_D [ohm]
}

// law returns n·V_T [V] and ln I_S [1] as they are used.
func (j Junction) law() (slope, logSaturation float64) {
	if j.Slope < idealSlope {
		return idealSlope, idealLogSaturation
	}
	return j.Slope, j.LogSaturation
}

// Voltage returns the drop at the current i [A], series resistance included [V]. Below -I_S there is none: -Inf.
func (j Junction) Voltage(i float64) float64 {
	return j.junctionVoltage(i) + j.Resistance*i
}

// junctionVoltage is n·V_T·ln(1 + i/I_S) [V] at the current i [A].
func (j Junction) junctionVoltage(i float64) float64 {
	slope, logIS := j.law()
	switch {
	case i > 0:
		d := math.Log(i) - logIS
		if d > 40 {
			return slope * d
		}
		return slope * math.Log1p(math.Exp(d))
	case i == 0:
		return 0 * (slope + logIS)
	default:
		d := math.Log(-i) - logIS
		if d >= 0 {
			return math.Inf(-1)
		}
		return slope * math.Log1p(-math.Exp(d))
	}
}

// AtTemperature moves the law from fromC to tempC [°C]: n·V_T scales with the absolute temperature, then ln I_S is set so that
// the drop at the upper point's current moves by -2 mV/K (silicon, from memory). r_D stays. The junction's part of that drop
// is kept at n·V_T·ln 2 or more (I_S at most that current), where -2 mV/K would make a low drop vanish or turn negative.
func (j Junction) AtTemperature(tempC, fromC float64, upper DiodePoint) Junction {
	if tempC == fromC || j.Slope < idealSlope {
		return j
	}
	slope := j.Slope
	moved := slope * (tempC + zeroCelsius) / (fromC + zeroCelsius)
	drop := math.Max(j.junctionVoltage(upper.Current)+dropPerKelvin*(tempC-fromC), moved*math.Ln2)
	return Junction{Slope: moved, LogSaturation: saturation(upper.Current, drop, moved), Resistance: j.Resistance}
}

// saturation returns ln I_S [1] of the junction with slope n·V_T [V] that drops v [V] at i [A]: I_S = i/(e^(v/(n·V_T)) - 1).
func saturation(i, v, slope float64) float64 {
	x := v / slope
	return math.Log(i) - x - math.Log(-math.Expm1(-x))
}
