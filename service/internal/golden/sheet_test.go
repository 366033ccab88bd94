package golden

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// sheet is a hand calculation that was read and evaluated.
type sheet struct {
	results map[string]float64 // by name, as printed
	texts   map[string]string  // the same as text
	rows    []row
}

// row is one line of the table at a sheet's end.
type row struct {
	key, place, hand, tolerance, why string
}

// mostTolerance is the largest distance that a hand calculation may keep from the program [1].
const mostTolerance = 0.03

// trial is how far a value found by trial may lie from what it gives [1].
const trial = 0.005

// readSheet reads a sheet and checks its arithmetic line by line.
func readSheet(t *testing.T, name string) sheet {
	t.Helper()
	file := stages + name + ".sheet.md"
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	s := sheet{results: map[string]float64{}, texts: map[string]string{}}
	var request any
	decodeFile(t, stages+name+".json", &request)
	calculated, given := 0, 0
	inside := false
	for number, line := range strings.Split(string(data), "\n") {
		at := fmt.Sprintf("%s:%d", file, number+1)
		switch {
		case strings.HasPrefix(line, "```"):
			inside = line == "```text"
		case inside && line != "":
			if strings.Contains(line, " <- ") {
				given++
			} else if strings.Count(line, " = ") == 2 {
				calculated++
			}
			if err := s.line(line, request); err != nil {
				t.Errorf("%s: %v", at, err)
			}
		case strings.HasPrefix(line, "| `"):
			cells := strings.Split(strings.Trim(line, "| "), " | ")
			if len(cells) != 5 {
				t.Fatalf("%s: %d cells, want 5", at, len(cells))
			}
			s.rows = append(s.rows, row{strings.Trim(cells[0], "`"), cells[1], cells[2], cells[3], cells[4]})
		}
	}
	for name, try := range s.results {
		if final, ok := strings.CutSuffix(name, "_try"); ok {
			if v, known := s.results[final]; !known || math.Abs(try/v-1) > trial {
				t.Errorf("%s: %s = %s is not what it leads to, %s = %s", file, name, s.texts[name], final, s.texts[final])
			}
		}
	}
	if calculated < 10 || given < 10 || len(s.rows) < 10 {
		t.Errorf("%s: %d calculated lines, %d given values, %d rows: not a sheet", file, calculated, given, len(s.rows))
	}
	return s
}

// line takes one line of arithmetic: `name = value`, `name = value <- field` or `name = expression = result`.
func (s *sheet) line(line string, request any) error {
	body, field, fromFile := strings.Cut(line, " <- ")
	parts := strings.Split(body, " = ")
	name, result := parts[0], parts[len(parts)-1]
	if len(parts) < 2 || len(parts) > 3 || !regexp.MustCompile(`^[A-Za-z]\w*$`).MatchString(name) {
		return fmt.Errorf("%q is not `name = expression = result`", line)
	}
	if _, twice := s.results[name]; twice {
		return fmt.Errorf("%s is calculated twice", name)
	}
	value, half, err := printed(result)
	if err != nil {
		return err
	}
	s.results[name], s.texts[name] = value, result
	if len(parts) == 3 {
		exact, err := evaluate(parts[1], s.results)
		if err != nil {
			return err
		}
		if math.Abs(exact-value) > half*(1+1e-6) {
			return fmt.Errorf("%s is %.7g, printed as %s", parts[1], exact, result)
		}
	}
	if fromFile {
		path := field
		if !strings.HasPrefix(field, "parts[") {
			path = "stage." + field
		}
		text, ok := lookUp(request, path).(string)
		if !ok {
			return fmt.Errorf("the stage has no %s", field)
		}
		text, _, _ = strings.Cut(text, " ±")
		in, err := evaluate(text, nil)
		if err != nil {
			return err
		}
		if math.Abs(in/value-1) > 1e-12 {
			return fmt.Errorf("%s stands in the stage as %s", field, text)
		}
	}
	return nil
}

func TestSheets(t *testing.T) {
	for _, name := range names(t) {
		t.Run(name, func(t *testing.T) {
			s := readSheet(t, name)
			var live any
			if err := json.Unmarshal(answer(t, name), &live); err != nil {
				t.Fatal(err)
			}
			for _, r := range s.rows {
				if err := s.compare(r, live); err != nil {
					t.Errorf("%s at %s: %v", r.key, r.place, err)
				}
			}
		})
	}
}

// compare holds one row against the answer.
func (s *sheet) compare(r row, live any) error {
	name, text, _ := strings.Cut(r.hand, " = ")
	if s.texts[name] != text {
		return fmt.Errorf("the table says %s, the sheet %s = %s", r.hand, name, s.texts[name])
	}
	percent, err := strconv.ParseFloat(strings.TrimSuffix(r.tolerance, " %"), 64)
	tolerance := percent / 100
	if err != nil || !(tolerance > 0 && tolerance <= mostTolerance) || r.why == "" {
		return fmt.Errorf("tolerance %q (%s)", r.tolerance, r.why)
	}
	value, err := find(r, live)
	if err != nil {
		return err
	}
	if hand := s.results[name]; math.Abs(hand/value-1) > tolerance {
		return fmt.Errorf("by hand %.6g, by the program %.6g: %+.3g %% apart, %s allowed", hand, value, 100*(hand/value-1), r.tolerance)
	}
	return nil
}

