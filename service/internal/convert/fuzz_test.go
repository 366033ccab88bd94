package convert

import (
	"slices"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc/stage"
)

// FuzzBindStage binds whatever the JSON decoder accepts: nothing panics, a second binding says the same, and a stage without faults can be
// completed.
func FuzzBindStage(f *testing.F) {
	f.Add(fullStage)
	for _, edit := range []string{
		`{}`, `{"id": ""}`, `{"driver": {"use": "x"}}`, `{"highSide": {"gateCharge": {"typ": "63"}}}`,
		`{"bootstrap": {"capacitor": {"marking": "1u/25V/X7R/0603/K", "biasCurve": [{"voltage": "1 V"}]}}}`,
		`{"layout": {"nodeClamp": {"fit": "NOT_FITTED", "junctionMax": "1 degC"}}}`,
		`{"operatingPoints": [{"name": "a", "heldOn": {}}, {"sinusoidal": {"zeroSequence": 77}}]}`,
		`{"lowSide": {"onResistance": {"at": [{"temperature": "-5 degC", "max": "1R"}, {"temperature": "1e300 degC", "typ": "±"}]}}}`,
	} {
		f.Add(edit)
	}
	b := New()
	policy := stage.DefaultPolicy()
	parts := []*pb.Part{{Id: proto.String("x"), Component: &pb.Part_Driver{Driver: &pb.Driver{Refdes: proto.String("U1")}}}, nil, {}}
	f.Fuzz(func(t *testing.T, text string) {
		st := &pb.Stage{}
		if protojson.Unmarshal([]byte(text), st) != nil {
			return
		}
		_, readings, faults := b.Stage(parts, st, "stage")
		_, r2, f2 := b.Stage(parts, st, "stage")
		if !slices.Equal(readings, r2) || !slices.Equal(faults, f2) {
			t.Error("two bindings differ")
		}
		for _, f := range faults {
			if f.Field == "" || f.Description == "" {
				t.Errorf("empty fault %+v", f)
			}
		}
		if s, _, faults := b.Stage(parts[:1], st, "stage"); len(faults) == 0 {
			s.Complete(&policy)
		}
	})
}
