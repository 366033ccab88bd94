package preferred

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// The decades as IEC 60063 prints them, from memory.
var published = map[Series][]float64{
	E3:  {1.0, 2.2, 4.7},
	E6:  {1.0, 1.5, 2.2, 3.3, 4.7, 6.8},
	E12: {1.0, 1.2, 1.5, 1.8, 2.2, 2.7, 3.3, 3.9, 4.7, 5.6, 6.8, 8.2},
	E24: {1.0, 1.1, 1.2, 1.3, 1.5, 1.6, 1.8, 2.0, 2.2, 2.4, 2.7, 3.0, 3.3, 3.6, 3.9, 4.3, 4.7, 5.1, 5.6, 6.2, 6.8, 7.5, 8.2, 9.1},
	E48: {1.00, 1.05, 1.10, 1.15, 1.21, 1.27, 1.33, 1.40, 1.47, 1.54, 1.62, 1.69, 1.78, 1.87, 1.96, 2.05, 2.15, 2.26, 2.37, 2.49,
		2.61, 2.74, 2.87, 3.01, 3.16, 3.32, 3.48, 3.65, 3.83, 4.02, 4.22, 4.42, 4.64, 4.87, 5.11, 5.36, 5.62, 5.90, 6.19, 6.49,
		6.81, 7.15, 7.50, 7.87, 8.25, 8.66, 9.09, 9.53},
	E96: {1.00, 1.02, 1.05, 1.07, 1.10, 1.13, 1.15, 1.18, 1.21, 1.24, 1.27, 1.30, 1.33, 1.37, 1.40, 1.43, 1.47, 1.50, 1.54, 1.58,
		1.62, 1.65, 1.69, 1.74, 1.78, 1.82, 1.87, 1.91, 1.96, 2.00, 2.05, 2.10, 2.15, 2.21, 2.26, 2.32, 2.37, 2.43, 2.49, 2.55,
		2.61, 2.67, 2.74, 2.80, 2.87, 2.94, 3.01, 3.09, 3.16, 3.24, 3.32, 3.40, 3.48, 3.57, 3.65, 3.74, 3.83, 3.92, 4.02, 4.12,
		4.22, 4.32, 4.42, 4.53, 4.64, 4.75, 4.87, 4.99, 5.11, 5.23, 5.36, 5.49, 5.62, 5.76, 5.90, 6.04, 6.19, 6.34, 6.49, 6.65,
		6.81, 6.98, 7.15, 7.32, 7.50, 7.68, 7.87, 8.06, 8.25, 8.45, 8.66, 8.87, 9.09, 9.31, 9.53, 9.76},
}

func TestSeriesAsPublished(t *testing.T) {
	for s, want := range published {
		if got := s.Values(); !slices.Equal(got, want) {
			t.Errorf("%v = %v, want %v", s, got, want)
		}
	}
}

// IEC 60063 (from memory): 9.20 where 100·10^(185/192) rounds to 919.
func TestE192Exception(t *testing.T) {
	values := E192.Values()
	if values[185] != 9.20 {
		t.Errorf("E192[185] = %v, want 9.20", values[185])
	}
	for i, v := range values {
		if want := math.Round(100*math.Pow(10, float64(i)/192)) / 100; i != 185 && v != want {
			t.Errorf("E192[%d] = %v, want the rounded %v", i, v, want)
		}
		if i%2 == 0 && i/2 < 96 && v != published[E96][i/2] {
			t.Errorf("E192[%d] = %v is not E96[%d] = %v", i, v, i/2, published[E96][i/2])
		}
	}
}

func TestSeriesNotInStandard(t *testing.T) {
	for _, s := range []Series{0, -3, 7, 1000} {
		if s.Valid() || s.Values() != nil || !math.IsNaN(AtLeast(1, s)) || !math.IsNaN(AtMost(1, s)) || !math.IsNaN(Nearest(1, s)) {
			t.Errorf("%v is taken for a series of IEC 60063", s)
		}
	}
}

