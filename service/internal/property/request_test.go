package property

import (
	"context"
	"encoding/json"
	"fmt"
	"maps"
	"os"
	"path/filepath"
	"runtime/debug"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"

	"google.golang.org/protobuf/encoding/protojson"

	pb "floatrail/api/floatrail/v1"
	"floatrail/calc"
	"floatrail/calc/finding"
	"floatrail/service/internal/convert"
)

// TestMain lets garbage grow: thousands of stages are reviewed, and each is thrown away whole.
func TestMain(m *testing.M) {
	debug.SetGCPercent(400)
	os.Exit(m.Run())
}

const stages = "../../../testdata/stages/"

// document reads a demo request as a JSON tree.
func document(t testing.TB, name string) any {
	t.Helper()
	raw, err := os.ReadFile(filepath.Join(stages, name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	return decode(t, raw)
}

func decode(t testing.TB, raw []byte) any {
	t.Helper()
	var tree any
	if err := json.Unmarshal(raw, &tree); err != nil {
		t.Fatal(err)
	}
	return tree
}

// path leads to a node of a JSON tree: names of members and numbers of elements.
type path []any

func (p path) String() string {
	var s strings.Builder
	for _, k := range p {
		switch k := k.(type) {
		case int:
			fmt.Fprintf(&s, "[%d]", k)
		case string:
			if s.Len() > 0 {
				s.WriteByte('.')
			}
			s.WriteString(k)
		}
	}
	return s.String()
}

func (p path) with(k any) path { return append(p[:len(p):len(p)], k) }

// last is the name of the member that the path leads to; empty for an element.
func (p path) last() string {
	s, _ := p[len(p)-1].(string)
	return s
}

// at parses a dotted path with numbers for elements.
func at(dotted string) path {
	var p path
	for _, k := range strings.Split(dotted, ".") {
		if n, err := strconv.Atoi(k); err == nil {
			p = append(p, n)
		} else {
			p = append(p, k)
		}
	}
	return p
}

// visit calls f for every member and element of a tree, parents first, in the order of names and numbers.
func visit(node any, here path, f func(p path, value any)) {
	switch n := node.(type) {
	case map[string]any:
		for _, k := range sorted(n) {
			f(here.with(k), n[k])
			visit(n[k], here.with(k), f)
		}
	case []any:
		for i := range n {
			f(here.with(i), n[i])
			visit(n[i], here.with(i), f)
		}
	}
}

// copyOf copies a JSON tree deeply.
func copyOf(node any) any {
	switch n := node.(type) {
	case map[string]any:
		out := make(map[string]any, len(n))
		for k, v := range n {
			out[k] = copyOf(v)
		}
		return out
	case []any:
		out := make([]any, len(n))
		for i := range n {
			out[i] = copyOf(n[i])
		}
		return out
	}
	return node
}

// without is a copy of a tree that lacks one member or element.
func without(tree any, p path) any {
	root := copyOf(tree)
	parent := lookup(root, p[:len(p)-1])
	switch k := p[len(p)-1].(type) {
	case string:
		delete(parent.(map[string]any), k)
	case int:
		list := parent.([]any)
		set(root, p[:len(p)-1], append(list[:k:k], list[k+1:]...))
	}
	return root
}

// with is a copy of a tree in which the nodes at paths are replaced; members that lack are made.
func with(tree any, edits ...edit) any {
	root := copyOf(tree)
	for _, e := range edits {
		set(root, e.at, e.to)
	}
	return root
}

type edit struct {
	at path
	to any
}

// to is an edit that puts JSON text at a dotted path; empty text deletes.
func to(dotted, text string) edit {
	if text == "" {
		return edit{at(dotted), deleted{}}
	}
	var v any
	if err := json.Unmarshal([]byte(text), &v); err != nil {
		panic(fmt.Sprintf("property: %s: %v", text, err))
	}
	return edit{at(dotted), v}
}

type deleted struct{}

func lookup(node any, p path) any {
	for _, k := range p {
		switch k := k.(type) {
		case string:
			node = node.(map[string]any)[k]
		case int:
			node = node.([]any)[k]
		}
	}
	return node
}

func set(root any, p path, v any) {
	node := root
	for i, k := range p {
		last := i == len(p)-1
		switch k := k.(type) {
		case string:
			m := node.(map[string]any)
			if _, gone := v.(deleted); gone && last {
				delete(m, k)
				return
			}
			if last {
				m[k] = v
			} else if m[k] == nil {
				m[k] = map[string]any{}
			}
			node = m[k]
		case int:
			l := node.([]any)
			if last {
				l[k] = v
			}
			node = l[k]
		}
	}
}

// bind turns a tree into a request, which must not be refused.
func bind(t testing.TB, tree any) *calc.Request {
	t.Helper()
	raw, err := json.Marshal(tree)
	if err != nil {
		t.Fatal(err)
	}
	req := &pb.ReviewStageRequest{}
	if err := protojson.Unmarshal(raw, req); err != nil {
		t.Fatalf("%v in %s", err, raw)
	}
	r, _, faults := binder().ReviewStage(req)
	if len(faults) > 0 {
		t.Fatalf("refused: %v", faults)
	}
	return &r
}

var binder = sync.OnceValue(convert.New)

// review reviews a tree; it must not be refused.
func review(t testing.TB, tree any, parts int) finding.Report {
	t.Helper()
	out, err := calc.Review(context.Background(), *bind(t, tree), parts)
	if err != nil {
		t.Fatal(err)
	}
	if out.Internal > 0 {
		t.Errorf("%d rules panicked", out.Internal)
	}
	return out
}

// pick finds the finding of a rule and role; in any mode where only one is there.
func pick(t testing.TB, r *finding.Report, rule, role string) *finding.Finding {
	t.Helper()
	var out *finding.Finding
	for i := range r.Findings {
		if f := &r.Findings[i]; f.Rule == rule && f.Role == role {
			if out != nil {
				t.Fatalf("more than one finding of %s %s", rule, role)
			}
			out = f
		}
	}
	if out == nil {
		t.Fatalf("no finding of %s %s", rule, role)
	}
	return out
}

func sorted(m map[string]any) []string { return slices.Sorted(maps.Keys(m)) }

// key is what findings are matched by.
type key struct{ rule, role, mode string }

func (k key) String() string { return k.rule + " " + k.role + " " + k.mode }
