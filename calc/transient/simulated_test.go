package transient

import (
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"
)

// simulatedSwitch is one position of a simulated bridge, as testdata/reference/event.py writes it.
type simulatedSwitch struct {
	InputCapacitance        float64      `json:"c_iss"`
	InputCapacitanceVoltage float64      `json:"c_iss_voltage"`
	Output                  [][2]float64 `json:"c_oss"`
	Transfer                [][2]float64 `json:"c_rss"`
	Transconductance        float64      `json:"transconductance"`
	Threshold               float64      `json:"threshold"`
	GateResistance          float64      `json:"gate_resistance"`
	OffBias                 float64      `json:"off_bias"`
	Reverse                 struct {
		Drop     float64 `json:"drop"`
		Recovery *struct {
			Current, Slope, Charge, Time float64
		} `json:"recovery_test"`
		Forward *struct {
			Current, Slope, Peak, Time float64
		} `json:"forward_recovery_test"`
	} `json:"reverse"`
}

// simulated is one case of testdata/reference/event.json, made by event.py with SciPy from the equations of the circuit in text.
type simulated struct {
	Name  string `json:"name"`
	Input struct {
		Event        string  `json:"event"`
		Bus          float64 `json:"bus"`
		Load         float64 `json:"load"`
		LowDrive     float64 `json:"drive2_on"`
		L1           float64 `json:"l1"`
		L2           float64 `json:"l2"`
		HighSource   float64 `json:"common_source1"`
		LowSource    float64 `json:"common_source2"`
		NodeResistor float64 `json:"node_resistor"`
		Floating     float64 `json:"floating_start"`
		High, Low    simulatedSwitch
	} `json:"input"`
	Result map[string]any `json:"result"`
}

func (c *simulated) number(key string) float64 {
	if v, ok := c.Result[key].(float64); ok {
		return v
	}
	return math.NaN()
}

func curveOf(points [][2]float64) Curve {
	c := Curve{}
	for _, p := range points {
		c.Points = append(c.Points, CurvePoint{p[0], p[1]})
	}
	return c
}

func (s *simulatedSwitch) model(source float64) Switch {
	return Switch{Threshold: s.Threshold, Transconductance: s.Transconductance, InputCapacitance: s.InputCapacitance,
		InputCapacitanceVoltage: s.InputCapacitanceVoltage, CommonSource: source, Transfer: curveOf(s.Transfer), Output: curveOf(s.Output)}
}

// estimates are the closed forms of a simulated case beside what was simulated, by name.
func (c *simulated) estimates(t *testing.T) map[string][2]float64 {
	in := &c.Input
	active, passive := &in.High, &in.Low
	ours, theirs := in.HighSource, in.LowSource
	gate := Gate{Resistance: in.High.GateResistance + in.NodeResistor, On: in.Floating, Off: in.High.OffBias}
	hold := in.Low.GateResistance
	index := "2" // of the passive switch in the results
	if strings.HasPrefix(in.Event, "SINKING") {
		active, passive, ours, theirs, index = passive, active, theirs, ours, "1"
		gate = Gate{Resistance: in.Low.GateResistance, On: in.LowDrive, Off: in.Low.OffBias}
		hold = in.High.GateResistance + in.NodeResistor
	}
	s, p := active.model(ours), passive.model(theirs)
	i, l := math.Abs(in.Load), in.L1+in.L2
	if strings.HasSuffix(in.Event, "TURN_OFF") {
		slope := TurnOffSlope(CurrentFall(i, &s, gate), i, l, s.Output.At(in.Bus))
		forward := 0.0
		if f := passive.Reverse.Forward; f != nil {
			fit, err := FitForwardRecovery(f.Current, f.Slope, f.Peak, passive.Reverse.Drop, f.Time)
			if err != nil {
				t.Fatal(err)
			}
			forward = fit.Peak(slope, i)
		}
		drop := passive.Reverse.Drop + forward
		peak := c.number("v_ds1_max")
		out := map[string][2]float64{}
		if index == "1" {
			peak = c.number("v_ds2_max")
			out["rise of the node"] = [2]float64{drop + in.L1*slope, c.number("node_max") - in.Bus}
		} else {
			out["undershoot"] = [2]float64{drop + in.L2*slope, -c.number("node_min")}
		}
		out["overshoot at turn-off"] = [2]float64{drop + l*slope, peak - in.Bus}
		out["slew at turn-off"] = [2]float64{TurnOffSwing(in.Bus, i, &s, p.Output, gate).Peak(), c.number("slew_peak_node")}
		return out
	}
	w := TurnOnSwing(in.Bus, i, &s, p.Output, gate)
	rise := CurrentRise(i, &s, gate)
	r := Recovering{Inductance: l, Output: p.Output, Rise: rise}
	if q := passive.Reverse.Recovery; q != nil {
		fit, err := FitRecovery(q.Current, q.Slope, q.Charge, q.Time)
		if err != nil {
			t.Fatal(err)
		}
		r.Peak, r.TauRR = fit.Peak(i, rise), fit.TauRR
	}
	rc := hold * p.InputCapacitance
	lift := math.Max(Lift(&p, hold, w), Lift(&p, hold, r.Swing(w)))
	if r.Peak > 0 {
		lift += SourceLift(theirs, r.Peak, r.TauRR, rc)
	}
	over := "overshoot at turn-on"
	dip, past, simulated := "rise of the node at turn-on", r.Overshoot(w)*in.L1/l, c.number("node_max")-in.Bus
	if index == "1" {
		dip, past, simulated = "undershoot at turn-on", r.Dip(w, in.L2/l), -c.number("node_min")
	}
	return map[string][2]float64{
		dip:                    {past, simulated},
		over:                   {r.Overshoot(w), c.number("v_ds"+index+"_max") - in.Bus},
		"slew at turn-on":      {r.Slew(w), c.number("slew_peak_node")},
		"gate voltage induced": {lift, c.number("v_gs"+index+"_max") - passive.OffBias},
	}
}

