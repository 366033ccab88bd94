package catalog_test

import (
	"os"
	"slices"
	"strings"
	"testing"

	"floatrail/calc/catalog"
	"floatrail/calc/rule"
)

// TestCatalogue holds ids, documentation, sources and severities.
func TestCatalogue(t *testing.T) {
	for _, err := range rule.Validate(catalog.All()) {
		t.Error(err)
	}
}

// fileOf is the file in which a rule of an id stands.
func fileOf(id string) string { return strings.NewReplacer("/", "_", "-", "_").Replace(id) + ".go" }

// TestOneFileARule finds every rule in the file of its name, and no other rule there.
func TestOneFileARule(t *testing.T) {
	expected := map[string]bool{"catalog.go": true, "common.go": true, "events.go": true}
	for _, r := range catalog.All() {
		name := fileOf(r.ID)
		expected[name] = true
		text, err := os.ReadFile(name)
		if err != nil {
			t.Error(err)
			continue
		}
		if n := strings.Count(string(text), "&rule.Rule{"); n != 1 {
			t.Errorf("%s has %d rules", name, n)
		}
		if !strings.Contains(string(text), `ID: "`+r.ID+`"`) {
			t.Errorf("%s does not hold %s", name, r.ID)
		}
	}
	files, err := os.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range files {
		if name := f.Name(); strings.HasSuffix(name, ".go") && !strings.HasSuffix(name, "_test.go") && !expected[name] {
			t.Errorf("%s holds no rule of the list", name)
		}
	}
}

// TestFind finds rules by id, and families in the order of the list, each once.
func TestFind(t *testing.T) {
	for _, r := range catalog.All() {
		if got, ok := catalog.Find(r.ID); !ok || got.ID != r.ID {
			t.Errorf("%s is not found", r.ID)
		}
	}
	if _, ok := catalog.Find("charge/no-such-rule"); ok {
		t.Error("a rule that does not exist is found")
	}
	want := []string{"charge", "capacitor", "diode", "resistor", "supply", "duty", "gate", "node", "thermal", "data"}
	if got := catalog.Families(); !slices.Equal(got, want) {
		t.Errorf("families %q, want %q", got, want)
	}
}

// TestSearchesCoverEveryRule has at least one search for every rule in every role.
func TestSearchesCoverEveryRule(t *testing.T) {
	for _, r := range catalog.All() {
		if n := len(r.Searches("")); n < 1 || len(r.Alternatives) > 0 && n != len(r.Alternatives) {
			t.Errorf("%s: %d searches", r.ID, n)
		}
	}
}
