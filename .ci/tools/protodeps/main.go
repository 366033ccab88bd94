// Protodeps writes the .proto files that the contract imports from outside
// the module, so that the compiler finds them without any download.
//
// google/api and google/rpc are published as Go packages without their
// sources, but each package carries its descriptor. Protodeps prints those
// descriptors back into source form:
//
//	protodeps <output folder>
//
// The google/protobuf files are left out: the compiler brings its own.
package main

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/jhump/protoreflect/v2/protoprint"
	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/reflect/protoregistry"

	_ "google.golang.org/genproto/googleapis/api/annotations" // google/api: annotations, http, field_behavior, resource, client
	_ "google.golang.org/genproto/googleapis/api/httpbody"    // google/api: httpbody
	_ "google.golang.org/genproto/googleapis/rpc/errdetails"  // google/rpc: error_details
	_ "google.golang.org/genproto/googleapis/rpc/status"      // google/rpc: status
)

// prefixes selects what is written, by path in the descriptor registry.
var prefixes = []string{"google/api/", "google/rpc/"}

func main() {
	if len(os.Args) != 2 {
		fmt.Fprintln(os.Stderr, "usage: protodeps <output folder>")
		os.Exit(2)
	}
	if err := write(os.Args[1]); err != nil {
		fmt.Fprintln(os.Stderr, "protodeps:", err)
		os.Exit(1)
	}
}

// write prints every selected file of the registry below folder.
func write(folder string) error {
	var failed error
	written := 0
	printer := protoprint.Printer{SortElements: false}
	protoregistry.GlobalFiles.RangeFiles(func(file protoreflect.FileDescriptor) bool {
		if !selected(file.Path()) {
			return true
		}
		failed = writeFile(&printer, file, filepath.Join(folder, filepath.FromSlash(file.Path())))
		written++
		return failed == nil
	})
	if failed == nil && written == 0 {
		failed = fmt.Errorf("the descriptor registry holds none of %s", strings.Join(prefixes, ", "))
	}
	return failed
}

func selected(path string) bool {
	for _, prefix := range prefixes {
		if strings.HasPrefix(path, prefix) {
			return true
		}
	}
	return false
}

func writeFile(printer *protoprint.Printer, file protoreflect.FileDescriptor, path string) error {
	text, err := printer.PrintProtoToString(file)
	if err != nil {
		return fmt.Errorf("%s: %w", file.Path(), err)
	}
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		return err
	}
	return os.WriteFile(path, []byte(text), 0o644)
}
