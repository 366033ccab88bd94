package property

import (
	"floatrail/calc/catalog"
	"testing"
)

func TestShow(t *testing.T) {
	for _, s := range subjects(t) {
		j := judge(t, bind(t, s.tree), catalog.All())
		for _, p := range j.places() {
			v := j.at[p]
			t.Log(s.name, p, v.outcome, v.value, v.limit, v.margin, v.text)
		}
	}
}
