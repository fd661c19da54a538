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

// columns lays signals out side by side: a column for each, wide enough for all
// of its numbers and words, so that no value moves what stands beside it.
type columns struct {
	dates bool
	cells []column
}

type column struct {
	parts []string // of the name: wheel, front_left, speed
	unit  string
	width int
	left  bool // words and texts; numbers are at the right
	point int  // digits after the point that every number has room for
}

// newColumns lays out signals with their names. Codes are in full if that keeps
// a row to widestLine, otherwise as their class.
func newColumns(signals []*decode.Signal, names []string, dates bool) *columns {
	c := &columns{dates: dates}
	for _, full := range []bool{true, false} {
		c.cells = c.cells[:0]
		for i, s := range signals {
			c.cells = append(c.cells, newColumn(s, nameParts(names[i]), full))
		}
		c.widen()
		if c.total() <= widestLine {
			break
		}
	}
	return c
}

// total is the width of a row.
func (c *columns) total() int {
	width := stampWidth(c.dates)
	for i := range c.cells {
		width += 2 + c.cells[i].width
	}
	return width
}

func newColumn(s *decode.Signal, parts []string, fullCodes bool) column {
	c := column{parts: parts, unit: s.Unit.Symbol, left: !s.IsNumber(), point: decimals(s)}
	c.width = max(len(c.parts[len(c.parts)-1]), utf8.RuneCountInString(c.unit))
	for _, word := range s.Words {
		c.width = max(c.width, utf8.RuneCountInString(word))
	}
	if s.IsNumber() {
		c.width = max(c.width, numberWidth(s, c.point))
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
func numberWidth(s *decode.Signal, decimals int) int {
	if s.Model != nil && s.Model.Kind == schema.Float {
		return len("not finite")
	}
	point := 0
	if decimals > 0 {
		point = 1 + decimals
	}
	whole := 1
	for _, end := range extremes(s) {
		text, _, _ := strings.Cut(unit.FormatRat(end, decimals), ".")
		whole = max(whole, len(text))
	}
	return whole + point
}

// decimals is how many digits after the point a signal's numbers can have; 0
// for floats, which aren't aligned.
func decimals(s *decode.Signal) int {
	if s.Scaled || s.Model == nil || s.Model.Affine == nil || s.Model.Kind == schema.Float {
		return s.Decimals
	}
	a, _ := unit.FiniteDecimals(s.Model.Affine.A)
	b, _ := unit.FiniteDecimals(s.Model.Affine.B)
	return min(max(a, b), unit.MaxDecimals)
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
	if c.point == 0 {
		return 0
	}
	at := bytes.IndexByte(text, '.')
	if at < 0 {
		at = len(text)
	}
	return max(0, min(c.point+1-(len(text)-at), c.width-len(text)))
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

// nameParts cuts wheel[front_left].speed into wheel, front_left, speed, and
// keeps "on chassis" together.
func nameParts(name string) []string {
	name = strings.Replace(name, " on ", ".on ", 1)
	return strings.FieldsFunc(name, func(r rune) bool { return r == '.' || r == '[' || r == ']' })
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

// header writes the parts of the names below each other, a line behind what
// several columns share, and the units.
func (c *columns) header(dst []byte) []byte {
	clock := "time [s]"
	if c.dates {
		clock = "time [UTC]"
	}
	time := stampWidth(c.dates)
	for row := c.rows() - 1; row >= 0; row-- {
		line := strings.Repeat(" ", time)
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
	names, units := strings.Repeat(" ", time), clock+strings.Repeat(" ", time-len(clock))
	for i := range c.cells {
		x := &c.cells[i]
		names += "  " + x.padded(x.parts[len(x.parts)-1])
		units += "  " + x.padded(x.unit)
	}
	dst = append(append(dst, strings.TrimRight(names, " ")...), '\n')
	return append(append(dst, strings.TrimRight(units, " ")...), '\n')
}

// appendCell appends a value in the width of its column; fits is false if the
// column is too narrow, and only a sign of it stands there.
func (c *column) appendCell(dst []byte, v *decode.Value, r *decode.Record) (out []byte, fits bool) {
	start := len(dst)
	dst = appendShown(dst, v, r)
	width, after := utf8.RuneCount(dst[start:]), 0
	if v.State == decode.Number {
		after = c.afterPoint(dst[start:])
	}
	fits = width <= c.width
	if !fits {
		dst = append(dst[:start], shortCell(v)...)
		width, after = len(dst)-start, 0
	}
	before := max(0, c.width-width-after)
	if c.left {
		return appendBlanks(dst, before), fits
	}
	dst = appendBlanks(dst, before)
	// The blanks go in front.
	copy(dst[start+before:], dst[start:len(dst)-before])
	for i := range before {
		dst[start+i] = ' '
	}
	return appendBlanks(dst, after), fits
}

// appendRow appends a row of cells; an empty cell is blank. note stands behind
// it.
func (c *columns) appendRow(dst []byte, ns int64, cells [][]byte, note []byte) []byte {
	dst = appendStamp(dst, ns, c.dates)
	end := len(dst) // behind the last that isn't blank
	for i, cell := range cells {
		dst = append(dst, "  "...)
		if len(cell) == 0 {
			dst = appendBlanks(dst, c.cells[i].width)
			continue
		}
		dst = append(dst, cell...)
		end = len(dst)
	}
	if len(note) > 0 {
		return append(append(append(dst, "  ! "...), note...), '\n')
	}
	dst = bytes.TrimRight(dst[:end], " ")
	return append(dst, '\n')
}

func (c *column) padded(text string) string {
	blanks := strings.Repeat(" ", max(0, c.width-utf8.RuneCountInString(text)))
	if c.left {
		return text + blanks
	}
	return blanks + text
}
