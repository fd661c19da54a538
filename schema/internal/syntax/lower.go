package syntax

import (
	"math/big"
	"strconv"
	"strings"

	"busloom/diag"
	"busloom/unit"
)

// Making the tree of what the parser library filled in.

var bigVersion = big.NewInt(LanguageVersion)

func (p *parser) name(t token) Name { return Name{t.Value, p.tokenSpan(&t)} }

func (p *parser) names(tokens []token) []Name {
	var out []Name
	for _, t := range tokens {
		out = append(out, p.name(t))
	}
	return out
}

func (p *parser) optionalName(t token) *Name {
	if t.Value == "" {
		return nil
	}
	n := p.name(t)
	return &n
}

// number reads a number token; bad ones were reported and replaced by Invalid
// before, so they don't come here.
func (p *parser) number(t token) Number {
	v, err := unit.ParseNumber(t.Value)
	if err != nil {
		v = new(big.Rat)
	}
	return Number{t.Value, v, p.tokenSpan(&t)}
}

func (p *parser) optionalNumber(t token) *Number {
	if t.Value == "" {
		return nil
	}
	n := p.number(t)
	return &n
}

func (p *parser) unit(t token) UnitRef { return UnitRef{t.Value, p.tokenSpan(&t)} }

func (p *parser) texts(tokens []token) Text {
	var out Text
	for i, t := range tokens {
		span := p.tokenSpan(&t)
		if i == 0 {
			out.Span = span
		}
		out.Span = out.Span.To(span)
		out.Given = true
		out.Parts = append(out.Parts, unquote(t.Value))
		out.Value += out.Parts[i]
	}
	return out
}

