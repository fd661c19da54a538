package schema

import (
	"fmt"
	"math/big"
	"slices"
	"time"

	"busloom/diag"
	"busloom/frame"
	"busloom/schema/internal/syntax"
	"busloom/unit"
)

// compileMessages compiles each message. Mistakes in one don't hide those of
// the others.
func (c *compiler) compileMessages() {
	eachDecl(c, func(src *source, d *syntax.MessageDecl) {
		sym := c.own(src, nsMessage, d.Name)
		if sym == nil {
			return
		}
		sym.message = c.compileMessage(src, d)
		c.messages = append(c.messages, sym.message)
		c.net.Messages = append(c.net.Messages, sym.message.msg)
	})
}

// compileMessage proves one message: head, body with its shapes expanded,
// what is said of it as a whole.
func (c *compiler) compileMessage(src *source, t *syntax.MessageDecl) *draft {
	msg := &Message{Name: t.Name.Text, Text: t.Text.Value, Span: t.Name.Span, FD: t.FD, AtLeast: t.AtLeast}
	d := &draft{src: src, what: "the message " + t.Name.Text, head: t.Name.Span, size: -1, atLeast: t.AtLeast, msg: msg, sound: true,
		root: &block{}, byPath: map[string]*member{}, groups: map[string]diag.Span{}, lost: src.damaged}
	c.messageHead(d, t)
	c.expandBody(d, t.Body, scope{src: src, size: -1, block: d.root})
	c.checkDraft(d)
	for _, m := range d.members {
		msg.Signals = append(msg.Signals, m.sig)
	}
	c.messageFacts(d)
	return d
}

func (c *compiler) messageHead(d *draft, t *syntax.MessageDecl) {
	msg := d.msg
	if bus := c.resolveName(d.src, nsBus, t.Bus); bus != nil && bus.bus != nil {
		msg.Bus = bus.bus
		if t.FD && bus.bus.FDRate == 0 {
			d.sound = false
			c.report(diag.BusMistake, t.Bus.Span, fmt.Sprintf("%s is an FD message, and %s is a classic bus", msg.Name, bus.name.Text), "give the bus an fd rate, or remove fd from the message").
				Also(bus.name.Span, "the bus")
		}
	} else {
		d.sound = false
	}
	var ok bool
	if msg.ID, ok = c.id(d.src, &t.ID); !ok {
		d.sound = false
	}
	size, ok := wholeBelow(t.Size, 1<<16)
	if !ok || !frame.ValidLen(int(size), t.FD) {
		d.sound = false
		problem, remedy := fmt.Sprintf("a classic frame has 0 to 8 bytes, not %s", t.Size.Raw), "write 0 to 8, or make the message fd"
		if t.FD {
			problem, remedy = fmt.Sprintf("no FD frame has %s bytes", t.Size.Raw), "write 0 to 8, 12, 16, 20, 24, 32, 48 or 64"
		}
		c.report(diag.BadSize, t.Size.Span, problem, remedy)
		return
	}
	msg.Size, d.size = int(size), int(size)
}

// messageFacts checks what is said of the message as a whole.
func (c *compiler) messageFacts(d *draft) {
	f, msg := &d.facts, d.msg
	for _, n := range f.notes {
		msg.Notes = append(msg.Notes, Note{Key: n.Key.Text, Text: n.Text.Value})
	}
	if f.fill != nil {
		msg.Fill, _ = c.fillByte(&f.fill.Value)
	}
	if f.timing != nil {
		c.timing(d, f.timing)
	}
	if f.from == nil {
		if !d.src.damaged {
			c.report(diag.SenderMissing, d.head, fmt.Sprintf("%s has no sender", msg.Name), "write from and the ECU that sends it, or from any")
		}
		return
	}
	c.senders(d, f.from)
}

