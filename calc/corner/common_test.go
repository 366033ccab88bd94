package corner_test

import (
	"math"
	"testing"

	"floatrail/calc/corner"
	"floatrail/calc/quantity"
	"floatrail/calc/stage"
)

var (
	nan    = math.NaN()
	policy = stage.DefaultPolicy()
	room   = corner.Set{Name: "room", Junction: 25, Ambient: 25}
)

// bench is a stage with a few inputs to be read by functions of a test; the rest of the stage stands at 0.
type bench struct {
	*stage.Stage
	op            *stage.OperatingPoint
	a, b, c       *stage.Quantity // inputs of parts, by ascending ID
	hot           *stage.Quantity // of a switch
	bus           *stage.Quantity // of the operating point: looked into between its ends
	absent, other *stage.Quantity // not known
	low, high     *stage.Quantity // points of one curve
	curve         *stage.List[stage.ForwardPoint]
}

// between is a value with a spread in a dimension with a plausible range.
func between(field string, low, typical, high float64) stage.Quantity {
	q := stage.Between(field, low, typical, high)
	q.Declare = &stage.Declaration{Dimension: quantity.Resistance, Low: 0, High: 100}
	return q
}

func unknown(field string) stage.Quantity {
	return stage.Absent(field, &stage.Declaration{Dimension: quantity.Current, Low: 0, High: 100})
}

// newBench makes the stage; change may alter it before it is completed.
func newBench(change func(*bench)) *bench {
	s := &stage.Stage{ID: "s"}
	s.OperatingPoints = stage.List[stage.OperatingPoint]{Field: "stage.operatingPoints", Items: make([]stage.OperatingPoint, 1)}
	op := &s.OperatingPoints.Items[0]
	f := &s.Bootstrap.Diode.ForwardPoints
	f.Field = "stage.bootstrap.diode.forwardPoints"
	f.Items = []stage.ForwardPoint{
		{Current: stage.Exact(f.Field+"[0].current", 0.1), Voltage: stage.Between(f.Field+"[0].voltage", 0.5, 0.6, 0.8)},
		{Current: stage.Exact(f.Field+"[1].current", 1), Voltage: stage.Between(f.Field+"[1].voltage", 0.9, 1.0, 1.1)},
	}
	b := &bench{Stage: s, op: op,
		a: &s.Driver.UVLOFalling, b: &s.Driver.LevelShiftCharge, c: &s.Bootstrap.Resistor.Resistance, hot: &s.HighSide.OnResistance,
		bus: &op.BusVoltage, absent: &s.Driver.OffsetLeakage, other: &s.Bootstrap.OtherLoad,
		low: &f.Items[0].Voltage, high: &f.Items[1].Voltage, curve: f}
	*b.a = between("stage.a", 1, 2, 4)
	*b.b = between("stage.b", 10, 20, 30)
	*b.c = between("stage.c", 0, 5, 10)
	*b.hot = between("stage.hot", 1, 2, 3)
	*b.bus = between("stage.bus", 0, 5, 10)
	*b.absent, *b.other = unknown("stage.absent"), unknown("stage.other")
	op.JunctionTemperature, op.AmbientTemperature = stage.Between("", -40, 25, 150), stage.Between("", -40, 25, 85)
	if change != nil {
		change(b)
	}
	s.Complete(&policy)
	return b
}

// space is the bench at a set.
func (b *bench) space(set corner.Set) *corner.Space {
	return corner.NewSpace(b.Stage, &policy, b.op, set)
}

func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if math.Abs(got-want) > 1e-12*math.Max(1, math.Abs(want)) && got != want || (got != got) != (want != want) {
		t.Errorf("%s: %g, want %g", what, got, want)
	}
}

// fields are the paths of inputs.
func fields(qs []*stage.Quantity) []string {
	var out []string
	for _, q := range qs {
		out = append(out, q.Field)
	}
	return out
}
