package capture

// interfaces numbers interface names in the order of their appearance.
type interfaces struct {
	names []string
	index map[string]uint16

	// short finds names of up to 7 bytes by their bytes in a word.
	short [64]shortName
}

type shortName struct {
	word uint64 // the name's bytes, first byte lightest; 0: no entry
	bus  uint16
}

func newInterfaces() *interfaces { return &interfaces{index: map[string]uint16{}} }

// maxInterfaces bounds what a damaged capture can make of it.
const maxInterfaces = 4096

// number returns the number of a name; ok is false if there are too many.
func (t *interfaces) number(name []byte) (uint16, bool) {
	if n, ok := t.index[string(name)]; ok {
		return n, true
	}
	if len(t.names) == maxInterfaces {
		return 0, false
	}
	n := uint16(len(t.names))
	t.names = append(t.names, string(name))
	t.index[string(name)] = n
	if len(name) < 8 {
		var word uint64
		for i, b := range name {
			word |= uint64(b) << (8 * i)
		}
		if s := &t.short[slot(word)]; s.word == 0 {
			*s = shortName{word, n}
		}
	}
	return n, true
}

// slot hashes a name's word.
func slot(word uint64) uint64 { return word * 0x9E3779B97F4A7C15 >> 58 }
