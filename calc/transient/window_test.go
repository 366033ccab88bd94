package transient

import (
	"errors"
	"math"
	"reflect"
	"strings"
	"testing"

	"floatrail/calc/recharge"
)

// TestWindow lets each reference case find its own end: the current has commutated by then, the node stays within 3 % of V_BUS to either side from one
// ringing period before it to the end of the reference's window, and the course up to the end is that of a run that goes on.
func TestWindow(t *testing.T) {
	var s Simulator
	for _, c := range referenceCases(t) {
		b := c.bridge()
		co, err := s.Run(b, Window{Limit: 2e-6, Levels: []float64{-1}})
		if err != nil {
			t.Fatalf("%s: %v", c.Name, err)
		}
		if !co.Settled || co.End > c.Input.End {
			t.Errorf("%s: settled %v at %g s, the reference's window, 1.25 times its own rest, ends at %g s", c.Name, co.Settled, co.End, c.Input.End)
		}
		hold := s.calm.hold
		if left := map[Event]float64{TurnOff: co.Last.HighCurrent, SinkingTurnOn: co.Last.HighCurrent}[b.Event]; math.Abs(left) > 0.1*math.Abs(b.Load) {
			t.Errorf("%s: %g A left in the branch that carried %g A", c.Name, left, b.Load)
		}
		low, high := math.Inf(1), math.Inf(-1)
		s.seen = func(at *span) {
			for k := range 9 {
				theta := float64(k) / 8
				if at.at(theta) >= co.End-hold {
					p := s.circuit.node.of(&at.state)
					low, high = math.Min(low, p.At(theta)), math.Max(high, p.At(theta))
				}
			}
		}
		whole, err := s.Run(b, Window{Limit: c.Input.End, Whole: true})
		s.seen = nil
		if err != nil {
			t.Fatal(err)
		}
		if high-low > 1.5*2*calmRing*b.Bus { // a slow tail may go on
			t.Errorf("%s: the node moves by %g V after it has settled", c.Name, high-low)
		}
		if whole.End != c.Input.End || !whole.Settled {
			t.Errorf("%s: ends at %g s, settled %v", c.Name, whole.End, whole.Settled)
		}
		cut, err := s.Run(b, Window{Limit: co.End * (1 - 1e-12), Levels: []float64{-1}})
		if err != nil {
			t.Fatal(err)
		}
		same(t, c.Name+", node", cut.Ranges[Node].Min, co.Ranges[Node].Min, 1e-3)
		near(t, c.Name+", gain", cut.Gain, co.Gain, 1e-3*math.Abs(co.Gain)+1e-6)
	}
}

// TestTighter takes a tenth of the tolerance, as an answer reports it for its binding runs, each run with its own window.
func TestTighter(t *testing.T) {
	var s Simulator
	worst := map[string]float64{}
	for _, c := range referenceCases(t) {
		b := c.bridge()
		w := Window{Limit: 2e-6}
		a, err := s.Run(b, w)
		if err != nil {
			t.Fatal(err)
		}
		w.Tolerance = DefaultTolerance / 10
		z, err := s.Run(b, w)
		if err != nil {
			t.Fatal(err)
		}
		check := func(what string, got, want, scale, limit float64) {
			d := math.Abs(got-want) / scale
			worst[what] = math.Max(worst[what], d)
			if !(d <= limit) {
				t.Errorf("%s: %s changes by %.3g %%, %g to %g", c.Name, what, 100*d, got, want)
			}
		}
		for k := range a.Ranges {
			scale := b.Bus
			if Signal(k) == Floating || Signal(k) == HighGate || Signal(k) == LowGate {
				scale = b.Supply
			}
			inside := func(t float64) bool { return t < 0.9*math.Min(a.End, z.End) } // a gate may still move towards its bias
			if inside(a.Ranges[k].MinTime) && inside(z.Ranges[k].MinTime) {
				check("extremes", a.Ranges[k].Min, z.Ranges[k].Min, scale, 0.005)
			}
			if inside(a.Ranges[k].MaxTime) && inside(z.Ranges[k].MaxTime) {
				check("extremes", a.Ranges[k].Max, z.Ranges[k].Max, scale, 0.005)
			}
		}
		if z.Ranges[Node].Min < 0 {
			check("undershoot", a.Ranges[Node].Min, z.Ranges[Node].Min, math.Max(1, -z.Ranges[Node].Min), 0.005)
		}
		check("end of the window", a.End, z.End, z.End, 0.02)
		if math.Abs(z.Gain) > 1e-3 {
			check("gain", a.Gain, z.Gain, math.Abs(z.Gain), 0.01)
		}
	}
	t.Log(worst)
}

