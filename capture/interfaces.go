package capture

import "encoding/binary"

// interfaces numbers interface names in the order of their appearance.
type interfaces struct {
	names []string
	index map[string]uint16

	// short finds most names of up to 15 bytes by their bytes in two words; a
	// name whose slot is taken isn't in it.
	short [64]shortName
}

type shortName struct {
	word0, word1 uint64 // the name's bytes, first byte lightest; 0: no entry
	bus          uint16
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
	if len(name) < 16 {
		var text [16]byte
		copy(text[:], name)
		w0, w1 := binary.LittleEndian.Uint64(text[:]), binary.LittleEndian.Uint64(text[8:])
		if s := &t.short[slot(w0^w1)]; s.word0 == 0 {
			*s = shortName{w0, w1, n}
		}
	}
	return n, true
}

// slot hashes a name's words.
func slot(words uint64) uint64 { return words * 0x9E3779B97F4A7C15 >> 58 }
