package bits

// Set is a set of bits of one payload; the zero Set is empty.
type Set struct {
	bytes [MaxByte + 1]byte
}

// Add puts the bits of a legal place in.
func (s *Set) Add(p Place) {
	for _, b := range p.Bits() {
		s.bytes[b.Byte] |= 1 << b.Bit
	}
}

// Overlap returns the first bit of p (heaviest first) that is in the set.
func (s *Set) Overlap(p Place) (Bit, bool) {
	for _, b := range p.Bits() {
		if s.bytes[b.Byte]>>b.Bit&1 != 0 {
			return b, true
		}
	}
	return Bit{}, false
}

// Has reports whether the bit is in the set.
func (s *Set) Has(b Bit) bool { return s.bytes[b.Byte]>>b.Bit&1 != 0 }

// Missing lists the bits of a payload of size bytes that aren't in the set, as
// runs within the text's order: whole stretches, heavy byte first.
func (s *Set) Missing(size int) []Run {
	var out []Run
	open := false
	for at := (Bit{0, 7}); at.Byte < size; {
		if s.Has(at) {
			open = false
		} else if open {
			out[len(out)-1].Light = at
		} else {
			out = append(out, Run{at, at})
			open = true
		}
		if at.Bit--; at.Bit < 0 {
			at = Bit{at.Byte + 1, 7}
		}
	}
	return out
}
