package modulation

import (
	"encoding/json"
	"math"
	"os"
	"testing"

	"floatrail/calc/recharge"
)

// referenceCase is one case of testdata/reference/modulation.json, in its own names.
type referenceCase struct {
	Name    string
	Kind    string
	Supply  float64
	Bus     float64
	Element struct {
		Slope         float64
		LogSaturation float64 `json:"log_saturation"`
		Resistance    float64
		Switch        bool
	}
	Capacitance          float64
	Load                 float64
	Conductance          float64
	Charge               float64
	ChargePerVolt        float64 `json:"charge_per_volt"`
	JunctionCharge       float64 `json:"junction_charge"`
	RecoverySpec         float64 `json:"recovery_spec"`
	RecoveryTau          float64 `json:"recovery_tau"`
	SwitchingFrequency   float64 `json:"switching_frequency"`
	DeadTime             float64 `json:"dead_time"`
	ShortestPulse        float64 `json:"shortest_pulse"`
	LowSide              string  `json:"low_side"`
	OnResistance         float64 `json:"on_resistance"`
	SaturationLevel      float64 `json:"saturation_level"`
	SaturationResistance float64 `json:"saturation_resistance"`
	ReverseLevel         float64 `json:"reverse_level"`
	ReverseResistance    float64 `json:"reverse_resistance"`
	OutputCharge         float64 `json:"output_charge"`
	Current              float64
	ZeroSequence         string `json:"zero_sequence"`
	Index                float64
	Displacement         float64
	Periods              int
	Chopping             string
	Duty                 float64
	Active               int
	IdleTime             float64 `json:"idle_time"`
	IdleNode             float64 `json:"idle_node"`
	UVLORising           float64 `json:"uvlo_rising"`
	Expected             struct {
		Low             float64
		LowAngle        float64 `json:"low_angle"`
		High            float64
		RivalDifference float64  `json:"rival_difference"`
		LowSourcing     *float64 `json:"low_sourcing"`
		RechargeCurrent float64  `json:"recharge_current"`
		WithoutRefresh  *float64 `json:"without_refresh"`
		LongestOn       float64  `json:"longest_on"`
		Collapses       bool
		AtPeriod        []int `json:"at_period"`
		Before          []float64
		IdleEnd         float64 `json:"idle_end"`
		Restarts        bool
	}
}

