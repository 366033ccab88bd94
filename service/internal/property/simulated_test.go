package property

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"floatrail/calc/circuit"
	"floatrail/calc/corner"
	"floatrail/calc/quantity"
)

// tries is the number of random corners that are simulated at every temperature set.
const tries = 24

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
	}{{"buck48, slow", with(document(t, "buck48"), slow...)}, {"drive400", document(t, "drive400")}} {
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
