package bits

import (
	"fmt"
	"strings"
)

// MaxByte is the last byte that a payload can have.
const MaxByte = 63

// PlaceError says why a place can't be.
type PlaceError struct {
	Run     Run
	Problem string
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
		return &PlaceError{r, fmt.Sprintf("within one byte a run goes from its heaviest bit down, and bit %d is lighter than bit %d", r.Heavy.Bit, r.Light.Bit)}
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

// Width is the number of bits.
func (r Run) Width() int {
	if r.Heavy.Byte == r.Light.Byte {
		return r.Heavy.Bit - r.Light.Bit + 1
	}
	between := r.Light.Byte - r.Heavy.Byte
	if between < 0 {
		between = -between
	}
	return r.Heavy.Bit + 1 + 8*(between-1) + 8 - r.Light.Bit
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
	out := make([]Bit, 0, p.Width())
	for _, r := range p.Runs {
		step := 1
		if r.Light.Byte < r.Heavy.Byte {
			step = -1
		}
		for at := r.Heavy; ; {
			out = append(out, at)
			if at == r.Light {
				break
			}
			if at.Bit--; at.Bit < 0 {
				at = Bit{at.Byte + step, 7}
			}
		}
	}
	return out
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
