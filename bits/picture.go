package bits

import (
	"fmt"
	"strings"
)

// Picture draws the bytes that a place touches, a row a byte: H is the
// heaviest bit, L the lightest, o one between, and beside each row which bits
// of the value it holds (0 the lightest). Of an illegal place it draws what
// exists: X is a bit taken twice, and ends outside any payload stand below.
// Every line ends with a newline.
func Picture(p Place) string {
	var d drawing
	if p.Check() == nil {
		d.legal(p)
	} else {
		d.illegal(p)
	}
	return d.String()
}

// drawing is one mark for every bit of a payload, 0 for none.
type drawing struct {
	marks [MaxByte + 1][8]byte
	// holds is, for each byte, the bits of the value in it.
	holds [MaxByte + 1][]string
	notes []string
}

func (d *drawing) legal(p Place) {
	all := p.Bits()
	for _, b := range all {
		d.mark(b, 'o')
	}
	d.mark(all[len(all)-1], 'L')
	d.mark(all[0], 'H')
	left := len(all)
	for _, r := range p.Runs {
		for b := r.Heavy.Byte; ; b += r.step() {
			_, width := r.part(b)
			span := fmt.Sprintf("value bit %d", left-1)
			if width > 1 {
				span = fmt.Sprintf("value bits %d..%d", left-1, left-width)
			}
			d.holds[b] = append(d.holds[b], span)
			left -= width
			if b == r.Light.Byte {
				break
			}
		}
	}
}

func (d *drawing) illegal(p Place) {
	for _, r := range p.Runs {
		if r.Check() == nil {
			for _, b := range (Place{Runs: []Run{r}}).Bits() {
				if d.marks[b.Byte][b.Bit] != 0 {
					d.mark(b, 'X')
				} else {
					d.mark(b, 'o')
				}
			}
		}
		d.end(r.Heavy, 'H')
		d.end(r.Light, 'L')
	}
}

// end marks an end of a run of an illegal place. A bit taken twice keeps its X.
func (d *drawing) end(b Bit, as byte) {
	switch {
	case b.Byte < 0 || b.Byte > MaxByte || b.Bit < 0 || b.Bit > 7:
		d.notes = append(d.notes, fmt.Sprintf("%c would be %s, outside", as, b))
	case d.marks[b.Byte][b.Bit] != 'X' && d.marks[b.Byte][b.Bit] != 'H':
		d.mark(b, as)
	}
}

func (d *drawing) mark(b Bit, as byte) { d.marks[b.Byte][b.Bit] = as }

func (d *drawing) String() string {
	var out strings.Builder
	out.WriteString("byte | 7 6 5 4 3 2 1 0\n")
	last := -1
	for row, marks := range d.marks {
		if marks == [8]byte{} {
			continue
		}
		if last >= 0 && row > last+1 {
			out.WriteString("  .. |\n")
		}
		last = row
		fmt.Fprintf(&out, "%4d |", row)
		for bit := 7; bit >= 0; bit-- {
			m := marks[bit]
			if m == 0 {
				m = '.'
			}
			fmt.Fprintf(&out, " %c", m)
		}
		if len(d.holds[row]) > 0 {
			fmt.Fprintf(&out, " | %s", strings.Join(d.holds[row], ", "))
		}
		out.WriteByte('\n')
	}
	for _, n := range d.notes {
		out.WriteString("       " + n + "\n")
	}
	return out.String()
}
