package golden

import (
	"bufio"
	"bytes"
	"encoding/json"
	"io"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"reflect"
	"regexp"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"

	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
)

// build makes the program once for a test.
func build(t *testing.T) string {
	t.Helper()
	program := filepath.Join(t.TempDir(), "floatrail")
	c := exec.Command("go", "build", "-o", program, "./service")
	c.Dir = root
	if out, err := c.CombinedOutput(); err != nil {
		t.Fatalf("go build: %v\n%s", err, out)
	}
	return program
}

// serve starts the program on free ports of loopback and returns a function that puts them in the place of the default addresses.
func serve(t *testing.T, program string) func(string) string {
	t.Helper()
	c := exec.Command(program, "serve", "--http-addr=127.0.0.1:0", "--grpc-addr=127.0.0.1:0", "--ops-addr=127.0.0.1:0", "--drain-delay=0s", "--log-level=error")
	out, err := c.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if err := c.Process.Signal(syscall.SIGTERM); err != nil {
			t.Error(err)
		}
		if err := c.Wait(); err != nil {
			t.Errorf("the service did not stop cleanly: %v", err)
		}
	})
	var found []string
	address := regexp.MustCompile(`127\.0\.0\.1:\d+`)
	for lines := bufio.NewScanner(out); len(found) < 3 && lines.Scan(); {
		found = append(found, address.FindAllString(lines.Text(), -1)...)
	}
	if len(found) != 3 {
		t.Fatalf("the service told the addresses %q", found)
	}
	place := strings.NewReplacer("127.0.0.1:8080", found[0], "127.0.0.1:50051", found[1], "127.0.0.1:9464", found[2]).Replace
	for end := time.Now().Add(20 * time.Second); ; time.Sleep(5 * time.Millisecond) {
		if status, _ := ask(t, http.MethodGet, place("http://127.0.0.1:9464/readyz"), nil, nil); status == http.StatusOK {
			return place
		}
		if time.Now().After(end) {
			t.Fatal("the service does not get ready")
		}
	}
}

func ask(t *testing.T, method, url string, header http.Header, body []byte) (int, []byte) {
	t.Helper()
	request, err := http.NewRequest(method, url, bytes.NewReader(body))
	if err != nil {
		t.Fatal(err)
	}
	for name, values := range header {
		request.Header[name] = values
	}
	response, err := http.DefaultClient.Do(request)
	if err != nil {
		t.Fatal(err)
	}
	defer func() { _ = response.Body.Close() }()
	data, err := io.ReadAll(response.Body)
	if err != nil {
		t.Fatal(err)
	}
	return response.StatusCode, data
}

// words splits a command line at blanks outside single quotes.
func words(line string) []string {
	var out []string
	for i, part := range strings.Split(line, "'") {
		if i%2 == 1 {
			out = append(out, part)
		} else {
			out = append(out, strings.Fields(part)...)
		}
	}
	return out
}

// curl does what the command line says.
func curl(t *testing.T, line string) (status int, url string, answer []byte) {
	t.Helper()
	method, header := http.MethodGet, http.Header{}
	var body []byte
	args := words(line)[1:]
	for i := 0; i < len(args); i++ {
		next := func() string {
			if i++; i == len(args) {
				t.Fatalf("%s: nothing after %s", line, args[i-1])
			}
			return args[i]
		}
		switch args[i] {
		case "-X":
			method = next()
		case "-H":
			name, value, _ := strings.Cut(next(), ": ")
			header.Set(name, value)
		case "--data-binary":
			file, ok := strings.CutPrefix(next(), "@")
			if !ok {
				t.Fatalf("%s: no file", line)
			}
			var err error
			if body, err = os.ReadFile(root + file); err != nil {
				t.Fatal(err)
			}
		default:
			if url != "" || !strings.HasPrefix(args[i], "http://127.0.0.1:") {
				t.Fatalf("%s: what is %s?", line, args[i])
			}
			url = args[i]
		}
	}
	status, answer = ask(t, method, url, header, body)
	return status, url, answer
}

// Every example of the README works as it is printed.
func TestReadme(t *testing.T) {
	text, blocks := document(t, "README.md")
	program := build(t)
	t.Run("quick start", func(t *testing.T) {
		first := slices.IndexFunc(blocks, func(b block) bool { return b.language == "sh" })
		want := []string{"go run ./service review testdata/stages/buck48.json testdata/stages/gan650.json testdata/stages/drive400.json", "go test ./..."}
		if first < 0 || !slices.Equal(blocks[first].lines, want) {
			t.Errorf("the quick start is not\n%s", strings.Join(want, "\n"))
		}
	})
	t.Run("commands", func(t *testing.T) { readmeCommands(t, blocks, program) })
	place := serve(t, program)
	t.Run("curl", func(t *testing.T) { readmeCurl(t, blocks, place) })
	t.Run("metrics", func(t *testing.T) { readmeMetrics(t, text, place) })
	t.Run("client", func(t *testing.T) { readmeClient(t, blocks, place) })
	t.Run("json", func(t *testing.T) { readmeJSON(t, blocks) })
}

