// Govulncheck reads the JSON stream of golang.org/x/vuln's govulncheck on
// standard input and prints one line per finding:
//
//	go tool govulncheck -format json ./... | govulncheck
//
// A vulnerable function of a required module that the code reaches is a fault:
// exit status 1. A vulnerable module whose functions are not reached, and the
// standard library, which comes with the machine's Go and not with go.mod, are
// reported only.
package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"maps"
	"os"
	"slices"
)

// message is the part of govulncheck's JSON messages that is read here.
type message struct {
	Config *struct {
		DB string `json:"db"`
	} `json:"config"`
	Finding *finding `json:"finding"`
}

type finding struct {
	OSV          string  `json:"osv"`
	FixedVersion string  `json:"fixed_version"`
	Trace        []frame `json:"trace"` // the vulnerable place first
}

type frame struct {
	Module   string `json:"module"`
	Version  string `json:"version"`
	Function string `json:"function"`
}

func main() {
	lines, faults, err := read(os.Stdin)
	for _, line := range lines {
		fmt.Println(line)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "govulncheck:", err)
		os.Exit(1)
	}
	fmt.Printf("%d findings, %d of them faults\n", len(lines), faults)
	if faults > 0 {
		os.Exit(1)
	}
}

// read returns a line per finding, sorted, and how many of them are faults. A
// stream without govulncheck's opening message is an error: a scan that did
// not run has found nothing.
func read(stream io.Reader) (lines []string, faults int, err error) {
	reached := map[string]bool{}
	started := false
	for decoder := json.NewDecoder(stream); ; {
		var m message
		err := decoder.Decode(&m)
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, 0, err
		}
		started = started || m.Config != nil
		if m.Finding == nil || len(m.Finding.Trace) == 0 {
			continue
		}
		place := m.Finding.Trace[0]
		fixed := m.Finding.FixedVersion
		if fixed == "" {
			fixed = "no version"
		}
		line := fmt.Sprintf("%s in %s@%s, fixed in %s", m.Finding.OSV, place.Module, place.Version, fixed)
		reached[line] = reached[line] || (place.Function != "" && place.Module != "stdlib")
	}
	if !started {
		return nil, 0, errors.New("no scan on standard input")
	}
	for _, line := range slices.Sorted(maps.Keys(reached)) {
		if reached[line] {
			faults++
			line = "FAULT " + line
		} else {
			line = "note  " + line
		}
		lines = append(lines, line)
	}
	return lines, faults, nil
}
