package main

import (
	"bytes"
	"context"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// runCommand runs one command line and returns exit status, standard output and standard error.
func runCommand(t *testing.T, ctx context.Context, stdin string, args ...string) (int, string, string) {
	t.Helper()
	var out bytes.Buffer
	errs := &lines{}
	stdout := &lines{}
	status := execute(&environment{ctx: ctx, stdin: strings.NewReader(stdin), stdout: stdout, stderr: errs}, args)
	out.WriteString(stdout.String())
	return status, out.String(), errs.String()
}

func TestCommands(t *testing.T) {
	for _, c := range []struct {
		args        string
		status      int
		out, errout string
	}{
		{"version", 0, "rule set", ""},
		{"rules", 0, "charge/lowest-voltage: ", ""},
		{"rules --format json", 0, `{"engine":{"version":"development"`, ""},
		{"fields", 0, "## Driver", ""},
		{"--help", 0, "Run \"floatrail <command> --help\"", ""},
		{"serve --help", 0, "FLOATRAIL_HTTP_ADDR", ""},
		{"review --help", 0, "Exit status", ""},
		{"serve --deadline 10 --queue x", 2, "", "--queue (FLOATRAIL_QUEUE): read \"x\""},
		{"--no-such-flag", 2, "", "no-such-flag"},
		{"review", 3, "", "expected \"<file>"},
		{"review --format xml -", 3, "", "--format"},
		{"review no-such-file.json", 3, "", "no-such-file.json: no such file or directory"},
		{"serve --http-addr 127.0.0.1:1 --grpc-addr 256.0.0.1:0 --ops-addr 127.0.0.1:0", 1, "", "--grpc-addr (FLOATRAIL_GRPC_ADDR): "},
	} {
		status, out, errs := runCommand(t, context.Background(), "", strings.Fields(c.args)...)
		if status != c.status || !strings.Contains(out, c.out) || !strings.Contains(errs, c.errout) {
			t.Errorf("%s: %d\n%s\n%s", c.args, status, out, errs)
		}
	}
}

func TestServeIsTheDefault(t *testing.T) {
	ctx, cancel := context.WithTimeout(context.Background(), 500*time.Millisecond)
	defer cancel()
	t.Setenv("FLOATRAIL_HTTP_ADDR", "127.0.0.1:0")
	t.Setenv("FLOATRAIL_GRPC_ADDR", "127.0.0.1:0")
	t.Setenv("FLOATRAIL_OPS_ADDR", "127.0.0.1:0")
	t.Setenv("FLOATRAIL_DRAIN_DELAY", "0s")
	status, out, errs := runCommand(t, ctx, "")
	if status != 0 || !strings.Contains(out, "http://127.0.0.1:") || !strings.Contains(errs, `"msg":"stopped"`) {
		t.Errorf("%d\n%s\n%s", status, out, errs)
	}
	t.Setenv("FLOATRAIL_HTTP_ADDR", "nowhere")
	if status, _, errs := runCommand(t, context.Background(), ""); status != 2 || !strings.Contains(errs, `--http-addr (FLOATRAIL_HTTP_ADDR): read "nowhere"`) {
		t.Errorf("%d\n%s", status, errs)
	}
}

// The review command and the service give the same bytes.
func TestReviewCommandAgreesWithTheService(t *testing.T) {
	r := start(t, settings(), realHandlers)
	_, want := r.post("/v1/reviews", small)
	file := filepath.Join(t.TempDir(), "small.json")
	if err := os.WriteFile(file, []byte(small), 0o600); err != nil {
		t.Fatal(err)
	}
	var bare map[string]json.RawMessage
	if err := json.Unmarshal([]byte(small), &bare); err != nil {
		t.Fatal(err)
	}
	for name, c := range map[string]struct{ stdin, file string }{"file": {"", file}, "standard input": {small, "-"}, "bare stage": {string(bare["stage"]), "-"},
		"board": {`{"stages":[` + string(bare["stage"]) + `]}`, "-"}} {
		status, out, errs := runCommand(t, context.Background(), c.stdin, "review", "--format", "json", c.file)
		if out != string(want)+"\n" || errs != "" {
			t.Errorf("%s: %d\n%s\n%s", name, status, out, errs)
		}
	}
}

// Faults are told with the paths that they have in the file.
func TestReviewCommandTellsFaults(t *testing.T) {
	const driver = `"driver":{"uvloRisng":{},"uvloFalling":{"typ":"8 C"},"floatingVoltageMax":18}`
	for name, c := range map[string]struct {
		stdin string
		want  []string
	}{
		"request":    {`{"stage":{` + driver + `}}`, []string{"stage.driver.uvloRisng", "stage.driver.uvloFalling.typ", "stage.driver.floatingVoltageMax"}},
		"bare stage": {`{` + driver + `}`, []string{"driver.uvloRisng", "driver.uvloFalling.typ", "driver.floatingVoltageMax"}},
		"board": {`{"stages":[{"id":"a"},{"id":"b",` + driver + `}],"options":{"fixes":true},"polcy":{}}`, []string{"stages[1].driver.uvloRisng", "stages[1].driver.uvloFalling.typ",
			"stages[1].driver.floatingVoltageMax", "options.fixes", "polcy"}},
		"malformed": {`{"stage":`, []string{"request"}},
	} {
		status, out, errs := runCommand(t, context.Background(), c.stdin, "review", "-")
		if status != 3 || out != "" {
			t.Errorf("%s: %d %s", name, status, out)
		}
		for _, field := range c.want {
			if strings.Count(errs, "-: "+field+": ") != 1 {
				t.Errorf("%s: %s is not told once:\n%s", name, field, errs)
			}
		}
		if n := strings.Count(errs, "\n"); n != len(c.want) {
			t.Errorf("%s: %d lines:\n%s", name, n, errs)
		}
	}
}
