package recharge

import (
	"errors"
	"fmt"
	"math"

	"floatrail/calc/internal/numeric"
)

const (
	highestEmission = 2.0  // n of recombination current: no junction has more [1]
	singleEmission  = 1.5  // n assumed when one point is all there is [1]
	lowestFitSlope  = 1e-6 // least n·V_T that a fit to more than two points may take [V]
)

// FitJunction fits the static law to points of a forward characteristic taken at tempC [°C] (NaN: 25 °C), in order of rising
// current. A known seriesResistance [ohm] (NaN: unknown) is subtracted first. n·V_T is at most 2·kT/q; what the points show
// beyond that becomes r_D.
//
// One point: n = 1.5 through it. Two points: through both exactly, with r_D = 0 unless n·V_T would exceed its limit. More:
// least squares of the voltages over (n·V_T, ln I_S, r_D) with 1 µV <= n·V_T <= 2·kT/q and r_D >= 0, every point weighted alike; the
// best of the feasible faces of that box is taken, and the +1 in the logarithm by fixed-point iteration. The
// fitted law always rises with current.
func FitJunction(points []DiodePoint, seriesResistance, tempC float64) (Junction, error) {
	if tempC != tempC {
		tempC = 25
	}
	vt := thermalVoltagePerKelvin * (tempC + zeroCelsius)
	if !(vt > 0) || math.IsInf(vt, 0) {
		return Junction{}, fmt.Errorf("temperature %g °C is not above absolute zero", tempC)
	}
	known := seriesResistance
	if known != known {
		known = 0
	}
	if known < 0 || math.IsInf(known, 0) {
		return Junction{}, fmt.Errorf("series resistance %g ohm is negative or infinite", known)
	}
	inner, err := withoutSeries(points, known)
	if err != nil {
		return Junction{}, err
	}
	var j Junction
	switch len(inner) {
	case 1:
		p := inner[0]
		j.Slope = singleEmission * vt
		j.LogSaturation = saturation(p.Current, p.Voltage, j.Slope)
	case 2:
		j, err = throughTwo(inner[0], inner[1], highestEmission*vt)
	default:
		j, err = leastSquares(inner, highestEmission*vt)
	}
	if err != nil {
		return Junction{}, err
	}
	j.Resistance += known
	return j, nil
}

// withoutSeries checks the points and returns those of the inner diode, i.e. less r·i.
func withoutSeries(points []DiodePoint, r float64) ([]DiodePoint, error) {
	if len(points) == 0 {
		return nil, errors.New("a diode fit needs at least one point")
	}
	inner := make([]DiodePoint, len(points))
	for k, p := range points {
		if !(p.Current > 0) || !(p.Voltage > 0) || math.IsInf(p.Current, 0) || math.IsInf(p.Voltage, 0) {
			return nil, fmt.Errorf("point %d (%g V at %g A) is not in the forward region", k, p.Voltage, p.Current)
		}
		inner[k] = DiodePoint{p.Current, p.Voltage - r*p.Current}
		if !(inner[k].Voltage > 0) {
			return nil, fmt.Errorf("series resistance %g ohm drops more than the %g V of point %d", r, p.Voltage, k)
		}
		if k == 0 {
			continue
		}
		a, b := inner[k-1], inner[k]
		switch {
		case !(b.Current > a.Current):
			return nil, fmt.Errorf("points %d and %d are not in order of rising current", k-1, k)
		case !(b.Voltage > a.Voltage):
			return nil, fmt.Errorf("voltage does not rise from point %d to point %d once series resistance is subtracted", k-1, k)
		case !(b.Voltage*a.Current < a.Voltage*b.Current):
			return nil, fmt.Errorf("points %d and %d curve away from any diode: voltage rises faster than current", k-1, k)
		}
	}
	return inner, nil
}

