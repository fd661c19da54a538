package decode

// lookup finds the message of an identifier on one bus.
type lookup struct {
	standard [1 << 11]*Message
	// extended is an open-addressing table of exact 29-bit identifiers; its
	// length is a power of two, at most a quarter full.
	extended []slot
	exact    []*Message // for extended, until finish
	patterns []*Message // identifiers with bits that don't matter
}

type slot struct {
	id      uint32
	message *Message
}

func newLookup() *lookup { return &lookup{} }

func (l *lookup) add(m *Message) {
	id := m.Model.ID
	full := uint32(1<<11 - 1)
	if id.Extended {
		full = 1<<29 - 1
	}
	switch {
	case id.Mask != full && id.Extended:
		l.patterns = append(l.patterns, m)
	case id.Extended:
		l.exact = append(l.exact, m)
	default:
		// Every identifier of the family: there are at most 2048.
		for v := range uint32(len(l.standard)) {
			if id.Matches(v) {
				l.standard[v] = m
			}
		}
	}
}

func (l *lookup) finish() {
	size := 16
	for size < 4*len(l.exact) {
		size *= 2
	}
	l.extended = make([]slot, size)
	for _, m := range l.exact {
		id := m.Model.ID.Value
		at := hash(id) & uint32(size-1)
		for l.extended[at].message != nil {
			at = (at + 1) & uint32(size-1)
		}
		l.extended[at] = slot{id, m}
	}
}

func hash(id uint32) uint32 { return id * 0x9E3779B1 >> 8 }

// find returns nil for an identifier that nothing describes.
func (l *lookup) find(id uint32, extended bool) *Message {
	if !extended {
		return l.standard[id&(1<<11-1)]
	}
	size := uint32(len(l.extended))
	for at := hash(id) & (size - 1); ; at = (at + 1) & (size - 1) {
		s := &l.extended[at]
		if s.message == nil {
			break
		}
		if s.id == id {
			return s.message
		}
	}
	for _, m := range l.patterns {
		if m.Model.ID.Matches(id) {
			return m
		}
	}
	return nil
}
