package transient

import (
	"math"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/recharge"
)

const (
	// A junction in the simulation has an n·V_T of at least sharpest [V], with the drop at the load current kept, and at least bluntness·n·V_T
	// there, so that it blocks. A fixed drop is then 12 mV less at a tenth of the current, an ideal diode drops 50 mV; a sharper knee would be
	// finer than what steps of the default tolerance see of the power circuit's voltages.
	sharpest, bluntness = 5e-3, 10
	// Series resistance of a junction at least this·n·V_T over the load current: it drops nothing there, and beyond any current the law
	// becomes a line instead of an exponential that overflows.
	leastSeries = 1e-6
	// Time constant L_fr/R_fr of a forward recovery that its test shows as an inductance alone, R_fr = +Inf [s].
	quickest = 50e-12
)

// path is a junction made ready, with its lumped charge and its forward recovery.
type path struct {
	fitted bool
	slope  float64 // n·V_T [V]
	series float64 // a = r + R_fr [ohm]
	static float64 // r [ohm]
	scale  float64 // current in front of the exponential: I_S, or I_S·(τ + T_M)/T_M [A]
	logIS  float64 // ln(I_S/1 A)
	shift  float64 // ln(scale·a/(n·V_T))
	offset float64 // [V]

	perSlope, slopePerSeries float64 // 1/(n·V_T), n·V_T/a

	lifetime, transit       float64 // τ, T_M, 0: no charge [s]
	perLifetime, perTransit float64
	inductance, resistance  float64 // L_fr, R_fr, 0: none
}

// newPath makes a junction ready for currents of the order of current [A].
func newPath(j recharge.Junction, current float64) path {
	p := path{fitted: true, slope: j.Slope, logIS: j.LogSaturation, static: j.Resistance}
	if p.slope < sharpest {
		drop := math.Max(j.Voltage(current)-j.Resistance*current, bluntness*sharpest)
		p.slope = sharpest
		p.logIS = math.Log(current) - drop/sharpest - math.Log(-math.Expm1(-drop/sharpest))
	}
	p.static = math.Max(p.static, leastSeries*p.slope/current)
	p.ready()
	return p
}

// recover adds the lumped charge and the forward recovery.
func (p *path) recover(r Recovery, f ForwardRecovery) {
	if r.Tau > 0 && r.Transit > 0 {
		p.lifetime, p.transit = r.Tau, r.Transit
		p.perLifetime, p.perTransit = 1/r.Tau, 1/r.Transit
	}
	if f.Inductance > 0 && f.Resistance > 0 {
		p.inductance, p.resistance = f.Inductance, math.Min(f.Resistance, f.Inductance/quickest)
	}
	p.ready()
}

func (p *path) ready() {
	p.series = p.static + p.resistance
	p.perSlope, p.slopePerSeries = 1/p.slope, p.slope/p.series
	more := 0.0
	if p.lifetime > 0 {
		more = math.Log1p(p.lifetime / p.transit)
	}
	p.scale = math.Exp(p.logIS + more)
	p.shift = p.logIS + more - math.Log(p.slopePerSeries)
}

// current returns i [A] at the voltage v across the path, from anode to cathode, with the charge q_M [C] and the current of L_fr [A], eq. (27),
// and share = w/(1 + w), so that di/dv = share/a and di/dq_M = (share - 1)/T_M.
func (p *path) current(v, charge, inner float64) (i, share float64) {
	base := p.scale + charge*p.perTransit
	y := (v-p.offset+p.resistance*inner+p.series*base)*p.perSlope + p.shift
	if y < -700 {
		return -base, 0
	}
	w := numeric.LambertNear(y)
	return w*p.slopePerSeries - base, w / (1 + w)
}

// rest returns i [A] at the voltage v after everything in the path has come to rest: q_M = τ·i, i_Lfr = i.
func (p *path) rest(v float64) float64 {
	is := math.Exp(p.logIS)
	_, w := numeric.LogLambertPair((v-p.offset+p.static*is)*p.perSlope + p.logIS + math.Log(p.static*p.perSlope))
	return w*p.slope/p.static - is
}
