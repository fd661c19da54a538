package diag

import (
	"fmt"
	"sort"
)

// Severity says what a diagnostic means for the result.
type Severity uint8

// Severities. An error means that no network comes out of a compilation; a
// warning and a note let it through.
const (
	Error Severity = iota + 1
	Warning
	Note
)

// String is the word people see.
func (s Severity) String() string {
	switch s {
	case Error:
		return "error"
	case Warning:
		return "warning"
	case Note:
		return "note"
	}
	return fmt.Sprintf("severity %d", uint8(s))
}

// Code is the stable short name of a kind of problem, such as PL02. The
// catalogue (Lookup, Codes) has them all.
type Code string

// Related is a second place that helps to understand a problem.
type Related struct {
	Span    Span
	Message string
}

// Diagnostic is one problem.
type Diagnostic struct {
	Code     Code
	Severity Severity
	// Span is as tight as possible: the word that is wrong, not its line.
	Span Span
	// Problem is one sentence saying what is wrong, without a final stop.
	Problem string
	// Remedy is one sentence saying what to do, without a final stop.
	Remedy string
	// Picture is an optional drawing of several lines (the bits of a place).
	Picture string
	Related []Related
}

// Error is the one-line form: file:line:column: severity CODE: problem.
func (d *Diagnostic) Error() string {
	if !d.Span.Known() {
		return fmt.Sprintf("%s %s: %s", d.Severity, d.Code, d.Problem)
	}
	line, col := d.Span.File.Position(d.Span.Start)
	return fmt.Sprintf("%s:%d:%d: %s %s: %s", d.Span.File.Name, line, col, d.Severity, d.Code, d.Problem)
}

// List collects diagnostics. The zero List is ready.
type List struct {
	items []*Diagnostic
}

// Report adds a problem; its severity comes from the catalogue. The result may
// be decorated (Related, Picture) before it is printed.
func (l *List) Report(code Code, span Span, problem, remedy string) *Diagnostic {
	info, ok := Lookup(code)
	if !ok {
		panic("diag: code " + string(code) + " is not in the catalogue")
	}
	d := &Diagnostic{Code: code, Severity: info.Severity, Span: span, Problem: problem, Remedy: remedy}
	l.items = append(l.items, d)
	return d
}

// Also adds a related place and returns d.
func (d *Diagnostic) Also(span Span, message string) *Diagnostic {
	d.Related = append(d.Related, Related{span, message})
	return d
}

// Count returns how many diagnostics have the severity.
func (l *List) Count(s Severity) int {
	n := 0
	for _, d := range l.items {
		if d.Severity == s {
			n++
		}
	}
	return n
}

// Failed reports whether any diagnostic is an error.
func (l *List) Failed() bool { return l.Count(Error) > 0 }

// Len is the number of diagnostics of every severity.
func (l *List) Len() int { return len(l.items) }

// Add appends the diagnostics of other.
func (l *List) Add(other *List) { l.items = append(l.items, other.items...) }

// Sorted returns the diagnostics ordered by place, then by code.
func (l *List) Sorted() []*Diagnostic {
	out := append([]*Diagnostic(nil), l.items...)
	sort.SliceStable(out, func(i, j int) bool {
		a, b := out[i], out[j]
		if a.Span != b.Span {
			return a.Span.Less(b.Span)
		}
		return a.Code < b.Code
	})
	return out
}
