package transient

import (
	"encoding/json"
	"math"
	"os"
	"testing"

	"floatrail/calc/internal/numeric"
	"floatrail/calc/recharge"
)

// referenceCell is one position as testdata/reference/event.py writes it, with the fits that event.py used itself.
type referenceCell struct {
	Kind             string       `json:"kind"`
	Output           [][2]float64 `json:"c_oss"`
	Transfer         [][2]float64 `json:"c_rss"`
	Transconductance float64      `json:"transconductance"`
	Threshold        float64      `json:"threshold"`
	OnResistance     float64      `json:"on_resistance"`
	GateSource       float64      `json:"c_gs"`
	GateResistance   float64      `json:"gate_resistance"`
	OffBias          float64      `json:"off_bias"`
	Reverse          struct {
		Slope         float64 `json:"nvt"`
		LogSaturation float64 `json:"ln_is"`
		Resistance    float64 `json:"resistance"`
		Offset        float64 `json:"offset"`
		Follows       bool    `json:"offset_follows_gate"`
		Recovery      *struct {
			Tau, Transit float64
		} `json:"recovery"`
		Forward *struct {
			Inductance, Resistance float64
		} `json:"forward_recovery"`
	} `json:"reverse"`
}

type referenceJunction struct {
	Slope         float64 `json:"nvt"`
	LogSaturation float64 `json:"ln_is"`
	Resistance    float64 `json:"resistance"`
}

func (j referenceJunction) junction() recharge.Junction {
	return recharge.Junction{Slope: j.Slope, LogSaturation: j.LogSaturation, Resistance: j.Resistance}
}

type referenceCase struct {
	Name  string `json:"name"`
	Input struct {
		Event      string             `json:"event"`
		Bus        float64            `json:"bus"`
		Load       float64            `json:"load"`
		Supply     float64            `json:"vdd"`
		LowDrive   float64            `json:"drive2_on"`
		L1         float64            `json:"l1"`
		L2         float64            `json:"l2"`
		R1         float64            `json:"r1"`
		R2         float64            `json:"r2"`
		HighSource float64            `json:"common_source1"`
		LowSource  float64            `json:"common_source2"`
		Node       float64            `json:"node_resistor"`
		Ringing    float64            `json:"ringing_resistance"`
		Pin        float64            `json:"pin_capacitance"`
		Bootstrap  float64            `json:"bootstrap_capacitance"`
		Floating   float64            `json:"floating_start"`
		Element    referenceJunction  `json:"bootstrap"`
		Clamp      *referenceJunction `json:"clamp"`
		High, Low  referenceCell
		End        float64 `json:"t_end"`
	} `json:"input"`
	Settles bool               `json:"settles"`
	Start   map[string]float64 `json:"start"`
	Result  referenceResult    `json:"result"`
}

// referenceResult is one case's results; the named ones that are no numbers apart.
type referenceResult struct {
	number map[string]float64
	below  []struct {
		Signal                string
		Level, Total, Longest float64
	}
	end map[string]float64
}

func (r *referenceResult) UnmarshalJSON(raw []byte) error {
	var parts map[string]json.RawMessage
	if err := json.Unmarshal(raw, &parts); err != nil {
		return err
	}
	r.number = map[string]float64{}
	for k, v := range parts {
		var err error
		switch k {
		case "below":
			err = json.Unmarshal(v, &r.below)
		case "states_end":
			err = json.Unmarshal(v, &r.end)
		default:
			number := math.NaN() // null: not found
			if string(v) != "null" {
				err = json.Unmarshal(v, &number)
			}
			r.number[k] = number
		}
		if err != nil {
			return err
		}
	}
	return nil
}

func (c *referenceCell) cell() Cell {
	out := Cell{
		GateSource: c.GateSource, Transfer: curveOf(c.Transfer), Output: curveOf(c.Output), Transconductance: c.Transconductance, Threshold: c.Threshold,
		OnResistance: c.OnResistance, Unidirectional: c.Kind == "IGBT", GateResistance: c.GateResistance, OffBias: c.OffBias,
		Reverse: recharge.Junction{Slope: c.Reverse.Slope, LogSaturation: c.Reverse.LogSaturation, Resistance: c.Reverse.Resistance},
		Offset:  c.Reverse.Offset, FollowsGate: c.Reverse.Follows,
	}
	if r := c.Reverse.Recovery; r != nil {
		out.Recovery = Recovery{Tau: r.Tau, Transit: r.Transit, TauRR: 1 / (1/r.Tau + 1/r.Transit)}
	}
	if f := c.Reverse.Forward; f != nil {
		out.Forward = ForwardRecovery{Inductance: f.Inductance, Resistance: f.Resistance}
	}
	return out
}

