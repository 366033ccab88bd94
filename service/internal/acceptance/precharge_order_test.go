package acceptance

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"strconv"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// The first charge of several stages from one reservoir: all at once against group after group.

// exactly is a quantity without spread, to the last digit.
func exactly(v float64, unit string) string { return strconv.FormatFloat(v, 'g', -1, 64) + " " + unit }

// junction is the points of a diode at 1 mA and 1 A.
func junction(slope, logSaturation float64) string {
	at := func(current string, i float64) string {
		v := exactly(slope*(math.Log(i)-logSaturation+math.Log1p(math.Exp(logSaturation)/i)), "V") // n·V_T·ln(1 + i/I_S)
		return fmt.Sprintf(`{"current":"%s","voltage":{"min":"%[2]s","typ":"%[2]s","max":"%[2]s"}}`, current, v)
	}
	return "[" + at("1 mA", 1e-3) + "," + at("1 A", 1) + "]"
}

// Against SciPy's integration of every capacitor, testdata/reference/staged.py: all at once, each waiting for the one before, spaced, and so close
// that several groups charge together. Answers have six digits.
func TestPrechargeOrderAgainstIntegration(t *testing.T) {
	text, err := os.ReadFile("../../../testdata/reference/staged.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Cases []struct {
			Name    string
			Element struct {
				Slope         float64
				LogSaturation float64 `json:"log_saturation"`
				Resistance    float64
				Switch        bool
			}
			Bootstrap, Reservoir, Supply, Initial, Load, Target float64
			SupplyCurrent                                       float64 `json:"supply_current"`
			Stages, Count                                       int
			Interval                                            *float64
			Expected                                            struct{ Time, Lowest float64 }
		}
	}
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	if len(doc.Cases) < 32 {
		t.Fatalf("%d cases", len(doc.Cases))
	}
	c := serve(t)
	for _, r := range doc.Cases {
		stage := join(exactLockout, switching("20 kHz", "50 %", "0 s"), capacitance(exactly(r.Bootstrap, "F")), edits{
			"gateSupply.voltage": exactly(r.Supply, "V"), "gateSupply.currentLimit": exactly(r.SupplyCurrent, "A"),
			"gateSupply.reservoir.fit": "", "gateSupply.reservoir.effectiveCapacitance": exactly(r.Reservoir, "F"),
			"gateSupply.stagesSharing": strconv.Itoa(r.Stages), "startup.simultaneous": strconv.Itoa(r.Count),
			"startup.initialVoltage": exactly(r.Initial, "V"), "driver.floatingQuiescentCurrent": exactly(r.Load, "A"),
			"driver.uvloRising": exactly(r.Target, "V"), "bootstrap.resistor.resistance": exactly(r.Element.Resistance, "ohm"),
			"bootstrap.diode.forwardPoints": junction(r.Element.Slope, r.Element.LogSaturation),
		})
		if r.Element.Switch {
			stage = join(stage, edits{"bootstrap.element": `"INTEGRATED_SWITCH"`, "bootstrap.diode.forwardPoints": "",
				"bootstrap.switchResistance": exactly(r.Element.Resistance, "ohm"), "bootstrap.resistor.resistance": "0 ohm"})
		}
		if r.Interval != nil {
			stage["startup.stageInterval"] = exactly(*r.Interval, "s")
		}
		t.Run(r.Name, func(t *testing.T) {
			p := c.of(t).precharge(request(t, stage))
			all(t, "lowest V_DD", p.GetReservoirLow(), r.Expected.Lowest, 1e-4)
			all(t, "time", p.GetTime(), r.Expected.Time, 1e-4*r.Expected.Time)
			low, time := p.GetReservoirLowStaged(), p.GetTimeStaged()
			if r.Count >= r.Stages {
				low, time = p.GetReservoirLowSimultaneous(), p.GetTimeSimultaneous()
			}
			all(t, "lowest V_DD of the order", low, r.Expected.Lowest, 1e-4)
			all(t, "time of the order", time, r.Expected.Time, 1e-4*r.Expected.Time)
		})
	}
}

// onReservoir is three stages on 10 µF behind 100 mA, 1 µF through 10 Ω each, to 9 V; the lockout on V_DD falls at 10 V.
func onReservoir(more ...edits) edits {
	return join(append([]edits{exactLockout, switching("20 kHz", "50 %", "0 s"), {
		"gateSupply.reservoir": `{"effectiveCapacitance":{"min":"10 uF","typ":"10 uF","max":"10 uF"}}`, "gateSupply.currentLimit": "100 mA",
		"gateSupply.uvloFalling": "10 V", "gateSupply.stagesSharing": "3", "bootstrap.resistor.resistance": "10 ohm", "driver.uvloFalling": "9 V",
	}}, more...)...)
}

