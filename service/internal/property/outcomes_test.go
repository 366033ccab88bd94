package property

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"text/tabwriter"

	"floatrail/calc/catalog"
	"floatrail/calc/finding"
)

var update = flag.Bool("update", false, "write the table of outcomes anew")

// TestOutcomesOfTheCorpus counts the outcomes of every rule over all stages of the corpus, as they are and strained. Any shift of a rule is a
// difference of the table, to be read before it is renewed with -update.
func TestOutcomesOfTheCorpus(t *testing.T) {
	files, err := filepath.Glob(stages + "*.json")
	if err != nil {
		t.Fatal(err)
	}
	sound, err := filepath.Glob(filepath.Join(stages, "..", "sound", "*.json"))
	if err != nil || len(sound) == 0 {
		t.Fatal("no sound stages", err)
	}
	counts := map[string]map[finding.Outcome]int{}
	count := func(tree any) {
		for f, v := range judge(t, bind(t, tree), catalog.All()).binding {
			if counts[f.rule] == nil {
				counts[f.rule] = map[finding.Outcome]int{}
			}
			counts[f.rule][v.outcome]++
		}
	}
	number := 0
	for _, file := range files {
		if name := strings.TrimSuffix(filepath.Base(file), ".json"); !strings.Contains(name, ".") {
			count(document(t, name))
			number++
		}
	}
	for _, file := range sound {
		raw, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		count(decode(t, raw))
		number++
	}
	count(strained(t))
	var text strings.Builder
	fmt.Fprintf(&text, "Findings by rule and outcome over %d stages, those of this folder and of sound, and buck48 strained by the property tests.\n\n", number)
	w := tabwriter.NewWriter(&text, 0, 0, 2, ' ', tabwriter.AlignRight)
	columns := []finding.Outcome{finding.Pass, finding.Marginal, finding.Fail, finding.Open, finding.NotApplicable}
	fmt.Fprint(w, "\t")
	for _, o := range columns {
		fmt.Fprintf(w, "%s\t", o)
	}
	fmt.Fprintln(w)
	for _, rl := range catalog.All() {
		fmt.Fprintf(w, "%s\t", rl.ID)
		for _, o := range columns {
			fmt.Fprintf(w, "%d\t", counts[rl.ID][o])
		}
		fmt.Fprintln(w)
	}
	if err := w.Flush(); err != nil {
		t.Fatal(err)
	}
	const table = stages + "outcomes.txt"
	if *update {
		if err := os.WriteFile(table, []byte(text.String()), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(table)
	if err != nil {
		t.Fatal(err)
	}
	if !slices.Equal(want, []byte(text.String())) {
		t.Errorf("the outcomes have shifted; read the difference and renew the table with -update:\n%s\nwas:\n%s", text.String(), want)
	}
}
