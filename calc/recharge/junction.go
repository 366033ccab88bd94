package recharge

import "math"

const (
	thermalVoltagePerKelvin = 1.380649e-23 / 1.602176634e-19 // k/q, exact SI constants [V/K]
	zeroCelsius             = 273.15                         // [K]
	dropPerKelvin           = -2e-3                          // silicon forward drop at constant current, from memory [V/K]
	sharpestSlope           = 1e-9                           // a smaller n·V_T is taken as this: an ideal diode [V]
)

// DiodePoint is one point of a forward characteristic.
type DiodePoint struct {
	Current float64 // forward current [A]
	Voltage float64 // forward voltage at that current [V]
}

// Junction is the static law of a diode, v = n·V_T·ln(1 + i/I_S) + r_D·i [V], at one temperature.
type Junction struct {
	Slope         float64 // n·V_T; below 1 nV it is taken as 1 nV [V]
	LogSaturation float64 // ln(I_S/1 A); I_S itself underflows for sharp characteristics [1]
	Resistance    float64 // r_D [ohm]
}

// Voltage returns the drop at the current i [A], series resistance included [V]. Below -I_S there is none: -Inf.
func (j Junction) Voltage(i float64) float64 {
	return j.junctionVoltage(i) + j.Resistance*i
}

// junctionVoltage is n·V_T·ln(1 + i/I_S) [V] at the current i [A].
func (j Junction) junctionVoltage(i float64) float64 {
	slope := math.Max(j.Slope, sharpestSlope)
	switch {
	case i > 0:
		d := math.Log(i) - j.LogSaturation
		if d > 40 {
			return slope * d
		}
		return slope * math.Log1p(math.Exp(d))
	case i == 0:
		return 0 * (slope + j.LogSaturation)
	default:
		d := math.Log(-i) - j.LogSaturation
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
	if tempC == fromC {
		return j
	}
	slope := math.Max(j.Slope, sharpestSlope)
	moved := slope * (tempC + zeroCelsius) / (fromC + zeroCelsius)
	drop := math.Max(j.junctionVoltage(upper.Current)+dropPerKelvin*(tempC-fromC), moved*math.Ln2)
	return Junction{Slope: moved, LogSaturation: saturation(upper.Current, drop, moved), Resistance: j.Resistance}
}

// saturation returns ln I_S [1] of the junction with slope n·V_T [V] that drops v [V] at i [A]: I_S = i/(e^(v/(n·V_T)) - 1).
func saturation(i, v, slope float64) float64 {
	x := v / slope
	return math.Log(i) - x - math.Log(-math.Expm1(-x))
}
