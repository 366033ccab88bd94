//go:build cvode

package transient

import (
	"fmt"
	"math"
	"os"
	"os/exec"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"
)

// BenchmarkCVODE measures the Simulator against SUNDIALS' CVODE at equal achieved error, over the cases of testdata/reference/event.json, from 0
// to each one's t_end.
//
// Program    testdata/reference/event_cvode.c, the same equations in C, tuned in CVODE's favour, built by .ci/cvode; its path is the environment
// variable FLOATRAIL_CVODE. It must agree with event.json to 1e-4 of the bus at an rtol of 1e-9, else the benchmark fails.
//
// Error      |extreme - event.json| over the larger of |event.json| and 2 % of the bus, the largest of a case's thirteen extremes. A case is met
// at 0.5 %.
//
// Tolerances, tried from one list:
//
//	loosest   each side at the loosest one at which it meets the case
//	lasting   each side at the loosest one from which on it meets the case at all tighter ones too, as a loose one may be luck
//	one       each side at one tolerance for all cases, the least of its lasting ones: what serves who does not know the solution
//	default   the Simulator at DefaultTolerance, where it must meet every case, against CVODE at the loosest of each case
//
// Time       processor time of the process, the collector's included, by turns: three rounds of at least 20 ms each, the least mean of them.
// CVODE integrates from given states and looks for the extremes alone; the Simulator checks the bridge, solves for its start and finds whatever a
// Course has.
//
// Metrics    of the loosest: ratio is our time over CVODE's, its median over the cases and that of the sums; ours-µs and cvode-µs the medians over
// the cases; ours-met, cvode-met and default-met the numbers of cases met.
func BenchmarkCVODE(b *testing.B) {
	program := os.Getenv("FLOATRAIL_CVODE")
	if program == "" {
		b.Fatal("FLOATRAIL_CVODE names no program: .ci/cvode builds it")
	}
	for b.Loop() {
		compareWithCVODE(b, program)
	}
	b.ReportMetric(0, "ns/op")
}

func compareWithCVODE(b *testing.B, program string) {
	cases := referenceCases(b)
	if len(cases) != 77 {
		b.Errorf("%d cases", len(cases))
	}
	var s Simulator
	var all []*rivals
	var one pair
	met, byDefault, apart := [2]int{}, 0, 0.0
	for k := range cases {
		r := &rivals{b: b, c: &cases[k], s: &s, program: program, flat: cases[k].flat(), times: map[pair]pair{}}
		apart = math.Max(apart, r.agreement())
		if e := r.error(r.own(DefaultTolerance)[0]); e <= equalError {
			byDefault++
		} else {
			b.Errorf("%s: an error of %.3g %% at the default tolerance", r.c.Name, 100*e)
		}
		r.loosest.ours, r.lasting.ours = r.meets(r.own)
		r.loosest.cvode, r.lasting.cvode = r.meets(r.cvode)
		met[0] += boolean(r.loosest.ours > 0)
		met[1] += boolean(r.loosest.cvode > 0)
		if r.lasting.ours == 0 || r.lasting.cvode == 0 {
			b.Errorf("%s: not met at the tightest tolerance by us, by CVODE or by both", r.c.Name)
			continue
		}
		if all = append(all, r); len(all) == 1 {
			one = r.lasting
		}
		one = pair{math.Min(one.ours, r.lasting.ours), math.Min(one.cvode, r.lasting.cvode)}
	}
	if !(apart <= 1e-4) {
		b.Error("CVODE does not agree with event.json")
	}
	b.Logf("%d cases, met by us %d, at the default tolerance %d, by CVODE %d; CVODE at 1e-9 within %.2g of the bus of event.json", len(cases), met[0],
		byDefault, met[1], apart)
	b.ReportMetric(float64(met[0]), "ours-met")
	b.ReportMetric(float64(met[1]), "cvode-met")
	b.ReportMetric(float64(byDefault), "default-met")
	if len(all) == 0 {
		return
	}
	kinds := []string{"loosest", "lasting", fmt.Sprintf("one (%g, CVODE %g)", one.ours, one.cvode), fmt.Sprintf("default (%g, CVODE loosest)", DefaultTolerance)}
	times := make([][]pair, len(kinds))
	for _, r := range all {
		for k, at := range []pair{r.loosest, r.lasting, one, {DefaultTolerance, r.loosest.cvode}} {
			times[k] = append(times[k], r.time(at))
		}
		if testing.Verbose() {
			r.log()
		}
	}
	for k, kind := range kinds {
		s := newSummary(times[k])
		b.Logf("%s: ratio median %.3f (%.3f to %.3f), of the sums %.3f; median %.1f µs, CVODE %.1f µs; sum %.2f ms, CVODE %.2f ms", kind,
			s.ratio, s.least, s.most, s.sum.ours/s.sum.cvode, s.median.ours, s.median.cvode, s.sum.ours/1e3, s.sum.cvode/1e3)
		if k == 0 {
			b.ReportMetric(s.ratio, "ratio-median")
			b.ReportMetric(s.sum.ours/s.sum.cvode, "ratio-sum")
			b.ReportMetric(s.median.ours, "ours-µs")
			b.ReportMetric(s.median.cvode, "cvode-µs")
		}
	}
}

