package golden

import (
	"bytes"
	"context"
	"encoding/json"
	"flag"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"floatrail/service/internal/render"
	"floatrail/service/internal/rpc"
	"floatrail/service/internal/wire"
)

var update = flag.Bool("update", false, "write the golden answers anew")

const (
	root   = "../../../" // of the module
	stages = root + "testdata/stages/"
)

// names lists the stages that have a golden answer or must get one.
func names(t *testing.T) []string {
	t.Helper()
	files, err := filepath.Glob(stages + "*.json")
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for _, file := range files {
		if name := strings.TrimSuffix(filepath.Base(file), ".json"); !strings.HasSuffix(name, ".answer") {
			out = append(out, name)
		}
	}
	if len(out) == 0 {
		t.Fatal("no stages")
	}
	return out
}

// answer is what `floatrail review --format json` prints for a stage: one canonical line.
func answer(t *testing.T, name string) []byte {
	t.Helper()
	return answerTo(t, stages+name+".json")
}

// answerTo is the same for the stage of a file.
func answerTo(t *testing.T, file string) []byte {
	t.Helper()
	var out, faults bytes.Buffer
	status := render.Review(context.Background(), rpc.New(rpc.Options{Version: "development", Carried: wire.ReportOf}),
		render.Options{Files: []string{file}, JSON: true, Stdout: &out, Stderr: &faults})
	if status == render.ExitFault || status == render.ExitInternal || faults.Len() > 0 {
		t.Fatalf("%s: exit status %d: %s", file, status, faults.String())
	}
	return bytes.TrimSuffix(out.Bytes(), []byte("\n"))
}

func TestGoldenAnswers(t *testing.T) {
	for _, name := range names(t) {
		t.Run(name, func(t *testing.T) {
			live := answer(t, name)
			file := stages + name + ".answer.json"
			if *update {
				if err := os.WriteFile(file, pretty(t, live), 0o644); err != nil {
					t.Fatal(err)
				}
				return
			}
			golden, err := os.ReadFile(file)
			if err != nil {
				t.Fatal(err)
			}
			var compact bytes.Buffer
			if err := json.Compact(&compact, golden); err != nil {
				t.Fatal(err)
			}
			if bytes.Equal(compact.Bytes(), live) {
				return
			}
			t.Errorf("%s differs; where that is meant, read the difference and run\n\tgo test ./service/internal/golden -run Golden -update\n%s",
				file, difference(string(pretty(t, compact.Bytes())), string(pretty(t, live))))
		})
	}
}

// Answers stand the same however often they are asked for.
func TestAnswersDoNotVary(t *testing.T) {
	for _, name := range names(t) {
		if !bytes.Equal(answer(t, name), answer(t, name)) {
			t.Errorf("%s: two answers to the same request differ", name)
		}
	}
}

// widest is the length up to which a value stands on one line.
const widest = 140

// pretty breaks canonical JSON into lines that a reader can compare; json.Compact undoes it.
func pretty(t *testing.T, data []byte) []byte {
	t.Helper()
	if !json.Valid(data) {
		t.Fatal("not JSON")
	}
	var out bytes.Buffer
	lay(&out, data, "")
	out.WriteByte('\n')
	return out.Bytes()
}

// lay writes one compact value; short ones stay whole.
func lay(out *bytes.Buffer, value []byte, indent string) {
	if len(value) <= widest || (value[0] != '{' && value[0] != '[') {
		out.Write(value)
		return
	}
	deeper := indent + " "
	out.WriteByte(value[0])
	for i, member := range members(value) {
		if i > 0 {
			out.WriteByte(',')
		}
		out.WriteString("\n" + deeper)
		if value[0] == '{' {
			key := member[:len(text(member))+1] // with its colon
			out.Write(key)
			member = member[len(key):]
		}
		lay(out, member, deeper)
	}
	out.WriteString("\n" + indent + string(value[len(value)-1]))
}

// text is the JSON string that a member begins with.
func text(member []byte) []byte {
	for i := 1; i < len(member); i++ {
		switch member[i] {
		case '\\':
			i++
		case '"':
			return member[:i+1]
		}
	}
	return member
}

// members splits a compact object or array at the commas of its own level.
func members(value []byte) [][]byte {
	var out [][]byte
	depth, from := 0, 1
	for i := 0; i < len(value); i++ {
		switch value[i] {
		case '"':
			i += len(text(value[i:])) - 1
		case '{', '[':
			depth++
		case '}', ']':
			if depth--; depth == 0 && i > from {
				out = append(out, value[from:i])
			}
		case ',':
			if depth == 1 {
				out = append(out, value[from:i])
				from = i + 1
			}
		}
	}
	return out
}

// difference shows the first lines in which two texts differ.
func difference(golden, live string) string {
	const most = 6
	var out strings.Builder
	was, is := strings.Split(golden, "\n"), strings.Split(live, "\n")
	shown := 0
	for i := range max(len(was), len(is)) {
		var a, b string
		if i < len(was) {
			a = was[i]
		}
		if i < len(is) {
			b = is[i]
		}
		if a == b {
			continue
		}
		out.WriteString("- " + strings.TrimSpace(a) + "\n+ " + strings.TrimSpace(b) + "\n")
		if shown++; shown == most {
			out.WriteString("and so on\n")
			break
		}
	}
	return out.String()
}

func TestPretty(t *testing.T) {
	long := strings.Repeat("x", widest)
	for _, value := range []string{`1`, `{}`, `[]`, `{"a":1,"b":[1,2]}`, `["` + long + `",{},[]]`,
		`{"a\"b":"` + long + `","c,d":{"e":["}","]","\\"],"f":"` + long + `"},"g":null}`} {
		var back bytes.Buffer
		if err := json.Compact(&back, pretty(t, []byte(value))); err != nil || back.String() != value {
			t.Errorf("%s became %s (%v)", value, back.String(), err)
		}
	}
	lines := strings.Split(string(pretty(t, []byte(`{"a":"`+long+`","b":1}`))), "\n")
	if want := []string{"{", ` "a":"` + long + `",`, ` "b":1`, "}", ""}; !slices.Equal(lines, want) {
		t.Errorf("lines are %q", lines)
	}
}
