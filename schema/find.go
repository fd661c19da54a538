package schema

import (
	"strconv"
	"strings"
)

// CountSignals is the number of signals of all messages.
func (n *Network) CountSignals() int {
	count := 0
	for _, m := range n.Messages {
		count += len(m.Signals)
	}
	return count
}

// FindMessages returns the messages of a name (one for each bus it is on), or
// those that an identifier such as 0x1A0 belongs to.
func (n *Network) FindMessages(name string) []*Message {
	var out []*Message
	digits, isID := strings.CutPrefix(name, "0x")
	id, err := strconv.ParseUint(digits, 16, 32)
	isID = isID && err == nil
	for _, m := range n.Messages {
		if m.Name == name || (isID && m.ID.Extended == (len(digits) > 3) && m.ID.Matches(uint32(id))) {
			out = append(out, m)
		}
	}
	return out
}

// Matches reports whether a received identifier belongs to the family.
func (id ID) Matches(received uint32) bool { return received&id.Mask == id.Value }

// Signal returns the message's signal of a path, nil if there is none.
func (m *Message) Signal(path string) *Signal {
	for _, s := range m.Signals {
		if s.Name == path {
			return s
		}
	}
	return nil
}
