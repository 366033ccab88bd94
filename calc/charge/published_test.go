package charge_test

import (
	"math"
	"testing"

	"floatrail/calc/charge"
)

// printed checks a result against a figure as a document prints it: it must
// round to that figure, unit being one in its last digit.
func printed(t *testing.T, what string, got, figure, unit float64) {
	t.Helper()
	if !(math.Abs(got-figure) <= 0.5*unit*(1+1e-9)) {
		t.Errorf("%s = %.6g, want %.6g as printed (last digit %.1g)", what, got, figure, unit)
	}
}

// exact checks a result against a closed form worked out by hand.
func exact(t *testing.T, what string, got, want float64) {
	t.Helper()
	if !(math.Abs(got-want) <= 1e-12*math.Abs(want)) {
		t.Errorf("%s = %.15g, want %.15g", what, got, want)
	}
}

const (
	nano  = 1e-9
	micro = 1e-6
	milli = 1e-3
)

// Complete sizing examples: budget, then Q_B, then Q_B/ΔV.
func TestPublishedSizing(t *testing.T) {
	for _, c := range []struct {
		id     string
		source string
		loads  charge.Loads
		edge   charge.Edge
		over   charge.Interval
		drop   float64 // [V]
		factor float64 // the document's own factor on the charge [1]

		total, totalUnit             float64 // [C]
		capacitance, capacitanceUnit float64 // [F]
	}{
		{
			id: "A01", source: "International Rectifier PD60213, 2.1-2.2, DT04-4 (last inputs from memory)",
			loads: charge.Loads{Quiescent: 800 * micro, OffsetLeakage: 50 * micro, GateLeakage: 100 * nano, DiodeLeakage: 100 * micro, Other: 150 * micro},
			edge:  charge.Edge{Gate: 160 * nano, LevelShift: 20 * nano},
			over:  charge.Interval{Period: 100 * micro, OnTime: 100 * micro},
			drop:  charge.VoltageBudget{Supply: 15, ElementDrop: 1, NodeLow: 3.1, Required: 10.5}.Available(), factor: 1,
			total: 290 * nano, totalUnit: nano, capacitance: 725 * nano, capacitanceUnit: nano,
		},
		{
			// The document cuts 105.253 nC off to 105.2 nC; the recomputed figure stands here.
			id: "A02", source: "Fairchild AN-6076 (2008), bootstrap capacitor example (from memory)",
			loads: charge.Loads{Quiescent: 120 * micro, OffsetLeakage: 50 * micro, GateLeakage: 100 * nano, DiodeLeakage: 10 * nano},
			edge:  charge.Edge{Gate: 98 * nano, LevelShift: 3 * nano},
			over:  charge.Interval{Period: 25 * micro, OnTime: 25 * micro},
			drop:  1, factor: 1,
			total: 105.253 * nano, totalUnit: 0.001 * nano, capacitance: 105 * nano, capacitanceUnit: nano,
		},
		{
			id: "A15", source: "Intersil HIP4086 data sheet, boot capacitor (equation read, numbers from memory)",
			loads: charge.Loads{Quiescent: 100 * micro, OffsetLeakage: 100 * nano, PullDown: 1 / 100e3},
			edge:  charge.Edge{Gate: 64 * nano},
			over:  charge.Interval{Period: milli, OnTime: milli, Voltage: 9.4},
			drop:  0.05 * 10, factor: 1,
			total: 258.1 * nano, totalUnit: 0.1 * nano, capacitance: 0.52 * micro, capacitanceUnit: 0.01 * micro,
		},
		{
			id: "A15 without the resistor", source: "Intersil HIP4086 data sheet, boot capacitor (equation read, numbers from memory)",
			loads: charge.Loads{Quiescent: 100 * micro, OffsetLeakage: 100 * nano},
			edge:  charge.Edge{Gate: 64 * nano},
			over:  charge.Interval{Period: milli, OnTime: milli, Voltage: 9.4},
			drop:  0.05 * 10, factor: 1,
			total: 164.1 * nano, totalUnit: 0.1 * nano, capacitance: 0.33 * micro, capacitanceUnit: 0.01 * micro,
		},
		{
			id: "A16", source: "Texas Instruments SLUS486B, eq. 1",
			edge: charge.Edge{Gate: 31 * nano},
			drop: 0.03 * 6, factor: 1,
			total: 31 * nano, totalUnit: nano, capacitance: 172 * nano, capacitanceUnit: nano,
		},
		{
			id: "A11", source: "Allegro A3946 data sheet 29319.150: C = 20·Q/V",
			edge: charge.Edge{Gate: 160 * nano},
			drop: 12, factor: 20,
			total: 160 * nano, totalUnit: nano, capacitance: 0.2667 * micro, capacitanceUnit: 0.0001 * micro,
		},
		{
			// The tip counts Q_G twice and the sum twice again as its safety factors.
			id: "A22", source: "International Rectifier DT98-2a, equation (result derived)",
			loads: charge.Loads{Quiescent: 230 * micro},
			edge:  charge.Edge{Gate: 2 * 63 * nano, LevelShift: 5 * nano},
			over:  charge.Interval{Period: 1 / 20e3},
			drop:  charge.VoltageBudget{Supply: 12, ElementDrop: 1.3, NodeLow: 1.5, Required: 8}.Available(), factor: 2,
			total: 142.5 * nano, totalUnit: 0.1 * nano, capacitance: 237.5 * nano, capacitanceUnit: 0.1 * nano,
		},
	} {
		t.Run(c.id, func(t *testing.T) {
			total := charge.Total(charge.Items(c.loads, c.edge, c.over))
			printed(t, "Q_B of "+c.source, total, c.total, c.totalUnit)
			got, ok := charge.MinimumCapacitance(c.factor*total, c.drop)
			if !ok {
				t.Fatalf("%s: no capacitance for ΔV = %g V", c.source, c.drop)
			}
			printed(t, "C of "+c.source, got, c.capacitance, c.capacitanceUnit)
		})
	}
}