const (
	equalError  = 0.005                 // of an extreme, at which both are compared [1]
	timedRounds = 3                     // by turns
	timedFor    = 20 * time.Millisecond // processor time of one round, at least
)

// rivalTolerances are tried by both, loosest first. [1]
var rivalTolerances = []float64{1e-1, 5e-2, 2e-2, 1e-2, 5e-3, 2e-3, 1e-3, 5e-4, 2e-4, 1e-4, 5e-5, 2e-5, 1e-5, 5e-6, 2e-6, 1e-6}

// comparedExtremes are the columns of event_cvode.c's output, with what a Course has of them.
var comparedExtremes = []struct {
	name   string
	signal Signal
	most   bool
}{
	{"node_min", Node, false}, {"node_max", Node, true}, {"pin_min", Pin, false}, {"pin_max", Pin, true}, {"rail_min", Rail, false},
	{"rail_max", Rail, true}, {"v_ds1_max", HighDrain, true}, {"v_ds2_max", LowDrain, true}, {"v_gs1_max", HighGate, true},
	{"v_gs2_max", LowGate, true}, {"v_gs1_min", HighGate, false}, {"v_gs2_min", LowGate, false}, {"floating_max", Floating, true},
}

// pair is a tolerance [1] or a processor time [µs] of both.
type pair struct{ ours, cvode float64 }

// attempt is a case at one tolerance: its extremes [V], none when the integrator gave up, and the processor time where it was measured [µs].
type attempt struct {
	extremes []float64
	time     float64
}

// rivals is one case for both.
type rivals struct {
	b                *testing.B
	c                *referenceCase
	s                *Simulator
	program, flat    string
	loosest, lasting pair          // tolerances that meet the case
	times            map[pair]pair // by the tolerances
}

// own simulates the case at each tolerance.
func (r *rivals) own(tolerances ...float64) (out []attempt) {
	bridge := r.c.bridge()
	for _, tolerance := range tolerances {
		co, err := r.s.Run(bridge, Window{Limit: r.c.Input.End, Whole: true, Tolerance: tolerance})
		var a attempt
		if err == nil {
			for _, x := range comparedExtremes {
				if g := &co.Ranges[x.signal]; x.most {
					a.extremes = append(a.extremes, g.Max)
				} else {
					a.extremes = append(a.extremes, g.Min)
				}
			}
		}
		out = append(out, a)
	}
	return out
}

// cvode integrates the case at each tolerance.
func (r *rivals) cvode(tolerances ...float64) []attempt { return r.run(0, tolerances...) }

