package capture

import "fmt"

// Reject is a record that could not be read.
type Reject struct {
	File     string
	Record   int64 // counted from 1
	Line     int64 // counted from 1
	Column   int   // in bytes from 1, of the first byte that is wrong
	Offset   int64 // of the line's first byte, after decompression
	Problem  string
	Expected string
}

// Error is file:line:column: problem: expected what.
func (r Reject) Error() string {
	text := fmt.Sprintf("%s:%d:%d: %s", r.File, r.Line, r.Column, r.Problem)
	if r.Expected != "" {
		text += ": expected " + r.Expected
	}
	return text
}