// A01, International Rectifier PD60213: ΔV = 15 - 1 - 3.1 - 10.5 = 0.4 V.
func TestPublishedVoltageBudget(t *testing.T) {
	b := charge.VoltageBudget{Supply: 15, ElementDrop: 1, NodeLow: 3.1, Required: 10.5}
	exact(t, "ΔV", b.Available(), 0.4)
}

// ΔV = Q/C.
func TestPublishedDrop(t *testing.T) {
	for _, c := range []struct {
		id, source          string
		charge, capacitance float64 // [C], [F]
		drop, unit          float64 // [V]
	}{
		{"A03", "Fairchild AN-6076 (from memory)", 105.2 * nano, 100 * nano, 1.05, 0.01},
		{"A03", "Fairchild AN-6076 (from memory)", 105.2 * nano, 150 * nano, 0.7, 0.1},
		{"A03", "Fairchild AN-6076 (from memory)", 105.2 * nano, 220 * nano, 0.48, 0.01},
		{"A03", "Fairchild AN-6076 (from memory)", 105.2 * nano, 570 * nano, 0.18, 0.01},
		{"A04", "STMicroelectronics L6386E, Doc 13989 Rev 2, 4.1", 30 * nano, 100 * nano, 0.300, 0.001},
		{"A05", "STMicroelectronics L6386E, Doc 13989 Rev 2, 4.1", 200 * micro * 5 * milli, micro, 1.000, 0.001},
		{"A11", "Allegro A3946 data sheet 29319.150, beyond its own limit of 0.4 V", 160 * nano, 0.22 * micro, 0.727, 0.001},
		{"A21", "Microchip synchronous buck controller data sheet, 4.5", 10 * milli * 3.33 * micro, 0.1 * micro, 0.333, 0.001},
	} {
		printed(t, c.id+" "+c.source, charge.Drop(c.charge, c.capacitance), c.drop, c.unit)
	}
}

// A04, STMicroelectronics L6386E, Doc 13989 Rev 2, 4.1: C_ext = Q/V = 3 nF; A05,
// same: 200 µA for 5 ms is 1 µC.
func TestPublishedChargeAndCapacitance(t *testing.T) {
	c, ok := charge.MinimumCapacitance(30*nano, 10)
	if !ok {
		t.Fatal("A04: no capacitance")
	}
	printed(t, "A04 C_ext", c, 3*nano, 0.001*nano)
	q := charge.Total(charge.Items(charge.Loads{Quiescent: 200 * micro}, charge.Edge{}, charge.Interval{Period: 5 * milli}))
	printed(t, "A05 Q", q, micro, 0.001*micro)
}

// D10, the inverse of A01 and A05: t = C·ΔV/I.
func TestPublishedHoldTime(t *testing.T) {
	a01 := charge.Hold{Start: 0.4 - charge.Drop(180*nano, 725*nano), Capacitance: 725 * nano, Loads: charge.Loads{Quiescent: 1.1001 * milli}}
	printed(t, "A01 hold time", a01.Time(0), 100.0*micro, 0.1*micro)
	a05 := charge.Hold{Start: 10, Capacitance: micro, Loads: charge.Loads{Quiescent: 200 * micro}}
	printed(t, "A05 hold time", a05.Time(9), 5.0*milli, 0.1*milli)
}
