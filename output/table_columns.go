package output

import (
	"bytes"
	"math/big"
	"slices"
	"strings"
	"unicode/utf8"

	"busloom/decode"
	"busloom/schema"
	"busloom/unit"
)

// columns lays out one message: a column for each signal, wide enough for all
// of its numbers and words, so that no value moves what stands beside it.
type columns struct {
	message *decode.Message
	time    int // width of the time
	cells   []column
}

type column struct {
	parts []string // of the path: wheel, front_left, speed
	unit  string
	width int
	left  bool // words and texts; numbers are at the right
	point int  // digits after the point that every number has room for
}

// widestColumns is the widest row; what would be wider is written as lists.
const widestColumns = 150

// newColumns returns nil where a row would be too wide. Codes are in full if
// that keeps the row to widestLine, otherwise as their class.
func newColumns(m *decode.Message, time int) *columns {
	var c *columns
	for _, full := range []bool{true, false} {
		c = &columns{message: m, time: time}
		for _, s := range m.Signals {
			c.cells = append(c.cells, newColumn(s, full))
		}
		c.widen()
		if c.total() <= widestLine {
			return c
		}
	}
	if c.total() > widestColumns {
		return nil
	}
	return c
}

func (c *columns) total() int {
	width := c.time
	for i := range c.cells {
		width += 2 + c.cells[i].width
	}
	return width
}

func newColumn(s *decode.Signal, fullCodes bool) column {
	c := column{parts: pathParts(s.Path), unit: s.Unit.Symbol, left: !s.IsNumber(), point: s.Decimals}
	c.width = max(len(c.parts[len(c.parts)-1]), utf8.RuneCountInString(c.unit))
	for _, word := range s.Words {
		c.width = max(c.width, utf8.RuneCountInString(word))
	}
	if s.IsNumber() {
		c.width = max(c.width, numberWidth(s))
	}
	if s.Model == nil {
		return c
	}
	for _, code := range s.Model.Codes {
		word := code.Class.String()
		if fullCodes {
			word = decode.CodeWord(code)
		}
		c.width = max(c.width, utf8.RuneCountInString(word))
	}
	switch s.Model.Kind {
	case schema.TextASCII, schema.TextUTF8:
		c.width = max(c.width, min(s.Model.Place.Width()/8, longestText))
	case schema.Bytes:
		c.width = max(c.width, min(s.Model.Place.Width()/4, longestText))
	}
	return c
}

// longestText is the most room that a column gives to texts and bytes.
const longestText = 24

// numberWidth is the room for any number of a signal, with the point in one
// place.
func numberWidth(s *decode.Signal) int {
	if !s.Scaled {
		return len("not finite")
	}
	point := 0
	if s.Decimals > 0 {
		point = 1 + s.Decimals
	}
	whole := 1
	for _, end := range extremes(s) {
		text := unit.FormatRat(end, s.Decimals)
		text, _, _ = strings.Cut(text, ".")
		whole = max(whole, len(text))
	}
	return whole + point
}

// extremes are values between which all numbers of a signal lie.
func extremes(s *decode.Signal) []*big.Rat {
	if s.Model == nil {
		for _, f := range s.Message.Model.ID.Fields {
			if strings.HasSuffix(s.Path, "."+f.Name) {
				return []*big.Rat{power(f.Width)}
			}
		}
		return nil
	}
	low, high := new(big.Rat), power(s.Model.Width)
	switch s.Model.Kind {
	case schema.Signed, schema.SignMagnitude:
		high = power(s.Model.Width - 1)
		low.Neg(high)
	case schema.PackedDecimal:
		high.SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(s.Model.Width/4)), nil))
		high.Sub(high, big.NewRat(1, 1))
	}
	ends := []*big.Rat{low, high}
	if c := s.Model.Curve; c != nil && c.Outside != schema.Extend {
		ends = []*big.Rat{new(big.Rat).Set(c.Points[0].Y), new(big.Rat).Set(c.Points[len(c.Points)-1].Y)}
	} else if a := s.Model.Affine; a != nil {
		for _, x := range ends {
			x.Add(x.Mul(x, a.A), a.B)
		}
	}
	if a, b, _, err := unit.Convert(s.Model.Unit, s.Unit); err == nil {
		for _, x := range ends {
			x.Add(x.Mul(x, a), b)
		}
	}
	return ends
}

