package golden

import (
	"os"
	"os/exec"
	"path/filepath"
	"reflect"
	"regexp"
	"slices"
	"strings"
	"testing"

	"floatrail/service/internal/config"
)

// block is a fenced block of a document.
type block struct {
	language string
	lines    []string
}

// document reads a document of the repository and its blocks.
func document(t *testing.T, name string) (text string, blocks []block) {
	t.Helper()
	data, err := os.ReadFile(root + name)
	if err != nil {
		t.Fatal(err)
	}
	inside := false
	for _, line := range strings.Split(string(data), "\n") {
		language, fence := strings.CutPrefix(line, "```")
		switch {
		case fence && inside:
			inside = false
		case fence:
			inside = true
			blocks = append(blocks, block{language: language})
		case inside:
			b := &blocks[len(blocks)-1]
			b.lines = append(b.lines, line)
		}
	}
	if inside || len(blocks) == 0 {
		t.Fatalf("%s: %d blocks, the last one open: %t", name, len(blocks), inside)
	}
	return string(data), blocks
}

// commands are the lines of a document's shell blocks that begin with a word.
func commands(blocks []block, word string) []string {
	var out []string
	for _, b := range blocks {
		for _, line := range b.lines {
			if b.language == "sh" && strings.HasPrefix(line+" ", word+" ") {
				out = append(out, line)
			}
		}
	}
	return out
}

// documents of the repository, by path from its root.
var documents = []string{"README.md", "DEVELOPERS.md", "testdata/stages/buck48.sheet.md", "testdata/stages/gan650.sheet.md",
	"testdata/stages/drive400.sheet.md", "testdata/stages/spindle325.sheet.md"}

var (
	link    = regexp.MustCompile(`\]\(([^)]+)\)`)
	heading = regexp.MustCompile(`(?m)^#+ (.+)$`)
	quoted  = regexp.MustCompile("`((?:\\.ci|api|calc|deploy|proto|service|testdata)/[A-Za-z0-9_./-]+)`")
)

// Links and paths lead to files that are there, and links within a document to its headings.
func TestLinks(t *testing.T) {
	for _, name := range documents {
		data, err := os.ReadFile(root + name)
		if err != nil {
			t.Error(err)
			continue
		}
		text := string(data)
		var anchors []string
		for _, h := range heading.FindAllStringSubmatch(text, -1) {
			anchors = append(anchors, "#"+strings.ReplaceAll(strings.ToLower(h[1]), " ", "-"))
		}
		for _, l := range link.FindAllStringSubmatch(text, -1) {
			if strings.HasPrefix(l[1], "#") {
				if !slices.Contains(anchors, l[1]) {
					t.Errorf("%s: no heading %s", name, l[1])
				}
			} else if _, err := os.Stat(filepath.Join(root, filepath.Dir(name), l[1])); err != nil {
				t.Errorf("%s: %v", name, err)
			}
		}
		for _, q := range quoted.FindAllStringSubmatch(text, -1) {
			if _, err := os.Stat(root + q[1]); err != nil {
				t.Errorf("%s: %v", name, err)
			}
		}
	}
}

// The README's table of flags is that of the program.
func TestFlags(t *testing.T) {
	text, _ := document(t, "README.md")
	flags := reflect.TypeFor[config.Flags]()
	for i := range flags.NumField() {
		f := flags.Field(i)
		name := f.Tag.Get("name")
		if name == "" {
			name = strings.ToLower(regexp.MustCompile(`([a-z])([A-Z])`).ReplaceAllString(f.Name, "$1-$2"))
		}
		row := "| `--" + name + "` | `" + config.Variable(name) + "` | `" + f.Tag.Get("default") + "` | " + f.Tag.Get("help") + " |"
		if !strings.Contains(text, row+"\n") {
			t.Errorf("README.md lacks the row\n%s", row)
		}
	}
	if n := strings.Count(text, "| `--"); n != flags.NumField() {
		t.Errorf("README.md lists %d flags, the program has %d", n, flags.NumField())
	}
}

// The packages that tests and fuzz targets are run for in DEVELOPERS.md are there.
func TestDevelopersCommands(t *testing.T) {
	_, blocks := document(t, "DEVELOPERS.md")
	path := regexp.MustCompile(`\./[a-z][a-z0-9_/]*`)
	target := regexp.MustCompile(`-(?:fuzz|run)='?\^?((?:Fuzz|Test|Golden)\w*)`)
	seen := 0
	for _, line := range commands(blocks, "go") {
		line, _, _ = strings.Cut(line, " #")
		for _, dir := range path.FindAllString(line, -1) {
			if info, err := os.Stat(root + dir); err != nil || !info.IsDir() {
				t.Errorf("%s: no folder %s", line, dir)
				continue
			}
			for _, name := range target.FindAllStringSubmatch(line, -1) {
				seen++
				list := exec.Command("go", "test", "-list", name[1], dir)
				list.Dir = root
				if out, err := list.CombinedOutput(); err != nil || !regexp.MustCompile(`(?m)^(Test|Fuzz)`).Match(out) {
					t.Errorf("%s: nothing is named %s: %s", line, name[1], out)
				}
			}
		}
	}
	if seen < 2 {
		t.Errorf("%d commands for single tests, expected those for golden answers and fuzzing", seen)
	}
}
