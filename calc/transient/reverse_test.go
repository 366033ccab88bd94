package transient

import (
	"math"
	"strings"
	"testing"
)

func TestDecayTime(t *testing.T) {
	// from memory, IEC 60747-2: through 90 % and 25 %; an exponential passes them at ln(1/0.9) and ln 4
	t90, t25 := math.Log(1/0.9), math.Log(4)
	same(t, "decay", decayTime, t90+0.9*(t25-t90)/(0.9-0.25), 1e-15)
	near(t, "as the design rounds it", decayTime, 1.88, 0.005)
}

// measured marches the lumped-charge equations through a turn-off from i [A] at slope [A/s]: q_M fed by i_D, which follows the circuit until
// the junction's charge q_E = q_M + T_M·i_D has gone, and q_E stays 0 from there.
func measured(r Recovery, i, slope float64) (peak, charge, time float64) {
	end := i/slope + 30*(r.TauRR+peakTime(r, i, slope))
	const n = 300000
	dt := end / n
	before, zero, reached90, reached25 := i, 0.0, 0.0, 0.0
	march([]float64{r.Tau * i}, end, n, func(now float64, y, dy []float64) {
		dy[0] = math.Max(i-slope*now, -y[0]/r.Transit) - y[0]/r.Tau
	}, func(now float64, y []float64) {
		current := math.Max(i-slope*now, -y[0]/r.Transit)
		if current < 0 {
			if zero == 0 {
				zero = now - dt*current/(current-before)
			}
			charge -= math.Min(before, 0)/2*dt + current/2*dt
		}
		peak = math.Max(peak, -current)
		if past := peak > 0 && current < 0 && current > before; past && reached90 == 0 && -current <= 0.9*peak {
			reached90 = now
		} else if past && reached25 == 0 && -current <= 0.25*peak {
			reached25 = now
		}
		before = current
	})
	return peak, charge, reached90 + 0.9*(reached25-reached90)/0.65 - zero
}

func peakTime(r Recovery, i, slope float64) float64 { return r.Peak(i, slope) / slope }

func TestRecoveryMeetsItsTest(t *testing.T) {
	for _, c := range []struct{ current, slope, charge, time float64 }{
		{10, 100e6, 100e-9, 60e-9},
		{1, 50e6, 15e-9, 35e-9},
		{30, 1e9, 800e-9, 60e-9},
		{20, 100e6, 1.5e-6, 180e-9}, // near the triangle, 1.62 µC: snappy
		{5, 200e6, 20e-9, 50e-9},    // soft
	} {
		r, err := FitRecovery(c.current, c.slope, c.charge, c.time)
		if err != nil {
			t.Fatal(err)
		}
		same(t, "τ_rr", 1/r.TauRR, 1/r.Tau+1/r.Transit, 1e-12)
		irm := r.Peak(c.current, c.slope)
		same(t, "charge", r.Charge(c.current, c.slope), c.charge, 1e-9)
		same(t, "time", irm/c.slope+decayTime*r.TauRR, c.time, 1e-9)
		// (16) itself
		same(t, "peak", irm, c.slope*(r.Tau-r.TauRR)*(1-math.Exp(-(c.current+irm)/(c.slope*r.Tau))), 1e-11)
		peak, charge, time := measured(r, c.current, c.slope)
		same(t, "integrated peak", peak, irm, 1e-4)
		same(t, "integrated charge", charge, c.charge, 1e-4)
		same(t, "integrated time", time, c.time, 1e-3)
		// another operating point
		peak, charge, _ = measured(r, 0.3*c.current, 4*c.slope)
		same(t, "elsewhere, peak", r.Peak(0.3*c.current, 4*c.slope), peak, 1e-4)
		same(t, "elsewhere, charge", r.Charge(0.3*c.current, 4*c.slope), charge, 1e-4)
	}
}