// lowestAtOnce is V_DD of onReservoir where n stages are charged at once, by the law of R·C with a fixed drop (derived): the current of a branch
// falls from 11.6 V/10 Ω to I' = C'·I_lim/C_VDD with τ = R·C', 1/C' = n/C_VDD + 1/C_B, and V_DD is lowest where it is I_lim/n; the charge of
// all capacitors gives V_DD there [V].
func lowestAtOnce(n float64) float64 {
	const cv, cb, limit, ohm = 10e-6, 1e-6, 0.1, 10.0
	series := 1 / (n/cv + 1/cb)
	end, last := series*limit/cv, limit/n
	time := ohm * series * math.Log((11.6/ohm-end)/(last-end))
	return (12*cv + n*cb*(0.4+ohm*last) + limit*time) / (cv + n*cb)
}

// Three at once take V_DD below the lockout; each of three finds it full where 20 ms of 100 mA refill the reservoir between. Both orders stand in the
// findings and in the result.
func TestPrechargeStagedAgainstSimultaneous(t *testing.T) {
	c := serve(t)
	together, staged := request(t, onReservoir()), request(t, onReservoir(edits{"startup.stageInterval": "20 ms"}))
	one := c.precharge(request(t, onReservoir(edits{"gateSupply.stagesSharing": "1"})))
	if one.GetReservoirLowStaged() != nil || one.GetTimeSimultaneous() != nil {
		t.Errorf("two orders of one stage: %v", one)
	}
	alone, single := one.GetReservoirLow().GetMin().GetValue(), one.GetTime().GetMax().GetValue()
	near(t, "one", one.GetReservoirLow().GetMin(), lowestAtOnce(1), 2e-4)
	answer := c.review(together)
	f := find(t, answer.GetFindings(), "supply/reservoir-sag", "gateSupply.reservoir")
	judged(t, f, fail, major)
	near(t, "at once", f.GetValue(), lowestAtOnce(3), 2e-4)
	says(t, f, "all 3 at once: "+f.GetValue().GetText(), "; one after another, each as soon as the one before has arrived: ")
	p := answer.GetDutyLimits().GetPrecharge()
	near(t, "at once", p.GetReservoirLowSimultaneous().GetMin(), f.GetValue().GetValue(), 0)
	if v := p.GetReservoirLowStaged().GetMin().GetValue(); !(v > f.GetValue().GetValue()) {
		t.Errorf("one after another %g V", v)
	}

	answer = c.review(staged)
	g := find(t, answer.GetFindings(), "supply/reservoir-sag", "gateSupply.reservoir")
	judged(t, g, pass, none)
	near(t, "staged", g.GetValue(), alone, 1e-3)
	says(t, g, "one after another every 20 ms: "+g.GetValue().GetText(), "; all 3 at once: "+f.GetValue().GetText())
	p = answer.GetDutyLimits().GetPrecharge()
	near(t, "staged against", p.GetReservoirLowSimultaneous().GetMin(), f.GetValue().GetValue(), 0)
	near(t, "time until the last one", p.GetTime().GetMax(), 40e-3+single, 1e-7)
	all(t, "without an order of its own", p.GetTimeStaged(), p.GetTime().GetTyp().GetValue(), 0)

	// Two at a time pull as two.
	two := c.precharge(request(t, onReservoir(edits{"gateSupply.stagesSharing": "2"}))).GetReservoirLow().GetMin().GetValue()
	h := find(t, c.review(request(t, onReservoir(edits{"startup.stageInterval": "20 ms", "startup.simultaneous": "2"}))).GetFindings(),
		"supply/reservoir-sag", "gateSupply.reservoir")
	near(t, "two at a time", h.GetValue(), two, 1e-3)
	says(t, h, "2 at a time every 20 ms")
}