// readmeCommands runs what the README runs of the program, except the server.
func readmeCommands(t *testing.T, blocks []block, program string) {
	served, statuses := 0, map[string]int{
		"review testdata/stages/buck48.json testdata/stages/gan650.json testdata/stages/drive400.json": 1,
		"review testdata/stages/buck48.json --all":                                                     0,
		"review testdata/stages/buck48.json --families=duty,gate --per-point":                          0,
		"review testdata/stages/buck48.json --format=json":                                             0,
		"review testdata/stages/drive400.json --simulate":                                              1,
		"review testdata/stages/spindle325.json":                                                       1,
		"rules":                                                                                        0,
		"fields":                                                                                       0,
	}
	for _, line := range commands(blocks, "go run ./service") {
		line = strings.TrimPrefix(strings.TrimPrefix(line, "go run ./service"), " ")
		if line == "" {
			served++
			continue
		}
		want, known := statuses[line]
		if !known {
			t.Errorf("no exit status is expected of %q", line)
			continue
		}
		delete(statuses, line)
		c := exec.Command(program, words(line)...)
		c.Dir = root
		var out, faults bytes.Buffer
		c.Stdout, c.Stderr = &out, &faults
		err := c.Run()
		if c.ProcessState == nil {
			t.Fatal(err)
		}
		if got := c.ProcessState.ExitCode(); got != want || out.Len() == 0 || faults.Len() > 0 {
			t.Errorf("%s: exit status %d, want %d; %d bytes; %s", line, got, want, out.Len(), faults.String())
		}
	}
	if served != 1 || len(statuses) > 0 {
		t.Errorf("the server is started %d times; not printed: %v", served, statuses)
	}
}

func readmeCurl(t *testing.T, blocks []block, place func(string) string) {
	lines := commands(blocks, "curl")
	if len(lines) < 5 {
		t.Fatalf("%d curl commands", len(lines))
	}
	for _, line := range lines {
		status, url, data := curl(t, place(line))
		if status != http.StatusOK || len(data) == 0 {
			t.Errorf("%s: status %d, %.200s", line, status, data)
		}
		answers := bytes.Split(bytes.TrimSuffix(data, []byte("\n")), []byte("\n")) // of a stream one a line
		for _, a := range answers {
			if strings.Contains(url, "/v1/") && !json.Valid(a) {
				t.Errorf("%s: not JSON", line)
			}
		}
		if last := answers[len(answers)-1]; strings.HasSuffix(url, "-studies") && (len(answers) < 3 || !bytes.Contains(last, []byte(`{"result":{`)) ||
			!bytes.Contains(last, []byte(`"overall":{"share":`))) {
			t.Errorf("%s: %d lines, the last one %.200s", line, len(answers), last)
		}
	}
}

// readmeMetrics compares the table of metrics with what the service exposes, labels included.
func readmeMetrics(t *testing.T, text string, place func(string) string) {
	// A missing input, so that it is counted.
	if status, data := ask(t, http.MethodPost, place("http://127.0.0.1:8080/v1/reviews"), http.Header{"Content-Type": {"application/json"}},
		[]byte(`{"stage":{"id":"bare","bootstrap":{"element":"DISCRETE_DIODE"},"operatingPoints":[{"name":"p","heldOn":{}}]}}`)); status != http.StatusOK {
		t.Fatalf("status %d: %s", status, data)
	}
	_, data := ask(t, http.MethodGet, place("http://127.0.0.1:9464/metrics"), nil, nil)
	exposed := map[string][]string{}
	sample := regexp.MustCompile(`^(floatrail_\w+?)(?:_bucket|_sum|_count)?(?:\{(.*)\})? `)
	label := regexp.MustCompile(`(\w+)="`)
	for _, line := range strings.Split(string(data), "\n") {
		if m := sample.FindStringSubmatch(line); m != nil {
			var labels []string
			for _, l := range label.FindAllStringSubmatch(m[2], -1) {
				if l[1] != "le" {
					labels = append(labels, l[1])
				}
			}
			slices.Sort(labels)
			exposed[m[1]] = labels
		}
	}
	printed := map[string][]string{}
	for _, m := range regexp.MustCompile("(?m)^\\| `(floatrail_\\w+)` \\| (.*)\\|$").FindAllStringSubmatch(text, -1) {
		var labels []string
		for _, l := range strings.Split(strings.TrimSpace(m[2]), ", ") {
			if l != "" {
				labels = append(labels, l)
			}
		}
		slices.Sort(labels)
		printed[m[1]] = labels
	}
	if !reflect.DeepEqual(exposed, printed) {
		t.Errorf("exposed %v\nprinted %v", exposed, printed)
	}
}

