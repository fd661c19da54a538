package output

import (
	"bytes"
	"strings"
	"unicode/utf8"

	"busloom/decode"
)

// grid lays signals out as columns: their names stacked above, then the unit,
// then a row of cells each.
type grid struct {
	signals []*decode.Signal
	heads   [][]string // by column: the words above each other
	width   []int
	dates   bool
}

// narrowest is the least width of a column, so that numbers of common length
// don't push it about.
const narrowest = 7

// longestWord is how much room a column keeps for its words.
const longestWord = 14

func newGrid(signals []*decode.Signal, names []string, dates bool) *grid {
	g := &grid{signals: signals, dates: dates}
	for i, s := range signals {
		head := nameParts(names[i])
		wide := max(narrowest, utf8.RuneCountInString(s.Unit.Symbol))
		for _, part := range head {
			wide = max(wide, len(part))
		}
		for _, word := range s.Words {
			wide = max(wide, min(len(word), longestWord))
		}
		g.heads = append(g.heads, head)
		g.width = append(g.width, wide)
	}
	return g
}

// nameParts cuts wheel[front_left].speed into wheel, front_left, speed, and
// keeps "on chassis" together.
func nameParts(path string) []string {
	path = strings.Replace(path, " on ", ".on ", 1)
	return strings.FieldsFunc(path, func(r rune) bool { return r == '.' || r == '[' || r == ']' })
}

func (g *grid) timeWidth() int {
	if g.dates {
		return len("2006-01-02 15:04:05.000000")
	}
	return len("1700000000.000000")
}

// header appends the stacked names and the units.
func (g *grid) header(dst []byte) []byte {
	rows := 0
	for _, head := range g.heads {
		rows = max(rows, len(head))
	}
	for row := range rows + 1 {
		name := ""
		if row == rows {
			name = "time [s]"
			if g.dates {
				name = "time [UTC]"
			}
		}
		line := appendPadded(nil, []byte(name), g.timeWidth(), false)
		for i, head := range g.heads {
			text := ""
			// The last part stands just above the unit.
			if at := row - (rows - len(head)); at >= 0 && at < len(head) {
				text = head[at]
			}
			if row == rows {
				text = g.signals[i].Unit.Symbol
			}
			line = appendPadded(append(line, "  "...), []byte(text), g.width[i], true)
		}
		dst = append(append(dst, bytes.TrimRight(line, " ")...), '\n')
	}
	return dst
}

// row appends a row; note stands behind it.
func (g *grid) row(dst []byte, ns int64, cells [][]byte, note []byte) []byte {
	start := len(dst)
	dst = appendStamp(dst, ns, g.dates)
	for i, cell := range cells {
		dst = appendPadded(append(dst, "  "...), cell, g.width[i], true)
	}
	if len(note) > 0 {
		dst = append(append(dst, "  ! "...), note...)
	}
	for len(dst) > start && dst[len(dst)-1] == ' ' {
		dst = dst[:len(dst)-1]
	}
	return append(dst, '\n')
}

// appendStamp appends a time as seconds or as a date, in a column.
func appendStamp(dst []byte, ns int64, dates bool) []byte {
	if dates {
		return appendDate(dst, ns)
	}
	start := len(dst)
	dst = appendTime(dst, ns)
	for n := len(dst) - start; n < len("1700000000.000000"); n++ {
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