func TestSteps(t *testing.T) {
	tests := []struct {
		v                        float64
		s                        Series
		atMost, atLeast, nearest float64
	}{
		{4.7e-9, E6, 4.7e-9, 4.7e-9, 4.7e-9},
		{4.7e-9 * (1 + 1e-12), E6, 4.7e-9, 4.7e-9, 4.7e-9},
		{4.7e-9 * (1 - 1e-12), E6, 4.7e-9, 4.7e-9, 4.7e-9},
		{4.7e-9 * (1 + 1e-8), E6, 4.7e-9, 6.8e-9, 4.7e-9},
		{4.7e-9 * (1 - 1e-8), E6, 3.3e-9, 4.7e-9, 4.7e-9},
		{6.9e-9, E6, 6.8e-9, 1e-8, 6.8e-9},
		{9.9e-9, E6, 6.8e-9, 1e-8, 1e-8},
		{1e-7, E12, 1e-7, 1e-7, 1e-7},
		{1e-7 * (1 - 1e-12), E12, 1e-7, 1e-7, 1e-7},
		{1e-7 * (1 - 1e-8), E12, 8.2e-8, 1e-7, 1e-7},
		{1e-7 * (1 + 1e-8), E12, 1e-7, 1.2e-7, 1e-7},
		{725e-9, E6, 680e-9, 1e-6, 680e-9}, // A01, IR2114 data sheet PD60213
		{8.3, E24, 8.2, 9.1, 8.2},
		{9.19, E192, 9.09, 9.20, 9.20},
		{9.995, E192, 9.88, 10, 10},
		{1000, E3, 1000, 1000, 1000},
		{1e22, E3, 1e22, 1e22, 1e22},
		{3e-30, E3, 2.2e-30, 4.7e-30, 2.2e-30},
	}
	for _, tt := range tests {
		if got := AtMost(tt.v, tt.s); got != tt.atMost {
			t.Errorf("AtMost(%v, %v) = %v, want %v", tt.v, tt.s, got, tt.atMost)
		}
		if got := AtLeast(tt.v, tt.s); got != tt.atLeast {
			t.Errorf("AtLeast(%v, %v) = %v, want %v", tt.v, tt.s, got, tt.atLeast)
		}
		if got := Nearest(tt.v, tt.s); got != tt.nearest {
			t.Errorf("Nearest(%v, %v) = %v, want %v", tt.v, tt.s, got, tt.nearest)
		}
	}
}

// Nearest is by ratio: sqrt(1·2.2) = 1.4832, not the mean 1.6.
func TestNearestIsByRatio(t *testing.T) {
	if got := Nearest(1.48, E3); got != 1 {
		t.Errorf("Nearest(1.48, E3) = %v, want 1", got)
	}
	if got := Nearest(1.49, E3); got != 2.2 {
		t.Errorf("Nearest(1.49, E3) = %v, want 2.2", got)
	}
}

func TestNoAnswer(t *testing.T) {
	for _, v := range []float64{0, math.Copysign(0, -1), -1, math.NaN(), math.Inf(1), math.Inf(-1)} {
		for _, s := range All() {
			for name, got := range map[string]float64{"AtLeast": AtLeast(v, s), "AtMost": AtMost(v, s), "Nearest": Nearest(v, s)} {
				if !math.IsNaN(got) {
					t.Errorf("%s(%v, %v) = %v, want NaN", name, v, s, got)
				}
			}
		}
	}
	if got := AtLeast(math.MaxFloat64, E3); !math.IsNaN(got) {
		t.Errorf("AtLeast(MaxFloat64, E3) = %v, want NaN", got)
	}
	if got := AtMost(math.MaxFloat64, E3); got != 1e308 {
		t.Errorf("AtMost(MaxFloat64, E3) = %v, want 1e308", got)
	}
}