// run runs the program, which spends at least the time at each tolerance.
func (r *rivals) run(spent time.Duration, tolerances ...float64) (out []attempt) {
	r.b.Helper()
	arguments := []string{"-m", strconv.FormatInt(spent.Milliseconds(), 10)}
	for _, tolerance := range tolerances {
		arguments = append(arguments, strconv.FormatFloat(tolerance, 'g', -1, 64))
	}
	command := exec.Command(r.program, arguments...)
	command.Stdin = strings.NewReader(r.flat)
	answer, err := command.Output()
	if err != nil {
		r.b.Fatalf("%s: %v", r.c.Name, err)
	}
	lines := strings.Split(strings.TrimRight(string(answer), "\n"), "\n")
	heading := strings.Split(lines[0], "\t")
	if len(lines) != 1+len(tolerances) {
		r.b.Fatalf("%s: %d lines", r.c.Name, len(lines))
	}
	for _, line := range lines[1:] {
		fields := strings.Split(line, "\t")
		value := func(name string) float64 {
			v, err := strconv.ParseFloat(fields[slices.Index(heading, name)], 64)
			if err != nil {
				r.b.Fatalf("%s: %s: %v", r.c.Name, name, err)
			}
			return v
		}
		a := attempt{time: value("us")}
		if value("flag") == 0 {
			for _, x := range comparedExtremes {
				a.extremes = append(a.extremes, value(x.name))
			}
		}
		out = append(out, a)
	}
	return out
}

// error is the largest of the extremes' errors. [1]
func (r *rivals) error(a attempt) (most float64) {
	if a.extremes == nil {
		return math.Inf(1)
	}
	for k, x := range comparedExtremes {
		want := r.c.Result.number[x.name]
		most = math.Max(most, math.Abs(a.extremes[k]-want)/math.Max(math.Abs(want), 0.02*r.c.Input.Bus))
	}
	return most
}

// agreement is the largest difference of CVODE at 1e-9 from event.json, of the bus. [1]
func (r *rivals) agreement() (most float64) {
	a := r.cvode(1e-9)[0]
	if a.extremes == nil {
		return math.Inf(1)
	}
	for k, x := range comparedExtremes {
		most = math.Max(most, math.Abs(a.extremes[k]-r.c.Result.number[x.name])/r.c.Input.Bus)
	}
	return most
}

// meets finds the loosest tolerance that meets the case, and the loosest from which on all do; 0: none.
func (r *rivals) meets(attempts func(...float64) []attempt) (loosest, lasting float64) {
	for k, a := range attempts(rivalTolerances...) {
		switch tolerance := rivalTolerances[k]; {
		case !(r.error(a) <= equalError):
			lasting = 0
		case lasting == 0:
			lasting = tolerance
			loosest = math.Max(loosest, tolerance)
		}
	}
	return loosest, lasting
}

// time measures both by turns. CVODE's program is warmed up by a round that is not counted, as each of its processes is a new one.
func (r *rivals) time(at pair) pair {
	if known, ok := r.times[at]; ok {
		return known
	}
	bridge, window := r.c.bridge(), Window{Limit: r.c.Input.End, Whole: true, Tolerance: at.ours}
	least := pair{math.Inf(1), math.Inf(1)}
	for range timedRounds {
		least.cvode = math.Min(least.cvode, r.run(timedFor, at.cvode, at.cvode)[1].time)
		began, spent, runs := processorTime(r.b), time.Duration(0), 0
		for spent < timedFor {
			if _, err := r.s.Run(bridge, window); err != nil {
				r.b.Fatalf("%s: %v", r.c.Name, err)
			}
			runs++
			spent = processorTime(r.b) - began
		}
		least.ours = math.Min(least.ours, 1e6*spent.Seconds()/float64(runs))
	}
	r.times[at] = least
	return least
}

// log prints the case's line of the table: each side's loosest tolerance, time and error there.
func (r *rivals) log() {
	at, t := r.loosest, r.time(r.loosest)
	r.b.Logf("%-88s ours %5.0e %7.1f µs %5.3f %%  CVODE %5.0e %7.1f µs %5.3f %%  ratio %.3f", r.c.Name, at.ours, t.ours, 100*r.error(r.own(at.ours)[0]),
		at.cvode, t.cvode, 100*r.error(r.cvode(at.cvode)[0]), t.ours/t.cvode)
}

