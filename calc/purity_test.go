package calc

import (
	"os/exec"
	"slices"
	"strings"
	"testing"
)

// golist lists, for every package of calc, its path and what it imports itself, tests left out.
func golist(t *testing.T) map[string][]string {
	t.Helper()
	out, err := exec.Command("go", "list", "-f", `{{.ImportPath}} {{join .Imports " "}}`, "floatrail/calc/...").Output()
	if err != nil {
		t.Fatal(err)
	}
	imports := map[string][]string{}
	for line := range strings.Lines(string(out)) {
		words := strings.Fields(line)
		imports[words[0]] = words[1:]
	}
	return imports
}

// allowed are the packages of the standard library that a calculation may use: none of them reads a clock, a file, the network, the
// environment or a random source. context carries the caller's end of patience, sync puts operating points side by side.
var allowed = []string{"bytes", "cmp", "context", "crypto/sha256", "encoding/binary", "encoding/hex", "errors", "fmt", "iter", "maps", "math", "math/big", "math/bits",
	"reflect", "runtime", "slices", "sort", "strconv", "strings", "sync", "sync/atomic", "unicode", "unicode/utf8"}

// TestPurity holds every package of calc to the standard library's pure part and to calc itself.
func TestPurity(t *testing.T) {
	imports := golist(t)
	if len(imports) < 15 {
		t.Fatalf("only %d packages", len(imports))
	}
	for pkg, list := range imports {
		for _, p := range list {
			if p != "floatrail/calc" && !strings.HasPrefix(p, "floatrail/calc/") && !slices.Contains(allowed, p) {
				t.Errorf("%s imports %s", pkg, p)
			}
		}
	}
}

// TestDependenciesPointOneWay keeps models from knowing rules and everything below from what stands on it.
func TestDependenciesPointOneWay(t *testing.T) {
	layers := [][]string{ // each may import the ones above it in this list, and none of its own line
		{"quantity", "source", "internal/numeric"},
		{"capacitor", "recharge", "preferred"},
		{"charge", "startup", "transient", "loss", "modulation"},
		{"stage"},
		{"finding"},
		{"corner"},
		{"circuit"},
		{"derive", "rule"},
		{"catalog"},
		{"result", "study"},
		{""},
	}
	level := map[string]int{}
	for i, names := range layers {
		for _, n := range names {
			level[strings.TrimSuffix("floatrail/calc/"+n, "/")] = i
		}
	}
	for pkg, list := range golist(t) {
		own, known := level[pkg]
		if !known {
			t.Errorf("%s has no layer", pkg)
			continue
		}
		for _, p := range list {
			if at, ok := level[p]; ok && at >= own {
				t.Errorf("%s imports %s", pkg, p)
			}
		}
	}
	out, err := exec.Command("go", "list", "-deps", "floatrail/calc/...").Output()
	if err != nil {
		t.Fatal(err)
	}
	for dep := range strings.Lines(string(out)) {
		dep = strings.TrimSpace(dep)
		for _, banned := range []string{"floatrail/service", "floatrail/api", "google.golang.org/", "github.com/", "net/http", "log", "math/rand"} {
			if dep == banned || strings.HasPrefix(dep, strings.TrimSuffix(banned, "/")+"/") {
				t.Errorf("calc depends on %s", dep)
			}
		}
	}
}
