package modulation

import (
	"encoding/json"
	"math"
	"os"
	"strings"
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
		Freewheeling: func(i float64) float64 { return -c.ReverseLevel - c.ReverseResistance*i },
		LowOn: func(i float64) float64 {
			switch {
			case c.LowSide != "IGBT":
				return -i * c.OnResistance
			case i > 0:
				return -c.ReverseLevel - c.ReverseResistance*i
			}
			return c.SaturationLevel - c.SaturationResistance*i
		},
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

func TestReferenceExplore(t *testing.T) {
	total := map[bool]int{}
	worst := 0.0
	for _, c := range references(t) {
		p := c.plan()
		if p == nil || strings.Contains(c.Name, "zzz") {
			continue
		}
		for _, exact := range []bool{true, false} {
			s := p.steady(math.NaN(), defaultTolerance, exact)
			e := &c.Expected
			on := math.NaN()
			if e.LowSourcing != nil {
				on = s.OnLow.Value - *e.LowSourcing
			}
			total[exact] += s.Passes
			if !exact {
				worst = max(worst, math.Abs(s.Low.Value-e.Low), math.Abs(s.High.Value-e.High))
			}
			angle := p.Angle(s.Low.Period) * 180 / math.Pi
			if c.Kind == "burst" {
				angle = s.Low.Period
			}
			tm := p.Timing()
			wr := -1.0
			if e.WithoutRefresh != nil {
				wr = *e.WithoutRefresh
			}
			if exact && (math.Abs(tm.LongestOn/e.LongestOn-1) > 1e-6 || math.Abs(tm.WithoutRefresh/wr-1) > 1e-6) {
				t.Log(c.Name, "TIMING", tm.LongestOn, e.LongestOn, tm.WithoutRefresh, wr)
			}
			t.Logf("%-45.45s n %5d runs %2d passes %6d steps %5d low %+.1e high %+.1e on %+.1e angle %+.3f per, i %+.1e collapse %v/%v rival %.1e",
				c.Name, p.periods, len(p.runs), s.Passes, len(s.steps), s.Low.Value-e.Low, s.High.Value-e.High, on,
				(angle-e.LowAngle)/360*float64(p.periods), s.Charge/p.time/e.RechargeCurrent-1, s.Collapses, e.Collapses, e.RivalDifference)
		}
	}
	t.Log(total, worst)
}

func BenchmarkFundamental(b *testing.B) {
	for _, c := range references(b) {
		if c.Name != "motoring" && c.Name != "min-max" && c.Name != "clamp 60" && c.Name != "peak detector" && c.Name != "recovery, motoring" && c.Name != "larger resistor" {
			continue
		}
		c.Periods = 16000
		p := c.plan()
		ref := p.steady(math.NaN(), defaultTolerance, true)
		b.Run(c.Name, func(b *testing.B) {
			var s Steady
			for b.Loop() {
				s = c.plan().Steady(13)
			}
			b.ReportMetric(float64(s.Passes), "passes")
			b.ReportMetric(float64(len(s.steps)), "steps")
			b.ReportMetric(s.Low.Value-ref.Low.Value, "dlow")
			b.ReportMetric(s.High.Value-ref.High.Value, "dhigh")
			b.ReportMetric(s.Low.Period-ref.Low.Period, "dperiod")
		})
		b.Run(c.Name+"/exact", func(b *testing.B) {
			for b.Loop() {
				p.steady(13, defaultTolerance, true)
			}
		})
	}
}
