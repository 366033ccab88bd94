package loss

import "math"

// doubling is by how much the temperature rises for the leakage of a silicon diode to double, from memory [K].
const doubling = 10.0

// Forward returns the conduction loss of the bootstrap diode [W] from its drop [V] and mean current [A]. With the drop at the mean current
// it is a little low for a diode that conducts in peaks; with that at the peak, high.
func Forward(drop, average float64) float64 { return drop * average }

// Recovery returns the loss of reverse recovery in the diode [W]: share·Q_rr·V_R·f. Of the energy Q_rr·V_R that the bus gives, the diode
// itself takes a share [1] between ½ and 1, the more the softer it recovers; charge [C], reverse voltage [V], frequency [Hz].
func Recovery(share, charge, reverse, frequency float64) float64 {
	return share * charge * reverse * frequency
}

// Hot returns a leakage current [A] at a rise [K] above the temperature at which it was given [A]: I·2^(rise/10 K), silicon, from
// memory; ×1024 from 25 to 125 °C.
func Hot(leakage, rise float64) float64 { return leakage * math.Exp2(rise/doubling) }

// Rise solves x = R_th·(P_0 + P_R·2^(x/10 K)) for how far a diode's junction stands above its surroundings [K]: thermal resistance R_th
// [K/W], loss P_0 that does not depend on the temperature [W], leakage loss P_R at the surroundings' temperature [W]. Of two
// solutions the lower one is stable and is returned; without any the leakage heats the diode faster than it cools: +Inf, false. A
// negative R_th or P_R gives NaN.
//
// With k = ln 2/10 K, a = R_th·P_0 and x = a + z/k it is z = β·e^z, β = k·R_th·P_R·e^(k·a), z = -W_0(-β): solvable for β <= 1/e.
// β·e^z - z is convex and falls on [0, z], so Newton's method from 0 comes up to the lower root from below and never passes it. At the edge
// of runaway both roots meet at z = 1, where a relative error of 1e-16 in β is one of 1e-8 in z.
func Rise(resistance, constant, leakage float64) (rise float64, stable bool) {
	const k = math.Ln2 / doubling
	if !(resistance >= 0) || !(leakage >= 0) || constant != constant {
		return math.NaN(), true
	}
	a := resistance * constant
	if resistance == 0 || leakage == 0 {
		return a, true
	}
	beta := k * resistance * leakage * math.Exp(k*a)
	if !(beta <= 1/math.E) {
		return math.Inf(1), false
	}
	z := 0.0
	for range 100 {
		grown := beta * math.Exp(z)
		step := (grown - z) / (1 - grown)
		if !(step > 1e-16*z) || z+step > 1 {
			break
		}
		z += step
	}
	return a + z/k, true
}
