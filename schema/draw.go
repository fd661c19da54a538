package schema

import (
	"fmt"
	"io"
	"strings"

	"busloom/bits"
	"busloom/unit"
)

// Draw writes the bit layout of a message: one table of bytes and bits for
// what is always there and one for each branch of its selections, with a key.
// A signal's heaviest bit is shown in upper case; a dot is a bit that nothing
// describes, a minus one that is named unused.
func (m *Message) Draw(w io.Writer) error {
	var b strings.Builder
	fmt.Fprintf(&b, "%s  %s on %s, %s\n", m.Name, m.ID.describe(), m.Bus.Name, m.describeSize())
	if m.Text != "" {
		fmt.Fprintf(&b, "%s\n", m.Text)
	}
	keys := map[*Signal]string{}
	for i, s := range m.Signals {
		keys[s] = drawKey(i)
	}
	groups := drawGroups(m)
	for i, g := range groups {
		fmt.Fprintln(&b)
		if len(groups) > 1 {
			fmt.Fprintln(&b, g.title)
		}
		m.drawTable(&b, g.signals, keys, i == 0)
		fmt.Fprintln(&b)
		drawLegend(&b, g.signals, keys)
	}
	fmt.Fprintf(&b, "\n  upper case: heaviest bit   -: named unused   .: nothing described%s\n", map[bool]string{true: " in this branch"}[len(groups) > 1])
	_, err := io.WriteString(w, b.String())
	return err
}

// drawKey is a, b, ... z, aa, ab, ...
func drawKey(i int) string {
	if i < 26 {
		return string(rune('a' + i))
	}
	return drawKey(i/26-1) + string(rune('a'+i%26))
}

type drawGroup struct {
	title   string
	signals []*Signal
}

// drawGroups sorts the signals by the choices that bring them.
func drawGroups(m *Message) []drawGroup {
	out := []drawGroup{{title: "always"}}
	index := map[string]int{"": 0}
	for _, s := range m.Signals {
		title := describeChoices(s.When)
		i, ok := index[title]
		if !ok {
			i = len(out)
			index[title] = i
			out = append(out, drawGroup{title: title})
		}
		out[i].signals = append(out[i].signals, s)
	}
	return out
}

func describeChoices(when []Choice) string {
	if len(when) == 0 {
		return ""
	}
	var parts []string
	for _, c := range when {
		var values []string
		for _, v := range c.Values {
			values = append(values, c.Selector.describeRaw(v))
		}
		is := " is "
		if c.Not {
			is = " is not "
		}
		parts = append(parts, c.Selector.Name+is+strings.Join(values, ", "))
	}
	return "when " + strings.Join(parts, " and ")
}

// describeRaw is a raw range as a person would write it for this signal: its
// states' words where it has them.
func (s *Signal) describeRaw(r RawRange) string {
	for _, st := range s.States {
		if st.Raw == r {
			return st.Name
		}
	}
	if r.Low == r.High {
		return fmt.Sprintf("%d", r.Low)
	}
	return fmt.Sprintf("%d..%d", r.Low, r.High)
}

func (m *Message) drawTable(b *strings.Builder, signals []*Signal, keys map[*Signal]string, common bool) {
	cells := make([][8]string, m.Size)
	width := 1
	put := func(p bits.Place, key string, heavy bool) {
		for i, at := range p.Bits() {
			text := key
			if i == 0 && heavy {
				text = strings.ToUpper(key)
			}
			if at.Byte < m.Size {
				cells[at.Byte][at.Bit] = text
				width = max(width, len(text))
			}
		}
	}
	if common {
		for _, p := range m.Unused {
			put(p, "-", false)
		}
	}
	for _, s := range signals {
		put(s.Place, keys[s], true)
	}
	fmt.Fprint(b, "  byte |")
	for bit := 7; bit >= 0; bit-- {
		fmt.Fprintf(b, " %*d", width, bit)
	}
	fmt.Fprintln(b, "  bit")
	for i := range cells {
		fmt.Fprintf(b, "  %4d |", i)
		for bit := 7; bit >= 0; bit-- {
			text := cells[i][bit]
			if text == "" {
				text = "."
			}
			fmt.Fprintf(b, " %*s", width, text)
		}
		fmt.Fprintln(b)
	}
}

