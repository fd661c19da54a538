package schema

import (
	"fmt"
	"math/big"

	"busloom/bits"
	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// checkDraft runs what is proven of every body, a message's or a shape's.
func (c *compiler) checkDraft(d *draft) {
	for _, m := range d.members {
		c.checkMember(d, m)
	}
	c.checkSelections(d)
	c.checkLayout(d)
	c.checkProtection(d)
}

// checkMember makes the signal of a member: place, kind, formula, codes,
// range, initial value. A later step is left out where an earlier one failed
// that it needs.
func (c *compiler) checkMember(d *draft, m *member) {
	t := m.tree
	s := &Signal{Name: m.path, Text: t.Text.Value, Span: t.Name.Span}
	m.sig = s
	fail := func() { m.broken = true }
	var placed bool
	s.Kind = kindOf(t)
	if !c.misplaced[t] {
		s.Place, placed = c.place(t.Place, scope{shift: m.shift, shape: m.shapeMark(), size: -1}, d, m.path, s)
	}
	if !placed {
		m.broken = true
	} else {
		s.Width = s.Place.Width()
		m.placed = true
		if !c.checkWidth(m) {
			fail()
			return
		}
	}
	if t.Kind != nil && !c.checkKind(m, placed) {
		fail()
	}
	for _, n := range t.Notes {
		s.Notes = append(s.Notes, Note{Key: n.Key.Text, Text: n.Text.Value})
	}
	if !c.checkClauses(m) {
		fail()
		return
	}
	if s.Kind.isNumber() && !c.checkConversion(m) {
		fail()
		return
	}
	if m.broken {
		return // what follows needs the width and the formula
	}
	if !c.checkTable(m) {
		fail()
		return
	}
	if !c.checkValues(m) {
		fail()
	}
}

// shapeMark is anything but nil inside a shape: place needs no more of it.
func (m *member) shapeMark() *shape {
	if m.inShape {
		return &shape{}
	}
	return nil
}

// kindOf is the kind that a member's clauses say.
func kindOf(t *syntax.Member) Kind {
	if t.Table != nil && t.Table.States {
		return States
	}
	if t.Kind == nil {
		return Unsigned
	}
	switch t.Kind.Word {
	case "signed":
		return Signed
	case "sign magnitude":
		return SignMagnitude
	case "float":
		return Float
	case "packed decimal":
		return PackedDecimal
	case "flag":
		return Flag
	case "bytes":
		return Bytes
	case "text":
		if t.Kind.Encoding == "utf8" {
			return TextUTF8
		}
		return TextASCII
	case "counter":
		return Counter
	case "checksum":
		return Checksum
	}
	return Unsigned // always
}

// isText reports whether the kind is a string of bytes.
func (k Kind) isText() bool { return k == TextASCII || k == TextUTF8 || k == Bytes }

// place checks where a member (or an unused run, if sig is nil) sits and
// returns it in the draft's bytes.
func (c *compiler) place(t syntax.Place, s scope, d *draft, path string, sig *Signal) (bits.Place, bool) {
	var out bits.Place
	if len(t.Runs) == 0 {
		return out, false
	}
	for i, r := range t.Runs {
		if r.Heavy.Bad || (r.Light != nil && r.Light.Bad) {
			return out, false // told when it was read
		}
		if r.Relative != (s.shape != nil) {
			if r.Relative {
				c.report(diag.RelativePlace, r.Span, fmt.Sprintf("%s counts from the start of a shape, and this isn't inside one", r.Span.Text()), "remove the +")
			} else {
				c.report(diag.RelativePlace, r.Span, fmt.Sprintf("%s is inside a shape, where places count from its start", r.Span.Text()), "write + before it")
			}
			return out, false
		}
		run := bits.Run{Heavy: bits.Bit{Byte: r.Heavy.Byte, Bit: r.Heavy.Bit}, Light: bits.Bit{Byte: r.Heavy.Byte, Bit: r.Heavy.Bit}}
		if r.Light != nil {
			run.Light = bits.Bit{Byte: r.Light.Byte, Bit: r.Light.Bit}
		}
		if r.End {
			var ok bool
			if run.Light, ok = c.placeToEnd(r, i == len(t.Runs)-1, s, d, sig); !ok {
				return out, false
			}
		}
		if err := run.Check(); err != nil {
			c.badPlace(r.Span, err, run)
			return out, false
		}
		out.Runs = append(out.Runs, run)
	}
	if err := out.Check(); err != nil {
		run := bits.Run{}
		if p, ok := err.(*bits.PlaceError); ok {
			run = p.Run
		}
		c.badPlace(t.Span, err, run)
		return out, false
	}
	if s.shift != 0 {
		out = out.Shift(s.shift)
	}
	size := d.size
	if s.shape != nil && s.size >= 0 {
		size = s.shift + s.size
	}
	// A text to the end may begin where the bytes that are always there end.
	if sig != nil && sig.ToEnd && out.Runs[0].Heavy.Byte == size {
		return out, size < mostSize
	}
	if size >= 0 && out.LastByte() >= size {
		subject := "this run"
		if path != "" {
			subject = path
		}
		c.report(diag.PastEnd, t.Span, fmt.Sprintf("%s reaches byte %d, but %s has %s", subject, out.LastByte(), d.what, describeBytes(size)), "move it, or make room for it").
			Also(d.head, d.what)
		return out, false
	}
	return out, true
}

func (c *compiler) badPlace(span diag.Span, err error, run bits.Run) {
	remedy := "write the heaviest bit first, bytes counted from 0 and bits from 7 down to 0"
	if run.Heavy.Byte == run.Light.Byte && run.Heavy.Bit < run.Light.Bit && run.Light.Bit <= 7 {
		remedy = fmt.Sprintf("write %s", bits.Run{Heavy: run.Light, Light: run.Heavy})
	}
	c.report(diag.BadPlace, span, err.Error(), remedy).Picture = bits.Picture(bits.Place{Runs: []bits.Run{run}})
}

// placeToEnd is the last bit of a run that goes on to the end.
func (c *compiler) placeToEnd(r syntax.PlaceRun, last bool, s scope, d *draft, sig *Signal) (bits.Bit, bool) {
	switch {
	case sig == nil || !sig.Kind.isText():
		c.report(diag.BadPlace, r.Span, "only text and bytes go on to the end", "write the lightest bit")
		return bits.Bit{}, false
	case s.shape != nil:
		c.report(diag.BadPlace, r.Span, "a shape has a fixed length, so nothing in it goes on to the message's end", "write the lightest bit")
		return bits.Bit{}, false
	case !last:
		c.report(diag.BadPlace, r.Span, "only the last run goes on to the end", "write the lightest bit")
		return bits.Bit{}, false
	case d.size < 0:
		return bits.Bit{}, false // the message's length is wrong, and known to be
	}
	sig.ToEnd = d.atLeast
	end := max(d.size-1, r.Heavy.Byte)
	if !d.atLeast && r.Heavy.Byte >= d.size {
		end = r.Heavy.Byte // reported as past the end
	}
	return bits.Bit{Byte: end, Bit: 0}, true
}

// checkWidth proves that the kind can have the width.
func (c *compiler) checkWidth(m *member) bool {
	s, span := m.sig, m.tree.Place.Span
	bad := func(problem, remedy string) bool {
		c.report(diag.WidthNotAllowed, span, problem, remedy)
		return false
	}
	w := s.Width
	if s.Kind.isText() {
		for _, r := range s.Place.Runs {
			if r.Heavy.Bit != 7 || r.Light.Bit != 0 {
				return bad(fmt.Sprintf("%s holds %s, which takes whole bytes: %s doesn't", s.Name, kindPhrase(s.Kind), r), "begin at a bit 7 and end at a bit 0")
			}
		}
		return true
	}
	switch {
	case w > 64:
		return bad(fmt.Sprintf("%s has %d bits, a value has at most 64", s.Name, w), "split it, or read it as bytes")
	case s.Kind == Float && w != 16 && w != 32 && w != 64:
		return bad(fmt.Sprintf("%s has %s, a float has 16, 32 or 64", s.Name, counted(w, "bit")), "correct the place")
	case s.Kind == PackedDecimal && w%4 != 0:
		return bad(fmt.Sprintf("%s has %s, packed decimal takes 4 for each digit", s.Name, counted(w, "bit")), "correct the place")
	case s.Kind == Flag && w != 1:
		return bad(fmt.Sprintf("%s has %d bits, a flag has 1", s.Name, w), "correct the place, or use states")
	case (s.Kind == Signed || s.Kind == SignMagnitude) && w < 2:
		return bad(fmt.Sprintf("%s has 1 bit, which leaves nothing beside the sign", s.Name), "correct the place, or read it unsigned")
	}
	return true
}

// checkKind checks what stands behind the kind's word.
func (c *compiler) checkKind(m *member, placed bool) bool {
	s, k := m.sig, m.tree.Kind
	switch k.Word {
	case "always":
		if k.Always == nil {
			return false
		}
		v, ok := whole(*k.Always)
		if !ok || (placed && v > onesOf(min(s.Width, 64))) {
			c.report(diag.CodeTooWide, k.Always.Span, fmt.Sprintf("%s has %s and can't be %s", s.Name, counted(s.Width, "bit"), k.Always.Raw), "write a value that fits")
			return false
		}
		s.Fixed = &v
	case "text":
		if k.Fill != nil {
			b, ok := c.fillByte(k.Fill)
			if !ok {
				return false
			}
			s.FillByte = b
		}
	}
	return true
}

func (c *compiler) fillByte(n *syntax.Number) (*byte, bool) {
	v, ok := wholeBelow(*n, 256)
	if !ok {
		c.report(diag.BadFill, n.Span, fmt.Sprintf("a fill byte is 0 to 255, not %s", n.Raw), "write one byte, such as 0xFF")
		return nil, false
	}
	b := byte(v)
	return &b, true
}

// checkClauses refuses clauses that mean nothing for states, and initial
// values of what has none. The parser refuses what a kind's word forbids.
func (c *compiler) checkClauses(m *member) bool {
	s, t := m.sig, m.tree
	refuse := func(span diag.Span, clause string) bool {
		phrase := kindPhrase(s.Kind)
		if t.Kind != nil && t.Kind.Word == "always" {
			phrase = "always the same value"
		}
		c.report(diag.ClauseNotAllowed, span, fmt.Sprintf("%s is %s, for which %s means nothing", s.Name, phrase, clause), "remove it, or change the kind")
		return false
	}
	switch {
	case s.Kind == States && t.Expr != nil:
		return refuse(t.Expr.ExprSpan(), "a formula")
	case s.Kind == States && t.Within != nil:
		return refuse(t.Within.Span, "a range")
	case s.Kind == States && t.Tolerance != nil:
		return refuse(t.Tolerance.Span, "a tolerance")
	case t.Initial != nil && (s.Kind.isText() || s.Kind == Checksum || (t.Kind != nil && t.Kind.Word == "always")):
		return refuse(t.Initial.Span, "an initial value")
	}
	return true
}

// identity is the formula of a member without one.
var identity = &Affine{A: big.NewRat(1, 1), B: new(big.Rat)}

// checkConversion reduces the formula.
func (c *compiler) checkConversion(m *member) bool {
	s, t := m.sig, m.tree
	if t.Expr == nil {
		s.Affine = identity
		return true
	}
	f, ok := c.reduce(m.src, t.Expr, t.In)
	if !ok {
		return false
	}
	s.Affine, s.Curve, s.Unit = f.affine, f.curve, f.unit
	return true
}

// checkTable gives the signal its codes and states.
func (c *compiler) checkTable(m *member) bool {
	s, t := m.sig, m.tree
	if t.Table != nil {
		table, sized, ok := c.tableFor(m.src, t.Table, s.Width)
		if !ok {
			return false
		}
		m.table = table
		s.Codes, s.States = sized.codes, sized.states
		if t.Table.States {
			s.StateSet = table.name
			if len(s.States) == 0 && len(s.Codes) == 0 && !c.damaged {
				c.report(diag.NothingLeft, t.Table.Span, fmt.Sprintf("the states of %s are none", s.Name), "name its states")
			}
		} else {
			s.CodeSet = table.name
		}
		return true
	}
	if m.codes == nil || !s.Kind.isNumber() || s.Fixed != nil {
		return true
	}
	clause := &syntax.TableClause{Path: &m.codes.fact.Path, Span: m.codes.fact.Path.Span}
	sym := c.resolvePath(m.codes.src, nsTable, *clause.Path)
	if sym == nil {
		return false
	}
	if sym.decl.(*syntax.TableDecl).States {
		c.report(diag.WrongKindOfName, clause.Path.Span, fmt.Sprintf("%s is %s, not one of codes", sym.name.Text, sym.word), "name a table of codes").Also(sym.name.Span, "declared here")
		return false
	}
	if sym.table == nil {
		return false
	}
	sized := sym.table.at(s.Width)
	if len(sized.problems) > 0 {
		p := sized.problems[0]
		c.report(p.code, t.Name.Span, fmt.Sprintf("the default codes %s don't fit %s: %s", sym.name.Text, s.Name, p.problem), "give it codes of its own").
			Also(clause.Path.Span, "the default")
		return false
	}
	s.Codes, s.CodeSet = sized.codes, sym.table.name
	return true
}