// A window that ends before the event says so, and its numbers are those up to there.
func TestUnfinishedWindow(t *testing.T) {
	b := referenceCases(t)[12].bridge()
	early := course(t, b, Window{Limit: 30e-9})
	whole := course(t, b, Window{Limit: 1e-6})
	if early.Settled || early.End != 30e-9 || !whole.Settled {
		t.Errorf("settled %v at %g s; %v", early.Settled, early.End, whole.Settled)
	}
	if early.Ranges[Node].Min < whole.Ranges[Node].Min || early.Ranges[Node].MinTime > 30e-9 {
		t.Error("the short window saw more")
	}
}

// TestRunsAreIndependent compares a fresh simulator's course with one after many others, to the last bit.
func TestRunsAreIndependent(t *testing.T) {
	var used Simulator
	w := Window{Limit: 1e-6, Levels: []float64{-1, -3}, Waveforms: []Signal{Node, ElementCurrent}}
	cases := referenceCases(t)
	for k := range cases {
		b := cases[k].bridge()
		var fresh Simulator
		a, err := fresh.Run(b, w)
		if err != nil {
			t.Fatal(err)
		}
		before := *b
		z, err := used.Run(b, w)
		if err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(a, z) {
			t.Errorf("%s: the course depends on the runs before", cases[k].Name)
		}
		if !reflect.DeepEqual(*b, before) {
			t.Errorf("%s: the run changed its parameters", cases[k].Name)
		}
	}
}

// A run allocates its answer and nothing per step.
func TestAllocations(t *testing.T) {
	var s Simulator
	b := referenceCases(t)[0].bridge()
	count := func(w Window) float64 {
		return testing.AllocsPerRun(20, func() {
			if _, err := s.Run(b, w); err != nil {
				t.Fatal(err)
			}
		})
	}
	few, many := count(Window{Limit: 20e-9, Whole: true}), count(Window{Limit: 300e-9, Whole: true, Tolerance: 1e-6})
	if few != many || few > 8 {
		t.Errorf("%g and %g allocations", few, many)
	}
}

func TestInterrupted(t *testing.T) {
	var s Simulator
	asked := 0
	_, err := s.Run(referenceCases(t)[0].bridge(), Window{Limit: 1e-6, Interrupted: func() bool { asked++; return asked == 3 }})
	if !errors.Is(err, ErrInterrupted) || asked != 3 {
		t.Errorf("%v after %d polls", err, asked)
	}
}

func TestWaveforms(t *testing.T) {
	var s Simulator
	all := make([]Signal, signals)
	for k := range all {
		all[k] = Signal(k)
	}
	for _, w := range []Window{{Limit: 1e-6}, {Limit: 1e-6, Tolerance: 1e-9}} {
		w.Waveforms = all
		co, err := s.Run(referenceCases(t)[4].bridge(), w)
		if err != nil {
			t.Fatal(err)
		}
		if w.Tolerance > 0 && co.Steps < mostPoints {
			t.Fatalf("only %d steps", co.Steps)
		}
		for k, wave := range co.Waveforms {
			if wave.Signal != Signal(k) || len(wave.Time) != len(wave.Value) || len(wave.Time) > mostPoints || len(wave.Time) < 200 {
				t.Fatalf("signal %d: %d times, %d values", wave.Signal, len(wave.Time), len(wave.Value))
			}
			if wave.Time[0] != 0 || wave.Time[len(wave.Time)-1] != co.End {
				t.Errorf("signal %d from %g to %g s", k, wave.Time[0], wave.Time[len(wave.Time)-1])
			}
			least, most := math.Inf(1), math.Inf(-1)
			for i, v := range wave.Value {
				least, most = math.Min(least, v), math.Max(most, v)
				if i > 0 && !(wave.Time[i] > wave.Time[i-1]) {
					t.Fatalf("signal %d: time %d does not rise", k, i)
				}
			}
			if Signal(k) < ranged {
				r := co.Ranges[k]
				near(t, "least", least, r.Min, 1e-12*math.Abs(r.Min))
				near(t, "greatest", most, r.Max, 1e-12*math.Abs(r.Max))
			}
		}
		sum := 0.0 // the element's charge under its waveform
		wave := co.Waveforms[ElementCurrent]
		for i := 1; i < len(wave.Time); i++ {
			sum += (wave.Value[i] + wave.Value[i-1]) / 2 * (wave.Time[i] - wave.Time[i-1])
		}
		same(t, "charge", sum, co.ElementCharge, 0.01)
	}
	if _, err := s.Run(referenceCases(t)[4].bridge(), Window{Limit: 1e-6, Waveforms: []Signal{signals}}); !errors.Is(err, ErrOutside) {
		t.Errorf("an unknown waveform: %v", err)
	}
}

