package bits

import (
	"fmt"
	"strings"
)

// MaxByte is the last byte that a payload can have.
const MaxByte = 63

// PlaceError says why a place can't be.
type PlaceError struct {
	Run     Run    // the run at fault; of two that meet, the later
	Problem string // for the user, without position
}

func (e *PlaceError) Error() string { return e.Problem }

// Check proves that the run's ends exist and aren't upside down. Runs over
// several bytes may end at any bit: the order of the two bytes says which way
// they go.
func (r Run) Check() error {
	for _, b := range []Bit{r.Heavy, r.Light} {
		if b.Bit < 0 || b.Bit > 7 {
			return &PlaceError{r, fmt.Sprintf("a byte has the bits 7 to 0, so %s can't be", b)}
		}
		if b.Byte < 0 || b.Byte > MaxByte {
			return &PlaceError{r, fmt.Sprintf("a payload has at most the bytes 0 to %d, so %s can't be", MaxByte, b)}
		}
	}
	if r.Heavy.Byte == r.Light.Byte && r.Heavy.Bit < r.Light.Bit {
		return &PlaceError{r, fmt.Sprintf("within one byte a run goes down from its heaviest bit: write %s", Run{r.Light, r.Heavy})}
	}
	return nil
}

// Check proves each run, and that no bit is taken twice.
func (p Place) Check() error {
	if len(p.Runs) == 0 {
		return &PlaceError{Run{}, "a place needs at least one run"}
	}
	var seen Set
	for _, r := range p.Runs {
		if err := r.Check(); err != nil {
			return err
		}
		one := Place{Runs: []Run{r}}
		if at, twice := seen.Overlap(one); twice {
			return &PlaceError{r, fmt.Sprintf("bit %s is in it twice", at)}
		}
		seen.Add(one)
	}
	return nil
}

// Width is the number of bits; below 1 for a run upside down within its byte.
func (r Run) Width() int {
	between := r.Light.Byte - r.Heavy.Byte
	if between < 0 {
		between = -between
	}
	return 8*between + r.Heavy.Bit - r.Light.Bit + 1
}

// Width is the number of bits.
func (p Place) Width() int {
	n := 0
	for _, r := range p.Runs {
		n += r.Width()
	}
	return n
}

// Bits lists the bits of a legal place, heaviest first.
func (p Place) Bits() []Bit {
	out := make([]Bit, 0, max(0, p.Width()))
	for _, r := range p.Runs {
		at := r.Heavy
		for range r.Width() {
			out = append(out, at)
			if at.Bit--; at.Bit < 0 {
				at = Bit{at.Byte + r.step(), 7}
			}
		}
	}
	return out
}

// step is from a byte of the run to the next lighter one.
func (r Run) step() int {
	if r.Light.Byte < r.Heavy.Byte {
		return -1
	}
	return 1
}

// part is the run's share of one of its bytes: the lightest bit and how many.
func (r Run) part(inByte int) (light, width int) {
	heavy := 7
	if inByte == r.Heavy.Byte {
		heavy = r.Heavy.Bit
	}
	if inByte == r.Light.Byte {
		light = r.Light.Bit
	}
	return light, heavy - light + 1
}

// String is the form of the language, such as 0.7..1.0.
func (r Run) String() string {
	if r.Heavy == r.Light {
		return r.Heavy.String()
	}
	return r.Heavy.String() + ".." + r.Light.String()
}

// String is the form of the language, such as 0.1..0.0 then 4.7..4.0.
func (p Place) String() string {
	parts := make([]string, len(p.Runs))
	for i, r := range p.Runs {
		parts[i] = r.String()
	}
	return strings.Join(parts, " then ")
}

// Shift moves a place by whole bytes.
func (p Place) Shift(bytes int) Place {
	out := Place{Runs: make([]Run, len(p.Runs))}
	for i, r := range p.Runs {
		r.Heavy.Byte += bytes
		r.Light.Byte += bytes
		out.Runs[i] = r
	}
	return out
}

// LastByte is the highest byte that the place touches.
func (p Place) LastByte() int {
	last := 0
	for _, r := range p.Runs {
		last = max(last, r.Heavy.Byte, r.Light.Byte)
	}
	return last
}

// WholeBytes reports whether every run starts at a bit 7 and ends at a bit 0.
func (p Place) WholeBytes() bool {
	for _, r := range p.Runs {
		if r.Heavy.Bit != 7 || r.Light.Bit != 0 {
			return false
		}
	}
	return true
}
