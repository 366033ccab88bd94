package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"strings"

	"floatrail/service/internal/convert"
)

// annotate reads the comments of an OpenAPI document and adds to the description of each property what the declaration of its field says.
// All other bytes stay as they are, and a document that is annotated already stays unchanged.
func annotate(document []byte, annotation func(message, field string) string) (convert.Comments, []byte, error) {
	comments := convert.Comments{}
	var out bytes.Buffer
	copied := 0
	walker := &walker{decoder: json.NewDecoder(bytes.NewReader(document))}
	for {
		text, isString, err := walker.next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, nil, err
		}
		message, field, ok := described(walker.path)
		if !isString || !ok {
			continue
		}
		if field == "" {
			comments[message] = text
			continue
		}
		note := annotation(message, field)
		if note == "" {
			comments[message+"."+field] = text
			continue
		}
		if comment, done := strings.CutSuffix(text, " "+note); done {
			comments[message+"."+field] = comment
			continue
		}
		comments[message+"."+field] = text
		escaped, err := json.Marshal(" " + note)
		if err != nil {
			return nil, nil, err
		}
		end := int(walker.decoder.InputOffset()) - 1 // the closing quotation mark
		out.Write(document[copied:end])
		out.Write(escaped[1 : len(escaped)-1])
		copied = end
	}
	out.Write(document[copied:])
	return comments, out.Bytes(), nil
}

// described tells which message or field the value at the path describes.
func described(path []string) (message, field string, ok bool) {
	switch {
	case len(path) == 3 && path[0] == "definitions" && path[2] == "description":
		return path[1], "", true
	case len(path) == 5 && path[0] == "definitions" && path[2] == "properties" && path[4] == "description":
		return path[1], path[3], true
	}
	return "", "", false
}

// walker reads a JSON document value by value.
type walker struct {
	decoder *json.Decoder
	path    []string // keys down to the value; "" in arrays
	array   []bool   // of each open container
	key     bool     // the next string is a key
}

// next reads one token. A string value is returned with its path in w.path.
func (w *walker) next() (text string, isString bool, err error) {
	token, err := w.decoder.Token()
	if err != nil {
		return "", false, err
	}
	switch t := token.(type) {
	case json.Delim:
		switch t {
		case '{', '[':
			w.array = append(w.array, t == '[')
			w.path = append(w.path, "")
			w.key = t == '{'
		default:
			w.array = w.array[:len(w.array)-1]
			w.path = w.path[:len(w.path)-1]
			w.key = len(w.array) > 0 && !w.array[len(w.array)-1]
		}
		return "", false, nil
	case string:
		if w.key {
			w.path[len(w.path)-1] = t
			w.key = false
			return "", false, nil
		}
		text, isString = t, true
	}
	w.key = len(w.array) > 0 && !w.array[len(w.array)-1]
	return text, isString, nil
}
