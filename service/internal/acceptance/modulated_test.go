package acceptance

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"

	pb "floatrail/api/floatrail/v1"
)

// Modulated operating points, through the REST interface, against arithmetic by hand: with an ideal diode of 0.4 V and recharge that is complete in every
// period V_BS stands at V_DD - V_F - V_LS before it falls by Q/C and I·t/C.

// point sets the common members of a modulated operating point, 20 kHz without dead time.
func point(mode, body string) edits {
	return edits{"operatingPoints.0.switchingFrequency": "20 kHz", "operatingPoints.0.deadTime": "0 s", "operatingPoints.0.loadCurrent": "10 A",
		"operatingPoints.0." + mode: body}
}

func typical(v string) string { return `{"typ":"` + v + `"}` }

// sinusoidal sets a sinusoidal modulation.
func sinusoidal(index, fundamental, displacement, zero string) edits {
	return point("sinusoidal", fmt.Sprintf(`{"modulationIndex":%s,"fundamentalFrequency":%s,"displacementAngle":%s,"zeroSequence":"%s"}`,
		typical(index), typical(fundamental), typical(displacement), zero))
}

// sixStep sets six-step commutation.
func sixStep(electrical, chopping, duty string) edits {
	return point("sixStep", fmt.Sprintf(`{"electricalFrequency":%s,"chopping":"%s","duty":%s}`, typical(electrical), chopping, typical(duty)))
}

// bursts sets bursts of half duty of 1 ms.
func bursts(idle, node string) edits {
	return point("burst", fmt.Sprintf(`{"duty":{"typ":"0.5"},"activeTime":{"typ":"1 ms"},"idleTime":%s,"idleNodeVoltage":%s}`, typical(idle), typical(node)))
}

// ideal carries V_BS through the 400 periods of a fundamental of 50 Hz, twice: an ideal diode charges C_B at once to what it can in the low side's
// on-time, the rest of the period the load of 1 mA discharges 100 nF, and the gate takes 1 nC. Returned are the lowest V_BS, and the lowest with the
// high side on and a current out of the node.
func ideal(index, displacement float64, node func(i float64) float64) (low, forward float64) {
	const n, period, c, load, gate, drop, resistor = 400, 50e-6, 100e-9, 1e-3, 1e-9, 0.4, 0.5
	low, forward = math.Inf(1), math.Inf(1)
	v := 10.0
	for k := range 2 * n {
		angle := 2 * math.Pi * float64(k) / n
		d, i := 0.5+index/2*math.Sin(angle), 10*math.Sin(angle-displacement)
		v -= gate/c + load*d*period/c
		if k >= n {
			low = math.Min(low, v)
			if i > 0 {
				forward = math.Min(forward, v)
			}
		}
		v = math.Max(v-load*(1-d)*period/c, 12-drop-load*resistor-node(i))
	}
	return low, forward
}

// The node stands at -|i|·R, or -V_F of a diode, while it sources, and at +|i|·R, or +V_CE(sat), while it sinks. A motor drive sources with long
// on-times and sinks with short ones, a regenerating one the other way round: its lockout is in greater danger, its drive in less.
func TestMotoringAndRegenerating(t *testing.T) {
	c := serve(t)
	base := edits{"bootstrap.capacitor.effectiveCapacitance": "100 nF", "bootstrap.resistor.resistance": "0.5 ohm", "driver.floatingQuiescentCurrent": "1 mA",
		"lowSide.onResistance": "5 mohm"}
	igbt := edits{"lowSide.kind": `"IGBT"`, "lowSide.channelPoints": `[{"current":"1 mA","voltage":{"min":"1.5 V","typ":"1.5 V","max":"1.5 V"}},{"current":"100 A","voltage":{"min":"1.5001 V","typ":"1.5001 V","max":"1.5001 V"}}]`}
	for _, z := range []struct {
		name string
		more edits
		node func(float64) float64
	}{
		{"MOSFET", nil, func(i float64) float64 { return -0.005 * i }},
		{"IGBT", igbt, func(i float64) float64 {
			if i > 0 {
				return -0.8
			}
			return 1.5
		}},
	} {
		low, forward := map[string]float64{}, map[string]float64{}
		for _, angle := range []string{"10.3", "169.7"} {
			degrees, _ := strconv.ParseFloat(angle, 64)
			wantLow, wantForward := ideal(0.8, degrees*math.Pi/180, z.node)
			answer := c.review(request(t, gate(1), base, sinusoidal("0.8", "50 Hz", angle+" deg", "NONE"), z.more))
			f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
			near(t, z.name+" at "+angle+": lowest V_BS", f.GetValue(), wantLow, 2e-3)
			low[angle] = f.GetValue().GetValue()
			f = find(t, answer.GetFindings(), "charge/gate-sufficiency", "")
			near(t, z.name+" at "+angle+": lowest drive with forward current", f.GetValue(), wantForward, 2e-3)
			forward[angle] = f.GetValue().GetValue()
			p := answer.GetDutyLimits().GetPoints()[0]
			all(t, z.name+" at "+angle+": floatingVoltageLow", p.GetFloatingVoltageLow(), wantLow, 2e-3)
			all(t, z.name+" at "+angle+": gateVoltageLow", p.GetGateVoltageLow(), wantForward, 2e-3)
		}
		if !(low["169.7"] < low["10.3"]-0.05) {
			t.Errorf("%s: lowest %v: regenerating is not below motoring", z.name, low)
		}
		if z.name == "MOSFET" && !(forward["10.3"] < forward["169.7"]-0.05) {
			t.Errorf("%s: lowest drive %v: motoring is not below regenerating", z.name, forward)
		}
		if !(low["169.7"] < forward["169.7"]-0.1) {
			t.Errorf("%s, regenerating: lowest %v, with forward current %v: the sinking half decides lockout alone", z.name, low, forward)
		}
	}
}

