package study

import (
	"encoding/json"
	"math"
	"os"
	"slices"
	"testing"

	"floatrail/calc/stage"
)

// reference is what study.py finds with SciPy.
type reference struct {
	Scipy  string
	Normal struct {
		Quantiles          []struct{ U, Value float64 }
		Variance, Kurtosis float64
	}
	Wilson []struct {
		Count, Of int
		Low, High float64
	}
	Orders []struct {
		N         int
		P         float64
		Low, High int
	}
	Spearman []struct {
		U, Y []float64
		Rho  float64
	}
}

func readReference(t *testing.T) reference {
	t.Helper()
	text, err := os.ReadFile("../../testdata/reference/study.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc reference
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	if doc.Scipy == "" || len(doc.Normal.Quantiles) < 14 || len(doc.Wilson) < 30 || len(doc.Orders) < 40 || len(doc.Spearman) < 6 {
		t.Fatalf("SciPy %q with too few cases", doc.Scipy)
	}
	return doc
}

// standard is a range whose normal distribution is the standard one, truncated at three standard deviations.
var standard = stage.Triple{Min: -reach, Typ: 0, Max: reach}

func TestNormalAgainstReference(t *testing.T) {
	for _, c := range readReference(t).Normal.Quantiles {
		if got := Normal.At(standard, c.U); math.Abs(got-c.Value) > 1e-8 {
			t.Errorf("quantile at %g: %.12g, want %.12g", c.U, got, c.Value)
		}
	}
}

func TestShareAgainstReference(t *testing.T) {
	for _, c := range readReference(t).Wilson {
		got := NewShare(c.Count, c.Of)
		if math.Abs(got.Low-c.Low) > 1e-9 || math.Abs(got.High-c.High) > 1e-9 || got.Value != float64(c.Count)/float64(c.Of) {
			t.Errorf("%d of %d: %g in %.12g to %.12g, want %.12g to %.12g", c.Count, c.Of, got.Value, got.Low, got.High, c.Low, c.High)
		}
	}
	if none := NewShare(0, 0); none.Value == none.Value || none.Low == none.Low || none.High == none.High {
		t.Errorf("of no draw: %+v, want nothing", none)
	}
}

func TestOrdersAgainstReference(t *testing.T) {
	for _, c := range readReference(t).Orders {
		o := orderOf(c.N, c.P)
		low, at, high := o.low, o.at, o.high
		if low != c.Low || high != c.High {
			t.Errorf("quantile %g of %d draws: %d to %d, want %d to %d", c.P, c.N, low, high, c.Low, c.High)
		}
		if at < 1 || at > c.N || at < low || high > 0 && at > high || math.Abs(float64(at)-c.P*float64(c.N)) > 1 {
			t.Errorf("quantile %g of %d draws: stands at %d, between %d and %d", c.P, c.N, at, low, high)
		}
	}
	if o := orderOf(100, 0.95); o.at != 95 { // 0.95 and 100·0.95 are not exact
		t.Errorf("quantile 0.95 of 100 draws: %+v, want 95", o)
	}
}

func TestSpearmanAgainstReference(t *testing.T) {
	for i, c := range readReference(t).Spearman {
		n := len(c.U)
		order := make([]int32, n)
		for k := range order {
			order[k] = int32(k)
		}
		slices.SortFunc(order, func(a, b int32) int {
			if c.U[a] < c.U[b] {
				return -1
			}
			return 1
		})
		// A draw without a number among them changes nothing.
		y := []float32{missing}
		for _, v := range c.Y {
			y = append(y, float32(v))
		}
		withGap := []int32{int32(0)}
		for _, k := range order {
			withGap = append(withGap, k+1)
		}
		ranks := make([]int32, n+1)
		if sorted := midranks(y, ranks, nil); len(sorted) != n {
			t.Fatalf("case %d: %d numbers, want %d", i, len(sorted), n)
		}
		if got := spearman(withGap, ranks); math.Abs(got-c.Rho) > 1e-12 {
			t.Errorf("case %d: %.15g, want %.15g", i, got, c.Rho)
		}
	}
	flat := make([]int32, 3)
	midranks([]float32{5, 5, 5}, flat, nil)
	if rho := spearman([]int32{0, 1, 2}, flat); rho == rho {
		t.Errorf("of what does not vary: %g, want none", rho)
	}
}