func (c *referenceCase) bridge() *Bridge {
	in := &c.Input
	event := map[string]Event{"TURN_OFF": TurnOff, "TURN_ON": TurnOn, "SINKING_TURN_OFF": SinkingTurnOff, "SINKING_TURN_ON": SinkingTurnOn}
	b := &Bridge{
		Event: event[in.Event], Bus: in.Bus, Load: in.Load, Supply: in.Supply, LowDrive: in.LowDrive, Floating: in.Floating,
		L1: in.L1, L2: in.L2, R1: in.R1, R2: in.R2,
		HighCommonSource: in.HighSource, LowCommonSource: in.LowSource, RingingResistance: in.Ringing, NodeResistor: in.Node, PinCapacitance: in.Pin,
		BootstrapCapacitance: in.Bootstrap, Element: recharge.Element{Junction: in.Element.junction(), Resistance: in.Element.Resistance},
		High: in.High.cell(), Low: in.Low.cell(),
	}
	b.Element.Junction.Resistance = 0 // in the element's
	if in.Clamp != nil {
		b.Clamped, b.Clamp = true, in.Clamp.junction()
	}
	return b
}

func (c *referenceCase) levels() (levels []float64) {
	for _, b := range c.Result.below {
		if b.Signal == "node" {
			levels = append(levels, b.Level)
		}
	}
	return levels
}

func referenceCases(tb testing.TB) []referenceCase {
	tb.Helper()
	raw, err := os.ReadFile("../../testdata/reference/event.json")
	if err != nil {
		tb.Fatal(err)
	}
	var document struct{ Cases []referenceCase }
	if err := json.Unmarshal(raw, &document); err != nil {
		tb.Fatal(err)
	}
	return document.Cases
}

// deviation of a result in the measure of its kind.
type deviation struct {
	kind, what string
	value      float64 // of 1
}

// compare holds a course to the reference. Voltages of the power circuit count over V_BUS, gate voltages over the drive, V_BS over itself;
// extremes below COM over their own depth as well; everything else over itself, di/dt over 2 % of V_BUS/L where it is
// less. Durations below a level count over
// themselves where the level may move by 0.3 % of the deepest point: close to the bottom of a dip its length says nothing else.
func (c *referenceCase) compare(co, lower, upper *Course) (out []deviation) {
	r, in := c.Result.number, &c.Input
	add := func(kind, what string, got, want, scale float64) {
		out = append(out, deviation{kind, what, math.Abs(got-want) / scale})
	}
	for _, s := range []struct {
		signal Signal
		name   string
		scale  float64
	}{
		{Node, "node", in.Bus}, {Pin, "pin", in.Bus}, {Rail, "rail", in.Bus}, {HighDrain, "v_ds1", in.Bus}, {LowDrain, "v_ds2", in.Bus},
		{HighGate, "v_gs1", in.Supply}, {LowGate, "v_gs2", in.Supply}, {Floating, "floating", in.Supply},
	} {
		g := &co.Ranges[s.signal]
		add("peaks", s.name+"_min", g.Min, r[s.name+"_min"], s.scale)
		add("peaks", s.name+"_max", g.Max, r[s.name+"_max"], s.scale)
		if s.name == "node" || s.name == "pin" {
			if depth := -r[s.name+"_min"]; depth > 0 {
				add("undershoot over itself", s.name+"_min", g.Min, r[s.name+"_min"], depth)
			}
		}
	}
	if gain := r["floating_gain"]; math.Abs(gain) > 1e-3 {
		add("gain", "floating_gain", co.Gain, gain, math.Abs(gain))
	}
	k := map[string]int{}
	for _, b := range c.Result.below {
		of := func(co *Course) Dips {
			return map[string][]Dips{"node": co.BelowNode, "pin": co.BelowPin, "rail": co.BelowRail}[b.Signal][k[b.Signal]]
		}
		d, l, u := of(co), of(lower), of(upper)
		k[b.Signal]++
		beyond := func(x, a, b, c float64) float64 { // by how much x lies beyond all of a, b and c
			return math.Max(0, math.Max(x-math.Max(a, math.Max(b, c)), math.Min(a, math.Min(b, c))-x))
		}
		if scale := math.Max(b.Total, d.Total); scale > 0 {
			add("durations", "below "+b.Signal+", total", beyond(d.Total, b.Total, l.Total, u.Total), 0, scale)
			add("durations", "below "+b.Signal+", longest", beyond(d.Longest, b.Longest, l.Longest, u.Longest), 0, math.Max(b.Longest, d.Longest))
		}
	}
	itself := func(kind, name string, got float64) {
		want := r[name]
		switch {
		case want != want && got == 0:
		case want != want:
			add(kind, name+", without reference", got, 0, math.Abs(got))
		default:
			add(kind, name, got, want, math.Abs(want))
		}
	}
	itself("slopes", "slew_peak_node", co.NodeSlew)
	itself("slopes", "slew_peak_pin", co.PinSlew)
	itself("slopes", "slew_10_90", co.Slew)
	for _, d := range []struct {
		name   string
		got, l float64
	}{{"didt_1", co.HighSlope, in.L1}, {"didt_2", co.LowSlope, in.L2}} {
		add("slopes", d.name, d.got, r[d.name], math.Max(r[d.name], 0.02*in.Bus/d.l))
	}
	itself("slopes", "didt_channel", co.ChannelSlope)
	itself("durations", "t_channel", co.ChannelTime)
	return out
}

