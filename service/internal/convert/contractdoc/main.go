// Command contractdoc writes the documentation that follows from the declarations of the contract: a reference of all fields, and units,
// ranges and meanings of absence into the descriptions of the OpenAPI document. It is run behind the generators.
package main

import (
	"flag"
	"fmt"
	"os"

	"floatrail/service/internal/convert"
)

func main() {
	openapi := flag.String("openapi", "api/openapi/floatrail.swagger.json", "OpenAPI document, annotated in place")
	fields := flag.String("fields", "api/FIELDS.md", "reference to write")
	flag.Parse()
	if err := run(*openapi, *fields); err != nil {
		fmt.Fprintln(os.Stderr, "contractdoc:", err)
		os.Exit(1)
	}
}

func run(openapi, fields string) error {
	document, err := os.ReadFile(openapi)
	if err != nil {
		return err
	}
	comments, annotated, err := annotate(document, convert.Annotation)
	if err != nil {
		return fmt.Errorf("%s: %w", openapi, err)
	}
	if err := os.WriteFile(fields, []byte(convert.Reference(comments)), 0o644); err != nil {
		return err
	}
	return os.WriteFile(openapi, annotated, 0o644)
}
