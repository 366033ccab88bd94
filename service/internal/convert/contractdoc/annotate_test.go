package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"floatrail/service/internal/convert"
)

const document = `{
  "definitions": {
    "Driver": {
      "description": "The gate driver.",
      "properties": {
        "refdes": {"type": "string", "description": "Reference designator."},
        "slewMax": {"type": "string", "description": "Slew \u003c limit.", "enum": ["description", "x"]}
      }
    }
  }
}`

func TestAnnotateTouchesOnlyDescriptionsOfValues(t *testing.T) {
	comments, out, err := annotate([]byte(document), func(message, field string) string {
		if message == "Driver" && field == "slewMax" {
			return `Unit: "V/s".`
		}
		return ""
	})
	if err != nil {
		t.Fatal(err)
	}
	want := strings.Replace(document, "limit.", `limit. Unit: \"V/s\".`, 1)
	if string(out) != want {
		t.Errorf("got\n%s\nwant\n%s", out, want)
	}
	if c := comments["Driver.slewMax"]; c != "Slew < limit." {
		t.Errorf("comment %q", c)
	}
	if c := comments["Driver"]; c != "The gate driver." {
		t.Errorf("comment of the message %q", c)
	}
}

func TestRunIsIdempotent(t *testing.T) {
	dir := t.TempDir()
	openapi, fields := filepath.Join(dir, "o.json"), filepath.Join(dir, "f.md")
	source, err := os.ReadFile("../../../../api/openapi/floatrail.swagger.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(openapi, source, 0o600); err != nil {
		t.Fatal(err)
	}
	var before [2]string
	for pass := range 2 {
		if err := run(openapi, fields); err != nil {
			t.Fatal(err)
		}
		for i, name := range []string{openapi, fields} {
			b, err := os.ReadFile(name)
			if err != nil {
				t.Fatal(err)
			}
			if pass == 1 && string(b) != before[i] {
				t.Errorf("%s changes in the second run", name)
			}
			before[i] = string(b)
		}
	}
	if note := convert.Annotation("Driver", "slewMax"); note == "" || !strings.Contains(before[0], "Largest permitted slew of V_S. "+note) {
		t.Errorf("the annotation %q is not in the document", note)
	}
	if !strings.Contains(before[1], "| `slewMax` | value | V/s | 100 V/µs to 1000 V/ns |") || !strings.Contains(before[1], "Largest permitted slew of V_S.") {
		t.Error("the reference lacks slewMax")
	}
}
