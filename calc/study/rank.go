package study

import (
	"math"
	"slices"
)

// place is a number with the draw that it belongs to.
type place struct {
	value float32
	draw  int32
}

// midranks gives each draw twice its rank, from 1 on, among the numbers that are there: those with equal numbers share the mean of their ranks.
// Draws without a number get 0. Sorted are the numbers in ascending order, in memory that is used again.
func midranks(values []float32, ranks []int32, sorted []place) []place {
	sorted = sorted[:0]
	for i, v := range values {
		ranks[i] = 0
		if v == v {
			sorted = append(sorted, place{v, int32(i)})
		}
	}
	slices.SortFunc(sorted, func(a, b place) int {
		switch {
		case a.value < b.value:
			return -1
		case a.value > b.value:
			return 1
		}
		return int(a.draw - b.draw)
	})
	for from := 0; from < len(sorted); {
		to := from
		for to < len(sorted) && sorted[to].value == sorted[from].value {
			to++
		}
		for _, p := range sorted[from:to] {
			ranks[p.draw] = int32(from + 1 + to)
		}
		from = to
	}
	return sorted
}

// spearman is the rank correlation of two rankings that order makes comparable: the draws in the ascending order of one variable without ties, and
// twice the midranks of another one over those draws that have any, 0 for the others. NaN where the other does not vary. It is the product-moment
// correlation of the ranks: Spearman, "The proof and measurement of association between two things", Am. J. Psychology 15, 1904; from memory, held
// against SciPy.
func spearman(order []int32, ranks []int32) float64 {
	var n, cross, square int64
	for _, i := range order {
		if r := int64(ranks[i]); r > 0 {
			n++
			cross += 2 * n * r
			square += r * r
		}
	}
	// Sums over doubled ranks, exact in integers: the mean of both is n + 1, the sum of squares of one without ties 4·n(n + 1)(2n + 1)/6.
	mean := n * (n + 1) * (n + 1)
	free := 4*n*(n+1)*(2*n+1)/6 - mean
	if square -= mean; square == 0 || free == 0 {
		return math.NaN()
	}
	return float64(cross-mean) / math.Sqrt(float64(square)) / math.Sqrt(float64(free))
}

// ascending is the order of the draws by a stream.
func (s stream) ascending(seed uint32, draws int) []int32 {
	u, out := make([]float64, draws), make([]int32, draws)
	for i := range u {
		u[i], out[i] = s.at(seed, uint32(i)), int32(i)
	}
	slices.SortFunc(out, func(a, b int32) int {
		switch {
		case u[a] < u[b]:
			return -1
		case u[a] > u[b]:
			return 1
		}
		return int(a - b)
	})
	return out
}