// slow is a load of 100 µA on 10 µF behind 0.1 Ω: 10 V/s, and a gate charge that moves V_BS by 10 µV.
var slowly = edits{"bootstrap.capacitor.effectiveCapacitance": "10 uF", "bootstrap.resistor.resistance": "0.1 ohm", "driver.floatingQuiescentCurrent": "100 uA",
	"highSide.gateCharge": "100 pC", "highSide.gateSourceCharge": "50 pC", "highSide.gateDrainCharge": "50 pC"}

const fallRate = 100e-6 / 10e-6 // of that load [V/s]

// Six-step at f_e = 100 Hz: high side on for 1/(3·f_e) = 3.333 ms, without refresh for 1/(2·f_e) = 5 ms with the open sixth before, and V_BS falls
// through the open sixth after it too, 6.667 ms. Where the high side chops its current freewheels and recharges: without refresh remain the open sixth,
// 1.667 ms, and an on-time of 25 µs.
func TestSixStepHolds(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		chopping      string
		without, fall float64 // [s]
	}{{"LOW_SIDE", 5e-3, 20e-3 / 3}, {"HIGH_SIDE", 10e-3/6 + 25e-6, 10e-3/6 + 25e-6}, {"BOTH", 10e-3/6 + 25e-6, 10e-3/6 + 25e-6}} {
		answer := c.review(request(t, slowly, sixStep("100 Hz", z.chopping, "0.5"), edits{"lowSide.reverse.forwardPoints": drops(0.01)}))
		f := find(t, answer.GetFindings(), "duty/longest-on-time", "")
		near(t, z.chopping+": without refresh", f.GetValue(), z.without, 60e-6) // sectors end with whole periods of 50 µs
		f = find(t, answer.GetFindings(), "charge/droop", "")
		near(t, z.chopping+": droop", f.GetValue(), fallRate*z.fall, 1e-3)
		says(t, f, "without recharge for")
		// The low side takes 10 A at 10 µΩ, 0.1 mV.
		near(t, z.chopping+": lowest", find(t, answer.GetFindings(), "charge/lowest-voltage", "").GetValue(), 11.6-fallRate*z.fall, 2e-3)
	}
	// An integrated switch does not conduct while the diode freewheels: it is as if the high side did not chop.
	f := find(t, c.review(request(t, slowly, sixStep("100 Hz", "HIGH_SIDE", "0.5"), integrated)).GetFindings(), "charge/droop", "")
	near(t, "integrated switch: droop", f.GetValue(), fallRate*20e-3/3, 1e-3)
}

var integrated = edits{"bootstrap.element": `"INTEGRATED_SWITCH"`, "bootstrap.switchResistance": "0.1 ohm"}