// power is 2^n - 1.
func power(n int) *big.Rat {
	x := new(big.Int).Lsh(big.NewInt(1), uint(n))
	return new(big.Rat).SetInt(x.Sub(x, big.NewInt(1)))
}

// afterPoint is how many blanks follow a number so that the points of a column
// are in one place.
func (c *column) afterPoint(text []byte) int {
	if c.point == 0 || len(text) >= c.width {
		return 0
	}
	at := bytes.IndexByte(text, '.')
	if at < 0 {
		return min(c.point+1, c.width-len(text))
	}
	return max(0, c.point-(len(text)-at-1))
}

// shortCell is what stands in a column that is too narrow for a value.
func shortCell(v *decode.Value) string {
	switch v.State {
	case decode.Coded:
		return v.Signal.Model.Codes[v.Index].Class.String()
	case decode.Missing:
		return "-"
	case decode.Unknown, decode.NotFinite, decode.NoValue:
		return "?"
	}
	return ">"
}

// pathParts cuts wheel[front_left].speed into wheel, front_left, speed.
func pathParts(path string) []string {
	return strings.FieldsFunc(path, func(r rune) bool { return r == '.' || r == '[' || r == ']' })
}

// group is columns side by side that share the first parts of their paths.
type group struct {
	from, to int // columns, to not included
	label    string
}

// groups are those of a header row; row 0 is just above the last parts.
func (c *columns) groups(row int) []group {
	var out []group
	for i := range c.cells {
		parts := c.cells[i].parts
		depth := len(parts) - 1 - row // parts that are shared
		if depth < 1 {
			continue
		}
		if n := len(out) - 1; n >= 0 && out[n].to == i && len(c.cells[i-1].parts) == len(parts) && slices.Equal(c.cells[i-1].parts[:depth], parts[:depth]) {
			out[n].to++
			continue
		}
		out = append(out, group{i, i + 1, parts[depth-1]})
	}
	return out
}

func (c *columns) rows() int {
	rows := 0
	for i := range c.cells {
		rows = max(rows, len(c.cells[i].parts)-1)
	}
	return rows
}

func (c *columns) widthOf(g group) int {
	width := 2 * (g.to - g.from - 1)
	for i := g.from; i < g.to; i++ {
		width += c.cells[i].width
	}
	return width
}

// widen makes room for the labels of groups.
func (c *columns) widen() {
	for row := range c.rows() {
		for _, g := range c.groups(row) {
			if lack := len(g.label) - c.widthOf(g); lack > 0 {
				c.cells[g.to-1].width += lack
			}
		}
	}
}

// header writes what the message is, then the parts of the paths below each
// other, a line under what several columns share, and the units.
func (c *columns) header(dst []byte, clock string) []byte {
	m := c.message.Model
	dst = append(dst, m.Name+" on "+c.message.Bus...)
	if m.Text != "" {
		dst = append(dst, ": "+m.Text...)
	}
	dst = append(dst, '\n')
	for row := c.rows() - 1; row >= 0; row-- {
		line := strings.Repeat(" ", c.time)
		next := 0
		for _, g := range c.groups(row) {
			for ; next < g.from; next++ {
				line += strings.Repeat(" ", 2+c.cells[next].width)
			}
			next = g.to
			lack := c.widthOf(g) - len(g.label)
			switch {
			case g.to-g.from == 1 && !c.cells[g.from].left:
				line += "  " + strings.Repeat(" ", lack) + g.label
			case g.to-g.from == 1 || lack < 2:
				line += "  " + g.label + strings.Repeat(" ", lack)
			default:
				line += "  " + g.label + " " + strings.Repeat("-", lack-1)
			}
		}
		dst = append(append(dst, strings.TrimRight(line, " ")...), '\n')
	}
	names, units := strings.Repeat(" ", c.time), clock+strings.Repeat(" ", c.time-len(clock))
	for i := range c.cells {
		x := &c.cells[i]
		names += "  " + x.padded(x.parts[len(x.parts)-1])
		units += "  " + x.padded(x.unit)
	}
	dst = append(append(dst, strings.TrimRight(names, " ")...), '\n')
	return append(append(dst, strings.TrimRight(units, " ")...), '\n')
}

func (c *column) padded(text string) string {
	blanks := strings.Repeat(" ", max(0, c.width-utf8.RuneCountInString(text)))
	if c.left {
		return text + blanks
	}
	return blanks + text
}
