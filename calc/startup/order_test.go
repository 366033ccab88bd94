package startup_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/startup"
)

// staged charges 3 × 1 µF one after another from 10 µF at 15 V through 10 ohm and a silicon diode each, behind 0.1 A.
func staged() startup.Order {
	o := startup.Order{Reservoir: three(), Stages: 3, Target: 11, Waits: true}
	o.Count, o.SupplyCurrent, o.Load = 1, 0.1, 0.3e-3
	return o
}

// spaced is staged with an interval.
func spaced(interval float64) startup.Order {
	o := staged()
	o.Waits, o.Interval = false, interval
	return o
}

func (c chargeOf) time() float64 {
	return startup.Charge{Element: c.Element, Capacitance: c.Bootstrap, Supply: c.Supply, Load: c.Load, Initial: c.Initial}.Time(c.Target)
}

type chargeOf startup.Order

// A reservoir without end leaves each capacitor to its own charge.
func TestOrderOnAStiffSupply(t *testing.T) {
	for farads, digits := range map[float64]float64{1e3: 1e-5, math.Inf(1): 1e-12} {
		o := staged()
		o.Reservoir.Reservoir = farads
		one := chargeOf(o).time()
		digits *= one
		got := o.Run()
		near(t, "waiting", got.Time, 3*one, digits)
		near(t, "last start", got.Last, 2*one, digits)
		near(t, "V_DD", got.Lowest, 15, 1e-6)
		o.Waits, o.Interval = false, one/3
		got = o.Run()
		near(t, "spaced", got.Time, one*5/3, digits)
		got = o.Together().Run()
		near(t, "together", got.Time, one, digits)
	}
	// A supply as strong as all peaks together does the same.
	o := spaced(1e-6)
	o.SupplyCurrent = 3 * o.PeakCurrent()
	got := o.Run()
	near(t, "strong supply", got.Time, 2e-6+chargeOf(o).time(), 1e-15)
	near(t, "strong supply, V_DD", got.Lowest, 15, 0)
}

// As the interval vanishes, the groups are charged at once; without one they are.
func TestOrderWithoutInterval(t *testing.T) {
	together := staged().Together()
	want := together.Run()
	near(t, "lowest", want.Lowest, together.Lowest(), 0)
	if got := spaced(0).Run(); got != want || want.Last != 0 {
		t.Errorf("%v, want %v", got, want)
	}
	for _, interval := range []float64{1e-8, 1e-9, 1e-11} {
		got := spaced(interval).Run()
		near(t, "lowest", got.Lowest, want.Lowest, 1e-5+1e4*interval)
		near(t, "time", got.Time, want.Time, 1e-5*want.Time+3*interval)
	}
	o := staged()
	o.Count = 3
	if got := o.Run(); got != want {
		t.Errorf("one group of all: %v, want %v", got, want)
	}
}

// Where the supply has time to refill the reservoir, each group finds it full, and V_DD falls as far as for one alone, but for what the first diodes
// still carry, their load, before they block.
func TestOrderWithFullRecovery(t *testing.T) {
	o := spaced(20e-3)
	alone := o
	alone.Stages = 1
	want := alone.Run()
	got := o.Run()
	near(t, "lowest", got.Lowest, want.Lowest, 1e-4)
	near(t, "time", got.Time, 40e-3+want.Time, 1e-3*want.Time)
	near(t, "single, by the law of one", want.Lowest, func() float64 { r := o.Reservoir; r.Count = 1; return r.Lowest() }(), 0)
}

// Conservation of charge: without supply and load, each capacitor in turn takes (V - V_F)·C_B·C_VDD/(C_VDD + C_B), and no diode gives any of it back.
func TestOrderBalance(t *testing.T) {
	o := spaced(1)
	o.Element, o.SupplyCurrent, o.Load, o.Target = fixedDrop(0.5, 10), 0, 0, 9
	v := 15.0
	for range 3 {
		v -= (v - 0.5) * 1 / 11
	}
	// The diode drops less than 0.5 V at less than 1 A: 10 µV a factor of e in current.
	near(t, "lowest, one after another", o.Run().Lowest, v, 1e-3)
	near(t, "lowest, at once, as a diode that carries nothing drops nothing", o.Together().Run().Lowest, 15*10./13, 1e-9)
	if together := o.Together(); !(v < together.Share()) {
		t.Errorf("the diodes keep nothing: %g V", v)
	}

	// The supply's charge comes on top: with I_s·t delivered and V_DD not back yet, V = V_0 - (3·C_B·(V_BS - v_0) - I_s·t)/C_VDD, V_BS the target.
	o = staged()
	o.Element, o.Load, o.Target, o.SupplyCurrent = fixedDrop(0.5, 0.01), 0, 12.5, 0.05
	o = o.Together()
	r := o.Run() // at the end each takes I_s/13 as V_DD rises: the drop is known
	u := 0.5 + 1e-5*math.Log(0.05/13) + 0.01*0.05/13
	near(t, "time by charge", r.Time, ((12.5+u-15)*10e-6+3e-6*12.5)/0.05, 1e-9)
}

