package output

import (
	"unicode"
	"unicode/utf8"

	"busloom/decode"
)

// table writes lines for people. With one wanted message its signals are
// columns; otherwise each frame is a line of names and values that goes on
// below where it gets too wide. Counters and checksums are left out, since what
// they are for is said behind each line.
type table struct {
	*tableLayout
	cell   []byte
	note   []byte
	cells  [][]byte        // of a row
	values []*decode.Value // of the current record, by place in its message
}

// tableLayout is prepared once.
type tableLayout struct {
	plan    *decode.Plan
	all     bool
	dates   bool
	one     *decode.Message // what the columns are of
	columns *columns        // nil: frames are lists
	places  []int           // of the columns' signals in the message
	buses   int             // widest bus name
	names   int             // widest message name
	widest  int             // most signals of a message
	items   [][]listItem    // by Message.Index
}

// widestLine is where a list goes on below, and the width that columns try to
// keep to; what would be wider than widestColumns is written as lists.
const (
	widestLine    = 118
	widestColumns = 150
)

func newTable(plan *decode.Plan, o Options) *table {
	l := &tableLayout{plan: plan, all: o.All, dates: o.Dates, items: make([][]listItem, len(plan.Messages))}
	wanted := 0
	for i, m := range plan.Messages {
		if !m.Wanted {
			continue
		}
		wanted++
		l.one = m
		l.buses = max(l.buses, len(m.Bus))
		l.names = max(l.names, len(m.Model.Name))
		l.widest = max(l.widest, len(m.Signals))
		l.items[i] = listItems(m, shown(m))
	}
	if wanted == 1 {
		signals := shown(l.one)
		var names []string
		for _, s := range signals {
			names = append(names, s.Path)
			l.places = append(l.places, s.Index-l.one.Signals[0].Index)
		}
		if c := newColumns(signals, names, o.Dates); len(signals) > 0 && c.total() <= widestColumns {
			l.columns = c
		}
	}
	return l.table()
}

// shown are the signals of a message that people are shown: those that aren't
// protection, or all if there are no others.
func shown(m *decode.Message) []*decode.Signal {
	var out []*decode.Signal
	for _, s := range m.Signals {
		if !isProtection(s) {
			out = append(out, s)
		}
	}
	if len(out) == 0 {
		return m.Signals
	}
	return out
}

func (l *tableLayout) table() *table {
	return &table{tableLayout: l, values: make([]*decode.Value, l.widest), cells: make([][]byte, len(l.places))}
}

// Fork implements Forker: the layout is shared.
func (t *table) Fork() Formatter { return t.tableLayout.table() }

// Header names the columns.
func (t *table) Header(dst []byte) []byte {
	if t.columns == nil {
		return dst
	}
	dst = append(dst, t.one.Model.Name+" on "+t.one.Bus...)
	if t.one.Model.Text != "" {
		dst = append(dst, ": "+t.one.Model.Text...)
	}
	return t.columns.header(append(dst, '\n'))
}

func (t *table) Trailer(dst []byte) []byte { return dst }

func (t *table) Record(dst []byte, r *decode.Record) []byte {
	if r.Class == decode.Decoded {
		if idle(r) {
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
	dst = appendStamp(dst, r.Frame.Time, t.dates)
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
	note := appendCheck(t.note[:0], r, phrases)
	for i, place := range t.places {
		t.cells[i] = t.cells[i][:0]
		v := t.values[place]
		if v == nil {
			continue
		}
		var fits bool
		t.cells[i], fits = t.columns.cells[i].appendCell(t.cells[i], v, r)
		if !fits && v.State != decode.Missing {
			if len(note) > 0 {
				note = append(note, phrases...)
			}
			note = appendShown(append(append(note, v.Signal.Path...), ' '), v, r)
		}
	}
	t.note = note
	return t.columns.appendRow(dst, r.Frame.Time, t.cells, note)
}

// appendShown appends a value as people are shown it.
func appendShown(dst []byte, v *decode.Value, r *decode.Record) []byte {
	start := len(dst)
	dst = v.Signal.AppendText(dst, v, r.Frame)
	if v.State == decode.Text {
		dst = append(dst[:start], printable(dst[start:])...)
	}
	return dst
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
