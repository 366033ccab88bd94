package acceptance

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// stageReference is testdata/reference/stage.json: requests, and what direct integration of the circuit that they describe gives.
type stageReference struct {
	Cases []struct {
		Name     string          `json:"name"`
		Request  json.RawMessage `json:"request"`
		Expected struct {
			Window    float64 `json:"window"` // time in which the element can recharge [s]
			Collapses bool    `json:"collapses"`
			Low       float64 `json:"low"`    // lowest V_BS [V]
			High      float64 `json:"high"`   // highest V_BS [V]
			Charge    float64 `json:"charge"` // charge of one period [C]
			Bound     float64 `json:"bound"`  // the same with R_GS at V_BS after the edge throughout [C]
		} `json:"expected"`
	} `json:"cases"`
}

// Answers print six significant digits; that is all by which they may differ from the reference, relative.
const printed = 5.01e-6

// TestStageReference holds whole requests against an independent integration (testdata/reference/stage.py, SciPy), from the text of the
// request to V_BS: no part of the path is shared. Voltages agree within the printed digits and 20 µV, windows within the printed digits,
// charges within 1e-5.
func TestStageReference(t *testing.T) {
	data, err := os.ReadFile(filepath.Join("..", "..", "..", "testdata", "reference", "stage.json"))
	if err != nil {
		t.Fatal(err)
	}
	var reference stageReference
	if err := json.Unmarshal(data, &reference); err != nil {
		t.Fatal(err)
	}
	if len(reference.Cases) < 24 {
		t.Fatalf("%d cases", len(reference.Cases))
	}
	c := serve(t)
	for _, k := range reference.Cases {
		t.Run(k.Name, func(t *testing.T) {
			answer := c.of(t).review(string(k.Request))
			points := answer.GetDutyLimits().GetPoints()
			if len(points) != 1 || len(points[0].GetMissing()) != 0 || points[0].GetReason() != "" {
				t.Fatalf("points %v", points)
			}
			p, want := points[0], k.Expected
			same(t, "recharge window", p.GetRechargeWindow().GetTyp(), want.Window, 0, printed)
			if (p.GetCollapses() != nil) != want.Collapses {
				t.Fatalf("collapses %v, want %v", p.GetCollapses(), want.Collapses)
			}
			if want.Collapses {
				return
			}
			same(t, "lowest V_BS", p.GetFloatingVoltageLow().GetTyp(), want.Low, 20e-6, printed)
			same(t, "highest V_BS", p.GetFloatingVoltageHigh().GetTyp(), want.High, 20e-6, printed)
			// The budget takes R_GS at the largest voltage of the on-time: a bound above the integral.
			charge := c.of(t).size(string(k.Request)).GetTotalCharge().GetTyp()
			same(t, "charge of one period", charge, want.Bound, 0, 1e-5)
			if charge.GetValue() < want.Charge*(1-printed) {
				t.Errorf("charge of one period = %v, below %.9g", charge, want.Charge)
			}
		})
	}
}

// same demands a number within an absolute and a relative tolerance.
func same(t *testing.T, what string, got *pb.Measure, want, absolute, relative float64) {
	t.Helper()
	if got == nil || got.Value == nil || !(math.Abs(got.GetValue()-want) <= absolute+relative*math.Abs(want)) {
		t.Errorf("%s = %v, want %.9g (off by %.3g)", what, got, want, got.GetValue()-want)
	}
}
