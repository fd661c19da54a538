package schema

import (
	"fmt"
	"sort"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// checkReplaced resolves what deprecated messages and members are replaced by.
func (c *compiler) checkReplaced() {
	next := map[string]string{}
	type link struct {
		from string
		span diag.Span
	}
	var links []link
	for _, d := range c.messages {
		if f := d.facts.replaced; f != nil {
			if to, ok := c.replacement(d, nil, f.Path); ok {
				d.msg.Deprecated = &Deprecation{ReplacedBy: to}
				next[d.msg.Name] = to
				links = append(links, link{d.msg.Name, f.Path.Span})
			}
		}
		for _, m := range d.members {
			if m.tree.Replaced == nil {
				continue
			}
			if to, ok := c.replacement(d, m, *m.tree.Replaced); ok {
				m.sig.Deprecated = &Deprecation{ReplacedBy: to}
				from := d.msg.Name + "." + m.path
				next[from] = to
				links = append(links, link{from, m.tree.Replaced.Span})
			}
		}
	}
	inRing := map[string]bool{}
	for _, l := range links {
		if inRing[l.from] {
			continue
		}
		// Following at most as many steps as there are links finds a ring.
		at := next[l.from]
		for steps := 0; at != l.from && at != "" && steps < len(next); steps++ {
			at = next[at]
		}
		if at != l.from {
			continue
		}
		problem := fmt.Sprintf("%s is replaced by itself", l.from)
		if next[l.from] != l.from {
			problem = fmt.Sprintf("%s is replaced by %s, which is replaced by %s in the end", l.from, next[l.from], l.from)
		}
		for at := next[l.from]; ; at = next[at] {
			inRing[at] = true
			if at == l.from {
				break
			}
		}
		c.report(diag.ReplacedItself, l.span, problem, "end the ring with what is to stay")
	}
}

// replacement finds a message, a member of a message, or a member of the
// message itself, and returns its full path.
func (c *compiler) replacement(d *draft, m *member, p syntax.Path) (string, bool) {
	if len(p.Steps) == 0 {
		return "", false
	}
	if m != nil {
		for _, path := range []string{m.prefix + pathText(p), pathText(p)} {
			if target := d.byPath[path]; target != nil {
				return d.msg.Name + "." + path, true
			}
		}
	}
	var other *draft
	if first := p.Steps[0]; first.Key == nil {
		if sym := c.symbols[symbolKey{nsMessage, first.Name.Text}]; sym != nil {
			other = sym.message
		}
	}
	if other == nil {
		if c.damaged || d.lost {
			return "", false
		}
		var names []string
		for key := range c.symbols {
			if key.space == nsMessage {
				names = append(names, key.name)
			}
		}
		if m != nil {
			for path := range d.byPath {
				names = append(names, path)
			}
		}
		sort.Strings(names)
		remedy := "write the name of a message, or a message, a dot and its member"
		if near := c.nearest(pathText(p), names); near != "" {
			remedy = "did you mean " + near + "?"
		} else if near := c.nearest(p.Steps[0].Name.Text, names); near != "" {
			remedy = "did you mean " + near + "?"
		}
		c.report(diag.UnknownName, p.Span, fmt.Sprintf("%s names no message and no member", pathText(p)), remedy)
		return "", false
	}
	if len(p.Steps) == 1 {
		return pathText(p), true
	}
	rest := syntax.Path{Steps: p.Steps[1:], Span: p.Span}
	rest.Span.Start = rest.Steps[0].Name.Span.Start
	if c.findMember(other, "", rest) == nil {
		return "", false
	}
	return pathText(p), true
}