func TestRecoveryLimits(t *testing.T) {
	r := Recovery{Tau: 100e-9, Transit: 50e-9, TauRR: 100e-9 / 3}
	same(t, "large current", r.Peak(1e6, 100e6), 100e6*(r.Tau-r.TauRR), 1e-12)
	// fast: all charge τ·i is swept out before it recombines; 1/a alone: x/(i + x) = (τ - τ_rr)/τ, so x = i·(τ - τ_rr)/τ_rr = i·τ/T_M
	same(t, "fast", r.Peak(3, 1e15), 3*r.Tau/r.Transit, 1e-5)
	same(t, "fast, charge", r.Charge(3, 1e15), 3*r.Tau/r.Transit*r.TauRR, 1e-4)
	for _, v := range []float64{r.Peak(0, 1e8), r.Peak(-3, 1e8), r.Peak(3, 0), r.Charge(0, 1e8), Recovery{}.Peak(3, 1e8), Recovery{}.Charge(3, 1e8)} {
		if v != 0 {
			t.Errorf("nothing gives %v", v)
		}
	}
	before := 0.0
	for i := 1e-6; i < 1e4; i *= 1.5 {
		v := r.Peak(i, 1e9)
		if !(v > before*(1-1e-12)) {
			t.Fatalf("current %v: %v after %v", i, v, before)
		}
		before = v
	}
	// no transit time: the whole charge up to the peak, then a step
	snap, err := FitRecovery(10, 100e6, 100e6*60e-9*60e-9/2, 60e-9)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "τ_rr", snap.TauRR, 0, 1e-15)
	same(t, "peak", snap.Peak(10, 100e6), 6, 1e-7)
	if none, err := FitRecovery(nan, nan, 0, nan); err != nil || none != (Recovery{}) {
		t.Errorf("no charge: %+v, %v", none, err)
	}
}

// Every test that can be met is met, from a nearly empty charge to the triangle and from a small to a large test current.
func TestRecoveryFitsWhatCanBe(t *testing.T) {
	const slope, time = 100e6, 60e-9
	for share := 1e-6; share < 0.5; share *= 1.9 {
		for current := 1e-3; current < 1e3; current *= 3.7 {
			i, charge := current*slope*time, share*slope*time*time
			r, err := FitRecovery(i, slope, charge, time)
			if err != nil {
				t.Fatalf("share %v, current %v: %v", share, current, err)
			}
			irm := r.Peak(i, slope)
			same(t, "charge", r.Charge(i, slope), charge, 1e-6)
			same(t, "time", irm/slope+decayTime*r.TauRR, time, 1e-6)
			if !(r.Tau > r.TauRR && r.TauRR > 0 && r.Transit >= r.TauRR) {
				t.Fatalf("share %v, current %v: %+v", share, current, r)
			}
		}
	}
}

// Whatever the spread makes of the charge, the time following its root, there is still a diode.
func TestRecoverySpreadKeepsTheTest(t *testing.T) {
	for k := 0.01; k < 100; k *= 1.3 {
		if _, err := FitRecovery(10, 100e6, k*179e-9, math.Sqrt(k)*60e-9); err != nil {
			t.Errorf("factor %v: %v", k, err)
		}
	}
}

func TestRecoveryRefuses(t *testing.T) {
	for _, c := range []struct {
		current, slope, charge, time float64
		words                        string
	}{
		{10, 100e6, 181e-9, 60e-9, "recoveryTime²/2"},
		{10, 100e6, nan, 60e-9, "recoveryCharge"},
		{10, 100e6, -1e-9, 60e-9, "recoveryCharge"},
		{nan, 100e6, 10e-9, 60e-9, "recoveryTestCurrent"},
		{10, 0, 10e-9, 60e-9, "recoveryTestSlope"},
		{10, 100e6, 10e-9, nan, "recoveryTime"},
		{inf, 100e6, 10e-9, 60e-9, "no diode"},
	} {
		r, err := FitRecovery(c.current, c.slope, c.charge, c.time)
		if err == nil || !strings.Contains(err.Error(), c.words) || r != (Recovery{}) {
			t.Errorf("%+v: %+v, %v", c, r, err)
		}
	}
	r := Recovery{Tau: 100e-9, Transit: 50e-9, TauRR: 100e-9 / 3}
	for _, v := range []float64{r.Peak(nan, 1e8), r.Peak(3, nan), r.Charge(nan, 1e8), Recovery{Tau: nan}.Peak(3, 1e8), Recovery{Tau: 1, TauRR: nan}.Charge(3, 1e8)} {
		if v == v {
			t.Errorf("NaN gives %v", v)
		}
	}
}
