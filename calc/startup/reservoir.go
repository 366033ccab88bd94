package startup

import (
	"math"

	"floatrail/calc/recharge"
)

// Reservoir is the simultaneous charge of equal bootstrap capacitors from one capacitor across V_DD, nodes at 0 V. Values outside
// their comments and NaN give NaN.
type Reservoir struct {
	Element       recharge.Element // of each branch, with what lies between reservoir and rail
	Bootstrap     float64          // C_B of each, at its largest [F]
	Reservoir     float64          // C_VDD, at its smallest [F]
	Count         int              // n, capacitors that are charged at once, at least 1
	Supply        float64          // V_DD at the start [V]
	Initial       float64          // V_BS at the start [V]
	Load          float64          // I_0 of each floating supply, not negative [A]
	SupplyCurrent float64          // I_s, limit of the supply behind the reservoir; 0: it brings nothing during the charge [A]
}

func (r Reservoir) valid() bool {
	return r.Bootstrap > 0 && r.Reservoir > 0 && r.Count >= 1 && r.Load >= 0 && r.SupplyCurrent >= 0 &&
		r.Supply == r.Supply && r.Initial == r.Initial
}

// total is n·C_B [F].
func (r Reservoir) total() float64 { return float64(r.Count) * r.Bootstrap }

// Share returns V_DD after a charge without drop, load and supply [V]: (V_DD·C_VDD + n·C_B·v_B0)/(C_VDD + n·C_B). V_DD never comes lower
// unless the loads take more than the supply brings meanwhile.
func (r Reservoir) Share() float64 {
	if !r.valid() {
		return math.NaN()
	}
	return r.shared(r.Initial)
}

// shared is the charge balance at which the rails end where n·C_B began at v [V].
func (r Reservoir) shared(v float64) float64 {
	n := r.total()
	return r.Supply + (v-r.Supply)*n/(r.Reservoir+n)
}

// PeakCurrent returns n·i at the start, what the reservoir must give at once [A].
func (r Reservoir) PeakCurrent() float64 {
	if !r.valid() {
		return math.NaN()
	}
	return float64(r.Count) * math.Max(r.Element.Current(r.Supply-r.Initial), 0)
}

// Lowest returns the lowest V_DD of the charge [V], eq. (3) of the package comment: that at the first time the supply's current suffices,
// or at the end of the rise of V_BS where it never does. V_DD itself where it suffices from the start.
func (r Reservoir) Lowest() float64 {
	v, _ := r.sag()
	return v
}

// LowestTime returns the time from the start to Lowest [s]; +Inf without load and supply.
func (r Reservoir) LowestTime() float64 {
	_, t := r.sag()
	return t
}

func (r Reservoir) sag() (low, time float64) {
	if !r.valid() {
		return math.NaN(), math.NaN()
	}
	count := float64(r.Count)
	end := math.Max(r.SupplyCurrent/count, r.Load) // i at the end [A]
	first := r.Element.Current(r.Supply - r.Initial)
	if first != first {
		return math.NaN(), math.NaN()
	}
	if end >= first {
		return r.Supply, 0
	}
	c := 1 / (count/r.Reservoir + 1/r.Bootstrap)
	load := (r.SupplyCurrent*r.Bootstrap + r.Load*r.Reservoir) / (r.Reservoir + r.total())
	drop := r.Element.Drop(end)
	// u = V_DD - v in the law of recharge, so that v rises from v_B0 to V_DD - drop
	time = r.Element.TimeTo(c, r.Supply, load, r.Initial, r.Supply-drop)
	low = r.shared(r.Initial + drop)
	// as n·I_0 tends to I_s the time grows as the logarithm of the difference, and the product vanishes
	if missing := count*r.Load - r.SupplyCurrent; missing != 0 && !math.IsInf(time, 1) {
		low -= missing * time / (r.Reservoir + r.total())
	}
	return low, time
}
