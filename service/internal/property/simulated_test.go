package property

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"floatrail/calc"
	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/finding"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
	"floatrail/calc/transient"
)

// short is by how much of its size the worst number that is found may fall short of what a random corner shows [1].
const short = 0.02

// TestSimulatedWorstIsFound simulates random corners, in which every input stands at one of its ends or at its typical value: none of them is worse
// than what the search finds with one simulation for each input and a few more.
func TestSimulatedWorstIsFound(t *testing.T) {
	numbers := []struct {
		name  string
		event circuit.Event
		high  bool
		dim   quantity.Dimension
		of    func(*circuit.Circuit, circuit.Event) float64
	}{
		{"undershoot", circuit.TurnOff, false, quantity.Voltage, (*circuit.Circuit).PinDip},
		{"high side's peak", circuit.TurnOff, true, quantity.Voltage, func(c *circuit.Circuit, e circuit.Event) float64 { return c.SwitchPeak(e, &c.Stage.HighSide) }},
		{"slew", circuit.TurnOn, true, quantity.VoltageSlew, (*circuit.Circuit).Slew},
		{"low side's peak", circuit.TurnOn, true, quantity.Voltage, func(c *circuit.Circuit, e circuit.Event) float64 { return c.SwitchPeak(e, &c.Stage.LowSide) }},
		{"induced gate voltage", circuit.TurnOn, true, quantity.Voltage, (*circuit.Circuit).Induced},
	}
	for _, s := range []struct {
		name string
		tree any
	}{{"buck48, slow", with(document(t, "buck48"), slow...)}, {"drive400", document(t, "drive400")}, {"gan650", document(t, "gan650")}, {"buck48", document(t, "buck48")}} {
		bench := judge(t, bind(t, s.tree), nil).bench
		bench.Simulate()
		for _, n := range numbers {
			t.Run(fmt.Sprintf("%s/%s", s.name, n.name), func(t *testing.T) {
				of := func(c *circuit.Circuit) float64 { return n.of(c, n.event) }
				for i := range bench.Points {
					p := &bench.Points[i]
					if !circuit.Occurs(bench.Stage, p.Operating, n.event) {
						continue
					}
					found := bench.Adverse(bench.Twins(p), of, n.dim, n.high)
					worst := found.Low.Value
					if n.high {
						worst = found.High.Value
					}
					for k, space := range p.Simulated {
						random := rand.New(rand.NewPCG(uint64(i), uint64(k)))
						_, trace := corner.Evaluate(space.Typical(), func(d *corner.Draw) float64 { return of(circuit.Of(d)) })
						inputs := space.Inputs(trace)
						for range tries {
							var changes []corner.Change
							for _, q := range inputs {
								if r := space.Range(q); r.Min < r.Max {
									changes = append(changes, corner.Change{ID: q.ID, Value: [...]float64{r.Min, r.Typ, r.Max}[random.IntN(3)]})
								}
							}
							space.Try(space.Typical(), func(d *corner.Draw) {
								v, _ := corner.Evaluate(d, func(d *corner.Draw) float64 { return of(circuit.Of(d)) })
								if n.high {
									v = -v
								}
								if v < worst-short*math.Abs(worst) {
									t.Errorf("%s, %s: %g is worse than %g, which was found", p.Name(), space.Set.Name, v, worst)
								}
							}, changes...)
						}
					}
				}
			})
		}
	}
}

// simulated is a review of a tree with its switching events simulated.
func simulated(t testing.TB, tree any) finding.Report {
	t.Helper()
	r := bind(t, tree)
	r.Options.Simulate = true
	report, err := calc.Review(context.Background(), *r, calc.WithTransient)
	if err != nil {
		t.Fatal(err)
	}
	report.Simulations, report.SimulationSteps = 0, 0 // depend on what was shared, not the answer
	return report
}

// TestSimulatedAnswersNeverVary reviews a stage with one processor and with all, and again.
func TestSimulatedAnswersNeverVary(t *testing.T) {
	tree := with(document(t, "buck48"), slow...)
	first := simulated(t, tree)
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	for _, n := range []int{1, 4} {
		runtime.GOMAXPROCS(n)
		if d := cmp.Diff(first, simulated(t, tree), cmpopts.EquateNaNs()); d != "" {
			t.Errorf("with %d processors the answer is another: %s", n, d)
		}
	}
}

