package main

import (
	"slices"
	"strings"
	"testing"
)

const config = `{"config":{"protocol_version":"v1.0.0","db":"file:///db"}}`

func TestRead(t *testing.T) {
	for _, c := range []struct {
		name   string
		stream string
		lines  []string
		faults int
	}{
		{"clean", config, nil, 0},
		{
			"reached module",
			config + `{"finding":{"osv":"GO-1","fixed_version":"v1.1.0","trace":[{"module":"example.org/m","version":"v1.0.0"}]}}` +
				`{"finding":{"osv":"GO-1","fixed_version":"v1.1.0","trace":[{"module":"example.org/m","version":"v1.0.0","package":"p","function":"F"}]}}`,
			[]string{"FAULT GO-1 in example.org/m@v1.0.0, fixed in v1.1.0"}, 1,
		},
		{
			"required only",
			config + `{"finding":{"osv":"GO-2","trace":[{"module":"example.org/m","version":"v1.0.0"}]}}`,
			[]string{"note  GO-2 in example.org/m@v1.0.0, fixed in no version"}, 0,
		},
		{
			"standard library",
			config + `{"finding":{"osv":"GO-3","fixed_version":"v1.26.9","trace":[{"module":"stdlib","version":"v1.26.8","function":"F"}]}}`,
			[]string{"note  GO-3 in stdlib@v1.26.8, fixed in v1.26.9"}, 0,
		},
	} {
		t.Run(c.name, func(t *testing.T) {
			lines, faults, err := read(strings.NewReader(c.stream))
			if err != nil || faults != c.faults || !slices.Equal(lines, c.lines) {
				t.Errorf("got %q, %d faults, %v; want %q, %d faults", lines, faults, err, c.lines, c.faults)
			}
		})
	}
	for _, stream := range []string{"", config + "{", "govulncheck: no such file"} {
		if _, _, err := read(strings.NewReader(stream)); err == nil {
			t.Errorf("%q: no error", stream)
		}
	}
}
