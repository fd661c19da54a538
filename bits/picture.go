package bits

import (
	"fmt"
	"strings"
)

// Picture draws the bytes that a place touches, a row a byte: H is the
// heaviest bit, L the lightest, o one between. The ends of an illegal run are
// drawn too, as far as they exist.
func Picture(p Place) string {
	marks := map[Bit]byte{}
	if p.Check() == nil {
		all := p.Bits()
		for _, b := range all {
			marks[b] = 'o'
		}
		marks[all[0]], marks[all[len(all)-1]] = 'H', 'L'
		if len(all) == 1 {
			marks[all[0]] = 'H'
		}
	} else {
		for _, r := range p.Runs {
			marks[r.Heavy], marks[r.Light] = 'H', 'L'
		}
	}
	low, high := MaxByte, 0
	for b := range marks {
		low, high = min(low, max(0, b.Byte)), max(high, min(MaxByte, b.Byte))
	}
	var out strings.Builder
	out.WriteString("byte | 7 6 5 4 3 2 1 0  bit\n")
	for row := low; row <= high; row++ {
		fmt.Fprintf(&out, "%4d |", row)
		for bit := 7; bit >= 0; bit-- {
			m, ok := marks[Bit{row, bit}]
			if !ok {
				m = '.'
			}
			fmt.Fprintf(&out, " %c", m)
		}
		out.WriteByte('\n')
	}
	return out.String()
}
