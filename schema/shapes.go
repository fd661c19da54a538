package schema

import (
	"fmt"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// shape is a declared shape.
type shape struct {
	name   string
	src    *source
	span   diag.Span
	tree   *syntax.ShapeDecl
	size   int
	broken bool // can't be expanded
	state  evalState
}

// checkShapes proves each shape on its own, so that a mistake in it is told
// once and where it is, and so that shapes nobody uses are checked, too.
func (c *compiler) checkShapes() {
	var all []*shape
	eachDecl(c, func(src *source, d *syntax.ShapeDecl) {
		sym := c.own(src, nsShape, d.Name)
		if sym == nil {
			return
		}
		s := &shape{name: d.Name.Text, src: src, span: d.Name.Span, tree: d}
		size, ok := wholeBelow(d.Size, mostSize+1)
		if !ok || size == 0 {
			c.report(diag.BadSize, d.Size.Span, fmt.Sprintf("a shape has 1 to %d bytes, not %s", mostSize, d.Size.Raw), "write how many bytes it takes")
			s.broken = true
		}
		s.size = int(size)
		sym.shape = s
		all = append(all, s)
	})
	var visit func(s *shape, ring []*shape)
	visit = func(s *shape, ring []*shape) {
		switch s.state {
		case evaluated:
			return
		case evaluating:
			for i := len(ring) - 1; ; i-- {
				ring[i].broken = true
				if ring[i] == s {
					break
				}
			}
			c.report(diag.ShapeCycle, s.span, fmt.Sprintf("the shape %s holds itself", s.name), "end the ring")
			return
		}
		s.state = evaluating
		c.eachShapeIn(s.src, s.tree.Body, func(inner *shape) { visit(inner, append(ring, s)) })
		s.state = evaluated
		if !s.broken {
			c.checkShape(s)
		}
	}
	for _, s := range all {
		visit(s, nil)
	}
}

// eachShapeIn calls f for the shapes that a body refers to. Unknown ones are
// reported when the body is expanded.
func (c *compiler) eachShapeIn(src *source, body *syntax.Body, f func(*shape)) {
	if body == nil {
		return
	}
	visit := func(p syntax.Path) {
		prefix, name := "", p.Steps[len(p.Steps)-1].Name.Text
		if len(p.Steps) == 2 {
			prefix = p.Steps[0].Name.Text
		}
		if sym := c.visible(src, nsShape, prefix, name); sym != nil && sym.shape != nil {
			f(sym.shape)
		}
	}
	for _, item := range body.Items {
		switch item := item.(type) {
		case *syntax.Group:
			if len(item.Shape.Steps) > 0 {
				visit(item.Shape)
			}
		case *syntax.HoldsFact:
			if len(item.Shape.Steps) > 0 {
				visit(item.Shape)
			}
		case *syntax.Select:
			for _, w := range item.Whens {
				c.eachShapeIn(src, w.Body, f)
			}
			if item.Otherwise != nil {
				c.eachShapeIn(src, item.Otherwise.Body, f)
			}
		}
	}
}

// checkShape checks a shape as if it were a message of its own. What it finds
// broken stays broken wherever the shape is used.
func (c *compiler) checkShape(s *shape) {
	d := &draft{src: s.src, what: "the shape " + s.name, head: s.span, relative: true, size: s.size,
		root: &block{}, byPath: map[string]*member{}, groups: map[string]diag.Span{}}
	c.expandBody(d, s.tree.Body, scope{src: s.src, shape: s, size: s.size, block: d.root})
	c.checkDraft(d)
	for _, m := range d.members {
		if m.broken {
			c.broken[m.tree] = true
		}
		if !m.placed {
			c.misplaced[m.tree] = true
		}
	}
	s.broken = d.full
}