// senders checks who sends and who listens.
func (c *compiler) senders(d *draft, f *syntax.FromFact) {
	msg := d.msg
	msg.AnySender, msg.OneFitted = f.Any, f.OneFitted
	// Receivers may also be on the buses that the message is relayed to.
	reach := []*Bus{msg.Bus}
	for _, r := range d.facts.relayed {
		if sym := c.visible(d.src, nsBus, "", r.To.Text); sym != nil && sym.bus != nil {
			reach = append(reach, sym.bus)
		}
	}
	sends := map[*ECU]syntax.Name{}
	whole := true
	for _, name := range f.Senders {
		sym := c.resolveName(d.src, nsECU, name)
		if sym == nil || sym.ecu == nil {
			whole = false
			continue
		}
		if _, twice := sends[sym.ecu]; twice {
			c.report(diag.DuplicateName, name.Span, fmt.Sprintf("%s is named twice as a sender", name.Text), "remove one of the two")
			continue
		}
		sends[sym.ecu] = name
		if msg.Bus != nil && !onBus(sym.ecu, msg.Bus) {
			c.report(diag.SenderNotOnBus, name.Span, fmt.Sprintf("%s sends %s, but isn't on the bus %s", name.Text, msg.Name, msg.Bus.Name), fmt.Sprintf("write ecu %s on %s, or correct the sender", name.Text, msg.Bus.Name)).
				Also(sym.name.Span, "declared here")
			whole = false
			continue
		}
		msg.Senders = append(msg.Senders, sym.ecu)
		c.checkSource(d, sym.ecu, name)
	}
	if several := f.Any || (len(f.Senders) > 1 && !f.OneFitted); several && d.sound && whole && !msg.ID.open() {
		who := "any ECU"
		span := f.Span
		if !f.Any {
			who, span = fmt.Sprintf("%d ECUs", len(f.Senders)), f.Senders[0].Span.To(f.Senders[len(f.Senders)-1].Span)
		}
		c.report(diag.NeedsOpenID, span, fmt.Sprintf("%s may send %s, but its identifier is fixed: two of them at once would spoil each other's frames", who, msg.Name),
			"use an id form with an open field, or join the senders by or if only one of them is fitted")
	}
	seen := map[*ECU]bool{}
	for _, name := range f.Receivers {
		sym := c.resolveName(d.src, nsECU, name)
		if sym == nil || sym.ecu == nil {
			continue
		}
		if seen[sym.ecu] {
			c.report(diag.DuplicateName, name.Span, fmt.Sprintf("%s is named twice as a receiver", name.Text), "remove one of the two")
			continue
		}
		seen[sym.ecu] = true
		if _, own := sends[sym.ecu]; own && len(f.Senders) == 1 {
			c.report(diag.SenderListens, name.Span, fmt.Sprintf("%s sends %s and is named as its receiver", name.Text, msg.Name), "remove it from the receivers")
		}
		there := false
		for _, b := range reach {
			there = there || b != nil && onBus(sym.ecu, b)
		}
		if !there && msg.Bus != nil {
			c.report(diag.ReceiverNotOnBus, name.Span, fmt.Sprintf("%s is to receive %s, but is on none of the buses that carry it", name.Text, msg.Name), fmt.Sprintf("write ecu %s on %s, or relay the message", name.Text, msg.Bus.Name)).
				Also(sym.name.Span, "declared here")
			continue
		}
		// Receivers on a relay's bus only are that copy's, see relayMessages.
		msg.Receivers = append(msg.Receivers, sym.ecu)
	}
	if len(f.Receivers) == 0 {
		c.report(diag.NobodyListens, f.Span, fmt.Sprintf("nobody is named to receive %s", msg.Name), "write to and its receivers")
	}
}

// checkSource holds a fixed source field of the identifier against the
// sender's source address.
func (c *compiler) checkSource(d *draft, e *ECU, name syntax.Name) {
	if e.Source == nil || !d.msg.ID.Extended {
		return
	}
	for _, f := range d.msg.ID.Fields {
		if f.Name == "source" && !f.Open && f.Width == 8 && f.Value != uint32(*e.Source) {
			c.report(diag.BadIDFields, name.Span, fmt.Sprintf("%s has the source address 0x%02X, the identifier of %s says 0x%02X", e.Name, *e.Source, d.msg.Name, f.Value), "leave the field open, or correct one of the two").
				Also(e.Span, "declared here")
		}
	}
}

// seconds is the unit that times are converted to.
var seconds = unit.Unit{Symbol: "s", Dim: "s", Factor: big.NewRat(1, 1)}

// longest is the longest time that a description can state.
const longest = 24 * time.Hour

func (c *compiler) duration(src *source, q *syntax.Quantity, what string) (time.Duration, bool) {
	if q == nil || q.Number.Value == nil {
		return 0, false
	}
	v, ok := c.quantity(src, *q, seconds, false, what)
	if !ok {
		return 0, false
	}
	ns := new(big.Rat).Mul(v, big.NewRat(int64(time.Second), 1))
	if !ns.IsInt() || ns.Sign() <= 0 || ns.Cmp(big.NewRat(int64(longest), 1)) > 0 {
		c.report(diag.TimingMistake, q.Span, fmt.Sprintf("%s can't be %s: times are whole nanoseconds, more than 0 and at most a day", what, q.Span.Text()), "write it such as 10 ms")
		return 0, false
	}
	return time.Duration(ns.Num().Int64()), true
}