// TestMeasuredSlopesAloneDecide takes what a simulation needs from a stage: slopes measured on the board then decide in closed form, and without
// them the events are open and name what to supply.
func TestMeasuredSlopesAloneDecide(t *testing.T) {
	const lacking = "stage.highSide.transconductance"
	tree := without(document(t, "buck48"), at("stage.highSide.transconductance"))
	report := simulated(t, tree)
	estimated := review(t, tree, calc.WithTransient)
	for _, e := range report.Transient.Events {
		if e.Method != finding.Estimate && (e.Event == "TURN_OFF" || e.Event == "TURN_ON") {
			t.Errorf("%s at %s is a %s", e.Event, e.OperatingPoint, e.Method)
		}
	}
	for _, id := range []string{"node/undershoot-pulse", "node/rail-below-com", "node/rail-overshoot"} {
		f, g := pick(t, &report, id, "driver"), pick(t, &estimated, id, "driver")
		if f.Outcome != g.Outcome || math.Abs(f.Value.Value-g.Value.Value) > 1e-3*math.Abs(g.Value.Value) {
			t.Errorf("%s: %s at %g with the simulation asked for, %s at %g without", id, f.Outcome, f.Value.Value, g.Outcome, g.Value.Value)
		}
	}
	for _, role := range []string{"current slope", "voltage slope"} {
		if f := pick(t, &report, "node/measured-slope", role); f.Outcome != finding.Open || !slices.Contains(f.Missing, lacking) {
			t.Errorf("%s: %s, missing %v", role, f.Outcome, f.Missing)
		}
	}
	report = simulated(t, without(tree, at("stage.layout.measured")))
	for _, id := range []string{"node/undershoot-pulse", "node/slew", "node/rail-overshoot"} {
		if f := pick(t, &report, id, "driver"); f.Outcome != finding.Open || !slices.Contains(f.Missing, lacking) || !strings.Contains(f.Message, "highSide.transconductance") {
			t.Errorf("%s: %s, missing %v: %s", id, f.Outcome, f.Missing, f.Message)
		}
	}
	for _, e := range report.Transient.Events {
		if e.Event == "TURN_OFF" && !slices.Contains(e.Missing, lacking) {
			t.Errorf("%s at %s: missing %v", e.Event, e.OperatingPoint, e.Missing)
		}
	}
}

// TestDipsAreCounted holds the times below the levels of the driver's table together: each dip is no longer than all of them, and the deeper level is
// the one passed for less time.
func TestDipsAreCounted(t *testing.T) {
	report := simulated(t, with(document(t, "buck48"), to("stage.driver.nodeUndershoot.0.voltage", `"-2 V"`)))
	dips, listed := 0, 0
	for _, e := range report.Transient.Events {
		for i, u := range e.Undershoots {
			if u.Duration.Max > u.Total.Max*(1+1e-9) || u.Dips == 0 && u.Total.Max > 0 || u.Dips == 1 && u.Duration.Max < u.Total.Max*(1-1e-9) {
				t.Errorf("%s at %s below %g V: %g s at most, %g s in %d dips", e.Event, e.OperatingPoint, u.Level.Value, u.Duration.Max, u.Total.Max, u.Dips)
			}
			if i > 0 && (u.Total.Max > e.Undershoots[i-1].Total.Max || u.Level.Value > e.Undershoots[i-1].Level.Value) {
				t.Errorf("%s at %s: %g s below %g V, %g s below %g V", e.Event, e.OperatingPoint, u.Total.Max, u.Level.Value,
					e.Undershoots[i-1].Total.Max, e.Undershoots[i-1].Level.Value)
			}
			dips = max(dips, u.Dips)
			sum, longest := 0.0, 0.0
			for _, one := range u.Each {
				sum, longest = sum+one.Value, max(longest, one.Value)
			}
			if longest > u.Duration.Max*(1+1e-5) || sum > u.Total.Max*(1+1e-5) || len(u.Each) > u.Dips {
				t.Errorf("%s at %s below %g V: %d dips of %g s, %g s together, want at most %d, %g s, %g s", e.Event, e.OperatingPoint, u.Level.Value,
					len(u.Each), longest, sum, u.Dips, u.Duration.Max, u.Total.Max)
			}
			listed = max(listed, len(u.Each))
		}
	}
	if dips < 2 || listed < 1 {
		t.Errorf("%d dips at most, %d listed: nothing rings", dips, listed)
	}
}

