package study

import (
	"crypto/sha256"
	"encoding/binary"
	"strings"

	"floatrail/calc/corner"
	"floatrail/calc/internal/numeric"
	"floatrail/calc/stage"
)

// stream is the name of an input's numbers: 96 bits of the SHA-256 of its path and symbol.
type stream [3]uint32

// separator stands between the parts of a name.
const separator = "\x1f"

// newStream names the numbers of a path. The symbol tells apart what a stage makes of one field: a dielectric's change with temperature, for
// example, from the field itself.
func newStream(path, symbol string) stream {
	h := sha256.Sum256([]byte(path + separator + symbol))
	var s stream
	for i := range s {
		s[i] = binary.BigEndian.Uint32(h[4*i:])
	}
	return s
}

// at is the number of a draw, strictly between 0 and 1.
func (s stream) at(seed, draw uint32) float64 {
	x := numeric.Philox([4]uint32{draw, s[0], s[1], s[2]}, [2]uint32{seed, 0})
	return numeric.Unit(x[0], x[1])
}

// variate is an input that is drawn.
type variate struct {
	input  *stage.Quantity
	stream stream
	point  int             // operating point that it belongs to, -1: to all
	twin   *stage.Quantity // junction temperature that moves with this ambient temperature; nil: this is none
}

// temperature tells whether the variate is the temperature of an operating point.
func (v *variate) temperature() bool { return v.twin != nil }

// field is the path under which the variate is ranked.
func (v *variate) field() string {
	if v.temperature() && !corner.Varies(v.input) {
		return v.twin.Field
	}
	return v.input.Field
}

// concerns tells whether a variate may move what is found at an operating point.
func (s *run) concerns(v *variate, point int) bool { return v.point < 0 || v.point == point }

// variates lists the inputs of a complete stage that are drawn, in the order of the stage. The temperatures of an operating point are one.
func variates(s *stage.Stage) []variate {
	var out []variate
	for id, q := range s.Inputs() {
		if id == 0 {
			continue
		}
		path := stage.Relative(q.Field)
		v := variate{input: q, point: -1}
		varies := corner.Varies(q)
		for i := range s.OperatingPoints.Items {
			op := &s.OperatingPoints.Items[i]
			switch {
			case q == &op.JunctionTemperature:
				varies = false
			case q == &op.AmbientTemperature:
				v.twin = &op.JunctionTemperature
				varies = varies || corner.Varies(&op.JunctionTemperature)
			}
			if rest, ok := strings.CutPrefix(path, stage.Relative(op.Field)+"."); ok {
				path = "operatingPoints" + separator + op.Name + separator + rest
				v.point = i
				break
			}
		}
		if varies {
			v.stream = newStream(path, q.Declare.Symbol)
			out = append(out, v)
		}
	}
	return out
}
