package schema

import (
	"fmt"
	"strings"

	"busloom/bits"
	"busloom/diag"
)

// checkLayout refuses members on the same bits, unless their conditions
// exclude each other, and unused bits that are used. Pairs are looked for only
// where sets of bits meet, so it costs little in a message without mistakes.
func (c *compiler) checkLayout(d *draft) {
	c.layoutBlock(d, d.root)
	c.checkUnused(d)
	if d.msg != nil {
		c.noteUnusedBits(d)
	}
}

// layoutBlock looks at every pair of members whose innermost common block is
// b. Members of two branches of one selection exclude each other anyway.
func (c *compiler) layoutBlock(d *draft, b *block) {
	var own bits.Set
	for i, m := range b.members {
		if !m.placed {
			continue
		}
		if _, hit := own.Overlap(m.sig.Place); hit {
			for _, other := range b.members[:i] {
				c.overlap(d, other, m)
			}
		}
		own.Add(m.sig.Place)
	}
	subtrees := make([][]*member, len(b.selects))
	for i, s := range b.selects {
		if s.broken {
			continue // who excludes whom isn't known
		}
		subtrees[i] = membersOf(s, nil)
		for _, m := range subtrees[i] {
			if !m.placed {
				continue
			}
			if _, hit := own.Overlap(m.sig.Place); hit {
				for _, other := range b.members {
					c.overlap(d, other, m)
				}
			}
		}
	}
	for i := range subtrees {
		if len(subtrees[i]) == 0 || i == len(subtrees)-1 {
			continue
		}
		var first bits.Set
		for _, m := range subtrees[i] {
			if m.placed {
				first.Add(m.sig.Place)
			}
		}
		for _, later := range subtrees[i+1:] {
			c.sisters(d, subtrees[i], &first, later)
		}
	}
	for _, s := range b.selects {
		if s.broken {
			continue
		}
		for _, inner := range s.blocks() {
			c.layoutBlock(d, inner)
		}
	}
}

// sisters looks at the pairs of two selections of one block; set has the bits
// of the first one. Whole branches that exclude each other are left out
// before their members are compared.
func (c *compiler) sisters(d *draft, first []*member, set *bits.Set, second []*member) {
	for _, y := range byBlock(second) {
		hit := false
		for _, m := range y {
			if m.placed && !hit {
				_, hit = set.Overlap(m.sig.Place)
			}
		}
		if !hit {
			continue
		}
		for _, x := range byBlock(first) {
			if exclusive(x[0].block.conditions(), y[0].block.conditions()) {
				continue
			}
			for _, a := range x {
				for _, b := range y {
					c.overlap(d, a, b)
				}
			}
		}
	}
}

// byBlock cuts a list of members into those of one block each.
func byBlock(members []*member) [][]*member {
	var out [][]*member
	for i, m := range members {
		if i == 0 || m.block != members[i-1].block {
			out = append(out, nil)
		}
		out[len(out)-1] = append(out[len(out)-1], m)
	}
	return out
}

// membersOf lists the members of a selection, nested ones included.
func membersOf(s *selection, list []*member) []*member {
	if s.broken {
		return list
	}
	for _, b := range s.blocks() {
		list = append(list, b.members...)
		for _, inner := range b.selects {
			list = membersOf(inner, list)
		}
	}
	return list
}

// overlap reports two members that share a bit and may be there together.
func (c *compiler) overlap(d *draft, a, b *member) {
	if !a.placed || !b.placed || a == b {
		return
	}
	var set bits.Set
	set.Add(a.sig.Place)
	at, hit := set.Overlap(b.sig.Place)
	if !hit || exclusive(a.block.conditions(), b.block.conditions()) {
		return
	}
	if b.order < a.order {
		a, b = b, a
	}
	if a.via != nil && b.via != nil && a.via.group != nil && a.via.group == b.via.group && a.via.index != b.via.index {
		g := a.via.group
		span := g.Origin.Span
		if g.Step != nil {
			span = g.Step.Span
		}
		c.report(diag.ShapePlacement, span, fmt.Sprintf("%s and %s share bit %s", a.path, b.path, at), "let the step be as long as the shape")
		return
	}
	spanOf := func(m, other *member) diag.Span {
		// Within one use of a shape its own text is at fault, otherwise the use.
		if m.via != nil && m.via != other.via {
			return m.via.span
		}
		return m.tree.Place.Span
	}
	c.report(diag.Overlap, spanOf(b, a), fmt.Sprintf("%s (%s) and %s (%s) share bit %s", a.path, a.sig.Place, b.path, b.sig.Place, at), "move one of them, or put them into different branches of one selection").
		Also(spanOf(a, b), a.path+" is here")
}

// checkUnused refuses unused runs that members use at the same time.
func (c *compiler) checkUnused(d *draft) {
	var all bits.Set
	for _, m := range d.members {
		if m.placed {
			all.Add(m.sig.Place)
		}
	}
	var visit func(b *block)
	visit = func(b *block) {
		for _, u := range b.unused {
			if d.msg != nil {
				d.msg.Unused = append(d.msg.Unused, u.place)
			}
			if _, hit := all.Overlap(u.place); !hit {
				continue
			}
			var set bits.Set
			set.Add(u.place)
			for _, m := range d.members {
				if !m.placed || m.block.brokenWay() || b.brokenWay() {
					continue
				}
				if at, hit := set.Overlap(m.sig.Place); hit && !exclusive(b.conditions(), m.block.conditions()) {
					span := m.tree.Place.Span
					if m.via != nil {
						span = m.via.span
					}
					c.report(diag.UnusedOverlap, u.span, fmt.Sprintf("bit %s is called unused, but %s uses it", at, m.path), "shorten the unused run").
						Also(span, m.path+" is here")
					break
				}
			}
		}
		for _, s := range b.selects {
			for _, inner := range s.blocks() {
				visit(inner)
			}
		}
	}
	visit(d.root)
}

// noteUnusedBits names the bits that nothing describes, once for a message.
func (c *compiler) noteUnusedBits(d *draft) {
	if d.size <= 0 || d.lost || d.src.damaged {
		return
	}
	var used bits.Set
	for _, m := range d.members {
		if !m.placed {
			return // its bits aren't known
		}
		used.Add(m.sig.Place)
	}
	for _, p := range d.msg.Unused {
		used.Add(p)
	}
	runs := used.Missing(d.size)
	if len(runs) == 0 {
		return
	}
	texts := make([]string, len(runs))
	for i, r := range runs {
		texts[i] = r.String()
	}
	count := 0
	for _, r := range runs {
		count += r.Width()
	}
	verb := "are"
	if count == 1 {
		verb = "is"
	}
	c.report(diag.UnusedBits, d.head, fmt.Sprintf("%s of %s %s described by nothing: %s", counted(count, "bit"), d.msg.Name, verb, listed(texts)),
		"write unused "+strings.Join(texts, ", "))
}