// The time available has to cover the whole order, and the order its intervals.
func TestPrechargeTimeCoversTheOrder(t *testing.T) {
	c := serve(t)
	of := func(more edits) *pb.Finding {
		return find(t, c.review(request(t, onReservoir(more))).GetFindings(), "duty/pre-charge", "")
	}
	judged(t, of(edits{"startup.timeAvailable": "30 ms"}), pass, none)
	f := of(edits{"startup.timeAvailable": "30 ms", "startup.stageInterval": "20 ms"})
	judged(t, f, fail, major)
	says(t, f, "one after another every 20 ms", "all 3 at once")
	judged(t, of(edits{"startup.timeAvailable": "50 ms", "startup.stageInterval": "20 ms"}), pass, none)
	// Where V_DD stands, the order costs time alone: R·C·ln(11.6/2.6) of one, three times if they wait for each other.
	stiff := edits{"gateSupply.reservoir": `{"fit":"NOT_FITTED"}`}
	one := 10e-6 * math.Log(11.6/2.6)
	for _, z := range []struct {
		more edits
		time float64 // [s]
	}{{nil, one}, {edits{"startup.simultaneous": "1"}, 3 * one}, {edits{"startup.stageInterval": "1 ms"}, 2e-3 + one},
		{edits{"startup.stageInterval": "1 ms", "startup.simultaneous": "2"}, 1e-3 + one}, {edits{"startup.stageInterval": "0 s"}, one}} {
		p := c.precharge(request(t, onReservoir(stiff, z.more)))
		all(t, fmt.Sprint("no reservoir, ", z.more), p.GetTime(), z.time, 2e-4*one+5e-6*z.time)
		all(t, "V_DD stands", p.GetReservoirLow(), 12, 0)
	}
	// Two pulses of 10 µs each 50 µs bring what 20 µs bring, in 50 µs + 5 µs; the second stage begins 1 ms later.
	pulsed := edits{"startup.pulseWidth": "10 us", "startup.pulsePeriod": "50 us", "startup.stageInterval": "1 ms", "gateSupply.stagesSharing": "2"}
	p := c.precharge(request(t, onReservoir(stiff, pulsed)))
	all(t, "pulsed", p.GetTime(), 1e-3+50e-6+(one-10e-6), 1e-7)
	if p.GetPulses() != 2 {
		t.Errorf("%d pulses, want 2", p.GetPulses())
	}
	// A reservoir that hardly moves behind a strong supply changes none of it.
	p = c.precharge(request(t, onReservoir(pulsed, edits{"gateSupply.currentLimit": "10 A",
		"gateSupply.reservoir": `{"effectiveCapacitance":{"min":"10 mF","typ":"10 mF","max":"10 mF"}}`})))
	all(t, "pulsed from a reservoir", p.GetTime(), 1e-3+50e-6+(one-10e-6), 2e-7)
}

// A supply that does not follow decides the time, however fast R·C is: 3·9 µC and C_VDD's share come at 10 mA (derived: charge balance; the drop at
// the end is that of the current I_lim/13 of each).
func TestPrechargeWaitsForTheSupply(t *testing.T) {
	c := serve(t)
	limit := 10e-3
	end := 9 + 0.4 + 10*limit/13 // V_DD when V_BS is at 9 V
	want := (3*9e-6 - 10e-6*(12-end)) / limit
	p := c.precharge(request(t, onReservoir(edits{"gateSupply.currentLimit": "10 mA"})))
	all(t, "time by charge", p.GetTime(), want, 1e-3*want)
	short := edits{"gateSupply.currentLimit": "10 mA", "driver.floatingQuiescentCurrent": "4 mA"}
	f := find(t, c.review(request(t, onReservoir(short))).GetFindings(), "duty/pre-charge", "")
	judged(t, f, fail, major)
	says(t, f, "never reaches 9 V", "the supply's current does not bring V_DD back")
}

// What is not given is not taken for nothing: an order needs the supply's limit, and how many stages there are.
func TestPrechargeOrderOfUnknownSupply(t *testing.T) {
	c := serve(t)
	unlimited := edits{"gateSupply.currentLimit": ""}
	for _, order := range []edits{{"startup.stageInterval": "20 ms"}, {"startup.simultaneous": "1"}} {
		answer := c.review(request(t, onReservoir(unlimited, order)))
		for rule, role := range map[string]string{"supply/reservoir-sag": "gateSupply.reservoir", "duty/pre-charge": ""} {
			f := find(t, answer.GetFindings(), rule, role)
			judged(t, f, open, major)
			says(t, f, "missing gateSupply.currentLimit")
		}
	}
	// At once a supply that brings nothing is on the safe side, and open where V_BS does not arrive without it.
	answer := c.review(request(t, onReservoir(unlimited, edits{"gateSupply.uvloFalling": "9 V", "driver.uvloFalling": "8 V"})))
	f := find(t, answer.GetFindings(), "supply/reservoir-sag", "gateSupply.reservoir")
	judged(t, f, pass, none)
	near(t, "shared charge", f.GetValue(), 12*10./13, 1e-5)
	judged(t, find(t, answer.GetFindings(), "duty/pre-charge", ""), pass, none)
	f = find(t, c.review(request(t, onReservoir(unlimited))).GetFindings(), "duty/pre-charge", "")
	judged(t, f, open, major)
	says(t, f, "missing gateSupply.currentLimit")

	// Three at once out of nobody knows how many.
	f = find(t, c.review(request(t, onReservoir(edits{"gateSupply.stagesSharing": "", "startup.simultaneous": "3", "gateSupply.uvloFalling": "8 V"}))).
		GetFindings(), "supply/reservoir-sag", "gateSupply.reservoir")
	judged(t, f, marginal, minor)
	says(t, f, "gateSupply.stagesSharing")
}