func references(t testing.TB) []referenceCase {
	t.Helper()
	text, err := os.ReadFile("../../testdata/reference/modulation.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct{ Cases []referenceCase }
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	return doc.Cases
}

func (c *referenceCase) leg() *Leg {
	l := &Leg{
		Element:     recharge.Element{Junction: recharge.Junction{Slope: c.Element.Slope, LogSaturation: c.Element.LogSaturation}, Resistance: c.Element.Resistance, Switch: c.Element.Switch},
		Capacitance: c.Capacitance, Supply: c.Supply, Bus: c.Bus, Period: 1 / c.SwitchingFrequency, DeadTime: c.DeadTime, Shortest: c.ShortestPulse,
		Load: c.Load, PullDown: c.Conductance, NodeCharge: c.OutputCharge, LowTime: math.Inf(1),
		Nodes: nodeFuncs{freewheeling: func(i float64) float64 { return -c.ReverseLevel - c.ReverseResistance*i },
			lowOn: func(i float64) float64 {
				switch {
				case c.LowSide != "IGBT":
					return -i * c.OnResistance
				case i > 0:
					return -c.ReverseLevel - c.ReverseResistance*i
				}
				return c.SaturationLevel - c.SaturationResistance*i
			}},
		Charge: c.Charge, ChargePerVolt: c.ChargePerVolt, Junction: c.JunctionCharge, RecoverySpec: c.RecoverySpec, RecoveryTau: c.RecoveryTau,
	}
	return l
}

var sequences = map[string]ZeroSequence{"NONE": None, "THIRD_HARMONIC": ThirdHarmonic, "MIN_MAX": MinMax, "CLAMP_60": Clamp60,
	"CLAMP_120_HIGH": Clamp120High, "CLAMP_120_LOW": Clamp120Low}

func (c *referenceCase) plan() *Plan {
	l := c.leg()
	switch c.Kind {
	case "sinusoidal":
		return l.Sinusoidal(Sinusoidal{Index: c.Index, Fundamental: c.SwitchingFrequency / float64(c.Periods), Displacement: c.Displacement * math.Pi / 180,
			Current: c.Current, ZeroSequence: sequences[c.ZeroSequence]})
	case "sixStep":
		return l.SixStep(SixStep{Electrical: c.SwitchingFrequency / float64(c.Periods), Duty: c.Duty, Current: c.Current,
			High: c.Chopping != "LOW_SIDE", Low: c.Chopping != "HIGH_SIDE"})
	case "burst":
		return l.Burst(Burst{Duty: c.Duty, Current: c.Current, Active: float64(c.Active) / c.SwitchingFrequency, Idle: c.IdleTime, IdleNode: c.IdleNode})
	}
	return nil
}

// TestReference holds every modulated case of testdata/reference/modulation.json, which integrates each period of the periodic solution by an explicit
// Runge-Kutta method of order 8 (SciPy, see the script), against the collocation over many periods and against the law of every period.
func TestReference(t *testing.T) {
	const volts, share = 0.3e-3, 1e-3 // [V], relative
	kinds := map[string]int{}
	for _, c := range references(t) {
		p := c.plan()
		if p == nil {
			continue
		}
		kinds[c.Kind]++
		e := &c.Expected
		for _, exact := range []bool{true, false} {
			s := p.steady(math.NaN(), defaultTolerance, exact, nil)
			bad := func(what string, got, want, tolerance float64) {
				if !(math.Abs(got-want) <= tolerance) {
					t.Errorf("%s, exact %v: %s %.9g, want %.9g ± %.1g", c.Name, exact, what, got, want, tolerance)
				}
			}
			if !s.Converged || s.Collapses != e.Collapses {
				t.Errorf("%s: converged %v, collapses %v, want %v", c.Name, s.Converged, s.Collapses, e.Collapses)
			}
			bad("lowest V_BS", s.Low.Value, e.Low, volts)
			bad("highest V_BS", s.High.Value, e.High, volts)
			if e.LowSourcing == nil {
				if s.OnLow.Period >= 0 {
					t.Errorf("%s: forward current at %v", c.Name, s.OnLow)
				}
			} else {
				bad("lowest V_BS with forward current", s.OnLow.Value, *e.LowSourcing, volts)
			}
			bad("recharge current", s.Charge/p.Time(), e.RechargeCurrent, share*e.RechargeCurrent)
			if e.RivalDifference > 2*volts { // otherwise another period is as low
				at, want := s.Low.Period, e.LowAngle
				if c.Kind != "burst" {
					want *= float64(p.periods) / 360
				}
				bad("period of the lowest V_BS", at, want, 1+1e-6)
			}
			for i, k := range e.AtPeriod {
				bad("V_BS before an edge", s.before(k), e.Before[i], volts)
			}
			if c.Kind == "burst" {
				bad("V_BS after the pause", s.Start, e.IdleEnd, volts)
				if (s.Start > c.UVLORising) != e.Restarts {
					t.Errorf("%s: restarts at %g", c.Name, s.Start)
				}
			}
		}
		timing := p.Timing()
		if math.Abs(timing.LongestOn-e.LongestOn) > 1e-9*e.LongestOn {
			t.Errorf("%s: longest on-time %.12g, want %.12g", c.Name, timing.LongestOn, e.LongestOn)
		}
		if want := e.WithoutRefresh; want == nil && !math.IsInf(timing.WithoutRefresh, 1) || want != nil && math.Abs(timing.WithoutRefresh-*want) > 1e-9**want {
			t.Errorf("%s: %.12g without recharge, want %v", c.Name, timing.WithoutRefresh, want)
		}
	}
	if kinds["sinusoidal"] < 40 || kinds["sixStep"] < 8 || kinds["burst"] < 6 {
		t.Errorf("cases: %v", kinds)
	}
}

// before is V_BS before the edge of a period [V].
func (s *Steady) before(k int) float64 {
	steps := s.kept.all()
	for i := range steps {
		q := &steps[i]
		if k < q.from || k >= q.to {
			continue
		}
		if !q.merged {
			return q.before(float64(k))
		}
		y, before := new(layout), new(layout) // some periods of those that come as one
		r := &s.plan.runs[q.run]
		if k == q.from {
			return q.v[0]
		}
		r.at(float64(q.from), y)
		y.time, y.on = y.time*float64(k-q.from), y.on*float64(k-q.from)
		for j := range y.n {
			y.off[j].Duration *= float64(k - q.from)
		}
		(&walker{plan: s.plan}).previous(q.run, before)
		p := s.plan.leg.period(before, y)
		v, _ := p.Map(q.v[0])
		return v
	}
	return math.NaN()
}

// nodeFuncs are node voltages by functions of the current.
type nodeFuncs struct{ freewheeling, lowOn func(float64) float64 }

func (n nodeFuncs) Freewheeling(i float64) float64 { return n.freewheeling(i) }
func (n nodeFuncs) LowOn(i float64) float64        { return n.lowOn(i) }