// TestNormalOperationIsDeepest holds what the search relies on: of both states of charge the one of normal operation takes the pin deepest.
func TestNormalOperationIsDeepest(t *testing.T) {
	for _, s := range []struct {
		name string
		tree any
	}{
		{"buck48", document(t, "buck48")}, {"buck48, slow", with(document(t, "buck48"), slow...)}, {"gan650", document(t, "gan650")},
		{"buck48, slow, with R_VS", with(document(t, "buck48"), append(slow, to("stage.layout.nodeResistor.resistance.typ", `"2.2 ohm ±1 %"`))...)},
		{"drive400", document(t, "drive400")},
	} {
		bench := judge(t, bind(t, s.tree), nil).bench
		bench.Simulate()
		compared := 0
		for i := range bench.Points {
			p := &bench.Points[i]
			for _, space := range p.Simulated {
				corner.Evaluate(space.Typical(), func(d *corner.Draw) float64 {
					c := circuit.Of(d)
					if !circuit.Occurs(bench.Stage, p.Operating, circuit.TurnOff) || c.Current(circuit.TurnOff) == 0 {
						return 0
					}
					running, lockout := c.Course(circuit.TurnOff, circuit.Running), c.Course(circuit.TurnOff, circuit.AtLockout)
					if running == nil || lockout == nil {
						t.Errorf("%s, %s: not simulated", s.name, p.Name())
						return 0
					}
					compared++
					if a, b := running.Ranges[transient.Pin].Min, lockout.Ranges[transient.Pin].Min; a > b+0.01 {
						t.Errorf("%s, %s, %s: the pin goes to %g V, from V_UV- to %g V", s.name, p.Name(), space.Set.Name, a, b)
					}
					return 0
				})
			}
		}
		if compared == 0 {
			t.Errorf("%s: no turn-off", s.name)
		}
	}
}

// TestUnsimulatedIsOpen gives events that cannot be simulated: a switch that does not carry its current at any voltage has no state to begin with.
func TestUnsimulatedIsOpen(t *testing.T) {
	tree := with(document(t, "buck48"), append(slow, to("stage.highSide.transconductance", `{"min": "1.8 S", "typ": "2 S", "max": "2.2 S"}`))...)
	report := simulated(t, tree)
	for _, id := range []string{"node/undershoot-pulse", "node/slew", "node/rail-overshoot"} {
		f := pick(t, &report, id, "driver")
		if f.Outcome != finding.Open || f.Severity < stage.Major || !strings.Contains(f.Message, "high side") {
			t.Errorf("%s: %s at %s: %s", id, f.Outcome, f.Severity, f.Message)
		}
	}
	open := 0
	for _, e := range report.Transient.Events {
		if e.Reason != "" {
			open++
			if e.NodeMin.Min == e.NodeMin.Min || e.NodeMax.Max == e.NodeMax.Max {
				t.Errorf("%s at %s has numbers, although %s", e.Event, e.OperatingPoint, e.Reason)
			}
		}
	}
	if open == 0 {
		t.Error("no event tells why it is open")
	}
}

// TestUndershootChargesTheSupply compares what the dips of a period add to V_BS, as levels and times that the period map takes, with what the simulation
// that they come from shows: most of it for dips that lie clearly beyond the diode's plateau, which itself is another interval of the period.
func TestUndershootChargesTheSupply(t *testing.T) {
	const deep, least, most = -2.4, 0.8, 1.12 // [V]; what is drawn within the plateau before and after the dip is missing: up to a fifth
	compared := 0
	for _, tree := range []any{document(t, "buck48"), with(document(t, "buck48"), slow...), document(t, "gan650"), document(t, "drive400"),
		with(document(t, "buck48"), append(slow, to("stage.layout.nodeResistor.resistance.typ", `"2.2 ohm ±1 %"`))...)} {
		bench := judge(t, bind(t, tree), nil).bench
		bench.Simulate()
		for i := range bench.Points {
			corner.Evaluate(corner.Home(bench.Points[i].Simulated).Typical(), func(d *corner.Draw) float64 {
				c := circuit.Of(d)
				if !c.Occurs(circuit.TurnOff) || c.Current(circuit.TurnOff) == 0 {
					return 0
				}
				k := c.Course(circuit.TurnOff, circuit.Running)
				if k == nil || k.Ranges[transient.Node].Min > deep {
					return 0
				}
				p, v := c.Pumped(), k.Ranges[transient.Floating].Min
				for n := range p.Off {
					if p.Names[n] == circuit.IntervalUndershoot {
						v, _ = p.Element.Advance(v, p.Off[n], p.Capacitance)
					}
				}
				compared++
				if gain := v - k.Ranges[transient.Floating].Min; gain < least*k.Gain || gain > most*k.Gain {
					t.Errorf("%s, %s: %g V by the period, %g V simulated", bench.Stage.ID, bench.Points[i].Name(), gain, k.Gain)
				}
				return 0
			})
		}
	}
	if compared < 8 {
		t.Errorf("%d compared", compared)
	}
}