// unquote takes the quotes off; \" and \\ stand for themselves, \n for a new
// line.
func unquote(raw string) string {
	raw = raw[1 : len(raw)-1]
	if !strings.Contains(raw, `\`) {
		return raw
	}
	var b strings.Builder
	for i := 0; i < len(raw); i++ {
		if raw[i] == '\\' && i+1 < len(raw) {
			i++
			if raw[i] == 'n' {
				b.WriteByte('\n')
				continue
			}
		}
		b.WriteByte(raw[i])
	}
	return b.String()
}

// quote is the inverse of unquote.
func quote(text string) string {
	return `"` + strings.NewReplacer(`\`, `\\`, `"`, `\"`, "\n", `\n`).Replace(text) + `"`
}

func (p *parser) quantity(g *gQuantity) Quantity {
	q := Quantity{Negative: g.Minus.Value != "", Number: p.number(g.Number)}
	q.Span = q.Number.Span
	if q.Negative {
		q.Span = p.tokenSpan(&g.Minus).To(q.Span)
	}
	if g.Unit.Value != "" {
		u := p.unit(g.Unit)
		q.Unit = &u
		q.Span = q.Span.To(u.Span)
	}
	return q
}

func (p *parser) path(g *gPath) Path {
	var out Path
	for i, s := range g.Steps {
		step := Step{Name: p.name(s.Name)}
		span := step.Name.Span
		if s.Key.Value != "" {
			step.Key = &Key{Text: s.Key.Value, Number: s.Key.Type == tokNumber, Span: p.tokenSpan(&s.Key)}
			span = span.To(step.Key.Span)
			span.End++ // the bracket
		}
		if i == 0 {
			out.Span = span
		}
		out.Span = out.Span.To(span)
		out.Steps = append(out.Steps, step)
	}
	return out
}

func (p *parser) spans(at piece, name token) Spans {
	return Spans{HeadSpan: p.tokenSpan(&p.tokens[at.from]).To(p.tokenSpan(&name)), WholeSpan: p.pieceSpan(at)}
}

func (p *parser) raw(g *gRaw) Raw {
	if g.Ones.Value == "" {
		n := p.number(g.Value)
		return Raw{Number: &n, Span: n.Span}
	}
	r := Raw{Ones: true, Number: p.optionalNumber(g.Less), Span: p.tokenSpan(&g.Ones)}
	if r.Number != nil {
		r.Span = r.Span.To(r.Number.Span)
	}
	return r
}

func (p *parser) rawRange(g *gRawRange) RawRange {
	r := RawRange{Low: p.raw(&g.Low)}
	r.Span = r.Low.Span
	if g.High != nil {
		h := p.raw(g.High)
		r.High = &h
		r.Span = r.Span.To(h.Span)
	}
	return r
}

func (p *parser) entry(g *gEntry) *Entry {
	e := &Entry{Raws: p.rawRange(&g.Raws), Text: p.texts(g.Texts)}
	e.Span = e.Raws.Span.To(p.tokenSpan(&g.First))
	switch g.First.Value {
	case "absent", "fault", "reserved":
		e.Class = p.name(g.First)
		if g.Name.Value != "" {
			e.Name = p.name(g.Name)
			e.Span = e.Span.To(e.Name.Span)
		}
	default:
		e.Name = p.name(g.First)
		if g.Name.Value != "" {
			p.problems.Report(diag.UnexpectedWord, p.tokenSpan(&g.Name), "a state has one word, and this is a second one", "join them by _, or put a text in quotes behind the state")
		}
	}
	if e.Text.Given {
		e.Span = e.Span.To(e.Text.Span)
	}
	return e
}

func (p *parser) id(g *gID) IDRef {
	if g.Form == nil {
		n := p.number(g.Number)
		return IDRef{Number: &n, Span: n.Span}
	}
	path := p.path(g.Form)
	id := IDRef{Form: &path, Span: path.Span}
	for _, f := range g.Fields {
		v := &IDFieldValue{Name: p.name(f.Name), Usually: f.Usually.Value != "", Value: p.number(f.Value)}
		id.Fields = append(id.Fields, v)
		id.Span = id.Span.To(v.Value.Span)
	}
	return id
}

func (p *parser) runs(runs []*gRun) []PlaceRun {
	var out []PlaceRun
	for _, g := range runs {
		r := PlaceRun{Relative: g.Plus.Value != "", Heavy: p.bit(g.Heavy), End: g.End.Value != ""}
		r.Span = r.Heavy.Span
		if r.Relative {
			r.Span = p.tokenSpan(&g.Plus).To(r.Span)
		}
		if g.Light.Value != "" {
			l := p.bit(g.Light)
			r.Light = &l
			r.Span = r.Span.To(l.Span)
		}
		if r.End {
			r.Span = r.Span.To(p.tokenSpan(&g.End))
		}
		out = append(out, r)
	}
	return out
}

// bit reads byte.bit; what has another form is told here.
func (p *parser) bit(t token) BitRef {
	out := BitRef{Span: p.tokenSpan(&t)}
	whole, bit, ok := strings.Cut(t.Value, ".")
	b, err1 := strconv.ParseUint(whole, 10, 16)
	i, err2 := strconv.ParseUint(bit, 10, 16)
	if !ok || err1 != nil || err2 != nil {
		p.problems.Report(diag.BadPlace, out.Span, clip(t.Value)+" is no position: it is written byte.bit", "write a place such as 0.7..1.0, from the heaviest bit to the lightest")
		out.Bad = true
		return out
	}
	out.Byte, out.Bit = int(b), int(i)
	return out
}

func (p *parser) table(g *gTable) *TableClause {
	t := &TableClause{States: g.Word.Value == "states", Span: p.tokenSpan(&g.Word)}
	if g.Path != nil {
		path := p.path(g.Path)
		t.Path = &path
		t.Span = t.Span.To(path.Span)
		return t
	}
	for _, e := range g.Entries {
		t.Entries = append(t.Entries, p.entry(e))
		t.Span = t.Span.To(t.Entries[len(t.Entries)-1].Span)
	}
	return t
}

func (p *parser) initial(g *gInitial) *InitialClause {
	i := &InitialClause{Span: p.tokenSpan(&g.Word)}
	if g.Value != nil {
		q := p.quantity(g.Value)
		i.Quantity = &q
		i.Span = i.Span.To(q.Span)
		return i
	}
	n := p.name(g.Name)
	i.Name = &n
	i.Span = i.Span.To(n.Span)
	return i
}

func (p *parser) kind(g *gKind) *KindClause {
	switch {
	case g.Simple.Value != "":
		return &KindClause{Word: g.Simple.Value, Span: p.tokenSpan(&g.Simple)}
	case g.Sign.Value != "":
		return &KindClause{Word: "sign magnitude", Span: p.tokenSpan(&g.Sign)}
	case g.Packed.Value != "":
		return &KindClause{Word: "packed decimal", Span: p.tokenSpan(&g.Packed)}
	case g.Text.Value != "":
		return &KindClause{Word: "text", Span: p.tokenSpan(&g.Text), Encoding: g.Encoding.Value, Fill: p.optionalNumber(g.Fill)}
	case g.AlwaysAt.Value != "":
		n := p.number(g.Always)
		return &KindClause{Word: "always", Span: p.tokenSpan(&g.AlwaysAt).To(n.Span), Always: &n}
	case g.Counter != nil:
		c := g.Counter
		k := &KindClause{Word: "counter", Low: p.optionalNumber(c.Low), High: p.optionalNumber(c.High), Step: p.optionalNumber(c.Step),
			AllowLost: p.optionalNumber(c.Lost), AllowRepeated: p.optionalNumber(c.Repeated)}
		k.Span = p.tokenSpan(&c.Word).To(k.High.Span)
		return k
	}
	m := p.method(g.Checksum)
	return &KindClause{Word: "checksum", Span: m.Span, Method: m}
}

func (p *parser) method(g *gMethod) *MethodRef {
	m := &MethodRef{Span: p.tokenSpan(&g.Word)}
	if g.Name == nil {
		m.E2E = true
		m.Profile = p.number(g.Profile)
		if g.Mode.Value != "" {
			m.Mode = p.name(g.Mode)
		}
		for _, id := range g.IDs {
			m.IDs = append(m.IDs, p.number(id))
		}
		path := p.path(g.Counter)
		m.Counter = &path
		m.Span = m.Span.To(path.Span)
		return m
	}
	m.Name = p.path(g.Name)
	for _, f := range g.Feeds {
		m.Feeds = append(m.Feeds, p.feed(f))
		m.Span = m.Span.To(m.Feeds[len(m.Feeds)-1].Span)
	}
	return m
}

func (p *parser) feed(g *gFeed) FeedRef {
	if g.Const.Value != "" {
		n := p.number(g.Const)
		return FeedRef{Const: &n, Span: n.Span}
	}
	f := FeedRef{First: p.optionalNumber(g.First), Last: p.optionalNumber(g.Last), End: g.End.Value != ""}
	f.Span = p.tokenSpan(&g.Word).To(f.First.Span)
	if f.Last != nil {
		f.Span = f.Span.To(f.Last.Span)
	}
	if f.End {
		f.Span = f.Span.To(p.tokenSpan(&g.End))
	}
	return f
}

// first is the formula's first token.
func (e *gExpr) first() token {
	switch {
	case e.open.Value != "" && e.path == nil:
		return e.open
	case e.left != nil:
		return e.left.first()
	case e.op.Value != "":
		return e.op
	case e.number.Value != "":
		return e.number
	case e.raw.Value != "":
		return e.raw
	}
	return e.path.Steps[0].Name
}

func (p *parser) expr(g *gExpr) Expr {
	var span diag.Span
	grow := func(t token) {
		if t.Value == "" {
			return
		}
		if !span.Known() {
			span = p.tokenSpan(&t)
		}
		span = span.To(p.tokenSpan(&t))
	}
	if g.path == nil {
		grow(g.open)
	}
	switch {
	case g.left != nil:
		l, r := p.expr(g.left), p.expr(g.right)
		if !span.Known() {
			span = l.ExprSpan()
		}
		span = span.To(r.ExprSpan())
		grow(g.close)
		return &Operation{Op: g.op.Value[0], Left: l, Right: r, Span: span}
	case g.op.Value != "":
		grow(g.op)
		o := p.expr(g.right)
		span = span.To(o.ExprSpan())
		grow(g.close)
		return &Negation{Operand: o, Span: span}
	case g.number.Value != "":
		grow(g.number)
		grow(g.unit)
		l := &Literal{Number: p.number(g.number)}
		if g.unit.Value != "" {
			u := p.unit(g.unit)
			l.Unit = &u
		}
		grow(g.close)
		l.Span = span
		return l
	case g.raw.Value != "":
		grow(g.raw)
		grow(g.close)
		return &RawRef{Span: span}
	}
	ref := &Reference{Path: p.path(g.path)}
	span = ref.Path.Span
	if g.operand != nil {
		ref.Operand = p.expr(g.operand)
	}
	grow(g.close)
	ref.Span = span
	return ref
}