// worst collects the worst deviation of each kind and fails the test beyond the limits.
type worst struct {
	limits map[string]float64
	kinds  map[string]deviation
}

func (w *worst) take(t *testing.T, name string, all []deviation) {
	t.Helper()
	for _, d := range all {
		if d.value >= w.kinds[d.kind].value {
			w.kinds[d.kind] = deviation{d.kind, name + ": " + d.what, d.value}
		}
		if limit, ok := w.limits[d.kind]; !ok || !(d.value <= limit) {
			t.Errorf("%s: %s, %s, deviates by %.3g %%", name, d.kind, d.what, 100*d.value)
		}
	}
}

func (w *worst) report(t *testing.T) {
	t.Helper()
	for kind, d := range w.kinds {
		t.Logf("%s: %.3g %%, %s", kind, 100*d.value, d.what)
	}
}

// ringingDeviation is the deviation of frequency and damping, the latter absolute, from the nearest of those wanted; none: no ringing.
func ringingDeviation(co *Course, wanted [][2]float64) (out []deviation) {
	if len(wanted) == 0 {
		return []deviation{{"ringing", "ringing where there is none", co.RingFrequency}}
	}
	best := math.Inf(1)
	for _, w := range wanted {
		if d := math.Abs(co.RingFrequency/w[0] - 1); d < best {
			best = d
			out = []deviation{{"ringing", "frequency", d}, {"damping", "damping", math.Abs(co.RingDamping - w[1])}}
		}
	}
	return out
}

func boolean(b bool) int {
	if b {
		return 1
	}
	return 0
}

// turns collects the turns of the signal that rings.
type turns struct {
	signal func(at *span) numeric.Polynomial
	piece  piece
	t, v   []float64
}

func (r *turns) seen(at *span) {
	p := r.signal(at)
	r.piece.set(&p)
	r.piece.divide()
	for k := 1; k < r.piece.n-1; k++ {
		r.t, r.v = append(r.t, at.at(r.piece.theta[k])), append(r.v, r.piece.value[k])
	}
}

// wanted are frequency and damping from each maximum that is the highest one within what counts as ringing: where two tops are level, the smallest
// error decides which is the higher one. Turns smaller than a ripple do not count.
func (r *turns) wanted(bus float64) (out [][2]float64) {
	t, v := []float64{}, []float64{}
	for k := range r.t {
		n := len(v)
		switch {
		case n > 1 && (v[n-1] > v[n-2]) == (r.v[k] > v[n-1]): // on in the same direction
			t[n-1], v[n-1] = r.t[k], r.v[k]
		case n > 0 && math.Abs(r.v[k]-v[n-1]) <= leastTurn*bus: // a ripple
		default:
			t, v = append(t, r.t[k]), append(v, r.v[k])
		}
	}
	top := math.Inf(-1)
	for _, x := range v {
		top = math.Max(top, x)
	}
	for k := 0; k+2 < len(v); k++ {
		e0, e1, e2 := v[k], v[k+1], v[k+2]
		if e0 < top-leastRing*bus || e0 < e1 || e2 < e1 || e0 < e2 || e2-e1 < leastRing*bus {
			continue
		}
		x := math.Log((e0 - e1) / (e2 - e1))
		out = append(out, [2]float64{1 / (t[k+2] - t[k]), x / math.Sqrt(math.Pi*math.Pi+x*x)})
	}
	return out
}