// TestRandomStagesSimulate draws stages at random about three demo stages, every number of them by up to a factor of 2.7: an event is simulated with numbers
// throughout, or the circuit says why it is not.
func TestRandomStagesSimulate(t *testing.T) {
	simulated, unsolved := 0, 0
	for k, name := range []string{"buck48", "gan650", "drive400"} {
		bench := judge(t, bind(t, document(t, name)), nil).bench
		bench.Simulate()
		random := rand.New(rand.NewPCG(2026, uint64(k)))
		for n := range randomStages {
			space := bench.Points[n%len(bench.Points)].Simulated[n%3%len(bench.Points[n%len(bench.Points)].Simulated)]
			var changes []corner.Change
			for id, q := range bench.Stage.Inputs() {
				if id > 0 && q.Known() && q.Typ != 0 {
					changes = append(changes, corner.Change{ID: id, Value: min(max(q.Typ*math.Exp(2*random.Float64()-1), q.Declare.Low), q.Declare.High)})
				}
			}
			space.Try(space.Typical(), func(d *corner.Draw) {
				for _, e := range circuit.Events() {
					var course *transient.Course
					_, trace := corner.Evaluate(d, func(d *corner.Draw) float64 {
						if c := circuit.Of(d); c.Current(e) > 0 && c.Simulates(e) {
							course = c.Course(e, circuit.StateOfCharge(n%2))
						} else {
							course = &transient.Course{}
						}
						return 0
					})
					if course == nil {
						if trace.Complete() {
							t.Errorf("%s, stage %d, %s: not simulated without a reason", name, n, e)
						}
						for _, r := range trace.Reasons() {
							if strings.Contains(r, transient.ErrUnsolved.Error()) {
								unsolved++
							}
						}
						continue
					}
					simulated++
					sum := course.Gain + course.NodeSlew + course.Slew + course.RingFrequency + course.End
					for _, r := range course.Ranges {
						sum += r.Min + r.Max
					}
					if sum != sum || math.IsInf(sum, 0) {
						t.Errorf("%s, stage %d, %s: %+v", name, n, e, course)
					}
				}
			}, changes...)
		}
	}
	t.Logf("%d events simulated, %d did not converge", simulated, unsolved)
	if unsolved*1000 > simulated {
		t.Errorf("%d of %d did not converge", unsolved, simulated)
	}
}

// TestSimulatedBreakEvens puts the break-even values of a rule that fails into the stage, one at a time: what is left of the margin is small, and what a
// board can change is among them.
func TestSimulatedBreakEvens(t *testing.T) {
	tree := with(document(t, "buck48"), append(slow, to("stage.driver.railMin", `"-300 mV"`))...)
	report := simulated(t, tree)
	passing := pick(t, &report, "node/undershoot-pulse", "driver")
	if passing.Outcome != finding.Pass || len(passing.BreakEven) == 0 {
		t.Errorf("%s with break-evens %v: %s", passing.Outcome, passing.BreakEven, passing.Message)
	}
	before := pick(t, &report, "node/rail-below-com", "driver")
	if before.Outcome != finding.Fail || len(before.BreakEven) < 2 {
		t.Fatalf("%s with break-evens %v", before.Outcome, before.BreakEven)
	}
	for _, b := range before.BreakEven {
		value := fmt.Sprintf(`{"min": %q, "typ": %[1]q, "max": %[1]q}`, quantity.Format(b.Measure.Value, b.Measure.Dimension))
		after := simulated(t, with(tree, to(strings.NewReplacer("[", ".", "]", "").Replace(b.Field), value)))
		f := pick(t, &after, "node/rail-below-com", "driver")
		if m, was := f.Margin.Absolute.Value, before.Margin.Absolute.Value; !(m > 0.2*was) || !(m < -0.2*was) {
			t.Errorf("%s at %s: margin %g V, was %g V", b.Field, value, m, was)
		}
	}
}
