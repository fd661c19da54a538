package heron

import "math"

// sent is one record on its way: waiting for its bus, then for its turn in the
// log.
type sent struct {
	ready    int64  // ns since the start: in its sender's buffer
	at       int64  // ns since the start: received, as the log has it
	priority uint32 // what arbitration compares; the lower wins
	id       uint32
	bus      uint8
	kind     recordKind
	fd       bool
	extended bool
	size     uint8
	from     *message // nil for single records and copies
	data     [24]byte
}

type recordKind uint8

const (
	dataRecord recordKind = iota
	remoteRecord
	errorRecord
)

// sender is a message's run time.
type sender struct {
	*message
	base    int64 // us: nominal time of the next sending
	count   uint64
	last    int64  // us: last release
	lastKey uint64 // the key at the last release
}

// lone is a record outside the cyclic messages.
type lone struct {
	at     int64 // us
	stray  *stray
	ask    *ask // the request; its answer is scheduled when it is sent
	answer bool
}

// network runs the vehicle and its buses.
type network struct {
	vehicle  *vehicle
	random   random // of the senders' jitter; what happens doesn't depend on it
	senders  []sender
	next     []int64 // us: each sender's next release
	lones    []lone
	nextLone int64 // us: the earliest of lones
	cycle    int64 // us: when keys are looked at next
	waiting  [busCount][]sent
	earlier  [busCount]int64 // ns: the earliest ready of those waiting
	free     [busCount]int64 // ns
	done     []sent          // on the log's way, by time
}

const never = math.MaxInt64

func newNetwork(c *script) *network {
	n := &network{vehicle: newVehicle(c), random: newRandom(c.seed ^ 0xB05), cycle: cycleMicros}
	for i, m := range messages(c) {
		// Spread over the period, as units that woke at different times.
		base := int64(i+1) * 7919 % m.period
		n.senders = append(n.senders, sender{message: m, base: base, count: uint64(i * 5), last: -never / 2})
		n.next = append(n.next, base)
	}
	for b := range n.earlier {
		n.earlier[b] = never
	}
	late := func() int64 { return n.random.below(900) }
	for i := range c.stray {
		n.lones = append(n.lones, lone{at: c.stray[i].at + late(), stray: &c.stray[i]})
	}
	for i := range c.asks {
		n.lones = append(n.lones, lone{at: c.asks[i].at + late(), ask: &c.asks[i]})
	}
	n.soonestLone()
	return n
}

// run emits the records in the order of the log until emit says stop or the
// time is over.
func (n *network) run(until int64, emit func(*sent) bool) {
	for {
		release, who := n.cycle, -1
		for i, t := range n.next {
			if t < release {
				release, who = t, i
			}
		}
		if n.nextLone < release {
			release, who = n.nextLone, -2
		}
		start, bus := n.soonestStart()
		// Every later record ends after both.
		if !n.flush(min(start, release*1000), emit) {
			return
		}
		if start < release*1000 {
			n.transmit(bus, start)
			continue
		}
		if release >= until {
			n.flush(until*1000, emit)
			return
		}
		n.vehicle.advance(release)
		switch who {
		case -1:
			n.lookAtKeys()
		case -2:
			n.releaseLone()
		default:
			n.release(who, release)
		}
	}
}

// lookAtKeys sends at once what changed, as soon as its gap allows.
func (n *network) lookAtKeys() {
	now := n.cycle
	n.cycle += cycleMicros
	for i := range n.senders {
		s := &n.senders[i]
		if s.key == nil || s.count == 0 || s.key(n.vehicle) == s.lastKey {
			continue
		}
		at := max(now, s.last+s.gap) + 100 + n.random.below(400)
		if at < n.next[i] {
			n.next[i], s.base = at, at
		}
	}
}

// release puts one sender's frame on its bus's waiting list.
func (n *network) release(i int, now int64) {
	s := &n.senders[i]
	f := sent{
		ready: now * 1000, id: s.id, bus: uint8(s.bus), fd: s.fd, extended: s.extended,
		size: uint8(s.size), from: s.message,
	}
	f.priority = arbitration(f.id, f.extended)
	s.fill(n.vehicle, f.data[:s.size], s.count)
	s.count++
	s.last = now
	if s.key != nil {
		s.lastKey = s.key(n.vehicle)
	}
	n.enqueue(&f)
	// The sender's cycle is late by up to 150 us, sometimes by more.
	s.base += s.period
	late := n.random.below(150)
	if n.random.below(50) == 0 {
		late += n.random.below(600)
	}
	n.next[i] = s.base + late
}

func (n *network) enqueue(f *sent) {
	n.waiting[f.bus] = append(n.waiting[f.bus], *f)
	n.earlier[f.bus] = min(n.earlier[f.bus], f.ready)
}

// arbitration orders identifiers as the wire does: an 11-bit identifier wins
// against a 29-bit one that starts with the same 11 bits.
func arbitration(id uint32, extended bool) uint32 {
	if extended {
		return id>>18<<19 | 1<<18 | id&0x3FFFF
	}
	return id << 19
}

