package render

import (
	"bytes"
	"io"
	"strings"
	"unicode/utf8"
)

// width is the number of characters in a line.
const width = 100

// page is text of at most width characters a line.
type page struct{ bytes.Buffer }

func (p *page) blank() { p.WriteByte('\n') }

// paragraph writes a text: the first line behind the lead, the others indented alike.
func (p *page) paragraph(lead string, text string) {
	indent := strings.Repeat(" ", utf8.RuneCountInString(lead))
	line := lead
	empty := true
	for _, word := range strings.Fields(text) {
		for {
			used, long := utf8.RuneCountInString(line), utf8.RuneCountInString(word)
			gap := 1
			if empty {
				gap = 0
			}
			if used+gap+long <= width {
				line += strings.Repeat(" ", gap) + word
				empty = false
				break
			}
			if !empty {
				p.line(line)
				line, empty = indent, true
				continue
			}
			// A word longer than a line is cut.
			fits := []rune(word)
			most := max(width-used, 1)
			p.line(line + string(fits[:most]))
			word, line = string(fits[most:]), indent
		}
	}
	p.line(line)
}

// line writes one line without blanks at its end.
func (p *page) line(text string) {
	p.WriteString(strings.TrimRight(text, " "))
	p.WriteByte('\n')
}

// pad fills a text with blanks up to the number of characters.
func pad(text string, to int) string {
	return text + strings.Repeat(" ", max(to-utf8.RuneCountInString(text), 0))
}

// caution closes the output.
func caution(w io.Writer, text string) {
	p := &page{}
	p.blank()
	p.paragraph("Caution: ", text)
	_, _ = w.Write(p.Bytes())
}