// What the equations do not hold for is refused with a reason, and nothing is returned.
func TestRefused(t *testing.T) {
	var s Simulator
	for _, c := range []struct {
		change func(b *Bridge)
		reason string
	}{
		{func(b *Bridge) { b.Load = 1000 }, "more than the channel carries"},
		{func(b *Bridge) { b.Load = -1 }, "direction"},
		{func(b *Bridge) { b.Load = nan }, "load current is not known"},
		{func(b *Bridge) { b.L2 = 0 }, "L2 is 0"},
		{func(b *Bridge) { b.Bus = inf }, "bus voltage is not known"},
		{func(b *Bridge) { b.HighCommonSource = 1e-6 }, "exceeds L1"},
		{func(b *Bridge) { b.High.Transfer = Curve{} }, "high side's C_rss is not known"},
		{func(b *Bridge) { b.Low.Output = Curve{Points: []CurvePoint{{10, 1e-9}, {5, 1e-9}}} }, "low side's C_oss is no curve"},
		{func(b *Bridge) { b.Low.Recovery.Tau = nan }, "low side's τ is not known"},
		{func(b *Bridge) { b.High.Diode = true }, "obeys no command"},
		{func(b *Bridge) { b.Event = 7 }, "no event"},
		{func(b *Bridge) { b.High.GateResistance = 0 }, "gate resistance is 0"},
		{func(b *Bridge) { b.Floating = 1 }, "more than the channel carries"},
	} {
		b := simple(TurnOff)
		c.change(b)
		co, err := s.Run(b, Window{Limit: 1e-6})
		if co != nil || !errors.Is(err, ErrOutside) || !strings.Contains(err.Error(), c.reason) {
			t.Errorf("%v, %v, want %q", co, err, c.reason)
		}
	}
	for _, limit := range []float64{0, -1, nan, inf} {
		if _, err := s.Run(simple(TurnOff), Window{Limit: limit}); !errors.Is(err, ErrOutside) {
			t.Errorf("limit %g: %v", limit, err)
		}
	}
}

// Parts without resistance, ideal parts, parts that are not there and data that contradict each other are simulated, and differ from the like by what
// their difference is worth.
func TestUnusualParts(t *testing.T) {
	base := func() *Bridge {
		b := referenceCases(t)[4].bridge() // mosfet48, TURN_OFF
		b.High.Recovery, b.Low.Recovery = Recovery{}, Recovery{}
		return b
	}
	plain := course(t, base(), Window{Limit: 1e-6})
	for _, c := range []struct {
		name   string
		change func(b *Bridge)
		within float64 // of the undershoot, 0: not compared
	}{
		{"no series resistance", func(b *Bridge) { b.Low.Reverse.Resistance = 0 }, 0.02},
		{"tiny series resistance", func(b *Bridge) { b.Low.Reverse.Resistance = 1e-9 }, 0.02},
		{"fixed drop", func(b *Bridge) {
			b.Low.Reverse = recharge.Junction{Slope: 1e-5, LogSaturation: math.Log(30) - 0.88/1e-5}
		}, 0.02},
		{"ideal diode", func(b *Bridge) { b.Low.Reverse = recharge.Junction{} }, 0.15},
		{"no R_VS, tiny R_VS", func(b *Bridge) { b.NodeResistor = 1e-6 }, 0.001},
		{"no ringing resistance", func(b *Bridge) { b.RingingResistance = 0; b.R1, b.R2 = 0.1, 0.1 }, 0.5},
		{"element without resistance", func(b *Bridge) { b.Element.Resistance = 0 }, 0},
		{"ideal element", func(b *Bridge) { b.Element = recharge.Element{Resistance: 2} }, 0.1},
		{"integrated switch", func(b *Bridge) { b.Element = recharge.Element{Switch: true, Resistance: 50} }, 0.2},
		{"clamp", func(b *Bridge) { b.Clamped, b.Clamp, b.NodeResistor = true, recharge.Junction{}, 5 }, 0},
		{"contradicting capacitances", func(b *Bridge) { b.Low.Transfer = b.Low.Output }, 0},
		{"forward recovery as an inductance", func(b *Bridge) { b.Low.Forward = ForwardRecovery{1e-9, inf} }, 0},
		{"diode below", func(b *Bridge) { b.Low = Cell{Diode: true, Output: b.Low.Output, Reverse: b.Low.Reverse} }, 0.03},
	} {
		b := base()
		c.change(b)
		co := course(t, b, Window{Limit: 1e-6})
		if !co.Settled {
			t.Errorf("%s: not settled by %g s", c.name, co.End)
		}
		if c.within > 0 {
			same(t, c.name, co.Ranges[Node].Min, plain.Ranges[Node].Min, c.within)
		}
		if math.IsNaN(co.Gain + co.Ranges[Node].Min + co.Ranges[HighDrain].Max) {
			t.Errorf("%s: a result is no number", c.name)
		}
		switch c.name {
		case "integrated switch":
			if co.Gain != 0 || co.ElementCharge != 0 {
				t.Errorf("the integrated switch conducts %g C while the low side is off", co.ElementCharge)
			}
		case "forward recovery as an inductance": // L_fr adds to L2
			l := base()
			l.L2 += 1e-9
			l.L1 -= 1e-9
			b.L1 += 0
			inductive := course(t, l, Window{Limit: 1e-6})
			if !(co.Ranges[Node].Min < plain.Ranges[Node].Min && co.Ranges[Node].Min > 1.2*inductive.Ranges[Node].Min) {
				t.Errorf("%s: %g V, without %g V, as part of L2 %g V", c.name, co.Ranges[Node].Min, plain.Ranges[Node].Min, inductive.Ranges[Node].Min)
			}
		case "clamp":
			if co.Ranges[Pin].Min < -0.5 || co.Ranges[Node].Min > -2 {
				t.Errorf("pin %g V, node %g V", co.Ranges[Pin].Min, co.Ranges[Node].Min)
			}
		}
	}
	on := referenceCases(t)[7].bridge() // SINKING_TURN_ON
	on.Element = recharge.Element{Switch: true, Resistance: 50}
	co := course(t, on, Window{Limit: 1e-6})
	if !(co.Gain > 0) {
		t.Errorf("the integrated switch of a low side that turns on gains %g V", co.Gain)
	}
}

