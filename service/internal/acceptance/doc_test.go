package acceptance

import (
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// The table in the package comment names tests that exist.
func TestTableNamesTests(t *testing.T) {
	doc, err := os.ReadFile("doc.go")
	if err != nil {
		t.Fatal(err)
	}
	names := regexp.MustCompile(`(?:([a-z/]+)\.)?(Test[A-Z]\w+)`).FindAllStringSubmatch(string(doc), -1)
	if len(names) < 50 {
		t.Errorf("%d names", len(names))
	}
	sources := map[string]string{}
	for _, n := range names {
		folder, test := n[1], n[2]
		if _, ok := sources[folder]; !ok {
			pattern := "*_test.go"
			if folder != "" {
				pattern = filepath.Join("..", "..", "..", filepath.FromSlash(folder), pattern)
			}
			files, err := filepath.Glob(pattern)
			if err != nil {
				t.Fatal(err)
			}
			for _, f := range files {
				text, err := os.ReadFile(f)
				if err != nil {
					t.Fatal(err)
				}
				sources[folder] += string(text)
			}
		}
		if !strings.Contains(sources[folder], "\nfunc "+test+"(") {
			t.Errorf("there is no %s.%s", folder, test)
		}
	}
}