// A pause of 50 ms after bursts of 1 ms takes 0.5 V where nothing recharges: the node stands at 24 V, or the switch is an integrated one, which waits
// for the low side's gate. On a node at 0 V the diode holds V_DD - V_F; on one at 3 V it stops at V_DD - V_F - V_node = 8.6 V.
func TestBurstPauses(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		name, idle, node string
		more             edits
		want             float64
		note             string
	}{
		{"node up", "50 ms", "24 V", nil, 11.6 - 0.5, "the node at 24 V blocks the recharge"},
		{"node low", "50 ms", "0 V", nil, 11.6, "V_BS settle at 11.6 V"},
		{"integrated switch, node low", "50 ms", "0 V", integrated, 12 - 0.5, "the integrated switch does not conduct"},
		{"pre-biased", "1 s", "3 V", nil, 8.6, "V_BS settle at 8.6 V"},
		{"pre-biased, too short to get there", "50 ms", "3 V", nil, 11.6 - 0.5, "V_BS settle at 8.6 V"},
		{"as long as it must not be", "300 ms", "24 V", edits{"driver.uvloRising": "8.7 V", "driver.uvloFalling": "8.5 V"}, 8.6, "after a pause of 300 ms, in which the node at 24 V blocks"},
	} {
		answer := c.review(request(t, slowly, bursts(z.idle, z.node), edits{"lowSide.reverse.forwardPoints": drops(0.01), "operatingPoints.0.loadCurrent": "-10 A"}, z.more))
		f := find(t, answer.GetFindings(), "duty/idle-refresh", "")
		near(t, z.name, f.GetValue(), z.want, 2e-3)
		says(t, f, z.note)
		if bad := strings.HasPrefix(z.name, "as long"); bad {
			judged(t, f, fail, major)
		} else {
			judged(t, f, pass, none)
		}
	}
}

// The longest pause: (11.6 V - 3 V) at 10 V/s, whatever the drawn one is.
func TestLongestPause(t *testing.T) {
	c := serve(t)
	for _, idle := range []string{"0 s", "50 ms", "100 s"} {
		body := request(t, slowly, bursts(idle, "24 V"), edits{"operatingPoints.0.loadCurrent": "-10 A"})
		limit(t, c.review(body), "longest pause between bursts", (11.6-3)/fallRate, 1e-3)
	}
}

// limit demands a derived limit of the first operating point within a share.
func limit(t *testing.T, answer *pb.ReviewStageResponse, name string, want, share float64) {
	t.Helper()
	for _, l := range answer.GetDutyLimits().GetPoints()[0].GetLimits() {
		if l.GetName() == name {
			near(t, name, l.GetMeasure(), want, share*want)
			return
		}
	}
	t.Errorf("no %s", name)
}

// Clamped for 120° to the upper rail at 20 Hz the high side is on for 1/60 s; to the lower one never longer than a period. Beyond the linear range it is on
// where m·sin θ > 1: with m = 2 for a third of the fundamental as well.
func TestHoldsOfASinusoidalModulation(t *testing.T) {
	c := serve(t)
	low := edits{"lowSide.reverse.forwardPoints": drops(0.01)}
	for _, z := range []struct {
		index, zero string
		hold        float64 // [s]
	}{{"0.9", "CLAMP_120_HIGH", 1. / 60}, {"0.9", "CLAMP_60", 1. / 120}, {"2", "NONE", 1. / 60}, {"0.9", "CLAMP_120_LOW", 0}, {"0.9", "MIN_MAX", 0}} {
		answer := c.review(request(t, slowly, sinusoidal(z.index, "20 Hz", "30 deg", z.zero), low))
		f := find(t, answer.GetFindings(), "charge/droop", "")
		near(t, z.zero+": droop", f.GetValue(), fallRate*z.hold, 2e-3)
		f = find(t, answer.GetFindings(), "duty/longest-on-time", "")
		if z.hold == 0 {
			judged(t, f, pb.Outcome_NOT_APPLICABLE, none)
			continue
		}
		judged(t, f, pass, none)
		near(t, z.zero+": without refresh", f.GetValue(), z.hold, 1.2e-4) // whole periods at both ends, and the on-times there
		near(t, z.zero+": lowest", find(t, answer.GetFindings(), "charge/lowest-voltage", "").GetValue(), 11.6-fallRate*z.hold, 3e-3)
	}
}

// A driver that passes 2 µs loses the low side's pulses where (1 - d)·50 µs is shorter, around the crest of m = 0.98; the current that leaves the node
// there brings it down, and through the diode of the low side C_B is recharged all the same. A current into the node does not.
func TestPulsesVanishAroundTheCrest(t *testing.T) {
	c := serve(t)
	body := func(displacement string, more edits) string {
		return request(t, slowly, sinusoidal("0.98", "20 Hz", displacement, "NONE"), edits{"driver.minimumPulse": `"2 us"`, "lowSide.reverse.forwardPoints": drops(0.01)}, more)
	}
	// 1 - d < 2.0001/50: sin θ > 0.92/0.98, for 40.3° of the fundamental.
	gone := 2 * math.Acos((1-2*2.0001/50)/0.98) / (2 * math.Pi) / 20
	for _, z := range []struct {
		name, displacement string
		more               edits
		droop              float64
	}{
		{"sourcing", "0.1 deg", nil, 0},
		{"sinking", "179.9 deg", nil, fallRate*gone + gone*20e3*100e-12/10e-6},
		{"sourcing, integrated switch", "0.1 deg", integrated, fallRate*gone + gone*20e3*100e-12/10e-6},
	} {
		answer := c.review(body(z.displacement, z.more))
		f := find(t, answer.GetFindings(), "charge/droop", "")
		near(t, z.name+": droop", f.GetValue(), z.droop, 2e-3)
		says(t, find(t, answer.GetFindings(), "duty/recharge-window", ""), "the low-side pulse is shorter", "the high-side pulse is shorter")
	}
}

