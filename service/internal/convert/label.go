package convert

import (
	"strconv"
	"unicode"
	"unicode/utf8"

	"google.golang.org/protobuf/reflect/protoreflect"
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

// nearest is the name most like text, empty where none is alike.
func nearest(text string, names []string) string {
	best, least := "", min(3, max(1, utf8.RuneCountInString(text)/2))+1
	for _, name := range names {
		if d := distance(text, name, least); d < least {
			best, least = name, d
		}
	}
	return best
}

// distance is the number of characters to insert, delete or replace, or limit where it is not below it.
func distance(a, b string, limit int) int {
	if d := len(a) - len(b); d >= 4*limit || -d >= 4*limit {
		return limit
	}
	from, to := []rune(a), []rune(b)
	if d := len(from) - len(to); d >= limit || -d >= limit {
		return limit
	}
	row := make([]int, len(to)+1)
	for j := range row {
		row[j] = j
	}
	for i, x := range from {
		diagonal, least := row[0], i+1
		row[0] = i + 1
		for j, y := range to {
			cost := diagonal
			if unicode.ToLower(x) != unicode.ToLower(y) {
				cost++
			}
			diagonal = row[j+1]
			row[j+1] = min(cost, row[j]+1, row[j+1]+1)
			least = min(least, row[j+1])
		}
		if least >= limit {
			return limit
		}
	}
	return min(row[len(to)], limit)
}

// suggestion names the nearest name, or nothing.
func suggestion(text string, names []string) string {
	if n := nearest(text, names); n != "" {
		return "the nearest is " + quote(n)
	}
	return ""
}
