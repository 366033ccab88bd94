// Manifests checks the Kubernetes manifests in a folder without a cluster:
//
//	manifests <folder>
//
// Every document is decoded strictly, so that a misspelt, unknown or repeated
// field is a fault, and then held against the assertions of check.go. All
// faults are printed; any fault makes the exit status 1.
package main

import (
	"fmt"
	"os"
)

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: manifests <folder>")
		os.Exit(2)
	}
	set, err := load(os.DirFS(os.Args[1]))
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	faults := check(set)
	for _, fault := range faults {
		fmt.Fprintln(os.Stderr, fault)
	}
	if len(faults) > 0 {
		os.Exit(1)
	}
	fmt.Printf("%d deployments and %d services are sound\n", len(set.deployments), len(set.services))
}
