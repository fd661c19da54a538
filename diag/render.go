package diag

import (
	"bytes"
	"encoding/json"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"
)

// Style says how Render writes.
type Style struct {
	// Color uses terminal colours.
	Color bool
	// Notes shows notes too; errors and warnings are always shown.
	Notes bool
}

// tabWidth is how many columns a tab takes in a snippet.
const tabWidth = 4

// longestSnippet is how much of a source line a snippet shows, in runes.
const longestSnippet = 120

// Render writes diagnostics for people: the place and the sentence, the source
// line with a marker under the span, related places, and what to do.
func Render(w io.Writer, list []*Diagnostic, style Style) error {
	var b bytes.Buffer
	for _, d := range list {
		if d.Severity == Note && !style.Notes {
			continue
		}
		renderOne(&b, d, style)
	}
	_, err := w.Write(b.Bytes())
	return err
}

func renderOne(b *bytes.Buffer, d *Diagnostic, style Style) {
	paint := func(code, text string) string {
		if !style.Color {
			return text
		}
		return "\x1b[" + code + "m" + text + "\x1b[0m"
	}
	colour := map[Severity]string{Error: "1;31", Warning: "1;33", Note: "1;36"}[d.Severity]
	if d.Span.Known() {
		line, col := d.Span.File.Position(d.Span.Start)
		fmt.Fprintf(b, "%s:%d:%d: ", d.Span.File.Name, line, col)
	}
	fmt.Fprintf(b, "%s %s\n", paint(colour, d.Severity.String()+" "+string(d.Code)+":"), d.Problem)
	snippet(b, d.Span, func(s string) string { return paint(colour, s) })
	for _, l := range strings.Split(strings.TrimRight(d.Picture, "\n"), "\n") {
		if l != "" {
			fmt.Fprintf(b, "      | %s\n", l)
		}
	}
	for _, r := range d.Related {
		if r.Span.Known() {
			line, col := r.Span.File.Position(r.Span.Start)
			fmt.Fprintf(b, "  %s:%d:%d: %s\n", r.Span.File.Name, line, col, r.Message)
			snippet(b, r.Span, func(s string) string { return s })
		} else {
			fmt.Fprintf(b, "  %s\n", r.Message)
		}
	}
	if d.Remedy != "" {
		fmt.Fprintf(b, "  %s %s\n", paint("1", "to mend:"), d.Remedy)
	}
}

// snippet writes the span's first line with a marker under it.
func snippet(b *bytes.Buffer, s Span, paint func(string) string) {
	if !s.Known() {
		return
	}
	number, column := s.File.Position(s.Start)
	line := []rune(printable(s.File.Line(number)))
	length := utf8.RuneCount(s.File.Text[s.Start:max(s.Start, min(s.End, len(s.File.Text)))])
	if i := bytes.IndexByte(s.File.Text[s.Start:max(s.Start, min(s.End, len(s.File.Text)))], '\n'); i >= 0 {
		length = utf8.RuneCount(s.File.Text[s.Start : s.Start+i])
	}
	from := column - 1
	// A long line is shown around the span only.
	cut := 0
	if len(line) > longestSnippet && from > longestSnippet/2 {
		cut = min(from-longestSnippet/2, len(line)-longestSnippet)
		cut = max(cut, 0)
	}
	shown := line[cut:min(len(line), cut+longestSnippet)]
	var text, mark strings.Builder
	for i, r := range shown {
		width := 1
		if r == '\t' {
			width = tabWidth
			text.WriteString(strings.Repeat(" ", tabWidth))
		} else {
			text.WriteRune(r)
		}
		switch at := i + cut; {
		case at < from:
			mark.WriteString(strings.Repeat(" ", width))
		case at < from+max(length, 1):
			mark.WriteString(strings.Repeat("^", width))
		}
	}
	if from >= cut+len(shown) {
		mark.WriteString(strings.Repeat(" ", max(0, from-cut-len(shown))) + "^")
	}
	lead, tail := "", ""
	if cut > 0 {
		lead = "… "
	}
	if cut+len(shown) < len(line) {
		tail = " …"
	}
	pad := strings.Repeat(" ", utf8.RuneCountInString(lead))
	fmt.Fprintf(b, "%5d | %s%s%s\n", number, lead, text.String(), tail)
	fmt.Fprintf(b, "      | %s%s\n", pad, paint(strings.TrimRight(mark.String(), " ")))
}

// printable replaces what a terminal must not get.
func printable(line []byte) string {
	return strings.Map(func(r rune) rune {
		if r == '\t' {
			return r
		}
		if r < ' ' || r == 0x7f || r == utf8.RuneError || (r >= 0x80 && r < 0xa0) || r == '\u202e' {
			return '·'
		}
		return r
	}, string(line))
}

type jsonSpan struct {
	File   string `json:"file"`
	Line   int    `json:"line"`
	Column int    `json:"column"`
	// EndLine and EndColumn are the place just after the span.
	EndLine   int `json:"endLine"`
	EndColumn int `json:"endColumn"`
	Offset    int `json:"offset"`
	EndOffset int `json:"endOffset"`
}

type jsonRelated struct {
	Span    *jsonSpan `json:"span,omitempty"`
	Message string    `json:"message"`
}

type jsonDiagnostic struct {
	Code     Code          `json:"code"`
	Severity string        `json:"severity"`
	Span     *jsonSpan     `json:"span,omitempty"`
	Problem  string        `json:"problem"`
	Remedy   string        `json:"remedy,omitempty"`
	Picture  string        `json:"picture,omitempty"`
	Related  []jsonRelated `json:"related,omitempty"`
}

func spanJSON(s Span) *jsonSpan {
	if !s.Known() {
		return nil
	}
	out := &jsonSpan{File: s.File.Name, Offset: s.Start, EndOffset: s.End}
	out.Line, out.Column = s.File.Position(s.Start)
	out.EndLine, out.EndColumn = s.File.Position(s.End)
	return out
}

// RenderJSON writes diagnostics as one JSON array; columns count runes from 1,
// offsets count bytes from 0.
func RenderJSON(w io.Writer, list []*Diagnostic) error {
	out := make([]jsonDiagnostic, 0, len(list))
	for _, d := range list {
		j := jsonDiagnostic{Code: d.Code, Severity: d.Severity.String(), Span: spanJSON(d.Span),
			Problem: d.Problem, Remedy: d.Remedy, Picture: d.Picture}
		for _, r := range d.Related {
			j.Related = append(j.Related, jsonRelated{spanJSON(r.Span), r.Message})
		}
		out = append(out, j)
	}
	enc := json.NewEncoder(w)
	enc.SetEscapeHTML(false)
	enc.SetIndent("", "  ")
	return enc.Encode(out)
}
