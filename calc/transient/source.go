package transient

import "math"

// SourceLift is the gate voltage [V] that a recovering diode induces through the inductance l [H] that gate loop and load share. The reverse
// current irm [A] leaves with the time constant tau [s], so that l·di/dt = u0·e^(-t/τ), u0 = l·irm/τ; the gate with its time constant
// a = R_g·C_iss [s] follows a·u' + u = u0·e^(-t/τ). The peak of u = u0/(1 - k)·(e^(-t/τ) - e^(-t/a)), k = a/τ, is
//
//	u = u0·k^(k/(1-k))        k → 0: u0, k = 1: u0/e, k → ∞: u0/k = l·irm/a
//
// Without recovery (tau 0) it is 0.
func SourceLift(l, irm, tau, a float64) float64 {
	if tau == 0 || l == 0 {
		return 0 * (l + irm + tau + a)
	}
	k := a / tau
	u0 := l * irm / tau
	if math.Abs(k-1) < 1e-6 {
		return u0 / math.E
	}
	if k == 0 {
		return u0
	}
	return u0 * math.Exp(k/(1-k)*math.Log(k))
}