// The diode of a low side that is one conducts while the node sources, and at no other time: sinking for half of a fundamental of 20 Hz, C_B falls for
// 25 ms, by 0.25 V and 500 gate charges of 10 µV.
func TestDiodeLowSideSinksWithoutRecharge(t *testing.T) {
	c := serve(t)
	f := find(t, c.review(request(t, slowly, sinusoidal("0.5", "20 Hz", "90.1 deg", "NONE"), edits{"lowSide.kind": `"DIODE"`, "lowSide.reverse.forwardPoints": drops(0.01)})).
		GetFindings(), "charge/droop", "")
	near(t, "droop", f.GetValue(), fallRate*25e-3+500*10e-6, 2e-3)
	// An integrated switch is driven with the low side's gate; there is none.
	f = find(t, c.review(request(t, slowly, sinusoidal("0.5", "20 Hz", "30 deg", "NONE"), edits{"lowSide.kind": `"DIODE"`}, integrated)).GetFindings(), "charge/lowest-voltage", "")
	judged(t, f, fail, major)
	says(t, f, "nothing recharges C_B")
}

// Pulse skipping: 10 kHz, the low side on for 1 µs of it. C_B loses I·T/C between two recharges, and 1 mA through 10 Ω and 1 µs of 100 µs are a deficit
// of 1 V; the ideal diode leaves 12 V - 0.4 V - 1 V before the edge, less half of the ripple.
func TestLowSideOnTime(t *testing.T) {
	c := serve(t)
	body := func(on string) string {
		return request(t, slowly, edits{"operatingPoints.0.switchingFrequency": "10 kHz", "operatingPoints.0.deadTime": "0 s", "operatingPoints.0.loadCurrent": "-1 A",
			"driver.floatingQuiescentCurrent": "1 mA", "bootstrap.resistor.resistance": "10 ohm", "driver.minimumPulse": `"0.1 us"`,
			"operatingPoints.0.fixedDuty": `{"duty":{"typ":"0.1"},"lowSideOnTime":{"typ":"` + on + `"}}`})
	}
	answer := c.review(body("1 us"))
	p := answer.GetDutyLimits().GetPoints()[0]
	all(t, "window", p.GetRechargeWindow(), 1e-6, 1e-12)
	// Of the period 99 µs draw from C_B before the window, 9.9 mV; the mean of the window is half of that above its start.
	all(t, "lowest V_BS", p.GetFloatingVoltageLow(), 12-0.4-1-0.0099/2, 2e-3)
	// Skipped below what the driver passes: nothing recharges.
	f := find(t, c.review(body("0.05 us")).GetFindings(), "charge/lowest-voltage", "")
	judged(t, f, fail, major)
	says(t, f, "collapses")
	says(t, find(t, c.review(body("0.05 us")).GetFindings(), "duty/recharge-window", ""), "the low-side pulse is shorter than the driver passes and vanishes")
}

// Full duty recharges nothing; none leaves the high side off, C_B at V_DD - V_F, and the drive without anything to judge.
func TestEndsOfTheDuty(t *testing.T) {
	c := serve(t)
	for _, z := range []struct {
		duty    string
		outcome pb.Outcome_Value
	}{{"1", fail}, {"0", pass}} {
		answer := c.review(request(t, slowly, switching("20 kHz", z.duty, "100 ns"), edits{"operatingPoints.0.loadCurrent": "0 A"}))
		f := find(t, answer.GetFindings(), "charge/lowest-voltage", "")
		if f.GetOutcome() != z.outcome {
			t.Errorf("duty %s: %v", z.duty, f)
		}
		if z.outcome == pass {
			near(t, "lowest V_BS", f.GetValue(), 11.6, 1e-3)
		}
		if o := find(t, answer.GetFindings(), "charge/gate-sufficiency", "").GetOutcome(); o != pb.Outcome_NOT_APPLICABLE {
			t.Errorf("duty %s without current: gate sufficiency %v", z.duty, o)
		}
	}
}
