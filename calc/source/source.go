// Package source is the bibliography: one table, one line a document. Rules,
// findings and comments cite its keys; nothing else in the program spells a
// document out. Parts named by a publisher stand here only as the titles of the
// documents that an equation or a check value came from.
package source

import (
	"slices"
	"strings"
)

// The provenance of a source says how far its content was verified.
const (
	Read           = "read"            // the document's text was read and its arithmetic closes
	Memory         = "memory"          // cited from memory; confirm before relying on it
	Derived        = "derived"         // values derived from an equation published without this result
	CommonPractice = "common practice" // usage of the trade without a document of its own
)

// Source is one entry of the bibliography.
type Source struct {
	Key        string // citation key, lower case
	Title      string // title of the document, or what it is when it has no title of its own
	Publisher  string // publisher or standards body
	Document   string // document number, revision, clause; empty when there is none
	Year       string // year of publication; empty when not known
	Provenance string // Read, Memory, Derived or CommonPractice
	Note       string // what the provenance does not cover, or why the source is cited; may be empty
}

// Lookup returns the entry with the given key.
func Lookup(key string) (Source, bool) {
	for _, s := range table {
		if s.Key == key {
			return s, true
		}
	}
	return Source{}, false
}

// All returns a copy of the bibliography, sorted by key.
func All() []Source {
	all := slices.Clone(table[:])
	slices.SortFunc(all, func(a, b Source) int { return strings.Compare(a.Key, b.Key) })
	return all
}
