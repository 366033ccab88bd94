package main

import (
	"bufio"
	"errors"
	"io"
	"net/http"
	"os"
	"os/exec"
	"regexp"
	"strings"
	"sync"
	"sync/atomic"
	"syscall"
	"testing"
	"time"
)

// asCommand makes the test binary the command itself.
const asCommand = "FLOATRAIL_TEST_AS_COMMAND"

func TestMain(m *testing.M) {
	if os.Getenv(asCommand) != "" {
		main()
		return
	}
	os.Exit(m.Run())
}

// SIGTERM ends the process with 0, after every accepted request was answered.
func TestSIGTERM(t *testing.T) {
	command := exec.Command(os.Args[0])
	command.Env = append(os.Environ(), asCommand+"=1", "FLOATRAIL_HTTP_ADDR=127.0.0.1:0", "FLOATRAIL_GRPC_ADDR=127.0.0.1:0", "FLOATRAIL_OPS_ADDR=127.0.0.1:0",
		"FLOATRAIL_DRAIN_DELAY=100ms")
	log := &lines{}
	command.Stderr = log
	out, err := command.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := command.Start(); err != nil {
		t.Fatal(err)
	}
	defer func() { _ = command.Process.Kill() }()
	url := ""
	for scanner := bufio.NewScanner(out); url == "" && scanner.Scan(); {
		url = regexp.MustCompile(`http://127\.0\.0\.1:\d+`).FindString(scanner.Text())
	}
	go func() { _, _ = io.Copy(io.Discard, out) }()
	var wait sync.WaitGroup
	var arrived atomic.Int32
	for range 4 {
		wait.Go(func() {
			for {
				a, err := http.Post(url+"/v1/duty-limits", "application/json", strings.NewReader(small))
				if err != nil {
					return // refused before it was accepted
				}
				_, err = io.Copy(io.Discard, a.Body)
				_ = a.Body.Close()
				if err != nil || a.StatusCode != http.StatusOK {
					t.Error(a.StatusCode, err)
					return
				}
				arrived.Add(1)
			}
		})
	}
	within(t, 20*time.Second, "it is under load", func() bool { return arrived.Load() > 20 })
	if err := command.Process.Signal(syscall.SIGTERM); err != nil {
		t.Fatal(err)
	}
	wait.Wait()
	if err := command.Wait(); err != nil {
		t.Errorf("exit: %v\n%s", err, log)
	}
	if given := strings.Count(log.String(), `"method":"CheckDutyLimits","transport":"rest","code":"OK"`); given != int(arrived.Load()) {
		t.Errorf("%d calls were answered, %d answers arrived", given, arrived.Load())
	}
}

func TestReadiness(t *testing.T) {
	failing := errors.New("the numbers are wrong")
	r := &readiness{selfTest: func() error { return failing }}
	if r.state() == nil {
		t.Error("ready before the self-test")
	}
	if err := r.check(); !errors.Is(err, failing) || !errors.Is(r.state(), failing) {
		t.Error("ready although the self-test failed")
	}
	r.selfTest = func() error { return nil }
	if r.check() != nil || r.state() != nil {
		t.Error("not ready although the self-test passed")
	}
	r.drain()
	if r.state() == nil {
		t.Error("ready while draining")
	}
}
