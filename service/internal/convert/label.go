package convert

import (
	"strconv"
	"unicode"
	"unicode/utf8"

	"google.golang.org/protobuf/reflect/protoreflect"

	"floatrail/service/internal/wire"
)

// label checks a string that is no value: the member name of path, or path itself where name is empty. It tells whether all is well.
func (w *walk) label(text string, limit int, path, name string) bool {
	if reason := labelFault(text, limit); reason != "" {
		w.fault(w.at(path, name), reason)
		return false
	}
	return true
}

func labelFault(text string, limit int) string {
	if len(text) > limit {
		if n := utf8.RuneCountInString(text); n > limit {
			return refusal(strconv.Itoa(n)+" characters", "at most "+strconv.Itoa(limit), "")
		}
	}
	for i, r := range text {
		if unicode.IsControl(r) {
			return refusal("the control character "+strconv.QuoteRune(r)+" at byte "+strconv.Itoa(i), "plain text", "")
		}
	}
	return ""
}

// labels checks a list of names.
func (w *walk) labels(list protoreflect.List, limit int, path string) []string {
	if list.Len() > limit {
		w.fault(path, tooMany(list.Len(), limit))
		return nil
	}
	out := make([]string, list.Len())
	for i := range out {
		out[i] = list.Get(i).String()
		if reason := labelFault(out[i], labelLimit("id")); reason != "" {
			w.fault(w.paths.element(path, i), reason)
		}
	}
	return out
}

// required checks a name that must not be empty.
func (w *walk) required(text, path, what string) {
	if text == "" {
		w.fault(path, refusal("nothing", what, ""))
	}
}

// suggestion names the nearest name, or nothing.
func suggestion(text string, names []string) string {
	if n := wire.Nearest(text, names); n != "" {
		return "the nearest is " + quote(n)
	}
	return ""
}
