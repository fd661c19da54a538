package diag

import (
	"sort"
	"unicode/utf8"
)

// File is one source text. Spans keep byte offsets into it; lines and columns
// are computed only when something is printed.
type File struct {
	// Name is shown to people, as the user gave it.
	Name string
	// Text is the whole text. It must not change after NewFile.
	Text []byte

	starts []int // byte offset of each line's first byte
}

// NewFile indexes text's lines. LF ends a line; a CR before it belongs to the
// line's end.
func NewFile(name string, text []byte) *File {
	f := &File{Name: name, Text: text, starts: []int{0}}
	for i, b := range text {
		if b == '\n' {
			f.starts = append(f.starts, i+1)
		}
	}
	return f
}

// Position returns the line and the column (in runes) of a byte offset, both
// counted from 1. Offsets outside the text are moved to its nearest end.
func (f *File) Position(offset int) (line, column int) {
	offset = min(max(offset, 0), len(f.Text))
	line = sort.SearchInts(f.starts, offset+1)
	return line, utf8.RuneCount(f.Text[f.starts[line-1]:offset]) + 1
}

// Line returns the text of a line counted from 1, without its line end.
func (f *File) Line(line int) []byte {
	if line < 1 || line > len(f.starts) {
		return nil
	}
	end := len(f.Text)
	if line < len(f.starts) {
		end = f.starts[line] - 1
	}
	text := f.Text[f.starts[line-1]:end]
	if n := len(text); n > 0 && text[n-1] == '\r' {
		text = text[:n-1]
	}
	return text
}

// Lines is the number of lines; a text that ends in LF has an empty last one.
func (f *File) Lines() int { return len(f.starts) }

// Span is a run of bytes of one file, End excluded. The zero Span has no place
// (a problem with a whole database, for example).
type Span struct {
	File  *File
	Start int
	End   int
}

// Known reports whether the span points into a file.
func (s Span) Known() bool { return s.File != nil }

// Text returns the bytes under the span.
func (s Span) Text() string {
	if s.File == nil {
		return ""
	}
	return string(s.File.Text[s.Start:s.End])
}

// To returns the span from the start of s to the end of t.
func (s Span) To(t Span) Span {
	return Span{File: s.File, Start: s.Start, End: max(s.End, t.End)}
}

// Less orders spans by file name, then by start, then by end.
func (s Span) Less(t Span) bool {
	a, b := "", ""
	if s.File != nil {
		a = s.File.Name
	}
	if t.File != nil {
		b = t.File.Name
	}
	if a != b {
		return a < b
	}
	if s.Start != t.Start {
		return s.Start < t.Start
	}
	return s.End < t.End
}
