package main

import (
	"context"
	"net/http"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
	"time"

	"google.golang.org/grpc/codes"
	"google.golang.org/grpc/status"

	pb "floatrail/api/floatrail/v1"
)

// Requests that were accepted before the stop are answered, on both transports, waiting ones included.
func TestStopLosesNoAcceptedRequest(t *testing.T) {
	g, handlers := newGated()
	c := settings()
	c.Workers, c.Queue, c.DrainDelay = 2, 32, 100*time.Millisecond
	r := start(t, c, handlers)
	request := parse(t, small, new(pb.SizeSupplyRequest))
	var wait sync.WaitGroup
	var answered atomic.Int32
	for range 4 {
		wait.Go(func() {
			if _, err := r.client.SizeSupply(context.Background(), request); err != nil {
				t.Error(err)
				return
			}
			answered.Add(1)
		})
		wait.Go(func() {
			answer, data, err := r.do(http.MethodPost, r.http+"/v1/sizing", "application/json", strings.NewReader(small))
			if err != nil || answer.StatusCode != http.StatusOK {
				t.Errorf("%v %s %v", answer, data, err)
				return
			}
			answered.Add(1)
		})
	}
	within(t, 5*time.Second, "all are accepted", func() bool { return r.metric("floatrail_requests_in_flight", `"SizeSupply"`) == 8 })
	r.cancel()
	within(t, 5*time.Second, "it is not ready", func() bool {
		code, data, err := r.get(r.ops + "/readyz")
		return err == nil && code == http.StatusServiceUnavailable && strings.Contains(string(data), "draining")
	})
	within(t, 5*time.Second, "the listener is closed", func() bool {
		_, _, err := r.get(r.http + "/v1/rules")
		return err != nil
	})
	if code, _, err := r.get(r.ops + "/livez"); err != nil || code != http.StatusOK {
		t.Error("not alive while draining", code, err)
	}
	close(g.release)
	wait.Wait()
	if answered.Load() != 8 {
		t.Errorf("%d of 8 answered", answered.Load())
	}
	if err := r.halt(); err != nil {
		t.Errorf("run: %v", err)
	}
}

// Under load, whatever was accepted is answered; the others find the door closed, never an answer cut off.
func TestStopUnderLoad(t *testing.T) {
	r := start(t, settings(), realHandlers)
	request := parse(t, small, new(pb.CheckDutyLimitsRequest))
	var wait sync.WaitGroup
	var grpcAnswers, restAnswers atomic.Int32
	for range 4 {
		wait.Go(func() {
			for {
				_, err := r.client.CheckDutyLimits(context.Background(), request)
				switch status.Code(err) {
				case codes.OK:
					grpcAnswers.Add(1)
				case codes.Unavailable:
					return // refused before it was accepted
				default:
					t.Error(err)
					return
				}
			}
		})
		wait.Go(func() {
			for {
				answer, data, err := r.do(http.MethodPost, r.http+"/v1/duty-limits", "application/json", strings.NewReader(small))
				switch {
				case err != nil:
					return // refused before it was accepted
				case answer.StatusCode != http.StatusOK:
					t.Errorf("%d %s", answer.StatusCode, data)
					return
				}
				restAnswers.Add(1)
			}
		})
	}
	within(t, 20*time.Second, "it is under load", func() bool { return grpcAnswers.Load() > 50 && restAnswers.Load() > 50 })
	if err := r.halt(); err != nil {
		t.Error(err)
	}
	wait.Wait()
	for transport, arrived := range map[string]int32{"grpc": grpcAnswers.Load(), "rest": restAnswers.Load()} {
		if given := strings.Count(r.log.String(), `"method":"CheckDutyLimits","transport":"`+transport+`","code":"OK"`); given != int(arrived) {
			t.Errorf("%s: %d calls were answered, %d answers arrived", transport, given, arrived)
		}
	}
}

// A call that does not end is given up at the end of the time for draining.
func TestStopIsBounded(t *testing.T) {
	g, handlers := newGated()
	defer close(g.release)
	c := settings()
	c.DrainTimeout = 200 * time.Millisecond
	r := start(t, c, handlers)
	request := parse(t, small, new(pb.SizeSupplyRequest))
	result := make(chan error, 1)
	go func() {
		_, err := r.client.SizeSupply(context.Background(), request)
		result <- err
	}()
	<-g.entered
	began := time.Now()
	if err := r.halt(); err == nil || !strings.Contains(err.Error(), "--drain-timeout") {
		t.Errorf("run: %v", err)
	}
	if took := time.Since(began); took > 5*time.Second {
		t.Errorf("stopping took %v", took)
	}
	if err := <-result; err == nil {
		t.Error("the call that was given up was answered")
	}
}
