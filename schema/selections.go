package schema

import (
	"fmt"
	"slices"
	"sort"
	"strings"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// checkSelections resolves selectors, refuses rings and absent selectors,
// reads the choices and builds the model's tree.
func (c *compiler) checkSelections(d *draft) {
	all := selectionsIn(d.root, nil)
	for _, s := range all {
		c.findSelector(d, s)
	}
	for _, s := range all {
		c.findRing(d, s, nil)
	}
	for _, s := range all {
		if s.broken || s.selector == nil {
			continue
		}
		c.readChoices(s)
	}
	for _, s := range all {
		if !s.broken {
			c.checkPresence(s)
		}
	}
	if d.msg != nil {
		for _, m := range d.members {
			m.sig.When = m.block.conditions()
		}
		for _, s := range d.root.selects {
			if sel := s.build(); sel != nil {
				d.msg.Selects = append(d.msg.Selects, sel)
			}
		}
	}
}

// selectionsIn lists the selections of a block, outer ones first.
func selectionsIn(b *block, list []*selection) []*selection {
	for _, s := range b.selects {
		list = append(list, s)
		for _, inner := range s.blocks() {
			list = selectionsIn(inner, list)
		}
	}
	return list
}

// blocks are the branches with the otherwise branch.
func (s *selection) blocks() []*block {
	if s.els == nil {
		return s.branches
	}
	return append(slices.Clone(s.branches), s.els)
}

// findMember looks a path up where it stands: inside a shape it begins at the
// shape.
func (c *compiler) findMember(d *draft, prefix string, p syntax.Path) *member {
	path := prefix + pathText(p)
	if m := d.byPath[path]; m != nil {
		return m
	}
	if c.damaged || d.lost {
		return nil
	}
	var names []string
	for name := range d.byPath {
		if rest, ok := strings.CutPrefix(name, prefix); ok {
			names = append(names, rest)
		}
	}
	sort.Strings(names)
	remedy := "write the name of a member"
	if near := c.nearest(pathText(p), names); near != "" {
		remedy = "did you mean " + near + "?"
	}
	c.report(diag.UnknownName, p.Span, fmt.Sprintf("%s has no member %s", d.what, path), remedy)
	return nil
}

func (c *compiler) findSelector(d *draft, s *selection) {
	m := c.findMember(d, s.prefix, s.tree.Selector)
	s.selector = m
	if m == nil || m.broken {
		s.broken = true
		return
	}
	kind := m.sig.Kind
	if (kind != Unsigned && kind != States && kind != Flag) || m.sig.Fixed != nil {
		s.broken = true
		problem := fmt.Sprintf("a member of the kind %s can't select", kindPhrase(kind))
		if m.sig.Fixed != nil {
			problem = fmt.Sprintf("%s is always %d, so it has nothing to select", m.path, *m.sig.Fixed)
		}
		c.report(diag.BadSelector, s.tree.Selector.Span, problem, "select by an unsigned number, states or a flag").
			Also(m.tree.Name.Span, "declared here")
	}
}

// findRing follows what a selection depends on: the selections around it and
// those around its selector.
func (c *compiler) findRing(d *draft, s *selection, way []*selection) {
	switch {
	case s.state == evaluated:
		return
	case s.state == evaluating:
		ring := way[slices.Index(way, s):]
		known := false
		for _, r := range ring {
			known = known || r.broken
		}
		if !known {
			problem := fmt.Sprintf("the selection by %s holds what %s depends on", s.selector.path, s.selector.path)
			if len(ring) == 1 {
				problem = fmt.Sprintf("the selector %s is inside its own selection", s.selector.path)
			}
			dg := c.report(diag.SelectorCycle, s.tree.Selector.Span, problem, "move the selector out of the selection")
			dg.Also(s.selector.tree.Name.Span, "the selector")
		}
		for _, r := range ring {
			r.broken = true
		}
		return
	}
	s.state = evaluating
	way = append(way, s)
	if s.outer.of != nil {
		c.findRing(d, s.outer.of, way)
	}
	if s.selector != nil && s.selector.block.of != nil {
		c.findRing(d, s.selector.block.of, way)
	}
	s.state = evaluated
}

// readChoices reads the values of each branch.
func (c *compiler) readChoices(s *selection) {
	sig := s.selector.sig
	type choice struct {
		raw    RawRange
		ref    *syntax.ChoiceRef
		branch int
	}
	var all []choice
	good := true
	for i, b := range s.branches {
		for j := range b.when.Choices {
			ref := &b.when.Choices[j]
			if ref.Name != nil {
				ranges := sig.named(ref.Name.Text)
				if len(ranges) == 0 {
					c.unknownWord(diag.UnknownName, s.selector, *ref.Name)
					good = false
				}
				for _, r := range ranges {
					all = append(all, choice{r, ref, i})
				}
				continue
			}
			if ref.Raws == nil {
				good = false
				continue
			}
			r, code, problem := rawRange(*ref.Raws, sig.Width)
			switch code {
			case "":
				all = append(all, choice{r, ref, i})
				continue
			case diag.CodeTooWide:
				c.report(diag.ChoiceTooWide, ref.Span, fmt.Sprintf("%s can't choose: %s", s.selector.path, problem), "write a value that the selector can have").
					Also(s.selector.tree.Place.Span, "the selector")
			default:
				c.report(code, ref.Span, problem, "write the lower value first")
			}
			good = false
		}
	}
	if !good {
		s.broken = true
		return
	}
	slices.SortStableFunc(all, func(a, b choice) int { return compareRaw(a.raw, b.raw) })
	for i := 1; i < len(all); i++ {
		a, b := all[i-1], all[i]
		if a.raw.High < b.raw.Low {
			continue
		}
		if b.ref.Span.Start < a.ref.Span.Start {
			a, b = b, a
		}
		where := "another branch"
		if a.branch == b.branch {
			where = "the same branch"
		}
		c.report(diag.ChoiceClash, b.ref.Span, fmt.Sprintf("%s of %s is chosen in %s already", b.ref.Span.Text(), s.selector.path, where), "let each value be in one branch, once").
			Also(a.ref.Span, "the other choice")
		s.broken = true
		return
	}
	var values []RawRange
	for _, ch := range all {
		b := s.branches[ch.branch]
		b.values = append(b.values, ch.raw)
		values = append(values, ch.raw)
	}
	exhausted := covered(values, 0, onesOf(sig.Width))
	switch {
	case s.tree.Otherwise == nil && !exhausted && s.src.damaged:
		s.broken = true // the branch may be there
	case s.tree.Otherwise == nil && !exhausted:
		c.report(diag.OtherwiseMissing, s.tree.Word, fmt.Sprintf("nothing is said of %s = %s", s.selector.path, missingText(values, sig.Width)),
			"write otherwise nothing, otherwise unknown, or otherwise with a block")
		s.broken = true
	case s.tree.Otherwise != nil && exhausted:
		c.report(diag.OtherwiseDead, s.tree.Otherwise.Span, fmt.Sprintf("every value of %s has a branch already", s.selector.path), "remove the otherwise")
	}
	if s.els != nil {
		s.els.values = values
	}
}

// missingText is the first values that sorted ranges leave out.
func missingText(values []RawRange, width int) string {
	var parts []string
	next, last := uint64(0), onesOf(width)
	add := func(low, high uint64) { parts = append(parts, describeRange(RawRange{low, high})) }
	done := false
	for _, v := range values {
		if v.Low > next {
			add(next, v.Low-1)
		}
		if v.High == last {
			done = true
			break
		}
		next = v.High + 1
	}
	if !done {
		add(next, last)
	}
	if len(parts) > 4 {
		parts = append(parts[:3], "others")
	}
	return listed(parts)
}

// conditions are the choices that lead to a block, outer ones first. It must
// not be asked of blocks in a ring; those are broken.
func (b *block) conditions() []Choice {
	if b.whenDone || b.of == nil {
		return b.choices
	}
	b.whenDone = true
	if b.of.broken || b.of.selector == nil {
		return nil
	}
	outer := b.of.outer.conditions()
	b.choices = append(slices.Clone(outer), Choice{Selector: b.of.selector.sig, Values: b.values, Not: b.negated})
	return b.choices
}

// brokenWay reports whether a block is reached through a broken selection.
func (b *block) brokenWay() bool {
	for ; b.of != nil; b = b.of.outer {
		if b.of.broken {
			return true
		}
	}
	return false
}

// checkPresence proves that the selector is there whenever the selection is.
func (c *compiler) checkPresence(s *selection) {
	if s.selector.block.brokenWay() || s.outer.brokenWay() {
		s.broken = s.broken || s.selector.block.brokenWay()
		return
	}
	need, have := s.selector.block.conditions(), s.outer.conditions()
	for i, n := range need {
		if i < len(have) && have[i].Selector == n.Selector && have[i].subsetOf(n) {
			continue
		}
		where := "is always there"
		if len(have) > 0 {
			where = "is there " + describeChoices(have)
		}
		c.report(diag.SelectorAbsent, s.tree.Selector.Span, fmt.Sprintf("%s is only there %s, but its selection %s", s.selector.path, describeChoices(need), where), "move the selection into the selector's branch, or the selector out of it").
			Also(s.selector.tree.Name.Span, "the selector")
		s.broken = true
		return
	}
}

// build makes the model's selection; nil if it is broken.
func (s *selection) build() *Select {
	if s.broken {
		return nil
	}
	out := &Select{Selector: s.selector.sig, Span: s.tree.Word, Otherwise: Exhausted}
	for _, b := range s.branches {
		out.Branches = append(out.Branches, *b.build())
	}
	if o := s.tree.Otherwise; o != nil {
		switch {
		case s.els != nil:
			out.Otherwise = OtherwiseBody
			out.Else = s.els.build()
		case o.Word == "unknown":
			out.Otherwise = OtherwiseUnknown
		default:
			out.Otherwise = OtherwiseNothing
		}
		if len(s.branches) > 0 && s.els == nil && covered(s.allValues(), 0, onesOf(s.selector.sig.Width)) {
			out.Otherwise = Exhausted
		}
	}
	return out
}

func (s *selection) allValues() []RawRange {
	var out []RawRange
	for _, b := range s.branches {
		out = append(out, b.values...)
	}
	slices.SortFunc(out, compareRaw)
	return out
}

func (b *block) build() *Branch {
	out := &Branch{}
	if !b.negated {
		out.Values = b.values
	}
	for _, m := range b.members {
		out.Signals = append(out.Signals, m.sig)
	}
	for _, s := range b.selects {
		if sel := s.build(); sel != nil {
			out.Selects = append(out.Selects, sel)
		}
	}
	return out
}

// allows lists the raw values that a choice lets through.
func (ch Choice) allows() []RawRange {
	if !ch.Not {
		return ch.Values
	}
	return complement(ch.Values, onesOf(ch.Selector.Width))
}

// complement is 0..last without sorted ranges.
func complement(values []RawRange, last uint64) []RawRange {
	var out []RawRange
	next := uint64(0)
	for _, v := range values {
		if v.Low > next {
			out = append(out, RawRange{next, v.Low - 1})
		}
		if v.High >= last {
			return out
		}
		next = v.High + 1
	}
	return append(out, RawRange{next, last})
}

// subsetOf reports whether every value that ch lets through passes other.
func (ch Choice) subsetOf(other Choice) bool {
	outer := other.allows()
	for _, r := range ch.allows() {
		if !covered(outer, r.Low, r.High) {
			return false
		}
	}
	return true
}

// disjoint reports whether no value passes both.
func (ch Choice) disjoint(other Choice) bool {
	a, b := ch.allows(), other.allows()
	for i, j := 0, 0; i < len(a) && j < len(b); {
		switch {
		case a[i].High < b[j].Low:
			i++
		case b[j].High < a[i].Low:
			j++
		default:
			return false
		}
	}
	return true
}

// exclusive reports whether two sets of conditions can't hold together: they
// ask different values of one selector.
func exclusive(a, b []Choice) bool {
	for _, x := range a {
		for _, y := range b {
			if x.Selector == y.Selector && x.disjoint(y) {
				return true
			}
		}
	}
	return false
}
