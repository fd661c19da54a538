package schema

import (
	"fmt"
	"math/big"
	"slices"

	"busloom/bits"
	"busloom/crc"
	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// checkProtection lowers counters and checksums.
func (c *compiler) checkProtection(d *draft) {
	first := map[Kind]*member{}
	for _, m := range d.members {
		kind := m.sig.Kind
		if kind != Counter && kind != Checksum || m.tree.Kind == nil {
			continue
		}
		word := "counter"
		if kind == Checksum {
			word = "checksum"
		}
		if m.block != d.root {
			m.broken = true
			c.report(diag.ChecksumNotAlways, m.tree.Kind.Span, fmt.Sprintf("the %s %s is only there when a selection brings it", word, m.path), "move it out of the selection: protection holds for every frame")
			continue
		}
		if other := first[kind]; other != nil {
			m.broken = true
			span := m.tree.Kind.Span
			if m.via != nil {
				span = m.via.span
			}
			c.report(diag.TwoCounters, span, fmt.Sprintf("%s is a second %s: %s is one already", m.path, word, other.path), "keep one, and read the other as a number").
				Also(other.tree.Name.Span, "the first one")
			continue
		}
		first[kind] = m
	}
	for _, m := range d.members {
		if m.sig.Kind == Counter && m.placed && !m.broken && !c.checkCounter(m) {
			m.broken = true
		}
	}
	for _, m := range d.members {
		if m.sig.Kind == Checksum && m.placed && !m.broken && !c.checkChecksum(d, m) {
			m.broken = true
		}
	}
}

// checkCounter lowers a counter's rule.
func (c *compiler) checkCounter(m *member) bool {
	s, k := m.sig, m.tree.Kind
	rule := &CounterRule{Step: 1}
	for _, f := range []struct {
		what   string
		number *syntax.Number
		to     *uint64
	}{{"lowest value", k.Low, &rule.Low}, {"highest value", k.High, &rule.High}, {"step", k.Step, &rule.Step},
		{"number of lost steps", k.AllowLost, &rule.AllowLost}, {"number of repeats", k.AllowRepeated, &rule.AllowRepeated}} {
		if f.number == nil {
			continue
		}
		v, ok := whole(*f.number)
		if !ok || v > onesOf(s.Width) {
			c.report(diag.CounterUnfit, f.number.Span, fmt.Sprintf("the %s of %s is %s, but it has %s: 0 to %d", f.what, s.Name, f.number.Raw, counted(s.Width, "bit"), onesOf(s.Width)), "write a whole number that fits")
			return false
		}
		*f.to = v
	}
	if k.Low == nil || k.High == nil {
		return false
	}
	span := k.Low.Span.To(k.High.Span)
	switch {
	case rule.Low >= rule.High:
		c.report(diag.CounterUnfit, span, fmt.Sprintf("a counter from %d to %d has nowhere to count", rule.Low, rule.High), "write the lower value first")
		return false
	case rule.Step == 0:
		c.report(diag.CounterUnfit, k.Step.Span, "a counter with the step 0 stands still", "write how much it grows from frame to frame")
		return false
	case (rule.High-rule.Low)%rule.Step != 0:
		c.report(diag.CounterUnfit, k.Step.Span, fmt.Sprintf("in steps of %d from %d the counter never is %d", rule.Step, rule.Low, rule.High), fmt.Sprintf("end it at %d", rule.High-(rule.High-rule.Low)%rule.Step))
		return false
	}
	steps := (rule.High - rule.Low) / rule.Step
	if rule.AllowLost >= steps {
		c.report(diag.CounterUnfit, k.AllowLost.Span, fmt.Sprintf("a counter of %d values can't tell %d lost steps from others", steps+1, rule.AllowLost), "allow fewer")
		return false
	}
	s.Counter = rule
	if i := m.tree.Initial; i != nil {
		if i.Name != nil {
			return c.initialName(m, i.Name)
		}
		v := i.Quantity.Value()
		if i.Quantity.Unit != nil || !v.IsInt() || v.Cmp(ratOf(rule.Low)) < 0 || v.Cmp(ratOf(rule.High)) > 0 || (v.Num().Uint64()-rule.Low)%rule.Step != 0 {
			c.report(diag.BadInitial, i.Quantity.Span, fmt.Sprintf("%s never counts to %s", s.Name, i.Quantity.Span.Text()), "write a value that it counts to")
			return false
		}
		raw := v.Num().Uint64()
		s.Initial = &raw
	}
	return true
}

func ratOf(v uint64) *big.Rat { return new(big.Rat).SetInt(new(big.Int).SetUint64(v)) }

// checkChecksum lowers a checksum to CRC parameters and what is run through.
func (c *compiler) checkChecksum(d *draft, m *member) bool {
	method := m.tree.Kind.Method
	if method == nil {
		return false
	}
	if method.E2E {
		return c.checkE2E(d, m, method)
	}
	if len(method.Name.Steps) == 0 {
		return false
	}
	rule := &ChecksumRule{}
	name := pathText(method.Name)
	width := 8
	switch params, ok := crc.Named(name); {
	case ok:
		rule.CRC, rule.Method, width = &params, name, params.Width
	case isBuiltinMethod(name):
		rule.Method = name
	default:
		params := c.declaredCRC(m.src, method.Name)
		if params == nil {
			return false
		}
		rule.CRC, rule.Method, width = params, params.Name, params.Width
	}
	if m.sig.Width != width {
		c.report(diag.ChecksumWidth, m.tree.Place.Span, fmt.Sprintf("%s has %s, %s gives %d", m.path, counted(m.sig.Width, "bit"), name, width), "correct the place or the method")
		return false
	}
	good := true
	for i := range method.Feeds {
		feed, ok := c.feed(d, m, &method.Feeds[i])
		good = good && ok
		rule.Feed = append(rule.Feed, feed)
	}
	m.sig.Checksum = rule
	return good
}

// isBuiltinMethod reports whether the language has the method itself.
func isBuiltinMethod(name string) bool {
	_, ok := crc.Named(name)
	return ok || name == "xor8" || name == "sum8"
}

// declaredCRC finds a method that a description declares.
func (c *compiler) declaredCRC(src *source, p syntax.Path) *crc.Params {
	prefix, name := "", p.Steps[len(p.Steps)-1].Name
	if len(p.Steps) == 2 {
		prefix = p.Steps[0].Name.Text
	}
	if sym := c.visible(src, nsCRC, prefix, name.Text); sym != nil {
		return sym.crc
	}
	if c.damaged {
		return nil
	}
	known := append(crc.Names(), "xor8", "sum8")
	known = append(known, c.visibleNames(src, nsCRC, prefix)...)
	remedy := "write one of " + listed(known) + ", or declare a crc"
	if near := c.nearest(name.Text, known); near != "" {
		remedy = "did you mean " + near + "?"
	}
	c.report(diag.UnknownMethod, p.Span, fmt.Sprintf("there is no checksum method %s", pathText(p)), remedy)
	return nil
}

// feed lowers one item that a checksum runs over.
func (c *compiler) feed(d *draft, m *member, f *syntax.FeedRef) (Feed, bool) {
	if f.Const != nil {
		v, ok := wholeBelow(*f.Const, 256)
		if !ok {
			c.report(diag.ChecksumRange, f.Span, fmt.Sprintf("a constant in a checksum is one byte, and %s is none", f.Const.Raw), "write 0 to 0xFF, and longer constants byte by byte")
			return Feed{}, false
		}
		return Feed{Kind: FeedConst, Byte: byte(v)}, true
	}
	if f.First == nil {
		return Feed{}, false
	}
	size := d.size - m.shift // of what the numbers count in
	if d.size < 0 {
		return Feed{}, false
	}
	out := Feed{Kind: FeedBytes}
	first, ok := wholeBelow(*f.First, mostSize)
	last := first
	switch {
	case f.End && d.atLeast:
		last = uint64(max(size, int(first)+1) - 1)
	case f.End:
		last = uint64(max(size-1, 0))
	case f.Last != nil:
		var okLast bool
		last, okLast = wholeBelow(*f.Last, mostSize)
		ok = ok && okLast
	}
	if !ok || int(last) >= size || int(first) >= size {
		c.report(diag.ChecksumRange, f.Span, fmt.Sprintf("%s goes beyond %s, which has %s", f.Span.Text(), d.what, describeBytes(size)), "name bytes that are there")
		return Feed{}, false
	}
	if first > last {
		c.report(diag.ChecksumRange, f.Span, fmt.Sprintf("%s is upside down", f.Span.Text()), "write the lower byte first")
		return Feed{}, false
	}
	out.First, out.Last = int(first)+m.shift, int(last)+m.shift
	for _, b := range m.sig.Place.Bits() {
		if b.Byte >= out.First && b.Byte <= out.Last {
			c.report(diag.ChecksumSelf, f.Span, fmt.Sprintf("%s covers byte %d, where the checksum %s itself is", f.Span.Text(), b.Byte, m.path), "leave that byte out").
				Also(m.tree.Place.Span, "the checksum")
			return Feed{}, false
		}
	}
	if f.End && d.atLeast {
		out.Last = -1
	}
	return out, true
}

// e2e are the profiles of AUTOSAR "E2E Protocol Specification" (document 849).
type e2e struct {
	crc      crc.Params
	counter  uint64 // highest value; the lowest is 0
	ids      int    // how many data ids
	highest  uint64 // of a data id
	idPhrase string
}

// The CRC of profile 1 starts with 0 and ends without a final xor, though it
// is named after SAE J1850: the two cancel in its library call.
var profiles = map[uint64]e2e{
	1: {crc.Params{Name: "e2e_1", Width: 8, Poly: 0x1D}, 14, 1, 0xFFFF, "one data id of 16 bits"},
	2: {crc.Params{Name: "crc8_h2f", Width: 8, Poly: 0x2F, Init: 0xFF, XorOut: 0xFF}, 15, 16, 0xFF, "16 data ids of a byte each"},
	5: {crc.Params{Name: "crc16_ccitt_false", Width: 16, Poly: 0x1021, Init: 0xFFFF}, 255, 1, 0xFFFF, "one data id of 16 bits"},
}

// checkE2E lowers an end-to-end profile and proves that the message has the
// layout that it demands.
func (c *compiler) checkE2E(d *draft, m *member, t *syntax.MethodRef) bool {
	number, ok := whole(t.Profile)
	profile, known := profiles[number]
	if !ok || !known {
		c.report(diag.UnknownMethod, t.Profile.Span, fmt.Sprintf("there is no e2e profile %s here", t.Profile.Raw), "write profile 1, 2 or 5")
		return false
	}
	bad := func(span diag.Span, problem, remedy string) bool {
		c.report(diag.ProfileLayout, span, problem, remedy)
		return false
	}
	name := fmt.Sprintf("profile %d", number)
	mode := t.Mode.Text
	if number == 1 {
		name += " " + mode
		if !slices.Contains([]string{"both", "alternating", "low", "nibble"}, mode) {
			return bad(t.Profile.Span, "profile 1 has four modes, and the text doesn't say which", "write both, alternating, low or nibble behind it")
		}
	} else if mode != "" {
		return bad(t.Mode.Span, fmt.Sprintf("%s has no modes", name), "remove "+mode)
	}
	ids, ok := c.dataIDs(t, profile, name)
	if !ok {
		return false
	}
	counter, ok := c.e2eCounter(d, m, t)
	if !ok {
		return false
	}
	if d.size < 0 {
		return false
	}
	if d.relative || m.inShape {
		return bad(t.Span, fmt.Sprintf("%s protects a whole message, not a shape", name), "write the checksum in the message")
	}
	if d.atLeast {
		return bad(t.Span, fmt.Sprintf("%s needs a fixed length, and %s has none", name, d.what), "remove at least")
	}
	if !c.e2eLayout(d, m, counter, number, profile, name) {
		return false
	}
	if number == 1 && mode == "nibble" && !c.e2eNibble(d, t, ids[0]) {
		return false
	}
	params := profile.crc
	rule := &ChecksumRule{Method: fmt.Sprintf("e2e_%d", number), CRC: &params}
	at := m.sig.Place.LastByte() - params.Width/8 + 1
	var payload []Feed
	if at > 0 {
		payload = append(payload, Feed{Kind: FeedBytes, First: 0, Last: at - 1})
	}
	if after := at + params.Width/8; after < d.size {
		payload = append(payload, Feed{Kind: FeedBytes, First: after, Last: d.size - 1})
	}
	constant := func(b uint64) Feed { return Feed{Kind: FeedConst, Byte: byte(b)} }
	low, high := ids[0], ids[0]>>8
	switch number {
	case 1:
		rule.Method += "_" + mode
		switch mode {
		case "both":
			rule.Feed = []Feed{constant(low), constant(high)}
		case "low":
			rule.Feed = []Feed{constant(low)}
		case "nibble":
			rule.Feed = []Feed{constant(low), constant(0)}
		case "alternating":
			rule.Feed = []Feed{{Kind: FeedByCounter, Table: []byte{byte(low), byte(high)}}}
			rule.Counter = counter.sig
		}
		rule.Feed = append(rule.Feed, payload...)
	case 2:
		table := make([]byte, len(ids))
		for i, id := range ids {
			table[i] = byte(id)
		}
		rule.Counter = counter.sig
		rule.Feed = append(payload, Feed{Kind: FeedByCounter, Table: table})
	case 5:
		rule.Feed = append(payload, constant(low), constant(high))
	}
	m.sig.Checksum = rule
	return true
}

// dataIDs reads the data ids of a profile.
func (c *compiler) dataIDs(t *syntax.MethodRef, profile e2e, name string) ([]uint64, bool) {
	span := t.Span
	if len(t.IDs) > 0 {
		span = t.IDs[0].Span.To(t.IDs[len(t.IDs)-1].Span)
	}
	if len(t.IDs) != profile.ids {
		c.report(diag.ProfileLayout, span, fmt.Sprintf("%s takes %s, not %d", name, profile.idPhrase, len(t.IDs)), "correct the numbers behind id")
		return nil, false
	}
	var ids []uint64
	for _, n := range t.IDs {
		v, ok := whole(n)
		if !ok || v > profile.highest {
			c.report(diag.ProfileLayout, n.Span, fmt.Sprintf("%s takes %s, and %s is none", name, profile.idPhrase, n.Raw), fmt.Sprintf("write 0 to 0x%X", profile.highest))
			return nil, false
		}
		ids = append(ids, v)
	}
	return ids, true
}

func (c *compiler) e2eCounter(d *draft, m *member, t *syntax.MethodRef) (*member, bool) {
	if t.Counter == nil || len(t.Counter.Steps) == 0 {
		c.report(diag.CounterMissing, t.Span, "the profile needs a counter", "write , counter and the name of one")
		return nil, false
	}
	k := d.byPath[m.prefix+pathText(*t.Counter)]
	switch {
	case k == nil && (c.damaged || d.lost):
		return nil, false
	case k == nil:
		var names []string
		for _, other := range d.members {
			if other.sig.Kind == Counter {
				names = append(names, other.path)
			}
		}
		remedy := "declare it: a member at a place, counter 0..14"
		if len(names) > 0 {
			remedy = "write " + names[0]
		}
		c.report(diag.CounterMissing, t.Counter.Span, fmt.Sprintf("%s has no counter %s", d.what, pathText(*t.Counter)), remedy)
		return nil, false
	case k.sig.Kind != Counter:
		c.report(diag.CounterMissing, t.Counter.Span, fmt.Sprintf("%s is no counter", k.path), "give it the clause counter").Also(k.tree.Name.Span, "declared here")
		return nil, false
	case k.broken:
		return nil, false
	}
	return k, true
}

// e2eLayout proves where the profile wants checksum and counter.
func (c *compiler) e2eLayout(d *draft, m, counter *member, number uint64, profile e2e, name string) bool {
	bad := func(span diag.Span, problem, remedy string) bool {
		c.report(diag.ProfileLayout, span, problem, remedy)
		return false
	}
	place, count := m.sig.Place, counter.sig
	counterSpan := counter.tree.Place.Span
	wantWidth := profile.crc.Width
	if m.sig.Width != wantWidth {
		c.report(diag.ChecksumWidth, m.tree.Place.Span, fmt.Sprintf("%s has %s, %s has a checksum of %d", m.path, counted(m.sig.Width, "bit"), name, wantWidth), "correct the place")
		return false
	}
	if r := count.Counter; r.Low != 0 || r.High != profile.counter || r.Step != 1 {
		return bad(counter.tree.Kind.Span, fmt.Sprintf("the counter of %s runs 0..%d in steps of 1, %s runs %d..%d in steps of %d", name, profile.counter, counter.path, r.Low, r.High, r.Step),
			fmt.Sprintf("write counter 0..%d", profile.counter))
	}
	aligned := func(p bits.Place, unit int) bool {
		return len(p.Runs) == 1 && p.Runs[0].Heavy.Byte == p.Runs[0].Light.Byte && p.Runs[0].Light.Bit%unit == 0 && p.Width() == unit
	}
	switch number {
	case 1:
		if !aligned(place, 8) {
			return bad(m.tree.Place.Span, fmt.Sprintf("the checksum of %s is one whole byte", name), "begin it at a bit 7")
		}
		if !aligned(count.Place, 4) {
			return bad(counterSpan, fmt.Sprintf("the counter of %s is one half of a byte, %s isn't", name, counter.path), "place it at n.3..n.0 or n.7..n.4")
		}
	case 2:
		if place.String() != "0.7..0.0" {
			return bad(m.tree.Place.Span, "the checksum of profile 2 is the first byte", "place it at 0.7..0.0")
		}
		if count.Place.String() != "1.3..1.0" {
			return bad(counterSpan, fmt.Sprintf("the counter of profile 2 is the light half of the second byte, %s isn't", counter.path), "place it at 1.3..1.0")
		}
	case 5:
		first := place.LastByte() - 1
		if want := fmt.Sprintf("%d.7..%d.0", first+1, first); place.String() != want {
			return bad(m.tree.Place.Span, "the checksum of profile 5 is two whole bytes, the light one first", "place it at "+want)
		}
		if want := fmt.Sprintf("%d.7..%d.0", first+2, first+2); count.Place.String() != want {
			return bad(counterSpan, fmt.Sprintf("the counter of profile 5 is the byte behind the checksum, %s isn't", counter.path), "place it at "+want)
		}
	}
	return true
}

// e2eNibble looks for the member that sends the heavy part of the data id.
func (c *compiler) e2eNibble(d *draft, t *syntax.MethodRef, id uint64) bool {
	if id > 0xFFF {
		c.report(diag.ProfileLayout, t.IDs[0].Span, fmt.Sprintf("profile 1 nibble sends 12 bits of the data id, and %s has more", t.IDs[0].Raw), "write 0 to 0xFFF")
		return false
	}
	want := id >> 8
	var near *member
	for _, m := range d.members {
		s := m.sig
		if s.Fixed == nil || s.Width != 4 || m.block != d.root || len(s.Place.Runs) != 1 || s.Place.Runs[0].Light.Bit%4 != 0 {
			continue
		}
		if *s.Fixed == want {
			return true
		}
		near = m
	}
	if c.damaged || d.lost {
		return false
	}
	dg := c.report(diag.ProfileLayout, t.Mode.Span, fmt.Sprintf("profile 1 nibble sends the heavy part of its data id, 0x%X, in half a byte, and no member is always that", want),
		fmt.Sprintf("declare one, such as id_nibble at 1.7..1.4 always 0x%X", want))
	if near != nil {
		dg.Also(near.tree.Name.Span, near.path+" is always another value")
	}
	return false
}