// TestDips counts dips in samples of the dense output.
func TestDips(t *testing.T) {
	levels := []float64{-0.5, -1.5, -2.5, -3.5, 5, 1e6}
	var s Simulator
	dips := 0
	for _, c := range referenceCases(t) {
		type sampled struct {
			inside                bool
			since, total, longest float64
			count                 int
		}
		all := make([]sampled, len(levels))
		last, coarse := 0.0, 0.0
		s.seen = func(at *span) {
			p := s.circuit.node.of(&at.state)
			const n = 200
			coarse = math.Max(coarse, at.length/n)
			for k := range n + 1 {
				v, now := p.At(float64(k)/n), at.at(float64(k)/n)
				for i := range all {
					a := &all[i]
					switch below := v <= levels[i]; {
					case below && !a.inside:
						a.inside, a.since = true, now
						a.count++
					case !below && a.inside:
						a.inside = false
						a.total += now - a.since
						a.longest = math.Max(a.longest, now-a.since)
					}
				}
				last = now
			}
		}
		co, err := s.Run(c.bridge(), Window{Limit: 1e-6, Levels: levels})
		if err != nil {
			t.Fatal(err)
		}
		for i := range all {
			a, d := &all[i], &co.BelowNode[i]
			if a.inside {
				a.total += last - a.since
				a.longest = math.Max(a.longest, last-a.since)
			}
			if d.Lasting != a.inside || d.Level != levels[i] {
				t.Errorf("%s: below %g V at the end: %v, samples %v", c.Name, levels[i], d.Lasting, a.inside)
			}
			if d.Count != a.count {
				t.Errorf("%s: %d dips below %g V, samples %d", c.Name, d.Count, levels[i], a.count)
			}
			near(t, c.Name+", total", d.Total, a.total, 3*coarse*float64(a.count)+1e-18)
			near(t, c.Name+", longest", d.Longest, a.longest, 3*coarse+1e-18)
			if d.Count > 0 && (d.Start < 0 || d.Start+d.Longest > co.End*(1+1e-12)) {
				t.Errorf("%s: longest dip from %g s for %g s in %g s", c.Name, d.Start, d.Longest, co.End)
			}
			dips += d.Count
		}
	}
	if dips < 200 {
		t.Errorf("only %d dips", dips)
	}
}

// The lengths of the dips that are listed are those that the sum, the longest and the number count.
func TestEachDip(t *testing.T) {
	var s Simulator
	several := 0
	for _, c := range referenceCases(t) {
		for _, d := range c.run(t, &s, 0, 0).BelowPin {
			sum, longest := 0.0, 0.0
			for _, one := range d.Each {
				sum, longest = sum+one, math.Max(longest, one)
			}
			if len(d.Each) != min(d.Count, mostDips) || d.Count <= mostDips && (math.Abs(sum-d.Total) > 1e-12*d.Total || longest != d.Longest) {
				t.Errorf("%s: %+v", c.Name, d)
			}
			if len(d.Each) > 1 {
				several++
			}
		}
	}
	if several < 20 {
		t.Errorf("%d levels with several dips", several)
	}
}
