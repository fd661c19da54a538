package output

import (
	"unicode"
	"unicode/utf8"

	"busloom/decode"
)

// table writes lines for people. With one wanted message its signals are
// columns; otherwise each frame is a line of names and values that goes on
// below where it gets too wide.
type table struct {
	*tableLayout
	cell   []byte
	note   []byte
	values []*decode.Value // of the current record, by place in its message
}

// tableLayout is prepared once.
type tableLayout struct {
	plan    *decode.Plan
	all     bool
	dates   bool
	columns *columns // nil: frames are lists
	buses   int      // widest bus name
	names   int      // widest message name
	widest  int      // most signals of a message
	items   [][]listItem
}

// widestLine is where a list goes on below, and the width that columns try to
// keep to.
const widestLine = 118

func newTable(plan *decode.Plan, o Options) *table {
	l := &tableLayout{plan: plan, all: o.All, dates: o.Dates, items: make([][]listItem, len(plan.Messages))}
	var wanted []*decode.Message
	for i, m := range plan.Messages {
		if !m.Wanted {
			continue
		}
		wanted = append(wanted, m)
		l.buses = max(l.buses, len(m.Bus))
		l.names = max(l.names, len(m.Model.Name))
		l.widest = max(l.widest, len(m.Signals))
		l.items[i] = listItems(m)
	}
	if len(wanted) == 1 && len(wanted[0].Signals) > 0 {
		l.columns = newColumns(wanted[0], l.timeWidth())
	}
	return l.table()
}

func (l *tableLayout) table() *table {
	return &table{tableLayout: l, values: make([]*decode.Value, l.widest)}
}

// Fork implements Forker: the layout is shared.
func (t *table) Fork() Formatter { return t.tableLayout.table() }

func (l *tableLayout) timeWidth() int {
	if l.dates {
		return len("2006-01-02 15:04:05.000000")
	}
	return len("1700000000.000000")
}

// Header names the columns.
func (t *table) Header(dst []byte) []byte {
	if t.columns == nil {
		return dst
	}
	clock := "time [s]"
	if t.dates {
		clock = "time [UTC]"
	}
	return t.columns.header(dst, clock)
}

func (t *table) Trailer(dst []byte) []byte { return dst }

func (t *table) appendTime(dst []byte, ns int64) []byte {
	start := len(dst)
	if t.dates {
		dst = appendDate(dst, ns)
	} else {
		dst = appendTime(dst, ns)
	}
	return appendBlanks(dst, t.timeWidth()-(len(dst)-start))
}

func (t *table) Record(dst []byte, r *decode.Record) []byte {
	if r.Class == decode.Decoded {
		if !r.Message.Wanted {
			return dst
		}
		t.spread(r)
		if t.columns != nil {
			return t.row(dst, r)
		}
		return t.list(dst, r)
	}
	if r.Class != decode.ErrorFrame && !t.all {
		return dst
	}
	dst = t.appendTime(dst, r.Frame.Time)
	dst = append(dst, "  "+className(r.Class)+" on "+t.plan.Interface(r.Frame.Bus)+": "...)
	switch r.Class {
	case decode.ErrorFrame:
		return append(append(dst, r.Frame.Report().String()...), '\n')
	case decode.RemoteFrame:
		return append(appendID(dst, r.Frame), '\n')
	}
	dst = appendID(dst, r.Frame)
	if r.Frame.Len > 0 {
		dst = appendData(append(dst, ' '), r.Frame)
	}
	return append(dst, '\n')
}

// spread puts the record's values at their signals' places.
func (t *table) spread(r *decode.Record) {
	clear(t.values)
	for i := range r.Values {
		v := &r.Values[i]
		t.values[v.Signal.Index-r.Message.Signals[0].Index] = v
	}
}

// row writes a frame in columns. What a cell has no room for stands in full
// behind the line.
func (t *table) row(dst []byte, r *decode.Record) []byte {
	dst = t.appendTime(dst, r.Frame.Time)
	note := t.note[:0]
	if wrong(r) {
		note = appendCheck(note, r, phrases)
	}
	blanks := 0 // not written yet
	for i := range t.columns.cells {
		c := &t.columns.cells[i]
		blanks += 2
		v := t.values[i]
		if v == nil {
			blanks += c.width
			continue
		}
		t.cell = v.Signal.AppendText(t.cell[:0], v, r.Frame)
		if v.State == decode.Text {
			t.cell = printable(t.cell)
		}
		width := utf8.RuneCount(t.cell)
		after := 0
		if v.State == decode.Number {
			after = c.afterPoint(t.cell)
		}
		if width+after > c.width {
			if v.State != decode.Missing {
				if len(note) > 0 {
					note = append(note, phrases...)
				}
				note = append(append(append(note, v.Signal.Path...), ' '), t.cell...)
			}
			t.cell = append(t.cell[:0], shortCell(v)...)
			width, after = len(t.cell), 0
		}
		before := max(0, c.width-width-after)
		if c.left {
			before, after = 0, before
		}
		dst = appendBlanks(dst, blanks+before)
		dst = append(dst, t.cell...)
		blanks = after
	}
	t.note = note
	if len(note) > 0 {
		dst = append(append(appendBlanks(dst, blanks), "  ! "...), note...)
	}
	return append(dst, '\n')
}

func appendBlanks(dst []byte, n int) []byte {
	for range n {
		dst = append(dst, ' ')
	}
	return dst
}

// printable replaces what a terminal must not get: a frame's text may hold
// control characters.
func printable(text []byte) []byte {
	plain := true
	for _, c := range text {
		plain = plain && c >= ' ' && c < 0x7F
	}
	if plain {
		return text
	}
	out := text[:0:0]
	for len(text) > 0 {
		r, n := utf8.DecodeRune(text)
		if !unicode.IsPrint(r) {
			r = '.'
		}
		out = utf8.AppendRune(out, r)
		text = text[n:]
	}
	return out
}
