package output

import (
	"strings"
	"unicode/utf8"

	"busloom/decode"
)

// listItem is what a list shows as one: a signal, or the same member of each
// element of an array, side by side: wheel[*].speed 80 / 79.9 / 80 / 80 km/h.
type listItem struct {
	label   string
	signals []int // places in the message
}

// listItems puts the members of arrays together, in the order of their first.
func listItems(m *decode.Message, shown []*decode.Signal) []listItem {
	var items []listItem
	byLabel := map[string]int{}
	for _, s := range shown {
		i := s.Index - m.Signals[0].Index
		label := arrayLabel(s.Path)
		at, known := byLabel[label]
		if !known || label == s.Path || m.Signals[items[at].signals[0]].Unit.Symbol != s.Unit.Symbol {
			byLabel[label] = len(items)
			items = append(items, listItem{label: s.Path, signals: []int{i}})
			continue
		}
		items[at].label = label
		items[at].signals = append(items[at].signals, i)
	}
	return items
}

// arrayLabel is wheel[*].speed for wheel[front_left].speed.
func arrayLabel(path string) string {
	before, rest, ok := strings.Cut(path, "[")
	_, after, closed := strings.Cut(rest, "]")
	if !ok || !closed {
		return path
	}
	return before + "[*]" + after
}

// list writes a frame as names and values.
func (t *table) list(dst []byte, r *decode.Record) []byte {
	start := len(dst)
	dst = append(appendStamp(dst, r.Frame.Time, t.dates), "  "...)
	dst = append(dst, r.Message.Bus...)
	dst = appendBlanks(dst, t.buses-len(r.Message.Bus)+2)
	dst = append(dst, r.Message.Model.Name...)
	indent := stampWidth(t.dates) + 2 + t.buses + 2 + t.names
	column := utf8.RuneCount(dst[start:])
	add := func(item []byte) {
		need := utf8.RuneCount(item)
		if column > indent && column+2+need > widestLine {
			dst = append(dst, '\n')
			column = 0
		}
		gap := max(0, indent-column) + 2
		dst = append(appendBlanks(dst, gap), item...)
		column += gap + need
	}
	if wrong(r) {
		t.cell = appendCheck(append(t.cell[:0], "! "...), r, phrases)
		add(t.cell)
	}
	for i := range t.items[r.Message.Index] {
		item := &t.items[r.Message.Index][i]
		if t.present(item) {
			t.appendItem(item, r)
			add(t.cell)
			continue
		}
		for _, at := range item.signals {
			if v := t.values[at]; v != nil {
				t.appendItem(&listItem{label: v.Signal.Path, signals: []int{at}}, r)
				add(t.cell)
			}
		}
	}
	return append(dst, '\n')
}

// present reports whether all of an item's values are there.
func (t *table) present(item *listItem) bool {
	for _, at := range item.signals {
		if t.values[at] == nil {
			return false
		}
	}
	return true
}

// appendItem sets cell to an item's label, values and unit.
func (t *table) appendItem(item *listItem, r *decode.Record) {
	t.cell = append(t.cell[:0], item.label...)
	unit := ""
	for i, at := range item.signals {
		v := t.values[at]
		between := " / "
		if i == 0 {
			between = " "
		}
		t.cell = append(t.cell, between...)
		t.cell = appendShown(t.cell, v, r)
		if v.State == decode.Number {
			unit = v.Signal.Unit.Symbol
		}
	}
	if unit != "" {
		t.cell = append(append(t.cell, ' '), unit...)
	}
}
