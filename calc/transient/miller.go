package transient

import "math"

// lowSteps is the number of parts, equal in ln(1 + v), into which Lift and Pull divide the lowest of the swing's steps, where C_gd
// changes most.
const lowSteps = 6

// Lift returns by how much the swing lifts the gate of the passive switch above its off drive [V] through C_gd, eq. (11), where its
// drain voltage rises from 0 to the bus voltage. rg is the resistance that holds the gate off: external, internal and the driver's
// [ohm]. Uses the input capacitance and Transfer.
func Lift(s *Switch, rg float64, w Swing) float64 { return miller(s, rg, &w, true) }

// Pull returns by how much the swing pulls the gate of the passive switch below its off drive [V], not negative, where its drain
// voltage falls from the bus voltage to 0; otherwise as Lift.
func Pull(s *Switch, rg float64, w Swing) float64 { return miller(s, rg, &w, false) }

func miller(s *Switch, rg float64, w *Swing, rising bool) float64 {
	const count = lowSteps + Steps - 1
	var v, l, q [count]float64
	low := log1p(w.Bus / Steps)
	for k := range count {
		if k < lowSteps-1 {
			l[k] = low * float64(k+1) / lowSteps
			v[k] = math.Exp(l[k]) - 1
			continue
		}
		v[k] = w.Bus * float64(k+2-lowSteps) / Steps
		l[k] = log1p(v[k])
	}
	s.Transfer.charges(v[:], l[:], q[:])
	cgs := s.gateSource()
	u, most := 0.0, 0.0
	for n := range count {
		k, step := n, max(n-lowSteps+1, 0)
		if !rising {
			k = count - 1 - n
			step = Steps - 1 - max(k-lowSteps+1, 0)
		}
		dv, dq := v[k], q[k]
		if k > 0 {
			dv, dq = dv-v[k-1], dq-q[k-1]
		}
		if anyNaN(rg, w.Slew[step], dq, cgs) {
			return math.NaN()
		}
		u = gateAfter(u, dv, dq, w.Slew[step], rg, cgs)
		most = math.Max(most, u)
	}
	return most
}

// gateAfter returns what the gate voltage u [V] has become after the drain has moved by dv [V] at slew [V/s] and C_gd has passed the
// charge dq [C]; rg holds the gate [ohm], cgs is C_gs [F].
func gateAfter(u, dv, dq, slew, rg, cgs float64) float64 {
	c := cgs + dq/dv
	x := dv / (slew * rg * c)
	switch {
	case rg == 0:
		return 0
	case x < 1e-8:
		return u*(1-x) + dq/c*(1-x/2)
	default:
		return u - math.Expm1(-x)*(dq/(c*x)-u)
	}
}
