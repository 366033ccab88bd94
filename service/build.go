package main

import (
	"runtime/debug"

	"floatrail/calc/catalog"
	"floatrail/service/internal/telemetry"
)

// version is set by the linker: -ldflags "-X main.version=1.2.3". It stands in every answer.
var version = "development"

// build is what was built, as far as the binary knows.
func build() telemetry.Build {
	b := telemetry.Build{Version: version, Go: telemetry.GoVersion(), RuleSet: catalog.RuleSet}
	if info, ok := debug.ReadBuildInfo(); ok {
		for _, s := range info.Settings {
			if s.Key == "vcs.revision" {
				b.Revision = s.Value
			}
		}
	}
	return b
}