// A last group may be smaller than the others: 3 in groups of 2 leave one.
func TestOrderWithASmallerLastGroup(t *testing.T) {
	o := spaced(20e-3)
	o.Count = 2
	if n := o.Groups(); n != 2 {
		t.Errorf("%d groups", n)
	}
	two := o
	two.Stages = 2
	got := o.Run()
	near(t, "lowest", got.Lowest, two.Run().Lowest, 1e-9) // the pair pulls harder
	near(t, "last start", got.Last, 20e-3, 0)
}

// What cannot arrive is said so: the loads exceed the supply, or the target the voltage.
func TestOrderThatNeverArrives(t *testing.T) {
	for what, change := range map[string]func(*startup.Order){
		"target": func(o *startup.Order) { o.Target = 14.6 },
		"loads":  func(o *startup.Order) { o.SupplyCurrent, o.Load, o.Target = 1e-3, 1e-3, 13 },
		"supply": func(o *startup.Order) { o.SupplyCurrent, o.Load, o.Target = 0, 0, 13 },
	} {
		for _, waits := range []bool{true, false} {
			o := staged()
			o.Waits, o.Interval = waits, 1e-3
			change(&o)
			got := o.Run()
			if !math.IsInf(got.Time, 1) || !(got.Lowest > 5 && got.Lowest <= 15) {
				t.Errorf("%s, waits %v: %v", what, waits, got)
			}
			if got = o.Together().Run(); !math.IsInf(got.Time, 1) || !(got.Lowest > 5) {
				t.Errorf("%s, at once: %v", what, got)
			}
		}
	}
	o := staged()
	o.Initial = 12
	if got := o.Run(); got.Time != 0 {
		t.Errorf("there from the start: %v", got)
	}
}

// Less supply, a smaller reservoir, more load and more capacitance never make the charge faster, and where groups start at given times they never
// keep V_DD higher: eq. (5) is monotone in all of them.
func TestOrderIsMonotone(t *testing.T) {
	worse := map[string]func(o *startup.Order, x float64){
		"supply current": func(o *startup.Order, x float64) { o.SupplyCurrent /= 1 + 3*x },
		"load":           func(o *startup.Order, x float64) { o.Load *= 1 + 9*x },
		"reservoir":      func(o *startup.Order, x float64) { o.Reservoir.Reservoir /= 1 + x },
		"bootstrap":      func(o *startup.Order, x float64) { o.Bootstrap *= 1 + x },
		"supply":         func(o *startup.Order, x float64) { o.Supply -= 1.5 * x },
		"target":         func(o *startup.Order, x float64) { o.Target += x },
	}
	rng := rand.New(rand.NewPCG(1, 2))
	for what, change := range worse {
		for n := range 40 {
			base := staged()
			base.Element = silicon(math.Exp(rng.Float64()*5 - 1))
			base.Reservoir.Reservoir = 3e-6 * math.Exp(3*rng.Float64())
			base.SupplyCurrent = math.Exp(rng.Float64()*5 - 5)
			base.Target = 8 + 4*rng.Float64()
			base.Waits, base.Interval = n%2 == 0, 1e-6*math.Exp(7*rng.Float64())
			var last startup.Outcome
			for k := range 12 {
				o := base
				change(&o, float64(k)/11)
				got := o.Run()
				if got.Lowest != got.Lowest || got.Time != got.Time {
					t.Fatalf("%s %d %d: %v from %+v", what, n, k, got, o)
				}
				if k > 0 {
					if got.Time < last.Time*(1-5e-5) {
						t.Errorf("%s, case %d, step %d: %g s after %g s, %+v", what, n, k, got.Time, last.Time, o)
					}
					if !base.Waits && what != "target" && got.Lowest > last.Lowest+5e-5 {
						t.Errorf("%s, case %d, step %d: %g V after %g V, %+v", what, n, k, got.Lowest, last.Lowest, o)
					}
				}
				last = got
			}
		}
	}
}

func TestOrderNaN(t *testing.T) {
	for what, change := range map[string]func(*startup.Order){
		"resistance":        func(o *startup.Order) { o.Element.Resistance = nan },
		"bootstrap":         func(o *startup.Order) { o.Bootstrap = nan },
		"reservoir":         func(o *startup.Order) { o.Reservoir.Reservoir = nan },
		"supply":            func(o *startup.Order) { o.Supply = nan },
		"initial":           func(o *startup.Order) { o.Initial = nan },
		"load":              func(o *startup.Order) { o.Load = nan },
		"supply current":    func(o *startup.Order) { o.SupplyCurrent = nan },
		"target":            func(o *startup.Order) { o.Target = nan },
		"interval":          func(o *startup.Order) { o.Waits, o.Interval = false, nan },
		"negative interval": func(o *startup.Order) { o.Waits, o.Interval = false, -1 },
		"no stage":          func(o *startup.Order) { o.Stages = 0 },
		"no group":          func(o *startup.Order) { o.Count = 0 },
	} {
		o := staged()
		change(&o)
		if r := o.Run(); r.Lowest == r.Lowest || r.Time == r.Time {
			t.Errorf("%s: %v", what, r)
		}
	}
}