// readmeClient builds the README's client against the module and runs it.
func readmeClient(t *testing.T, blocks []block, place func(string) string) {
	i := slices.IndexFunc(blocks, func(b block) bool { return b.language == "go" })
	if i < 0 {
		t.Fatal("no Go block")
	}
	source := filepath.Join(t.TempDir(), "client.go")
	if err := os.WriteFile(source, []byte(place(strings.Join(blocks[i].lines, "\n")+"\n")), 0o644); err != nil {
		t.Fatal(err)
	}
	c := exec.Command("go", "run", source)
	c.Dir = root
	out, err := c.CombinedOutput()
	if err != nil || !strings.HasPrefix(string(out), "buck48-phase-a ") || !strings.Contains(string(out), "capacitor") && !strings.Contains(string(out), "V_BS") {
		t.Errorf("%v: %.500s", err, out)
	}
}

// readmeJSON holds the finding that the README prints against the answer, waiver and options against the contract.
func readmeJSON(t *testing.T, blocks []block) {
	var live any
	if err := json.Unmarshal(answer(t, "buck48"), &live); err != nil {
		t.Fatal(err)
	}
	findings, waivers, options, studies, modes := 0, 0, 0, 0, 0
	for _, b := range blocks {
		if b.language != "json" {
			continue
		}
		data := []byte(strings.Join(b.lines, "\n"))
		var excerpt map[string]any
		if err := json.Unmarshal(data, &excerpt); err != nil {
			t.Fatalf("%v: %s", err, data)
		}
		if excerpt["waivers"] != nil {
			waivers++
			if err := protojson.Unmarshal(data, new(pb.ReviewStageRequest)); err != nil {
				t.Error(err)
			}
			continue
		}
		if excerpt["draws"] != nil {
			studies++
			if err := protojson.Unmarshal(data, new(pb.StudyTolerancesRequest)); err != nil {
				t.Error(err)
			}
			continue
		}
		if excerpt["options"] != nil {
			options++
			var request pb.ReviewStageRequest
			if err := protojson.Unmarshal(data, &request); err != nil || !request.GetOptions().GetSimulate() || !request.GetOptions().GetWaveforms() {
				t.Error(err, &request)
			}
			continue
		}
		if points, ok := excerpt["operatingPoints"].([]any); ok {
			modes++
			readmePoints(t, points)
			continue
		}
		findings++
		all, _ := lookUp(live, "findings").([]any)
		if !slices.ContainsFunc(all, func(f any) bool { return within(excerpt, f) }) {
			t.Errorf("no finding of buck48 reads\n%s", data)
		}
	}
	if findings != 1 || waivers != 1 || options != 1 || studies != 1 || modes != 1 {
		t.Errorf("%d findings, %d waivers, %d options, %d studies and %d lists of operating points, want one of each", findings, waivers, options, studies, modes)
	}
}

// readmePoints reviews buck48 at operating points of the README: V_BS is decided at each.
func readmePoints(t *testing.T, points []any) {
	t.Helper()
	var request map[string]any
	decodeFile(t, stages+"buck48.json", &request)
	request["stage"].(map[string]any)["operatingPoints"] = points
	data, err := json.Marshal(request)
	if err != nil {
		t.Fatal(err)
	}
	file := filepath.Join(t.TempDir(), "points.json")
	if err := os.WriteFile(file, data, 0o644); err != nil {
		t.Fatal(err)
	}
	var live any
	if err := json.Unmarshal(answerTo(t, file), &live); err != nil {
		t.Fatal(err)
	}
	decided := 0
	for _, f := range lookUp(live, "findings").([]any) {
		if lookUp(f, "rule") == "charge/lowest-voltage" && lookUp(f, "value") != nil {
			decided++
		}
	}
	if decided != len(points) {
		t.Errorf("V_BS is decided at %d of %d operating points of the README", decided, len(points))
	}
}

// within tells whether every member of a tree stands in another with the same value.
func within(part, whole any) bool {
	p, ok := part.(map[string]any)
	if !ok {
		return reflect.DeepEqual(part, whole)
	}
	w, ok := whole.(map[string]any)
	if !ok {
		return false
	}
	for k, v := range p {
		if !within(v, w[k]) {
			return false
		}
	}
	return true
}
