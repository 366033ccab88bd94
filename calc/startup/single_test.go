package startup

import (
	"encoding/json"
	"math"
	"os"
	"testing"

	"floatrail/calc/recharge"
)

// TestSingleChargeAndHold holds the first charges and holds of testdata/reference/modulation.json, which are integrated by an explicit Runge-Kutta
// method of order 8 (SciPy, see modulation.py): voltages within 0.1 mV, times within 0.01 %, and the number of pulses.
func TestSingleChargeAndHold(t *testing.T) {
	text, err := os.ReadFile("../../testdata/reference/modulation.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Cases []struct {
			Name, Kind string
			Supply     float64
			Element    struct {
				Slope         float64
				LogSaturation float64 `json:"log_saturation"`
				Resistance    float64
				Switch        bool
			}
			Capacitance, Load, Conductance, Node, Initial, Target, At, Width, Period, Duration, Lockout float64
			Expected                                                                                    struct {
				Arrives                bool
				Time, Reached, Settled float64
				Pulses                 int
				Peak                   float64 `json:"peak_current"`
				End                    float64
				ToLockout              float64 `json:"time_to_lockout"`
			}
		}
	}
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	charges, holds := 0, 0
	for _, k := range doc.Cases {
		near := func(what string, got, want, tolerance float64) {
			if !(math.Abs(got-want) <= tolerance) {
				t.Errorf("%s: %s %.9g, want %.9g ± %.1g", k.Name, what, got, want, tolerance)
			}
		}
		const volts, share = 1e-4, 1e-4
		switch e := &k.Expected; k.Kind {
		case "heldOn":
			holds++
			near("V_BS at the end", recharge.Hold(k.Initial, k.Load, k.Conductance, k.Capacitance, k.Duration), e.End, volts)
			near("time to lockout", recharge.HoldTime(k.Initial, k.Load, k.Conductance, k.Capacitance, k.Lockout), e.ToLockout, share*e.ToLockout)
		case "precharge":
			charges++
			c := Charge{Element: recharge.Element{Junction: recharge.Junction{Slope: k.Element.Slope, LogSaturation: k.Element.LogSaturation},
				Resistance: k.Element.Resistance, Switch: k.Element.Switch}, Capacitance: k.Capacitance, Supply: k.Supply, Node: k.Node, Load: k.Load, Initial: k.Initial}
			near("peak current", c.PeakCurrent(), e.Peak, share*e.Peak)
			reached, time, pulses := c.Reached(k.At), c.Time(k.Target), 0
			if k.Period > 0 {
				reached = c.PulsedReached(k.Width, k.Period, k.At)
				time, pulses = c.PulsedTime(k.Width, k.Period, k.Target)
			} else {
				near("V_BS once settled", c.Settled(), e.Settled, volts)
			}
			near("V_BS", reached, e.Reached, volts)
			if !e.Arrives {
				if !math.IsInf(time, 1) {
					t.Errorf("%s: arrives after %g s", k.Name, time)
				}
				continue
			}
			near("time", time, e.Time, share*e.Time)
			if pulses != e.Pulses {
				t.Errorf("%s: %d pulses, want %d", k.Name, pulses, e.Pulses)
			}
		}
	}
	if charges < 8 || holds < 4 {
		t.Errorf("%d first charges and %d holds", charges, holds)
	}
}