// TestAgainstSimulation holds the closed forms to the simulation: by how much each may be too small, case by case, and how far above it lies in the
// geometric mean. Values that hardly exist (below 2 % of the bus, or 1 V at the node and the gates) are left out of both.
func TestAgainstSimulation(t *testing.T) {
	raw, err := os.ReadFile("../../testdata/reference/event.json")
	if err != nil {
		t.Fatal(err)
	}
	var document struct{ Cases []simulated }
	if err := json.Unmarshal(raw, &document); err != nil {
		t.Fatal(err)
	}
	bounds := map[string]struct {
		least, mean float64
		cases       int
	}{
		"undershoot":                  {1.4, 4, 20},
		"undershoot at turn-on":       {0.97, 2.5, 8},
		"rise of the node at turn-on": {0.87, 2.5, 5},
		"rise of the node":            {0.88, 2.5, 8},
		"overshoot at turn-off":       {0.95, 3, 30},
		"slew at turn-off":            {0.6, 2, 35},
		"overshoot at turn-on":        {0.87, 2.5, 12},
		"slew at turn-on":             {0.62, 2, 30},
		"gate voltage induced":        {0.58, 1.2, 20},
	}
	sums, counts := map[string]float64{}, map[string]int{}
	for i := range document.Cases {
		c := &document.Cases[i]
		for name, v := range c.estimates(t) {
			b, ok := bounds[name]
			if !ok {
				t.Fatalf("no bounds of %s", name)
			}
			small := 0.02 * c.Input.Bus
			switch name {
			case "undershoot", "undershoot at turn-on", "gate voltage induced":
				small = 1
			case "slew at turn-off", "slew at turn-on":
				small = 0
			}
			if v[1] <= small {
				continue
			}
			ratio := v[0] / v[1]
			if !(ratio >= b.least) {
				t.Errorf("%s of %s: %.4g, simulated %.4g, ratio %.3f below %g", name, c.Name, v[0], v[1], ratio, b.least)
			}
			sums[name] += math.Log(ratio)
			counts[name]++
		}
	}
	for name, b := range bounds {
		mean := math.Exp(sums[name] / float64(counts[name]))
		t.Logf("%s: geometric mean %.2f over %d cases", name, mean, counts[name])
		if counts[name] < b.cases || !(mean <= b.mean) {
			t.Errorf("%s: geometric mean %.2f over %d cases, at most %g over at least %d", name, mean, counts[name], b.mean, b.cases)
		}
	}
}
