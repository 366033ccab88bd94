// Package selftest reviews a small stage whose numbers are known from a closed form, along the way that every request takes: body, binding,
// models, rules, answer. A service that does not find them is not ready.
package selftest

import (
	"context"
	"fmt"
	"math"
	"time"

	pb "floatrail/api/floatrail/v1"
	"floatrail/service/internal/rpc"
	"floatrail/service/internal/wire"
)

// The floating supply of a high side that is held on: C_B is discharged by a constant current I and, through the gate's pull-down, by a
// conductance G, so that v(t) = (v_0 + I/G)·exp(-G·t/C) - I/G.
const (
	initial     = 11       // v_0 [V]
	current     = 150e-6   // I [A]
	conductance = 1 / 10e3 // G [S]
	capacitance = 6e-6     // C [F]
	held        = 10.64e-3 // t [s]
	lockout     = 8.9      // V_UV- [V]
)

const body = `{
  "stage": {
    "id": "self-test", "gateSupply": {"voltage": {"typ": "12 V 0%"}},
    "driver": {"uvloFalling": {"typ": "8.9 V 0%"}, "floatingQuiescentCurrent": {"typ": "150 uA 0%"}, "offsetLeakage": {"typ": "0 A"}},
    "highSide": {"kind": "SI_MOSFET", "gatePullDown": {"resistance": {"typ": "10 kohm 0%"}}, "gateLeakage": {"typ": "0 A"}},
    "bootstrap": {
      "element": "DISCRETE_DIODE", "diode": {"reverseLeakage": {"typ": "0 A"}},
      "capacitor": {"effectiveCapacitance": {"typ": "6 uF 0%"}, "leakage": {"typ": "0 A"}},
      "clamp": {"fit": "NOT_FITTED"}, "otherLoad": {"typ": "0 A"}
    },
    "operatingPoints": [{"name": "held", "heldOn": {"duration": {"typ": "10.64 ms"}, "initialVoltage": {"typ": "11 V"}}}]
  }
}`

// patience is the time within which the answer must come.
const patience = 5 * time.Second

// Run runs the self-test.
func Run() error {
	var request pb.CheckDutyLimitsRequest
	var report wire.Report
	wire.NewDecoder().Decode([]byte(body), &request, &report)
	if len(report.Faults) > 0 {
		return fmt.Errorf("selftest: the body is refused: %v", report.Faults)
	}
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	answer, err := rpc.New(rpc.Options{Version: "self-test"}).CheckDutyLimits(ctx, &request)
	if err != nil {
		return fmt.Errorf("selftest: %w", err)
	}
	return verify(answer)
}

// verify compares an answer with the closed form.
func verify(answer *pb.CheckDutyLimitsResponse) error {
	points := answer.GetDutyLimits().GetPoints()
	if len(points) != 1 {
		return fmt.Errorf("selftest: %d operating points, want 1", len(points))
	}
	want := (initial+current/conductance)*math.Exp(-conductance*held/capacitance) - current/conductance
	if got := points[0].GetFloatingVoltageLow().GetMin(); !near(got.GetValue(), want) {
		return fmt.Errorf("selftest: lowest V_BS is %q, want %.5g V", got.GetText(), want)
	}
	const rule = "charge/lowest-voltage"
	for _, f := range answer.GetFindings() {
		if f.GetRule() != rule {
			continue
		}
		if got := f.GetMargin().GetAbsolute(); f.GetOutcome() != pb.Outcome_MARGINAL || math.Abs(got.GetValue()-(want-lockout)) > 1e-4 {
			return fmt.Errorf("selftest: %s is %v by %q, want MARGINAL by %.4g V", rule, f.GetOutcome(), got.GetText(), want-lockout)
		}
		return nil
	}
	return fmt.Errorf("selftest: %s was not evaluated", rule)
}

// near compares to the six digits of an answer.
func near(got, want float64) bool { return math.Abs(got-want) <= 1e-5*math.Abs(want) }