// throughTwo passes the law exactly through two points. With I_S = i1/expm1(v1/m) the second point reads v2 =
// m·log1p((i2/i1)·expm1(v1/m)), rising in m from v1 to v1·i2/i1; above the limit of m, r_D is the root instead.
func throughTwo(a, b DiodePoint, limit float64) (Junction, error) {
	ratio := b.Current / a.Current
	second := func(m, v1 float64) float64 {
		if x := v1 / m; x > 40 {
			return v1 + m*math.Log(ratio)
		} else if x > 0 {
			return m * math.Log1p(ratio*math.Expm1(x))
		}
		return v1 * ratio
	}
	if second(limit, a.Voltage) >= b.Voltage {
		low := (b.Voltage - a.Voltage) / math.Log(ratio) // exact where I_S is far below i1; else the root lies above or below
		m, ok := low, low > 0 && a.Voltage/low > 40
		if !ok {
			m, ok = numeric.Root(func(m float64) float64 { return second(m, a.Voltage) - b.Voltage }, low*1e-3, limit, 1e-15*limit)
		}
		if !ok {
			return Junction{}, errors.New("no diode passes through the two points")
		}
		return Junction{Slope: m, LogSaturation: saturation(a.Current, a.Voltage, m)}, nil
	}
	r, ok := numeric.Root(func(r float64) float64 {
		return second(limit, a.Voltage-r*a.Current) + r*b.Current - b.Voltage
	}, 0, a.Voltage/a.Current*(1-1e-12), 1e-15*a.Voltage/a.Current)
	if !ok {
		return Junction{}, errors.New("no diode passes through the two points")
	}
	return Junction{Slope: limit, LogSaturation: saturation(a.Current, a.Voltage-r*a.Current, limit), Resistance: r}, nil
}

// leastSquares fits v = m·(ln i - ln I_S) + r·i + m·ln(1 + I_S/i), linear but for the last, small term, which is carried over
// from the previous pass.
func leastSquares(points []DiodePoint, limit float64) (Junction, error) {
	var j Junction
	rest := make([]float64, len(points))
	for pass := range 200 {
		for k, p := range points {
			rest[k] = p.Voltage
			if pass > 0 {
				rest[k] -= j.Slope * math.Log1p(math.Exp(j.LogSaturation-math.Log(p.Current)))
			}
		}
		next := linearFit(points, rest, limit)
		if next.Slope != next.Slope || next.LogSaturation != next.LogSaturation {
			return Junction{}, errors.New("no diode fits the points")
		}
		done := math.Abs(next.LogSaturation-j.LogSaturation) <= 1e-13*math.Abs(next.LogSaturation) &&
			math.Abs(next.Slope-j.Slope) <= 1e-13*next.Slope
		j = next
		if done {
			return j, nil
		}
	}
	return Junction{}, errors.New("no diode fits the points: the least squares do not settle")
}

// linearFit minimises Σ(y - a - m·ln i - r·i)² over a, m within [lowestFitSlope, limit] and r >= 0; y [V], limit [V].
func linearFit(points []DiodePoint, y []float64, limit float64) Junction {
	n := float64(len(points))
	var meanL, meanI, meanY float64
	for k, p := range points {
		meanL, meanI, meanY = meanL+math.Log(p.Current)/n, meanI+p.Current/n, meanY+y[k]/n
	}
	var ll, li, ii, ly, iy float64
	for k, p := range points {
		l, i, v := math.Log(p.Current)-meanL, p.Current-meanI, y[k]-meanY
		ll, li, ii, ly, iy = ll+l*l, li+l*i, ii+i*i, ly+l*v, iy+i*v
	}
	// a convex quadratic in (m, r): its minimum in the box is the free one or lies on a face
	m, r := (ly*ii-iy*li)/(ll*ii-li*li), (iy*ll-ly*li)/(ll*ii-li*li)
	if !(m >= lowestFitSlope && m <= limit && r >= 0) {
		best := math.Inf(1)
		try := func(mt, rt float64) {
			if cost := ll*mt*mt + 2*li*mt*rt + ii*rt*rt - 2*ly*mt - 2*iy*rt; cost < best {
				best, m, r = cost, mt, rt
			}
		}
		try(math.Min(math.Max(ly/ll, lowestFitSlope), limit), 0)
		for _, edge := range [2]float64{lowestFitSlope, limit} {
			try(edge, math.Max(0, (iy-li*edge)/ii))
		}
	}
	a := meanY - m*meanL - r*meanI
	return Junction{Slope: m, LogSaturation: -a / m, Resistance: r}
}
