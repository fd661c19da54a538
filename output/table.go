package output

import (
	"bytes"
	"strings"
	"unicode/utf8"

	"busloom/decode"
)

// table writes lines for people. With one wanted message its signals are
// columns; otherwise each frame is a line of name and value, going on below
// where it gets too wide.
type table struct {
	plan  *decode.Plan
	all   bool
	dates bool
	one   *decode.Message // the only wanted message
	width []int           // of each of its signals' columns
	buses int             // widest bus name
	names int             // widest message name
	cell  []byte
	cells [][]byte
}

// widestLine is where a line of the table goes on below.
const widestLine = 118

// narrowest is the least width of a column, so that numbers of common length
// don't push it about.
const narrowest = 7

func newTable(plan *decode.Plan, o Options) *table {
	t := &table{plan: plan, all: o.All, dates: o.Dates}
	wanted := 0
	for _, m := range plan.Messages {
		if m.Wanted {
			wanted++
			t.one = m
			t.buses = max(t.buses, len(m.Bus))
			t.names = max(t.names, len(m.Model.Name))
		}
	}
	if wanted != 1 || len(t.one.Signals) == 0 {
		t.one = nil
		return t
	}
	for _, s := range t.one.Signals {
		wide := max(narrowest, utf8.RuneCountInString(s.Unit.Symbol))
		for _, part := range pathParts(s.Path) {
			wide = max(wide, len(part))
		}
		for _, word := range s.Words {
			wide = max(wide, min(len(word), 14))
		}
		t.width = append(t.width, wide)
	}
	t.cells = make([][]byte, len(t.one.Signals))
	return t
}

// pathParts cuts wheel[front_left].speed into wheel, front_left, speed.
func pathParts(path string) []string {
	return strings.FieldsFunc(path, func(r rune) bool { return r == '.' || r == '[' || r == ']' })
}

func (t *table) timeWidth() int {
	if t.dates {
		return len("2006-01-02 15:04:05.000000")
	}
	return len("1700000000.000000")
}

// Header names the columns: the parts of each path below each other, then the
// unit.
func (t *table) Header(dst []byte) []byte {
	if t.one == nil {
		return dst
	}
	dst = append(dst, t.one.Model.Name+" on "+t.one.Bus...)
	if t.one.Model.Text != "" {
		dst = append(dst, ": "+t.one.Model.Text...)
	}
	dst = append(dst, '\n')
	rows := 0
	for _, s := range t.one.Signals {
		rows = max(rows, len(pathParts(s.Path)))
	}
	for row := range rows + 1 {
		var line []byte
		name := ""
		if row == rows {
			name = "time [s]"
		}
		line = appendPadded(line, []byte(name), t.timeWidth(), false)
		for i, s := range t.one.Signals {
			parts := pathParts(s.Path)
			text := ""
			// The last part stands just above the unit.
			if at := row - (rows - len(parts)); at >= 0 && at < len(parts) {
				text = parts[at]
			}
			if row == rows {
				text = s.Unit.Symbol
			}
			line = append(line, "  "...)
			line = appendPadded(line, []byte(text), t.width[i], true)
		}
		dst = append(append(dst, bytes.TrimRight(line, " ")...), '\n')
	}
	return dst
}

func (t *table) Trailer(dst []byte) []byte { return dst }

func (t *table) appendTime(dst []byte, ns int64) []byte {
	start := len(dst)
	if t.dates {
		dst = appendDate(dst, ns)
	} else {
		dst = appendTime(dst, ns)
	}
	for n := len(dst) - start; n < t.timeWidth(); n++ {
		dst = append(dst, ' ')
	}
	return dst
}

// appendPadded appends text in a column, at its right or left side.
func appendPadded(dst, text []byte, width int, right bool) []byte {
	pad := max(0, width-utf8.RuneCount(text))
	if !right {
		dst = append(dst, text...)
	}
	for range pad {
		dst = append(dst, ' ')
	}
	if right {
		dst = append(dst, text...)
	}
	return dst
}

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
		dst = t.appendTime(dst, r.Frame.Time)
		dst = append(dst, "  error frame on "+t.plan.Interface(r.Frame.Bus)+": "+r.Frame.Report().String()...)
		return append(dst, '\n')
	}
	if !t.all {
		return dst
	}
	dst = t.appendTime(dst, r.Frame.Time)
	dst = append(dst, "  "+className(r.Class)+" on "+t.plan.Interface(r.Frame.Bus)+": "...)
	dst = appendID(dst, r.Frame)
	if r.Class != decode.RemoteFrame && r.Frame.Len > 0 {
		dst = appendData(append(dst, ' '), r.Frame)
	}
	return append(dst, '\n')
}

func (t *table) columns(dst []byte, r *decode.Record) []byte {
	first := t.one.Signals[0].Index
	for i := range t.cells {
		t.cells[i] = t.cells[i][:0]
	}
	for i := range r.Values {
		v := &r.Values[i]
		cell := &t.cells[v.Signal.Index-first]
		*cell = printableText(v.Signal.AppendText(*cell, v, r.Frame))
	}
	start := len(dst)
	dst = t.appendTime(dst, r.Frame.Time)
	for i, cell := range t.cells {
		dst = append(dst, "  "...)
		dst = appendPadded(dst, cell, t.width[i], true)
	}
	if check := appendCheck(nil, r); len(check) > 0 {
		dst = append(append(dst, "  ! "...), check...)
	}
	for len(dst) > start && dst[len(dst)-1] == ' ' {
		dst = dst[:len(dst)-1]
	}
	return append(dst, '\n')
}

func (t *table) list(dst []byte, r *decode.Record) []byte {
	start := len(dst)
	dst = t.appendTime(dst, r.Frame.Time)
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
	if check := appendCheck(nil, r); len(check) > 0 {
		gap(2 + len(check))
		dst = append(append(dst, "! "...), check...)
	}
	for i := range r.Values {
		v := &r.Values[i]
		s := v.Signal
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

// printableText replaces control characters, which a frame's text may hold
// and a terminal must not get.
func printableText(text []byte) []byte {
	for i, c := range text {
		if c < ' ' || c == 0x7f {
			text[i] = '.'
		}
	}
	return text
}
