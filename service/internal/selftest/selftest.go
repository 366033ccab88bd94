// Package selftest reviews small stages whose numbers are known from closed forms, along the way that every request takes: body, binding,
// models, rules, answer. A service that does not find them is not ready.
package selftest

import (
	"context"
	"errors"
	"fmt"
	"math"
	"time"

	"google.golang.org/protobuf/proto"

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

// The undershoot of a node from which 30 A move at 1 A/ns through 10 nH into a diode of 1.2 V: -(V_F + L2·di/dt) = -11.2 V.
const undershoot = -(1.2 + 10e-9*1e9)

const fastBody = `{
  "stage": {
    "id": "self-test", "highSide": {"kind": "SI_MOSFET"},
    "lowSide": {"kind": "SI_MOSFET", "reverse": {"forwardPoints": [
      {"current": "1 A", "voltage": {"min": "1.2 V", "typ": "1.2 V", "max": "1.2 V"}}, {"current": "50 A", "voltage": {"min": "1.2000001 V", "typ": "1.2000001 V", "max": "1.2000001 V"}}], "peakForwardRecovery": {"typ": "0 V"}}},
    "layout": {"lowSideInductance": {"min": "10 nH", "typ": "10 nH", "max": "10 nH"}, "shunt": {"resistance": {"typ": "0R"}}, "nodeClamp": {"fit": "NOT_FITTED"},
      "measured": {"turnOffCurrentSlope": {"typ": "1 A/ns"}}},
    "operatingPoints": [{"name": "fast", "loadCurrent": {"typ": "30 A"}, "rippleCurrent": {"typ": "0 A"},
      "junctionTemperature": {"typ": "25 degC"}, "ambientTemperature": {"typ": "25 degC"}, "heldOn": {"duration": {"typ": "1 ms"}}}]
  }
}`

// patience is the time within which the answer must come.
const patience = 5 * time.Second

// Run runs the self-test.
func Run() error {
	ctx, cancel := context.WithTimeout(context.Background(), patience)
	defer cancel()
	handlers := rpc.New(rpc.Options{Version: "self-test"})
	var held pb.CheckDutyLimitsRequest
	var fast pb.CheckTransientStressRequest
	for text, request := range map[string]proto.Message{body: &held, fastBody: &fast} {
		var report wire.Report
		wire.NewDecoder().Decode([]byte(text), request, &report)
		if len(report.Faults) > 0 {
			return fmt.Errorf("selftest: the body is refused: %v", report.Faults)
		}
	}
	answer, err := handlers.CheckDutyLimits(ctx, &held)
	if err != nil {
		return fmt.Errorf("selftest: %w", err)
	}
	if err := verify(answer); err != nil {
		return err
	}
	stress, err := handlers.CheckTransientStress(ctx, &fast)
	if err != nil {
		return fmt.Errorf("selftest: %w", err)
	}
	return verifyUndershoot(stress)
}

// verifyUndershoot compares an answer with the closed form.
func verifyUndershoot(answer *pb.CheckTransientStressResponse) error {
	for _, e := range answer.GetTransientStress().GetEvents() {
		if e.GetEvent() != pb.TransientEvent_Event_TURN_OFF {
			continue
		}
		if got := e.GetNodeMin().GetMin(); !near(got.GetValue(), undershoot) {
			return fmt.Errorf("selftest: undershoot is %q, want %.4g V", got.GetText(), undershoot)
		}
		return nil
	}
	return errors.New("selftest: the undershoot was not evaluated")
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