// processorTime of all threads.
func processorTime(tb testing.TB) time.Duration {
	var used syscall.Rusage
	if err := syscall.Getrusage(syscall.RUSAGE_SELF, &used); err != nil {
		tb.Fatal(err)
	}
	return time.Duration(used.Utime.Nano() + used.Stime.Nano())
}

// summary of times over the cases: of the ratio [1] its median and both ends, of the times [µs] median and sum.
type summary struct {
	ratio, least, most float64
	median, sum        pair
}

func newSummary(all []pair) (s summary) {
	var ratio, ours, cvode []float64
	for _, p := range all {
		ratio, ours, cvode = append(ratio, p.ours/p.cvode), append(ours, p.ours), append(cvode, p.cvode)
		s.sum.ours += p.ours
		s.sum.cvode += p.cvode
	}
	s.least, s.most = slices.Min(ratio), slices.Max(ratio)
	s.ratio, s.median = median(ratio), pair{median(ours), median(cvode)}
	return s
}

func median(all []float64) float64 {
	slices.Sort(all)
	n := len(all)
	return (all[(n-1)/2] + all[n/2]) / 2
}

// flat writes the case as event_cvode.c reads it.
func (c *referenceCase) flat() string {
	out := &strings.Builder{}
	line := func(key string, values ...float64) {
		out.WriteString(key)
		for _, v := range values {
			out.WriteString(" " + strconv.FormatFloat(v, 'g', -1, 64))
		}
		out.WriteByte('\n')
	}
	points := func(key string, pairs [][2]float64) {
		var values []float64
		for _, p := range pairs {
			values = append(values, p[0], p[1])
		}
		line(key, values...)
	}
	in := &c.Input
	out.WriteString("name " + c.Name + "\nevent " + in.Event + "\n")
	line("bus", in.Bus)
	line("load", in.Load)
	line("vdd", in.Supply)
	line("drive2_on", in.LowDrive)
	line("l1", in.L1)
	line("l2", in.L2)
	line("r1", in.R1)
	line("r2", in.R2)
	line("common_source1", in.HighSource)
	line("common_source2", in.LowSource)
	line("node_resistor", in.Node)
	line("ringing_resistance", in.Ringing) // null is 0: none
	line("pin_capacitance", in.Pin)
	line("bootstrap_capacitance", in.Bootstrap)
	line("t_end", in.End)
	line("bootstrap", in.Element.Slope, in.Element.LogSaturation, in.Element.Resistance)
	if in.Clamp != nil {
		line("clamp", in.Clamp.Slope, in.Clamp.LogSaturation, in.Clamp.Resistance)
	}
	for side, s := range []*referenceCell{&in.High, &in.Low} {
		side := []string{"high.", "low."}[side]
		out.WriteString(side + "kind " + s.Kind + "\n")
		line(side+"c_gs", s.GateSource)
		line(side+"gate_resistance", s.GateResistance)
		line(side+"off_bias", s.OffBias)
		line(side+"transconductance", s.Transconductance)
		line(side+"threshold", s.Threshold)
		line(side+"on_resistance", s.OnResistance)
		points(side+"c_oss", s.Output)
		points(side+"c_rss", s.Transfer)
		r := &s.Reverse
		line(side+"reverse", r.Slope, r.LogSaturation, r.Resistance, r.Offset, float64(boolean(r.Follows)))
		if r.Recovery != nil {
			line(side+"recovery", r.Recovery.Tau, r.Recovery.Transit)
		}
		if r.Forward != nil {
			line(side+"forward_recovery", r.Forward.Inductance, r.Forward.Resistance)
		}
	}
	var start []float64
	for _, state := range []string{"i1", "i2", "v_gs1", "v_ds1", "v_gs2", "v_ds2", "v_pin", "v_bs", "q_m1", "q_m2", "i_lfr1", "i_lfr2"} {
		start = append(start, c.Start[state])
	}
	line("start", start...)
	out.WriteString("run\n")
	return out.String()
}
