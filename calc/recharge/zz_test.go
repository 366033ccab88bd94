package recharge

import (
	"testing"
)

func TestZZ(t *testing.T) {
	p := benchPeriod(t)
	p.SteadyState()
	hist := map[int]int{}
	for _, r := range readReference(t) {
		p := r.period()
		hist[p.SteadyState().Iterations]++
	}
	t.Log(hist)
}
