package wire

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"
)

// maxDepth bounds the nesting of a body; the contract itself needs less than a third.
const maxDepth = 32

// tokens reads a body token by token and keeps count of the nesting.
type tokens struct {
	data  []byte
	dec   *json.Decoder
	depth int
	start int64 // where the token read last may begin: the end of the one before [byte]
}

func newTokens(data []byte) *tokens {
	dec := json.NewDecoder(bytes.NewReader(data))
	dec.UseNumber()
	return &tokens{data: data, dec: dec}
}

// A stop ends the walk.
type stop struct{ description string }

func (s *stop) Error() string { return s.description }

// next reads one token.
func (t *tokens) next() (json.Token, error) {
	t.start = t.dec.InputOffset()
	tok, err := t.dec.Token()
	if err != nil {
		return nil, t.malformed(err)
	}
	switch tok {
	case json.Delim('{'), json.Delim('['):
		if t.depth++; t.depth > maxDepth {
			return nil, &stop{fmt.Sprintf("read more than %d nested objects and lists at %s, expected at most %d", maxDepth,
				t.position(t.dec.InputOffset()), maxDepth)}
		}
	case json.Delim('}'), json.Delim(']'):
		t.depth--
	}
	return tok, nil
}

// skip reads past the value that began with the token.
func (t *tokens) skip(tok json.Token) error {
	if !opens(tok) {
		return nil
	}
	for outside := t.depth - 1; t.depth > outside; {
		if _, err := t.next(); err != nil {
			return err
		}
	}
	return nil
}

// end makes sure that nothing but white space follows.
func (t *tokens) end() error {
	at := t.dec.InputOffset()
	if rest := bytes.TrimLeft(t.data[at:], " \t\r\n"); len(rest) > 0 {
		return &stop{"read further data behind the object, at " + t.position(int64(len(t.data)-len(rest))+1) + ", expected the end of the body"}
	}
	return nil
}

// malformed words a syntax error with its place.
func (t *tokens) malformed(err error) error {
	if len(bytes.TrimSpace(t.data)) == 0 {
		return &stop{"read an empty body, expected a JSON object"}
	}
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return &stop{"malformed JSON: the body ends at " + t.position(int64(len(t.data))) + ", within an object, a list or a string"}
	}
	at, text := t.dec.InputOffset(), err.Error()
	// The decoder's own offsets count from the token, those of a check of the whole body from its beginning.
	var syntax *json.SyntaxError
	if errors.As(json.Unmarshal(t.data, new(json.RawMessage)), &syntax) {
		at, text = syntax.Offset, syntax.Error()
	}
	return &stop{"malformed JSON at " + t.position(at) + ": " + text}
}

// position is the line and column, both from 1 and the column in characters, of the byte with this number, which counts from 1.
func (t *tokens) position(number int64) string {
	before := t.data[:min(max(number-1, 0), int64(len(t.data)))]
	line := bytes.Count(before, []byte{'\n'}) + 1
	column := utf8.RuneCount(before[bytes.LastIndexByte(before, '\n')+1:]) + 1
	return "line " + strconv.Itoa(line) + ", column " + strconv.Itoa(column)
}

// invalidUTF8 is the fault of a body that is not UTF-8, or nil.
func (t *tokens) invalidUTF8() error {
	if utf8.Valid(t.data) {
		return nil
	}
	at := 0
	for at < len(t.data) {
		r, size := utf8.DecodeRune(t.data[at:])
		if r == utf8.RuneError && size == 1 {
			break
		}
		at += size
	}
	return &stop{fmt.Sprintf("read the byte 0x%02X at %s, expected UTF-8", t.data[at], t.position(int64(at)+1))}
}

// loneSurrogate tells whether the string read last, whose value is s, escapes half of a surrogate pair; the decoder replaces it silently.
func (t *tokens) loneSurrogate(s string) bool {
	if !strings.ContainsRune(s, utf8.RuneError) {
		return false
	}
	raw := t.data[t.start:t.dec.InputOffset()]
	for i := 0; i+1 < len(raw); i++ {
		if raw[i] != '\\' {
			continue
		}
		i++
		switch half := surrogate(raw, i); {
		case half == 0:
		case half == 'h' && i+5 < len(raw) && raw[i+5] == '\\' && surrogate(raw, i+6) == 'l':
			i += 10
		default:
			return true
		}
	}
	return false
}

// surrogate tells whether the escape at the index, behind its backslash, is the high (h) or low (l) half of a surrogate pair, or neither (0).
func surrogate(raw []byte, at int) byte {
	if at+4 >= len(raw) || raw[at] != 'u' {
		return 0
	}
	v, err := strconv.ParseUint(string(raw[at+1:at+5]), 16, 16)
	switch {
	case err != nil || v < 0xD800 || v > 0xDFFF:
		return 0
	case v < 0xDC00:
		return 'h'
	}
	return 'l'
}

func opens(tok json.Token) bool { return tok == json.Delim('{') || tok == json.Delim('[') }

// read words what a token is.
func read(tok json.Token) string {
	switch v := tok.(type) {
	case nil:
		return "read null"
	case json.Number:
		return "read the number " + shorten(v.String())
	case string:
		return "read the string " + strconv.Quote(shorten(v))
	case bool:
		return "read " + strconv.FormatBool(v)
	case json.Delim:
		if v == '{' {
			return "read an object"
		}
	}
	return "read a list"
}
