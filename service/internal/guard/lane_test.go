package guard

import (
	"context"
	"errors"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"google.golang.org/protobuf/proto"

	pb "floatrail/api/floatrail/v1"
)

func TestLaneServesInOrderOfArrival(t *testing.T) {
	waiting := make(chan int, 100)
	l := NewLane(1, 5, func(w, _ int) { waiting <- w })
	ctx := context.Background()
	if err := l.Enter(ctx); err != nil {
		t.Fatal(err)
	}
	<-waiting
	var order []int
	var wait sync.WaitGroup
	for i := range 5 {
		wait.Go(func() {
			if err := l.Enter(ctx); err != nil {
				t.Error(err)
				return
			}
			order = append(order, i) // one runs at once
			l.Leave()
		})
		for w := range waiting {
			if w == i+1 {
				break
			}
		}
	}
	if err := l.Enter(ctx); !errors.Is(err, errFull) {
		t.Errorf("the sixth: %v", err)
	}
	l.Leave()
	wait.Wait()
	for i, who := range order {
		if who != i {
			t.Fatalf("served as %v", order)
		}
	}
	if l.running != 0 || len(l.queue) != 0 {
		t.Errorf("%d run, %d wait", l.running, len(l.queue))
	}
}

func TestLaneForgetsWhoLeavesTheQueue(t *testing.T) {
	l := NewLane(1, 2, func(int, int) {})
	if err := l.Enter(context.Background()); err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Millisecond)
	defer cancel()
	if err := l.Enter(ctx); !errors.Is(err, context.DeadlineExceeded) {
		t.Error(err)
	}
	if err := l.Enter(ctx); !errors.Is(err, context.DeadlineExceeded) {
		t.Error("an ended context entered", err)
	}
	if len(l.queue) != 0 {
		t.Error("it still waits")
	}
	l.Leave()
	if l.running != 0 {
		t.Errorf("%d run", l.running)
	}
}

func TestLaneOfACall(t *testing.T) {
	g := &Guard{Lanes: Lanes{ClosedForm: NewLane(1, 0, nil), Simulation: NewLane(1, 0, nil)}}
	on, off := &pb.Options{Simulate: proto.Bool(true)}, &pb.Options{Simulate: proto.Bool(false)}
	for _, c := range []struct {
		method string
		req    any
		want   *Lane
	}{
		{"ReviewStage", &pb.ReviewStageRequest{}, g.Lanes.ClosedForm},
		{"ReviewStage", &pb.ReviewStageRequest{Options: off}, g.Lanes.ClosedForm},
		{"ReviewStage", &pb.ReviewStageRequest{Options: on}, g.Lanes.Simulation},
		{"CheckTransientStress", &pb.CheckTransientStressRequest{Options: on}, g.Lanes.Simulation},
		{"SizeSupply", &pb.SizeSupplyRequest{}, g.Lanes.ClosedForm},
		{"ListDataGaps", &pb.ListDataGapsRequest{}, g.Lanes.ClosedForm},
		{"StudyAlternates", &pb.StudyAlternatesRequest{}, g.Lanes.Simulation},
		{"StudyTolerances", nil, g.Lanes.Simulation},
		{"ListRules", &pb.ListRulesRequest{}, nil},
		{"GetRule", &pb.GetRuleRequest{}, nil},
	} {
		if got := g.lane("/floatrail.v1.FloatRail/"+c.method, c.req); got != c.want {
			t.Errorf("%s %v: another lane", c.method, c.req)
		}
	}
}

// However calls come, wait, give up and leave: never more run than may, and in the end nobody runs or waits.
func TestLaneUnderContention(t *testing.T) {
	const width = 3
	l := NewLane(width, 8, func(int, int) {})
	var running, entered, full atomic.Int32
	var wait sync.WaitGroup
	for i := range 200 {
		wait.Go(func() {
			ctx, cancel := context.WithTimeout(context.Background(), time.Duration(i%7)*time.Millisecond)
			defer cancel()
			switch err := l.Enter(ctx); {
			case err == nil:
				if running.Add(1) > width {
					t.Error("too many run")
				}
				entered.Add(1)
				time.Sleep(time.Millisecond)
				running.Add(-1)
				l.Leave()
			case errors.Is(err, errFull):
				full.Add(1)
			}
		})
	}
	wait.Wait()
	if l.running != 0 || len(l.queue) != 0 || entered.Load() == 0 || full.Load() == 0 {
		t.Errorf("%d run, %d wait, %d entered, %d found it full", l.running, len(l.queue), entered.Load(), full.Load())
	}
}