func (n *network) soonestStart() (start int64, bus int) {
	start = never
	for b := range n.waiting {
		if n.earlier[b] == never {
			continue
		}
		if at := max(n.earlier[b], n.free[b]); at < start {
			start, bus = at, b
		}
	}
	return start, bus
}

// transmit lets the frames that are ready at the time fight for the bus.
func (n *network) transmit(bus int, start int64) {
	list := n.waiting[bus]
	best := -1
	for i := range list {
		if list[i].ready <= start && (best < 0 || list[i].priority < list[best].priority) {
			best = i
		}
	}
	f := list[best]
	list[best] = list[len(list)-1]
	list = list[:len(list)-1]
	n.waiting[bus] = list
	n.earlier[bus] = never
	for i := range list {
		n.earlier[bus] = min(n.earlier[bus], list[i].ready)
	}
	length, pause := wireTime(&f)
	f.at = start + length
	n.free[bus] = f.at + pause
	if f.from != nil {
		for _, c := range f.from.copies {
			g := f
			g.bus, g.id, g.from = uint8(c.bus), c.id, nil
			g.priority = arbitration(g.id, false)
			g.ready = f.at + 180_000 + n.random.below(250)*1000
			n.enqueue(&g)
		}
	}
	// A short list, nearly in order already.
	n.done = append(n.done, f)
	for i := len(n.done) - 1; i > 0 && n.done[i].at < n.done[i-1].at; i-- {
		n.done[i], n.done[i-1] = n.done[i-1], n.done[i]
	}
}

// bitNanos is the time of one bit on each bus.
var bitNanos = [busCount]int64{chassis: 2000, powertrain: 2000, body: 8000}

const fastBitNanos = 500 // of the data phase

// wireTime is how long a record takes until it is received, and the pause
// until the next may start, in ns. Stuff bits are reckoned with one in twelve,
// common in real traffic.
func wireTime(f *sent) (length, pause int64) {
	bit := bitNanos[f.bus]
	pause = 3 * bit
	data := 8 * int64(f.size)
	switch {
	case f.kind == errorRecord:
		return 60 * bit, 11 * bit
	case f.fd:
		crc := int64(17)
		if f.size > 16 {
			crc = 21
		}
		fast := 5 + data + 4 + crc + 6 + (data+crc)/12
		return 30*bit + fast*fastBitNanos, pause
	case f.extended:
		return (64 + data + (54+data)/12) * bit, pause
	}
	return (44 + data + (34+data)/12) * bit, pause
}

// flush emits the records that no later one can come before.
func (n *network) flush(before int64, emit func(*sent) bool) bool {
	i := 0
	for ; i < len(n.done) && n.done[i].at < before; i++ {
		if !emit(&n.done[i]) {
			return false
		}
	}
	if i > 0 {
		n.done = n.done[:copy(n.done, n.done[i:])]
	}
	return true
}

func (n *network) soonestLone() {
	n.nextLone = never
	for i := range n.lones {
		n.nextLone = min(n.nextLone, n.lones[i].at)
	}
}

// releaseLone sends the earliest of the single records.
func (n *network) releaseLone() {
	i := 0
	for n.lones[i].at != n.nextLone {
		i++
	}
	s := &n.lones[i]
	f := sent{ready: s.at * 1000, bus: powertrain, size: 8}
	switch {
	case s.answer:
		f.id = 0x7E8
		d := answer(n.vehicle, *s.ask)
		copy(f.data[:], d[:])
		s.at = never
	case s.ask != nil:
		f.id = 0x7E0
		d := request(*s.ask)
		copy(f.data[:], d[:])
		s.answer, s.at = true, s.at+9000+n.random.below(8000)
	default:
		n.stray(s, &f)
	}
	f.priority = arbitration(f.id, f.extended)
	if f.kind == errorRecord {
		f.priority = 0
	}
	n.enqueue(&f)
	n.soonestLone()
}

func (n *network) stray(s *lone, f *sent) {
	f.bus = uint8(s.stray.bus)
	switch s.stray.kind {
	case strayError:
		// Linux error classes: protocol violation and bus error; a stuff error
		// in the data field.
		f.kind, f.id = errorRecord, 0x088
		f.data = [24]byte{2: 0x04, 3: 0x0A}
	case strayRemote:
		f.kind, f.id = remoteRecord, 0x2D0
		f.size = 8
	case strayRequest:
		f.id = 0x7DF
		f.data = [24]byte{2, 0x01, 0x00, 0x55, 0x55, 0x55, 0x55, 0x55}
	case fleetOrder:
		f.id, f.extended = 0x18EF274A, true
		d := order()
		copy(f.data[:], d[:])
	}
	s.at = never
	if n.vehicle.repeat > 0 {
		s.at = f.ready/1000 + n.vehicle.repeat
	}
}