func drawLegend(b *strings.Builder, signals []*Signal, keys map[*Signal]string) {
	var rows [][4]string
	var wide [4]int
	for _, s := range signals {
		row := [4]string{keys[s], s.Place.String(), s.Name, s.Describe()}
		if s.ToEnd {
			row[1] += " on to the end"
		}
		rows = append(rows, row)
		for i, c := range row {
			wide[i] = max(wide[i], len([]rune(c)))
		}
	}
	for _, r := range rows {
		line := fmt.Sprintf("  %-*s  %-*s  %-*s  %s", wide[0], r[0], wide[1], r[1], wide[2], r[2], r[3])
		fmt.Fprintln(b, strings.TrimRight(line, " "))
	}
}

// Describe says in a few words what a signal is: width, kind, formula, unit.
func (s *Signal) Describe() string {
	text := fmt.Sprintf("%d bits", s.Width)
	if s.Width == 1 {
		text = "1 bit"
	}
	if s.Kind != Unsigned {
		text += ", " + kindPhrase(s.Kind)
	}
	if s.Fixed != nil {
		text += ", always " + hexRaw(*s.Fixed)
	}
	if f := s.formula(); f != "" {
		text += ", " + f
	}
	if c := s.Counter; c != nil {
		text += fmt.Sprintf(" %d..%d", c.Low, c.High)
	}
	if c := s.Checksum; c != nil {
		text += " " + c.Method
	}
	return text
}

func kindPhrase(k Kind) string {
	switch k {
	case SignMagnitude:
		return "sign magnitude"
	case PackedDecimal:
		return "packed decimal"
	case TextASCII:
		return "text ascii"
	case TextUTF8:
		return "text utf8"
	}
	return k.String()
}

// formula is the conversion as it could stand in a description.
func (s *Signal) formula() string {
	if s.Affine == nil {
		return ""
	}
	plain := s.Affine.A.IsInt() && s.Affine.A.Num().IsInt64() && s.Affine.A.Num().Int64() == 1 && s.Affine.B.Sign() == 0
	text := "raw"
	if !plain {
		text = "raw * " + unit.FormatExact(s.Affine.A)
		switch s.Affine.B.Sign() {
		case 1:
			text += " + " + unit.FormatExact(s.Affine.B)
		case -1:
			text += " - " + strings.TrimPrefix(unit.FormatExact(s.Affine.B), "-")
		}
	}
	if s.Curve != nil {
		text = s.Curve.Name + "(" + text + " " + s.Curve.From.Symbol + ")"
	}
	if plain && s.Curve == nil && s.Unit.Symbol == "" {
		return ""
	}
	return strings.TrimSpace(text + " " + s.Unit.Symbol)
}

func (id ID) describe() string {
	digits := 3
	if id.Extended {
		digits = 8
	}
	var open []string
	for _, f := range id.Fields {
		if f.Open {
			open = append(open, f.Name)
		}
	}
	text := fmt.Sprintf("0x%0*X", digits, id.Send)
	if len(open) > 0 {
		text += " (any " + strings.Join(open, ", ") + ")"
	}
	return text
}

func (m *Message) describeSize() string {
	text := fmt.Sprintf("%d bytes", m.Size)
	if m.Size == 1 {
		text = "1 byte"
	}
	if m.AtLeast {
		text = "at least " + text
	}
	if m.FD {
		text = "FD, " + text
	}
	return text
}

// List writes a line for each message: identifier, name, bus, length, senders
// and period.
func (n *Network) List(w io.Writer) error {
	var b strings.Builder
	var rows [][5]string
	var wide [5]int
	for _, m := range n.Messages {
		senders := strings.Join(ecuNames(m.Senders), ", ")
		if m.AnySender {
			senders = "any"
		}
		row := [5]string{m.ID.describe(), m.Name, m.Bus.Name, m.describeSize(), senders}
		if m.Timing.Period > 0 {
			row[4] += fmt.Sprintf(" every %s", m.Timing.Period)
		}
		rows = append(rows, row)
		for i, c := range row {
			wide[i] = max(wide[i], len(c))
		}
	}
	for _, r := range rows {
		fmt.Fprintf(&b, "%-*s  %-*s  %-*s  %-*s  %s\n", wide[0], r[0], wide[1], r[1], wide[2], r[2], wide[3], r[3], r[4])
	}
	_, err := io.WriteString(w, b.String())
	return err
}