// find reads the number of a row: `rule`, `rule of subject`, either with ` limit`, ` guard`, ` typical` or ` margin`; or the path of a result.
// A place is `operating point; corner`, or the operating point alone where a finding has no corner; `any; corner` where the rule reads nothing
// of an operating point but its temperatures.
func find(r row, live any) (float64, error) {
	if !strings.Contains(r.key, "/") {
		v, ok := lookUp(live, r.key+".value").(float64)
		if !ok {
			return 0, fmt.Errorf("the answer has no %s", r.key)
		}
		return v, nil
	}
	key, attribute := r.key, "value"
	for _, a := range []string{"limit", "guard", "typical", "margin"} {
		if rest, ok := strings.CutSuffix(key, " "+a); ok {
			key, attribute = rest, a
		}
	}
	rule, subject, _ := strings.Cut(key, " of ")
	findings, _ := lookUp(live, "findings").([]any)
	fault := errors.New("the answer has no such finding")
	for _, f := range findings { // one for each kind of mode
		subjects, _ := lookUp(f, "subjects").([]any)
		if lookUp(f, "rule") != rule || subject != "" && (len(subjects) != 1 || subjects[0] != subject) {
			continue
		}
		place, _ := lookUp(f, "operatingPoint").(string)
		if corner, ok := lookUp(f, "corner.name").(string); ok {
			place += "; " + corner
		}
		_, corner, _ := strings.Cut(place, "; ")
		if place != r.place && "any; "+corner != r.place {
			fault = fmt.Errorf("binds at %s", place)
			continue
		}
		if attribute == "margin" {
			attribute = "margin.absolute"
		}
		v, ok := lookUp(f, attribute+".value").(float64)
		if !ok {
			return 0, fmt.Errorf("the finding has no %s", attribute)
		}
		return v, nil
	}
	return 0, fault
}

// lookUp follows a path of members, and of elements by number or by their operatingPoint or name, through a JSON tree.
func lookUp(tree any, path string) any {
	for _, step := range strings.FieldsFunc(path, func(r rune) bool { return r == '.' || r == '[' || r == ']' }) {
		switch node := tree.(type) {
		case map[string]any:
			tree = node[step]
		case []any:
			tree = nil
			for i, e := range node {
				if strconv.Itoa(i) == step || lookUp(e, "operatingPoint") == step || lookUp(e, "name") == step {
					tree = e
					break
				}
			}
		default:
			return nil
		}
	}
	return tree
}

func decodeFile(t *testing.T, file string, into any) {
	t.Helper()
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, into); err != nil {
		t.Fatalf("%s: %v", file, err)
	}
}

// A sheet whose numbers are wrong does not pass.
func TestSheetFaults(t *testing.T) {
	request := map[string]any{"stage": map[string]any{"v": map[string]any{"typ": "12 V ±5 %"}}}
	for line, good := range map[string]bool{
		"a = 2 V": true, "a = 1 + 1 = 2": true, "a = 10 / 3 = 3.33": true, "a = 10 / 3 = 3.34": false, "a = 12 V <- v.typ": true,
		"a = 13 V <- v.typ": false, "a = 12 V <- v.max": false, "a = b = 2": false, "a == 2": false, "a = 1 = 1 = 1": false,
	} {
		s := sheet{results: map[string]float64{}, texts: map[string]string{}}
		if err := s.line(line, request); (err == nil) != good {
			t.Errorf("%s: %v", line, err)
		}
	}
	live := map[string]any{"findings": []any{map[string]any{"rule": "a/b", "operatingPoint": "p", "corner": map[string]any{"name": "hot"},
		"subjects": []any{"U1"}, "value": map[string]any{"value": 2.0}, "margin": map[string]any{"absolute": map[string]any{"value": -1.0}}}},
		"sizing": map[string]any{"points": []any{map[string]any{"operatingPoint": "p", "low": map[string]any{"value": 3.0}}}}}
	s := sheet{results: map[string]float64{"x": 2, "y": -1, "z": 3}, texts: map[string]string{"x": "2 V", "y": "-1 V", "z": "3 V"}}
	for _, c := range []struct {
		row  row
		good bool
	}{
		{row{"a/b", "p; hot", "x = 2 V", "0.1 %", "exact"}, true}, {row{"a/b of U1", "p; hot", "x = 2 V", "0.1 %", "exact"}, true},
		{row{"a/b margin", "p; hot", "y = -1 V", "0.1 %", "exact"}, true}, {row{"a/b", "any; hot", "x = 2 V", "0.1 %", "exact"}, true},
		{row{"a/b", "any; cold", "x = 2 V", "0.1 %", "exact"}, false}, {row{"sizing.points[p].low", "p", "z = 3 V", "0.1 %", "exact"}, true},
		{row{"a/b of U2", "p; hot", "x = 2 V", "0.1 %", "exact"}, false}, {row{"a/b", "p; cold", "x = 2 V", "0.1 %", "exact"}, false},
		{row{"a/b", "p; hot", "x = 2.1 V", "0.1 %", "exact"}, false}, {row{"a/b", "p; hot", "z = 3 V", "0.1 %", "exact"}, false},
		{row{"a/b", "p; hot", "x = 2 V", "5 %", "wide"}, false}, {row{"a/b", "p; hot", "x = 2 V", "0.1 %", ""}, false},
		{row{"a/b limit", "p; hot", "x = 2 V", "0.1 %", "exact"}, false}, {row{"sizing.none", "p", "z = 3 V", "0.1 %", "exact"}, false},
	} {
		if err := s.compare(c.row, live); (err == nil) != c.good {
			t.Errorf("%v: %v", c.row, err)
		}
	}
}