func (c *referenceCase) run(t *testing.T, s *Simulator, tolerance, levelFactor float64) *Course {
	t.Helper()
	w := Window{Limit: c.Input.End, Whole: true, Levels: c.levels(), Tolerance: tolerance}
	depth := levelFactor * math.Max(0, math.Max(-c.Result.number["node_min"], -c.Result.number["pin_min"]))
	for k := range w.Levels {
		w.Levels[k] += depth
	}
	co, err := s.Run(c.bridge(), w)
	if err != nil {
		t.Fatalf("%s: %v", c.Name, err)
	}
	return co
}

// TestReferenceTight holds the equations, all 77 cases, to SciPy's LSODA at a tolerance of 1e-9, over the same window. A wrong sign or place of
// an element anywhere moves some of these by per cents. Ringing as event.py counts it, each ripple as a turn.
func TestReferenceTight(t *testing.T) {
	w := worst{map[string]float64{
		"peaks": 1e-5, "undershoot over itself": 1e-4, "gain": 1e-4, "durations": 1e-3, "slopes": 1e-3, "ringing": 1e-3, "damping": 1e-4, "end": 1e-3,
	}, map[string]deviation{}}
	s := Simulator{}
	s.watch.everyTurn = true
	cases := referenceCases(t)
	if len(cases) != 77 {
		t.Errorf("%d cases", len(cases))
	}
	for _, c := range cases {
		co := c.run(t, &s, 1e-7, 0)
		w.take(t, c.Name, c.compare(co, co, co))
		var wanted [][2]float64
		if f := c.Result.number["ring_frequency"]; f > 0 {
			wanted = [][2]float64{{f, c.Result.number["ring_damping"]}}
		}
		w.take(t, c.Name, ringingDeviation(co, wanted))
		end, l := c.Result.end, &co.Last
		load, bus := math.Abs(c.Input.Load), c.Input.Bus
		for name, v := range map[string][2]float64{
			"i1": {l.HighCurrent, load}, "i2": {l.LowCurrent, load}, "v_gs1": {l.HighGate, c.Input.Supply}, "v_gs2": {l.LowGate, c.Input.Supply},
			"v_ds1": {l.HighDrain, bus}, "v_ds2": {l.LowDrain, bus}, "v_pin": {l.Pin, bus}, "v_bs": {l.Floating, c.Input.Supply},
			"i_lfr1": {l.HighForward, load}, "i_lfr2": {l.LowForward, load},
		} {
			w.take(t, c.Name, []deviation{{"end", name, math.Abs(v[0]-end[name]) / v[1]}})
		}
	}
	w.report(t)
}

// TestReference holds the default tolerance to the reference: peaks within 0.5 %, durations and slopes within 1 %; and to a fine run of its own what
// rings, frequency within 4 % as its tops are flat.
func TestReference(t *testing.T) {
	w := worst{map[string]float64{
		"peaks": 0.005, "undershoot over itself": 0.005, "gain": 0.005, "durations": 0.01, "slopes": 0.01, "ringing": 0.04, "damping": 0.01,
	}, map[string]deviation{}}
	var s Simulator
	const fine = 1e-6
	steps, rejected, evaluations := 0, 0, 0
	for _, c := range referenceCases(t) {
		co := c.run(t, &s, 0, 0)
		r := turns{signal: func(at *span) numeric.Polynomial { return at.state[stateVd1+2*boolean(!c.bridge().Event.falls())] }}
		s.seen = r.seen
		c.run(t, &s, fine, 0)
		s.seen = nil
		w.take(t, c.Name, c.compare(co, c.run(t, &s, fine, -0.003), c.run(t, &s, fine, 0.003)))
		w.take(t, c.Name, ringingDeviation(co, r.wanted(c.Input.Bus)))
		steps, rejected, evaluations = steps+co.Steps, rejected+co.Rejected, evaluations+co.Evaluations
		if co.Settled != c.Settles {
			t.Errorf("%s: settled %v by the time the reference says %v", c.Name, co.Settled, c.Settles)
		}
	}
	w.report(t)
	t.Logf("%d steps, %d rejected, %d evaluations", steps, rejected, evaluations)
}
