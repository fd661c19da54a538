package bits

// Set is a set of the bits of one payload of up to 64 bytes; the zero Set is
// empty, and an assignment copies it.
type Set struct {
	bytes [MaxByte + 1]byte
}

// Add puts the bits of a legal place in.
func (s *Set) Add(p Place) {
	for _, b := range p.Bits() {
		s.bytes[b.Byte] |= 1 << b.Bit
	}
}

// Has reports whether the bit is in the set.
func (s *Set) Has(b Bit) bool { return s.bytes[b.Byte]>>b.Bit&1 != 0 }

// Overlap returns the first bit of a legal place, heaviest first, that is in
// the set.
func (s *Set) Overlap(p Place) (Bit, bool) {
	for _, b := range p.Bits() {
		if s.Has(b) {
			return b, true
		}
	}
	return Bit{}, false
}

// Missing lists the bits of a payload of up to 64 bytes that aren't in the
// set, from byte 0 bit 7 on, as the longest runs, heavy byte first.
func (s *Set) Missing(size int) []Run {
	var out []Run
	open := false
	for at := (Bit{0, 7}); at.Byte < size; {
		switch {
		case s.Has(at):
			open = false
		case open:
			out[len(out)-1].Light = at
		default:
			out = append(out, Run{at, at})
			open = true
		}
		if at.Bit--; at.Bit < 0 {
			at = Bit{at.Byte + 1, 7}
		}
	}
	return out
}
