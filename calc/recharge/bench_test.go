package recharge

import "testing"

// benchPeriod is a half-bridge at 100 kHz: 12 V, a silicon diode, 2.2 ohm, 470 nF, blocked on-time and three intervals to recharge.
func benchPeriod(tb testing.TB) Period {
	tb.Helper()
	j, err := FitJunction([]DiodePoint{{0.01, 0.55}, {1, 0.95}}, nan, 25)
	if err != nil {
		tb.Fatal(err)
	}
	return Period{
		Element:     Element{Junction: j, Resistance: 2.2 + j.Resistance},
		Capacitance: 470e-9,
		On:          Interval{Duration: 4.9e-6, Drive: 12 - 400, Conducts: true, Load: 250e-6, Conductance: 1e-4},
		Off: []Interval{
			{Duration: 0.1e-6, Drive: 12.9, Conducts: true, Load: 250e-6},
			{Duration: 4.9e-6, Drive: 12.05, Conducts: true, Load: 250e-6},
			{Duration: 0.1e-6, Drive: 12.9, Conducts: true, Load: 250e-6},
		},
		Charge: 60e-9, ChargePerVolt: 4e-9, Return: 1e-9, RecoverySpec: 10e-9, RecoveryTau: 20e-9,
	}
}

func BenchmarkSteadyState(b *testing.B) {
	p := benchPeriod(b)
	b.ReportAllocs()
	var s Steady
	for b.Loop() {
		s = p.SteadyState()
	}
	if !s.Converged || s.Collapses {
		b.Fatal(s)
	}
	b.ReportMetric(float64(s.Iterations), "maps/op")
}

func BenchmarkMap(b *testing.B) {
	p := benchPeriod(b)
	b.ReportAllocs()
	v := 11.0
	for b.Loop() {
		v, _ = p.Map(v)
	}
	if v < 10 {
		b.Fatal(v)
	}
}

// The service answers thousands of these per request: none may allocate.
func TestSteadyStateDoesNotAllocate(t *testing.T) {
	p := benchPeriod(t)
	if n := testing.AllocsPerRun(100, func() { p.SteadyState() }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}
