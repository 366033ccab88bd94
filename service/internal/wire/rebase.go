package wire

import "strings"

// Rebase is the report as one part of the message sees it: paths at or below `from` move to `to`, those elsewhere below `list` concern
// other parts and are dropped, the rest stays. An empty `from` is the whole message.
func (r *Report) Rebase(from, to, list string) *Report {
	move := func(path string) (string, bool) {
		switch {
		case path == Body:
			return path, true
		case from == "":
			return to + "." + path, true
		case within(path, from):
			return to + path[len(from):], true
		}
		return path, !within(path, list)
	}
	out := &Report{More: r.More, Unread: r.Unread}
	for _, f := range r.Faults {
		if field, ok := move(f.Field); ok {
			out.Faults = append(out.Faults, Fault{Field: field, Description: f.Description})
		}
	}
	for _, lists := range []struct {
		from []string
		to   *[]string
	}{{r.Opaque, &out.Opaque}, {r.Partial, &out.Partial}} {
		for _, path := range lists.from {
			if moved, ok := move(path); ok {
				*lists.to = append(*lists.to, moved)
			}
		}
	}
	return out
}

// within tells whether a path is the other one or lies below it.
func within(path, other string) bool {
	rest, ok := strings.CutPrefix(path, other)
	return ok && (rest == "" || rest[0] == '.' || rest[0] == '[')
}
