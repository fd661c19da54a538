package schema

import (
	"fmt"
	"math"
	"strings"

	"busloom/codegen/ident"
	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// checkIDs refuses two messages of one bus that one identifier belongs to.
// Messages with the same mask are bucketed by value, so that only pairs of
// masks are compared, not pairs of messages.
func (c *compiler) checkIDs() {
	type family struct {
		bus      *Bus
		extended bool
	}
	type group struct {
		mask     uint32
		messages []*Message
	}
	groups := map[family][]*group{}
	var order []family
	unsound := map[string]bool{}
	for _, d := range c.messages {
		if !d.sound {
			unsound[d.msg.Name] = true
		}
	}
	for _, m := range c.net.Messages {
		if m.Bus == nil || unsound[m.Name] {
			continue
		}
		f := family{m.Bus, m.ID.Extended}
		var g *group
		for _, have := range groups[f] {
			if have.mask == m.ID.Mask {
				g = have
			}
		}
		if g == nil {
			g = &group{mask: m.ID.Mask}
			if len(groups[f]) == 0 {
				order = append(order, f)
			}
			groups[f] = append(groups[f], g)
		}
		g.messages = append(g.messages, m)
	}
	for _, f := range order {
		for i, a := range groups[f] {
			for _, b := range groups[f][i:] {
				common := a.mask & b.mask
				taken := make(map[uint32]*Message, len(a.messages))
				if a != b {
					for _, m := range a.messages {
						if taken[m.ID.Value&common] == nil {
							taken[m.ID.Value&common] = m
						}
					}
				}
				for _, m := range b.messages {
					key := m.ID.Value & common
					if first := taken[key]; first != nil {
						c.idClash(first, m)
					} else if a == b {
						taken[key] = m
					}
				}
			}
		}
	}
}

func (c *compiler) idClash(a, b *Message) {
	if b.Span.Less(a.Span) && a.Relayed == nil {
		a, b = b, a
	}
	// The lowest identifier that belongs to both.
	both := a.ID.Value | b.ID.Value
	digits := 3
	if b.ID.Extended {
		digits = 8
	}
	as := b.Name
	if b.Relayed != nil {
		as += " (relayed)"
	}
	c.report(diag.IDClash, b.Span, fmt.Sprintf("on the bus %s the identifier 0x%0*X belongs to %s and to %s", b.Bus.Name, digits, both, a.Name, as), "give one of the two another identifier").
		Also(a.Span, a.Name+" is here")
}

// checkLoad warns of buses whose cyclic messages alone, at their longest, need
// more than the bit rate.
func (c *compiler) checkLoad() {
	load := map[*Bus]float64{}
	count := map[*Bus]int{}
	for _, m := range c.net.Messages {
		if m.Bus == nil || m.Timing.Period == 0 || m.Bus.BitRate == 0 {
			continue
		}
		load[m.Bus] += frameTime(m) / m.Timing.Period.Seconds()
		count[m.Bus]++
	}
	for _, b := range c.net.Buses {
		if load[b] > 1 {
			c.report(diag.BusOverbooked, b.Span, fmt.Sprintf("the %s of %s need %.1f %% of its bit rate, counting frames at their longest", counted(count[b], "cyclic message"), b.Name, math.Ceil(load[b]*1000)/10),
				"send less often, or move messages to another bus")
		}
	}
}

// frameTime is how long a frame occupies its bus at most, in seconds, with the
// pause that follows it.
//
// Classic frames: Davis, Burns, Bril, Lukkien, "Controller Area Network (CAN)
// schedulability analysis", Real-Time Systems 35 (2007), section 3.1: 55 + 10 s
// bits with 11-bit identifiers, 80 + 10 s with 29-bit ones. FD frames: Bosch,
// "CAN with Flexible Data-Rate" 1.0 (2012), with the stuff count of ISO
// 11898-1:2015 10.4.2.6; the data rate holds from the bit after BRS to the bit
// before the CRC delimiter.
func frameTime(m *Message) float64 {
	rate := float64(m.Bus.BitRate)
	if !m.FD {
		bits := 55 + 10*m.Size
		if m.ID.Extended {
			bits = 80 + 10*m.Size
		}
		return float64(bits) / rate
	}
	head, slow := 22, 17 // up to DLC; of it up to BRS
	if m.ID.Extended {
		head, slow = 41, 36
	}
	crc := 28 // stuff count, CRC, fixed stuff bits, delimiter
	if m.Size > 16 {
		crc = 33
	}
	stuffed := func(n int) int { return n + (n-1)/4 }
	slowBits := stuffed(slow) + 1 + 12 // delimiter; acknowledgement, end, pause
	all := stuffed(head+8*m.Size) + crc + 12
	return float64(slowBits)/rate + float64(all-slowBits)/float64(m.Bus.FDRate)
}

// checkGenerated refuses names that become one identifier in generated code.
func (c *compiler) checkGenerated() {
	types := newIdentSet(c)
	for _, src := range c.order {
		for _, decl := range src.tree.Decls {
			switch d := decl.(type) {
			case *syntax.MessageDecl:
				if c.own(src, nsMessage, d.Name) != nil {
					types.add(identUse{kind: "the message ", name: d.Name.Text, span: d.Name.Span})
				}
			case *syntax.TableDecl:
				if d.States && c.own(src, nsTable, d.Name) != nil {
					types.add(identUse{kind: "the states ", name: d.Name.Text, span: d.Name.Span})
				}
			}
		}
	}
	tables := map[*table]bool{}
	for _, d := range c.messages {
		fields := newIdentSet(c)
		for _, m := range d.members {
			fields.add(identUse{name: m.path, span: m.tree.Name.Span, via: m.via})
			if m.table != nil && !tables[m.table] {
				tables[m.table] = true
				c.checkWords(m.table)
			}
		}
	}
}

func (c *compiler) checkWords(t *table) {
	words := newIdentSet(c)
	for _, e := range t.entries {
		if e.name != "" {
			words.add(identUse{name: e.name, span: e.tree.Name.Span})
		}
	}
}

// identSet holds the identifiers of one place of generated code.
type identSet struct {
	c     *compiler
	taken map[string]identUse
}

type identUse struct {
	kind, name string // kind begins the description, "" where all are alike
	span       diag.Span
	via        *via // what brought a member of a shape
}

// spanBeside is where a use is told of in a clash with another one: a member
// that a shape brings at its group, unless both come from one use of it.
func (u identUse) spanBeside(other identUse) diag.Span {
	if u.via == nil || u.via == other.via {
		return u.span
	}
	if u.via.group != nil {
		return u.via.group.Name.Span
	}
	return u.via.span
}

func newIdentSet(c *compiler) *identSet {
	return &identSet{c: c, taken: map[string]identUse{}}
}

// add takes a name, and reports an earlier one that becomes the same.
func (s *identSet) add(u identUse) {
	for _, id := range []string{ident.Go(u.name), ident.C(u.name)} {
		first, ok := s.taken[id]
		if !ok {
			s.taken[id] = u
			continue
		}
		span := u.spanBeside(first)
		if first.kind == u.kind && strings.EqualFold(first.name, u.name) {
			s.c.report(diag.NameCaseClash, span, fmt.Sprintf("%s differs from %s in letter case only", u.name, first.name), "rename one of the two").
				Also(first.spanBeside(u), "the other one")
			return
		}
		s.c.report(diag.GeneratedClash, span, fmt.Sprintf("%s%s and %s%s both become %s in generated code", first.kind, first.name, u.kind, u.name, id), "rename one of the two").
			Also(first.spanBeside(u), first.name+" is here")
		return
	}
}
