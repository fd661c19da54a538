package schema

import (
	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// Format lays a description out in its canonical form; ok is false, with
// problems reported, if it has syntax errors.
func Format(src *diag.File, problems *diag.List) (text []byte, ok bool) {
	return syntax.Format(src, problems)
}
