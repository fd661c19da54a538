package heron

// message is one sender's message: when it goes out and what is in it.
type message struct {
	bus      int
	id       uint32
	extended bool
	fd       bool
	size     int
	period   int64 // us
	gap      int64 // us between sendings on change
	// fill writes the payload; d is size zero bytes, n counts the sendings.
	fill func(v *vehicle, d []byte, n uint64)
	// key changes when the message must go out at once; nil for purely cyclic ones.
	key func(v *vehicle) uint64
	// copies are sent on by the gateway.
	copies []relay
}

type relay struct {
	bus int
	id  uint32
}

const ms = 1000

// cyclic is a classic message with an 11-bit identifier.
func cyclic(bus int, id uint32, size int, period int64, fill func(*vehicle, []byte, uint64)) *message {
	return &message{bus: bus, id: id, size: size, period: period, fill: fill}
}

func (m *message) asFD() *message { m.fd = true; return m }

func (m *message) wide() *message { m.extended = true; return m }

func (m *message) onChange(gap int64, key func(*vehicle) uint64) *message {
	m.gap, m.key = gap, key
	return m
}

func (m *message) relayed(to int, as uint32) *message {
	m.copies = append(m.copies, relay{to, as})
	return m
}

// messages are all that a vehicle's units send of their own accord.
func messages(c *script) []*message {
	all := chassisMessages()
	all = append(all, powertrainMessages()...)
	return append(all, bodyMessages(c)...)
}
