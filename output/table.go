package output

import (
	"unicode/utf8"

	"busloom/decode"
	"busloom/schema"
)

// table writes lines for people. With one wanted message its signals are
// columns; otherwise each frame is a line of name and value, going on below
// where it gets too wide. Counters and checksums are left out, since what they
// are for is said behind each line.
type table struct {
	plan   *decode.Plan
	all    bool
	dates  bool
	one    *decode.Message // the only wanted message
	grid   *grid
	column []int // by Signal.Index: column + 1, 0 for none
	buses  int   // widest bus name
	names  int   // widest message name
	cell   []byte
	cells  [][]byte
}

// widestLine is where a line of the table goes on below.
const widestLine = 118

func newTable(plan *decode.Plan, o Options) *table {
	t := &table{plan: plan, all: o.All, dates: o.Dates, column: make([]int, len(plan.Signals))}
	wanted := 0
	for _, m := range plan.Messages {
		if m.Wanted {
			wanted++
			t.one = m
			t.buses = max(t.buses, len(m.Bus))
			t.names = max(t.names, len(m.Model.Name))
		}
	}
	var shown []*decode.Signal
	var names []string
	for _, s := range plan.Signals {
		if isProtection(s) {
			continue
		}
		shown = append(shown, s)
		names = append(names, s.Path)
		t.column[s.Index] = len(shown)
	}
	if wanted != 1 || len(shown) == 0 {
		t.one = nil
		return t
	}
	t.grid = newGrid(shown, names, o.Dates)
	t.cells = make([][]byte, len(shown))
	return t
}

// isProtection reports whether a signal is a counter, a checksum or a constant
// beside them.
func isProtection(s *decode.Signal) bool {
	return s.Model != nil && (s.Model.Kind == schema.Counter || s.Model.Kind == schema.Checksum || s.Model.Fixed != nil)
}

// Header names the message and its columns.
func (t *table) Header(dst []byte) []byte {
	if t.one == nil {
		return dst
	}
	dst = append(dst, t.one.Model.Name+" on "+t.one.Bus...)
	if t.one.Model.Text != "" {
		dst = append(dst, ": "+t.one.Model.Text...)
	}
	return t.grid.header(append(dst, '\n'))
}

func (t *table) Trailer(dst []byte) []byte { return dst }

func (t *table) Record(dst []byte, r *decode.Record) []byte {
	switch r.Class {
	case decode.Decoded:
		switch {
		case !r.Message.Wanted:
			return dst
		case t.one != nil:
			return t.columns(dst, r)
		}
		return t.list(dst, r)
	case decode.ErrorFrame:
		dst = appendStamp(dst, r.Frame.Time, t.dates)
		dst = append(dst, "  error frame on "+t.plan.Interface(r.Frame.Bus)+": "+r.Frame.Report().String()...)
		return append(dst, '\n')
	}
	if !t.all {
		return dst
	}
	dst = appendStamp(dst, r.Frame.Time, t.dates)
	dst = append(dst, "  "+className(r.Class)+" on "+t.plan.Interface(r.Frame.Bus)+": "...)
	dst = appendID(dst, r.Frame)
	if r.Class != decode.RemoteFrame && r.Frame.Len > 0 {
		dst = appendData(append(dst, ' '), r.Frame)
	}
	return append(dst, '\n')
}

func (t *table) columns(dst []byte, r *decode.Record) []byte {
	for i := range t.cells {
		t.cells[i] = t.cells[i][:0]
	}
	for i := range r.Values {
		v := &r.Values[i]
		if c := t.column[v.Signal.Index]; c > 0 {
			cell := &t.cells[c-1]
			*cell = printableText(v.Signal.AppendText(*cell, v, r.Frame))
		}
	}
	return t.grid.row(dst, r.Frame.Time, t.cells, appendCheck(nil, r, phrases))
}

func (t *table) list(dst []byte, r *decode.Record) []byte {
	start := len(dst)
	dst = appendStamp(dst, r.Frame.Time, t.dates)
	dst = append(dst, "  "...)
	dst = appendPadded(dst, []byte(r.Message.Bus), t.buses, false)
	dst = append(dst, "  "...)
	dst = appendPadded(dst, []byte(r.Message.Model.Name), t.names, false)
	indent := len(dst) - start
	column := indent
	gap := func(need int) {
		if column > indent && column+2+need > widestLine {
			dst = append(dst, '\n')
			for range indent {
				dst = append(dst, ' ')
			}
			column = indent
		}
		dst = append(dst, "  "...)
		column += 2 + need
	}
	if check := appendCheck(nil, r, phrases); len(check) > 0 {
		gap(2 + len(check))
		dst = append(append(dst, "! "...), check...)
	}
	for i := range r.Values {
		v := &r.Values[i]
		s := v.Signal
		if t.column[s.Index] == 0 {
			continue
		}
		t.cell = append(append(t.cell[:0], s.Path...), ' ')
		t.cell = printableText(s.AppendText(t.cell, v, r.Frame))
		if v.State == decode.Number && s.Unit.Symbol != "" {
			t.cell = append(append(t.cell, ' '), s.Unit.Symbol...)
		}
		gap(utf8.RuneCount(t.cell))
		dst = append(dst, t.cell...)
	}
	return append(dst, '\n')
}
