package schema

import (
	"fmt"
	"slices"
	"strconv"

	"busloom/bits"
	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// draft is a message, or a shape on its own, while it is checked: shapes are
// expanded, so its members are flat, each with its path and block.
type draft struct {
	src      *source
	what     string // "the message WheelSpeeds", "the shape Wheel"
	head     diag.Span
	relative bool // a shape on its own
	size     int  // bytes; -1 if unknown
	atLeast  bool
	root     *block
	members  []*member
	byPath   map[string]*member
	groups   map[string]diag.Span // names of groups, which no member may have
	full     bool                 // more members than a message may have
	facts    facts
	msg      *Message
	sound    bool // no mistake that concerns the message as a whole
	// lost is set if a shape or member couldn't be expanded: what is missing
	// may be in it.
	lost bool
}

// facts are the statements of a body that aren't members.
type facts struct {
	from     *syntax.FromFact
	timing   *syntax.TimingFact
	fill     *syntax.FillFact
	replaced *syntax.ReplacedFact
	relayed  []*syntax.RelayedFact
	notes    []*syntax.Note
}

// block is what exists under one set of conditions: the body itself, or a
// branch of a selection.
type block struct {
	of       *selection // nil: the body itself
	when     *syntax.When
	members  []*member
	selects  []*selection
	unused   []unusedRuns
	values   []RawRange // of the selector; of all other branches for otherwise
	negated  bool
	whenDone bool
	choices  []Choice
}

// unusedRuns is one run of an unused fact.
type unusedRuns struct {
	place bits.Place
	span  diag.Span
}

// selection is one select.
type selection struct {
	tree     *syntax.Select
	src      *source
	prefix   string
	outer    *block
	selector *member
	branches []*block
	els      *block
	state    evalState // of the search for rings
	broken   bool
}

// member is one value of a draft.
type member struct {
	tree    *syntax.Member
	src     *source // whose names the member uses
	path    string
	prefix  string
	shift   int
	inShape bool
	via     *via // the item of the draft's own body that brought it
	block   *block
	codes   *defaultCodes
	order   int

	sig    *Signal
	table  *table
	placed bool // the place is legal
	broken bool // something is wrong with it
}

// via is the group or holds that brings members of a shape into a draft.
type via struct {
	span  diag.Span
	name  string
	index int // counts instances of a group
	group *syntax.Group
}

// defaultCodes is a default codes fact.
type defaultCodes struct {
	src  *source
	fact *syntax.DefaultCodesFact
}

// scope is what a body is expanded in.
type scope struct {
	src    *source
	prefix string
	shift  int
	shape  *shape // the innermost shape, nil in a message's own body
	size   int    // of that shape
	via    *via
	codes  *defaultCodes
	block  *block
}

// mostMembers bounds what repeated shapes can grow to. A payload has 512 bits;
// more members than this need hundreds of branches.
const mostMembers = 16384

// mostSize is the longest payload.
const mostSize = bits.MaxByte + 1

func (c *compiler) expandBody(d *draft, body *syntax.Body, s scope) {
	if body == nil {
		return
	}
	for _, item := range body.Items {
		if f, ok := item.(*syntax.DefaultCodesFact); ok {
			if s.codes != nil && s.codes.src == s.src && s.codes.fact != f && within(s.codes.fact.Span, body.Span) {
				c.report(diag.RepeatedClause, f.Span, "this block has default codes already", "keep one of the two").Also(s.codes.fact.Span, "the other one")
				continue
			}
			s.codes = &defaultCodes{s.src, f}
		}
	}
	for _, item := range body.Items {
		if d.full {
			return
		}
		switch item := item.(type) {
		case *syntax.Member:
			c.addMember(d, item, s)
		case *syntax.Group:
			c.expandGroup(d, item, s)
		case *syntax.HoldsFact:
			if sh := c.shapeOf(d, s, item.Shape); sh != nil {
				c.expandShape(d, sh, item.Origin, 0, s, s.prefix, &via{span: item.Origin.Span, name: "what is held of " + pathText(item.Shape)})
			}
		case *syntax.Select:
			c.expandSelect(d, item, s)
		case *syntax.UnusedFact:
			for _, run := range item.Runs {
				if p, ok := c.place(syntax.Place{Runs: []syntax.PlaceRun{run}, Span: run.Span}, s, d, "", nil); ok {
					s.block.unused = append(s.block.unused, unusedRuns{p, run.Span})
				}
			}
		default:
			c.addFact(d, item, s)
		}
	}
}

func within(inner, outer diag.Span) bool {
	return inner.File == outer.File && inner.Start >= outer.Start && inner.End <= outer.End
}

func (c *compiler) addFact(d *draft, item syntax.Item, s scope) {
	if note, ok := item.(*syntax.Note); ok {
		if s.shape == nil && s.block == d.root {
			d.facts.notes = append(d.facts.notes, note)
		}
		return
	}
	if _, ok := item.(*syntax.DefaultCodesFact); ok {
		return
	}
	if d.relative || s.shape != nil || s.block != d.root {
		c.report(diag.ClauseNotAllowed, item.ItemSpan(), "this is said of a message as a whole", "write it in the message's own body, outside selections and shapes")
		return
	}
	again := func(first syntax.Item) {
		c.report(diag.RepeatedClause, item.ItemSpan(), "the message says this already", "keep one of the two").Also(first.ItemSpan(), "the other one")
	}
	f := &d.facts
	switch item := item.(type) {
	case *syntax.FromFact:
		if f.from != nil {
			again(f.from)
			return
		}
		f.from = item
	case *syntax.TimingFact:
		if f.timing != nil {
			again(f.timing)
			return
		}
		f.timing = item
	case *syntax.FillFact:
		if f.fill != nil {
			again(f.fill)
			return
		}
		f.fill = item
	case *syntax.ReplacedFact:
		if f.replaced != nil {
			again(f.replaced)
			return
		}
		f.replaced = item
	case *syntax.RelayedFact:
		f.relayed = append(f.relayed, item)
	}
}

func (c *compiler) addMember(d *draft, t *syntax.Member, s scope) {
	if t.Name.Text == "" {
		return
	}
	if len(d.members) >= mostMembers {
		d.full = true
		c.report(diag.ShapePlacement, t.Name.Span, fmt.Sprintf("%s has more than %d members with all its shapes", d.what, mostMembers), "repeat fewer shapes in it")
		return
	}
	m := &member{tree: t, src: s.src, path: s.prefix + t.Name.Text, prefix: s.prefix, shift: s.shift, inShape: s.shape != nil,
		via: s.via, block: s.block, codes: s.codes, order: len(d.members), broken: c.broken[t]}
	if first := d.byPath[m.path]; first != nil {
		span, remedy := t.Name.Span, "rename one of the two: members keep their names across selections too"
		if s.via != nil && s.shape != nil {
			span, remedy = s.via.span, "give the group another name or key"
		}
		c.report(diag.DuplicateName, span, fmt.Sprintf("%s has the member %s already", d.what, m.path), remedy).Also(first.tree.Name.Span, "first declared here")
		d.lost = true
		return
	}
	if span, ok := d.groups[m.path]; ok {
		c.report(diag.DuplicateName, t.Name.Span, fmt.Sprintf("%s is already the name of a group", m.path), "rename one of the two").Also(span, "the group")
		d.lost = true
		return
	}
	d.byPath[m.path] = m
	d.members = append(d.members, m)
	s.block.members = append(s.block.members, m)
}

func (c *compiler) expandSelect(d *draft, t *syntax.Select, s scope) {
	sel := &selection{tree: t, src: s.src, prefix: s.prefix, outer: s.block}
	s.block.selects = append(s.block.selects, sel)
	inner := s
	for _, w := range t.Whens {
		b := &block{of: sel, when: w}
		sel.branches = append(sel.branches, b)
		inner.block = b
		c.expandBody(d, w.Body, inner)
	}
	if t.Otherwise != nil && t.Otherwise.Body != nil {
		sel.els = &block{of: sel, negated: true}
		inner.block = sel.els
		c.expandBody(d, t.Otherwise.Body, inner)
	}
}

// shapeOf finds a shape that can be expanded.
func (c *compiler) shapeOf(d *draft, s scope, p syntax.Path) *shape {
	sym := c.resolvePath(s.src, nsShape, p)
	if sym == nil || sym.shape == nil || sym.shape.broken {
		d.lost = true
		return nil
	}
	return sym.shape
}

// expandGroup places a shape once for each key.
func (c *compiler) expandGroup(d *draft, g *syntax.Group, s scope) {
	if g.Name.Text == "" {
		return
	}
	path := s.prefix + g.Name.Text
	if m := d.byPath[path]; m != nil {
		c.report(diag.DuplicateName, g.Name.Span, fmt.Sprintf("%s has the member %s already", d.what, path), "rename one of the two").Also(m.tree.Name.Span, "first declared here")
		d.lost = true
		return
	}
	keys, ok := c.groupKeys(d, g)
	if !ok {
		return
	}
	sh := c.shapeOf(d, s, g.Shape)
	if sh == nil {
		return
	}
	d.groups[path] = g.Name.Span
	step := sh.size
	if g.Step != nil {
		v, ok := wholeBelow(*g.Step, mostSize)
		switch {
		case !ok || v == 0:
			c.report(diag.ShapePlacement, g.Step.Span, fmt.Sprintf("a step is 1 to %d bytes, not %s", mostSize-1, g.Step.Raw), "write from how many bytes to the next one starts")
			d.lost = true
			return
		case len(keys) == 0:
			c.report(diag.ShapePlacement, g.Step.Span, fmt.Sprintf("%s stands for one %s, so there is nothing to step to", g.Name.Text, sh.name), "give keys in brackets, or remove the step")
			d.lost = true
			return
		}
		step = int(v)
	}
	if len(keys) == 0 {
		c.expandShape(d, sh, g.Origin, 0, s, path+".", &via{span: g.Origin.Span, name: path, group: g})
		return
	}
	for i, key := range keys {
		name := path + "[" + key + "]"
		if !c.expandShape(d, sh, g.Origin, i*step, s, name+".", &via{span: g.Origin.Span, name: name, index: i, group: g}) {
			return
		}
	}
}

// groupKeys lists what stands in the brackets; ok is false if they are wrong.
func (c *compiler) groupKeys(d *draft, g *syntax.Group) (keys []string, ok bool) {
	if g.Low != nil && g.High != nil {
		low, okLow := wholeBelow(*g.Low, 1<<31)
		high, okHigh := wholeBelow(*g.High, 1<<31)
		span := g.Low.Span.To(g.High.Span)
		switch {
		case !okLow || !okHigh:
			c.report(diag.ShapePlacement, span, "numbers of a group are whole", "write such as 1..12")
		case low > high:
			c.report(diag.ShapePlacement, span, fmt.Sprintf("the numbers %s are upside down", span.Text()), "write the lower number first")
		case high-low >= mostSize*8:
			c.report(diag.ShapePlacement, span, fmt.Sprintf("%s are more than any payload holds", span.Text()), "write fewer numbers")
		default:
			for i := low; i <= high; i++ {
				keys = append(keys, strconv.FormatUint(i, 10))
			}
			return keys, true
		}
		d.lost = true
		return nil, false
	}
	for _, k := range g.Keys {
		if i := slices.Index(keys, k.Text); i >= 0 {
			c.report(diag.DuplicateName, k.Span, fmt.Sprintf("the key %s is given twice", k.Text), "rename one of the two").Also(g.Keys[i].Span, "first given here")
			d.lost = true
			continue
		}
		keys = append(keys, k.Text)
	}
	return keys, true
}

// expandShape puts a shape's body into a draft, offset bytes after the origin.
func (c *compiler) expandShape(d *draft, sh *shape, origin syntax.Number, offset int, s scope, prefix string, v *via) bool {
	at, ok := wholeBelow(origin, mostSize)
	if !ok {
		c.report(diag.ShapePlacement, origin.Span, fmt.Sprintf("a shape starts at byte 0 to %d, not %s", mostSize-1, origin.Raw), "write the number of its first byte")
		d.lost = true
		return false
	}
	size := d.size
	shift := int(at) + offset
	if s.shape != nil {
		size = s.size
	}
	if size >= 0 && shift+sh.size > size {
		where := d.what
		if s.shape != nil {
			where = "the shape " + s.shape.name
		}
		c.report(diag.PastEnd, origin.Span, fmt.Sprintf("%s reaches byte %d, but %s has %s", v.name, shift+sh.size-1, where, describeBytes(size)),
			"move it, or make room for it").Also(sh.span, fmt.Sprintf("the shape %s has %s", sh.name, counted(sh.size, "byte")))
		d.lost = true
		return false
	}
	if s.via != nil {
		v = s.via // the item of the draft's own body counts
	}
	inner := scope{src: sh.src, prefix: prefix, shift: s.shift + shift, shape: sh, size: sh.size, via: v, codes: s.codes, block: s.block}
	c.expandBody(d, sh.tree.Body, inner)
	return true
}

// describeBytes is "8 bytes, 0 to 7".
func describeBytes(size int) string {
	switch size {
	case 0:
		return "no bytes"
	case 1:
		return "1 byte, byte 0"
	}
	return fmt.Sprintf("%d bytes, 0 to %d", size, size-1)
}
