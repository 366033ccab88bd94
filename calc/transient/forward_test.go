package transient

import (
	"math"
	"strings"
	"testing"
)

// A fitted diode in the circuit of its test: the current rises at a to I_F, L_fr beside R_fr is integrated, the static drop is V_F at I_F and
// follows the current below. The peak, and the time from the start of the current to 110 % of V_F, must be the data sheet's within 2 %.
func TestForwardRecoveryMeetsItsTest(t *testing.T) {
	for _, c := range []struct{ current, slope, peak, static, time float64 }{
		{1, 50e6, 3.0, 0.9, 60e-9},
		{10, 100e6, 6, 1.2, 200e-9},
		{30, 1e9, 25, 1.5, 300e-9},
		{8, 200e6, 2.6, 1.1, 41e-9}, // τ_fr far shorter than the rise
		{8, 200e6, 1.4, 1.1, 400e-9},
	} {
		f, err := FitForwardRecovery(c.current, c.slope, c.peak, c.static, c.time)
		if err != nil {
			t.Fatal(err)
		}
		rise := c.current / c.slope
		peak, last := 0.0, 0.0
		march([]float64{0}, 2*c.time, 400000, func(now float64, y, dy []float64) {
			dy[0] = f.Resistance * (math.Min(c.slope*now, c.current) - y[0]) / f.Inductance
		}, func(now float64, y []float64) {
			i := math.Min(c.slope*now, c.current)
			v := c.static*math.Pow(i/c.current, 0.2) + f.Resistance*(i-y[0])
			peak = math.Max(peak, v)
			if v > 1.1*c.static {
				last = now
			}
		})
		same(t, "peak", peak, c.peak, 1e-3)
		same(t, "time", last, c.time, 1e-3)
		same(t, "closed form", f.Peak(c.slope, c.current), c.peak-c.static, 1e-12)
		if now := f.Inductance / f.Resistance; !(now > 0) || rise <= 0 {
			t.Errorf("τ_fr %v", now)
		}
	}
}

func TestForwardRecoveryPeak(t *testing.T) {
	f := ForwardRecovery{Inductance: 5e-9, Resistance: 0.1} // τ_fr 50 ns
	same(t, "slow", f.Peak(1e6, 50), 5e-3, 1e-14)
	same(t, "fast", f.Peak(1e15, 10), 1, 1e-5)
	same(t, "at once", f.Peak(inf, 10), 1, 1e-15)
	same(t, "middle", f.Peak(1e9, 50), 5*(1-math.Exp(-1)), 1e-14)
	same(t, "inductance alone", ForwardRecovery{Inductance: 5e-9, Resistance: inf}.Peak(1e9, 10), 5, 1e-15)
	for _, v := range []float64{f.Peak(0, 10), f.Peak(1e9, 0), ForwardRecovery{}.Peak(1e9, 10)} {
		if v != 0 {
			t.Errorf("nothing gives %v", v)
		}
	}
	before := 0.0
	for slope := 1e5; slope < 1e16; slope *= 1.7 {
		if v := f.Peak(slope, 10); v < before || v > 1 {
			t.Fatalf("slope %v: %v after %v", slope, v, before)
		} else {
			before = v
		}
	}
	for _, v := range []float64{f.Peak(nan, 1), f.Peak(1, nan), ForwardRecovery{nan, 1}.Peak(1, 1), ForwardRecovery{1, nan}.Peak(1, 1)} {
		if v == v {
			t.Errorf("NaN gives %v", v)
		}
	}
}

func TestForwardRecoveryWithoutTime(t *testing.T) {
	// no peak above the static drop: nothing, whatever the time
	if f, err := FitForwardRecovery(10, 100e6, 1.2, 1.2, nan); err != nil || f != (ForwardRecovery{}) {
		t.Errorf("%+v, %v", f, err)
	}
	if f, err := FitForwardRecovery(10, 100e6, 1.1, 1.2, 50e-9); err != nil || f != (ForwardRecovery{}) {
		t.Errorf("%+v, %v", f, err)
	}
	// a peak that never exceeds 110 %: the excess at that slope, and in proportion at others
	f, err := FitForwardRecovery(10, 100e6, 1.25, 1.2, nan)
	if err != nil {
		t.Fatal(err)
	}
	same(t, "test slope", f.Peak(100e6, 10), 0.05, 1e-12)
	same(t, "steeper", f.Peak(2e9, 10), 1, 1e-12)
}

func TestForwardRecoveryRefuses(t *testing.T) {
	for _, c := range []struct {
		current, slope, peak, static, time float64
		words                              string
	}{
		{10, 100e6, 6, 1.2, 100e-9, "forwardRecoveryTime"},
		{10, 100e6, 6, 1.2, 80e-9, "forwardRecoveryTime"},
		{10, 100e6, 6, 1.2, nan, "forwardRecoveryTime"},
		{0, 100e6, 6, 1.2, 1e-6, "forwardRecoveryTestCurrent"},
		{10, nan, 6, 1.2, 1e-6, "forwardRecoveryTestSlope"},
		{10, 100e6, nan, 1.2, 1e-6, "peakForwardRecovery"},
		{10, 100e6, 6, nan, 1e-6, "static drop"},
		{10, 100e6, 6, 0, 1e-6, "static drop"},
	} {
		f, err := FitForwardRecovery(c.current, c.slope, c.peak, c.static, c.time)
		if err == nil || !strings.Contains(err.Error(), c.words) || f != (ForwardRecovery{}) {
			t.Errorf("%+v: %+v, %v", c, f, err)
		}
	}
}
