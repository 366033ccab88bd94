package wire

import (
	"context"
	"testing"

	"github.com/google/go-cmp/cmp"
	"google.golang.org/grpc/metadata"
)

func TestRebase(t *testing.T) {
	r := Report{Faults: []Fault{{"stages[0].id", "a"}, {"stages[1].id", "b"}, {"stages[10].id", "c"}, {"policy.name", "d"}, {Body, "e"}},
		Opaque: []string{"stages[1].driver", "parts[0]"}, Partial: []string{"stages[0]", "stages[1]"}, More: 3}
	want := &Report{Faults: []Fault{{"stage.id", "b"}, {"policy.name", "d"}, {Body, "e"}}, Opaque: []string{"stage.driver", "parts[0]"},
		Partial: []string{"stage"}, More: 3}
	if diff := cmp.Diff(want, r.Rebase("stages[1]", "stage", "stages")); diff != "" {
		t.Error(diff)
	}
	whole := Report{Faults: []Fault{{"id", "a"}, {Body, "b"}}, Opaque: []string{"driver"}}
	want = &Report{Faults: []Fault{{"stage.id", "a"}, {Body, "b"}}, Opaque: []string{"stage.driver"}}
	if diff := cmp.Diff(want, whole.Rebase("", "stage", "")); diff != "" {
		t.Error(diff)
	}
}

func TestCarry(t *testing.T) {
	r := &Report{Faults: []Fault{{"stage.ü", "µ \" \x01"}}, More: 1, Unread: true, Opaque: []string{"a"}, Partial: []string{"b"}}
	out, _ := metadata.FromOutgoingContext(Carry(context.Background(), r))
	if diff := cmp.Diff(r, Carried(metadata.NewIncomingContext(context.Background(), out))); diff != "" {
		t.Error(diff)
	}
	for _, none := range []*Report{nil, {}} {
		if _, ok := metadata.FromOutgoingContext(Carry(context.Background(), none)); ok {
			t.Error("nothing was carried")
		}
	}
	if Carried(context.Background()) != nil || Carried(metadata.NewIncomingContext(context.Background(), metadata.Pairs(carrier, "{"))) != nil {
		t.Error("a report from nothing")
	}
}