// timing checks when the message is sent.
func (c *compiler) timing(d *draft, f *syntax.TimingFact) {
	t := &d.msg.Timing
	t.OnChange, t.OnRequest = f.OnChange, f.OnRequest
	ok := true
	for _, p := range []struct {
		q    *syntax.Quantity
		what string
		to   *time.Duration
	}{{f.Every, "the period", &t.Period}, {f.Gap, "the least distance", &t.Gap}, {f.Lost, "the time after which it is lost", &t.LostAfter}} {
		if p.q == nil {
			continue
		}
		v, good := c.duration(d.src, p.q, p.what)
		ok = ok && good
		*p.to = v
	}
	if !ok {
		return
	}
	bad := func(q *syntax.Quantity, problem, remedy string) {
		c.report(diag.TimingMistake, q.Span, problem, remedy)
	}
	switch {
	case t.LostAfter > 0 && t.Period == 0:
		bad(f.Lost, fmt.Sprintf("%s isn't sent periodically, so its absence means nothing", d.msg.Name), "state a period, or remove lost after")
	case t.LostAfter > 0 && t.LostAfter <= t.Period:
		bad(f.Lost, fmt.Sprintf("%s would be lost after %s, but comes every %s only", d.msg.Name, f.Lost.Span.Text(), f.Every.Span.Text()), "write several periods")
	case t.Gap > 0 && t.Period > 0 && t.Gap > t.Period:
		bad(f.Gap, fmt.Sprintf("%s comes every %s, which is less than the least distance of %s", d.msg.Name, f.Every.Span.Text(), f.Gap.Span.Text()), "write a shorter distance")
	}
}

// relayMessages adds a copy of each relayed message for every further bus.
func (c *compiler) relayMessages() {
	var out []*Message
	for _, d := range c.messages {
		out = append(out, d.msg)
		taken := map[*Bus]bool{}
		all := slices.Clone(d.msg.Receivers)
		for _, f := range d.facts.relayed {
			copied := c.relay(d, f, all, taken)
			if copied != nil {
				out = append(out, copied)
			}
		}
		if len(taken) > 0 {
			d.msg.Receivers = slices.DeleteFunc(all, func(e *ECU) bool { return !onBus(e, d.msg.Bus) })
		}
	}
	c.net.Messages = out
}

func (c *compiler) relay(d *draft, f *syntax.RelayedFact, receivers []*ECU, taken map[*Bus]bool) *Message {
	by, to := c.resolveName(d.src, nsECU, f.By), c.resolveName(d.src, nsBus, f.To)
	if by == nil || by.ecu == nil || to == nil || to.bus == nil || d.msg.Bus == nil {
		return nil
	}
	bad := func(span diag.Span, problem, remedy string) *diag.Diagnostic {
		return c.report(diag.RelayMistake, span, problem, remedy)
	}
	switch {
	case to.bus == d.msg.Bus:
		bad(f.To.Span, fmt.Sprintf("%s is on %s already", d.msg.Name, f.To.Text), "relay it to another bus")
		return nil
	case taken[to.bus]:
		bad(f.To.Span, fmt.Sprintf("%s is relayed to %s twice", d.msg.Name, f.To.Text), "remove one of the two")
		return nil
	case !onBus(by.ecu, d.msg.Bus):
		bad(f.By.Span, fmt.Sprintf("%s isn't on %s, where %s comes from", f.By.Text, d.msg.Bus.Name, d.msg.Name), "name an ECU that is on both buses").Also(by.name.Span, "declared here")
		return nil
	case !onBus(by.ecu, to.bus):
		bad(f.By.Span, fmt.Sprintf("%s isn't on %s, where %s is to go", f.By.Text, f.To.Text, d.msg.Name), "name an ECU that is on both buses").Also(by.name.Span, "declared here")
		return nil
	case d.msg.FD && to.bus.FDRate == 0:
		bad(f.To.Span, fmt.Sprintf("%s is an FD message, and %s is a classic bus", d.msg.Name, f.To.Text), "relay it to an FD bus").Also(to.name.Span, "the bus")
		return nil
	}
	taken[to.bus] = true
	copied := *d.msg
	copied.Bus, copied.AnySender, copied.OneFitted = to.bus, false, false
	copied.Senders, copied.Receivers = []*ECU{by.ecu}, nil
	for _, e := range receivers {
		if onBus(e, to.bus) && !onBus(e, d.msg.Bus) {
			copied.Receivers = append(copied.Receivers, e)
		}
	}
	copied.Relayed = &Relay{By: by.ecu, From: d.msg}
	copied.Span = f.To.Span
	if f.As != nil {
		id, ok := c.id(d.src, f.As)
		if !ok {
			return nil
		}
		copied.ID = id
	}
	return &copied
}
