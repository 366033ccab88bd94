package study

import (
	"math"
	"slices"
)

// Confidence of every interval of a study [1].
const Confidence = 0.95

// z is the quantile of the normal distribution that leaves half of what is outside the confidence above it.
var z = math.Sqrt2 * math.Erfinv(Confidence)

// Share is a count out of a number of draws with the confidence interval of the probability behind it.
type Share struct {
	Count, Of int
	Value     float64 // NaN without draws [1]
	Low, High float64 // [1]
}

// NewShare makes a share; its interval is the score interval: Wilson, "Probable inference, the law of succession, and statistical inference",
// JASA 22, 1927; from memory, held against SciPy.
func NewShare(count, of int) Share {
	s := Share{Count: count, Of: of, Value: math.NaN(), Low: math.NaN(), High: math.NaN()}
	if of == 0 {
		return s
	}
	n := float64(of)
	s.Value = float64(count) / n
	mid := (s.Value + z*z/(2*n)) / (1 + z*z/n)
	half := z / (1 + z*z/n) * math.Sqrt(s.Value*(1-s.Value)/n+z*z/(4*n*n))
	s.Low, s.High = math.Max(0, mid-half), math.Min(1, mid+half)
	if count == 0 { // what the formula gives but for rounding
		s.Low = 0
	}
	if count == of {
		s.High = 1
	}
	return s
}

// order is the order statistic that stands for a quantile, and those that enclose it, by their numbers from 1 on; 0 for an end that there is not.
type order struct{ low, at, high int }

// orderOf is the smallest of n draws that the share p of them does not exceed, enclosed by order statistics between which the quantile p lies with at
// least the confidence, whatever the distribution; at most half of the rest is left on either side, and of too few draws there is no such end. Source:
// David, Nagaraja, "Order Statistics", 3rd ed., 2003, 7.1; from memory, held against SciPy.
func orderOf(n int, p float64) order {
	o := order{
		low:  binomial(n, p, (1-Confidence)/2),
		at:   min(max(int(math.Ceil(float64(n)*p-1e-9)), 1), n), // a product that rounding puts above a whole number is meant to be that
		high: binomial(n, p, (1+Confidence)/2) + 1,
	}
	if o.high > n {
		o.high = 0
	}
	return o
}

// least is a probability that nothing here can see.
const least = 1e-18

// binomial is the smallest k up to which the binomial distribution of n trials of probability p, strictly between 0 and 1, has at least the share q.
func binomial(n int, p, q float64) int {
	if n == 0 {
		return 0
	}
	mode := int(math.Floor(float64(n+1) * p))
	lg := func(x int) float64 { v, _ := math.Lgamma(float64(x + 1)); return v }
	top := math.Exp(lg(n) - lg(mode) - lg(n-mode) + float64(mode)*math.Log(p) + float64(n-mode)*math.Log1p(-p))
	first, odds := mode, p/(1-p)
	var mass []float64
	for k, m := mode, top; k >= 0 && m > least; k-- { // downwards from the mode
		mass, first = append(mass, m), k
		m *= float64(k) / float64(n-k+1) / odds
	}
	slices.Reverse(mass)
	for k, m := mode, top; k < n; { // upwards
		m *= float64(n-k) / float64(k+1) * odds
		if k++; m <= least {
			break
		}
		mass = append(mass, m)
	}
	all := 0.0
	for _, m := range mass {
		all += m
	}
	sum := 0.0
	for i, m := range mass {
		if sum += m; sum >= q*all {
			return first + i
		}
	}
	return first + len(mass) - 1
}