// Every member of every decade is its own neighbour, and the float64 nearest
// to its decimal text.
func TestMembersMeetThemselves(t *testing.T) {
	for _, s := range All() {
		for decade := -20; decade <= 20; decade++ {
			for i, mantissa := range s.Values() {
				var v float64
				if _, err := fmt.Sscanf(fmt.Sprintf("%.2fe%d", mantissa, decade), "%g", &v); err != nil {
					t.Fatal(err)
				}
				if AtLeast(v, s) != v || AtMost(v, s) != v || Nearest(v, s) != v {
					t.Fatalf("%v value %d of decade %d: %v gives %v, %v, %v", s, i, decade, v, AtLeast(v, s), AtMost(v, s), Nearest(v, s))
				}
			}
		}
	}
}

// Against a plain scan of all values around v.
func TestAgainstScan(t *testing.T) {
	r := rand.New(rand.NewPCG(60063, 1))
	for range 20000 {
		s := All()[r.IntN(len(All()))]
		v := math.Pow(10, 24*r.Float64()-12)
		low, high := 0.0, math.Inf(1)
		for decade := math.Floor(math.Log10(v)) - 1; decade <= math.Floor(math.Log10(v))+1; decade++ {
			for _, m := range s.Values() {
				x := m * math.Pow(10, decade)
				if x <= v && x > low {
					low = x
				}
				if x >= v && x < high {
					high = x
				}
			}
		}
		if got := AtMost(v, s); math.Abs(got/low-1) > 1e-8 {
			t.Fatalf("AtMost(%v, %v) = %v, scan finds %v", v, s, got, low)
		}
		if got := AtLeast(v, s); math.Abs(got/high-1) > 1e-8 {
			t.Fatalf("AtLeast(%v, %v) = %v, scan finds %v", v, s, got, high)
		}
	}
}

func TestRatings(t *testing.T) {
	tests := []struct {
		name string
		next func(float64) (float64, bool)
		v    float64
		want float64
		ok   bool
	}{
		{"capacitor", RatedVoltageAtLeast, 0.1, 4, true},
		{"capacitor", RatedVoltageAtLeast, 6.3, 6.3, true},
		{"capacitor", RatedVoltageAtLeast, 6.3 * (1 + 1e-12), 6.3, true},
		{"capacitor", RatedVoltageAtLeast, 6.31, 10, true},
		{"capacitor", RatedVoltageAtLeast, 15 / 0.6, 25, true},
		{"capacitor", RatedVoltageAtLeast, 1000, 1000, true},
		{"capacitor", RatedVoltageAtLeast, 1001, 0, false},
		{"capacitor", RatedVoltageAtLeast, 0, 0, false},
		{"capacitor", RatedVoltageAtLeast, math.NaN(), 0, false},
		{"capacitor", RatedVoltageAtLeast, math.Inf(1), 0, false},
		{"diode", ReverseVoltageAtLeast, 1, 20, true},
		{"diode", ReverseVoltageAtLeast, 100, 100, true},
		{"diode", ReverseVoltageAtLeast, 400 / 0.7, 600, true},
		{"diode", ReverseVoltageAtLeast, 1300, 1700, true},
		{"diode", ReverseVoltageAtLeast, 1701, 0, false},
		{"diode", ReverseVoltageAtLeast, -5, 0, false},
		{"diode", ReverseVoltageAtLeast, math.NaN(), 0, false},
	}
	for _, tt := range tests {
		if got, ok := tt.next(tt.v); got != tt.want || ok != tt.ok {
			t.Errorf("%s rating for %v V = %v, %v; want %v, %v", tt.name, tt.v, got, ok, tt.want, tt.ok)
		}
	}
	for _, list := range [][]float64{RatedVoltages(), ReverseVoltages()} {
		if !slices.IsSorted(list) || len(slices.Compact(slices.Clone(list))) != len(list) {
			t.Errorf("%v does not rise strictly", list)
		}
	}
}

func ExampleAtLeast() {
	fmt.Println(AtLeast(237.5e-9, E6), AtLeast(4.7e-9, E6))
	// Output: 3.3e-07 4.7e-09
}

func BenchmarkAtLeast(b *testing.B) {
	for b.Loop() {
		AtLeast(237.5e-9, E24)
	}
}
