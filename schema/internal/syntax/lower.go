package syntax

import (
	"fmt"
	"math/big"
	"strconv"
	"strings"

	"busloom/diag"
	"busloom/unit"
)

// lowering makes the tree of what the parser library filled in. What a piece
// can't mean whatever its names stand for is told here.
type lowering struct {
	src      *diag.File
	problems *diag.List
	// numbers keeps one value for each way of writing, since descriptions
	// write the same few numbers again and again. Values in the tree are never
	// changed.
	numbers map[string]*big.Rat
}

func (l *lowering) span(t *token) diag.Span {
	// A brace that was put in at the end of the file isn't in its text.
	return diag.Span{File: l.src, Start: t.Pos.Offset, End: min(t.Pos.Offset+len(t.Value), len(l.src.Text))}
}

func (l *lowering) name(t *token) Name { return Name{t.Value, l.span(t)} }

func (l *lowering) names(tokens []token) []Name {
	var out []Name
	for i := range tokens {
		out = append(out, l.name(&tokens[i]))
	}
	return out
}

func (l *lowering) number(t *token) Number {
	v := l.numbers[t.Value]
	if v == nil {
		var err error
		if v, err = unit.ParseNumber(t.Value); err != nil {
			v = new(big.Rat) // the lexer lets no such number through
		}
		l.numbers[t.Value] = v
	}
	return Number{t.Value, v, l.span(t)}
}

func (l *lowering) optionalNumber(t *token) *Number {
	if t.Value == "" {
		return nil
	}
	n := l.number(t)
	return &n
}

func (l *lowering) texts(g gTexts) Text {
	var out Text
	if len(g.toks) == 0 {
		return out
	}
	out.Given, out.Span = true, l.span(&g.toks[0]).To(l.span(&g.toks[len(g.toks)-1]))
	out.Parts = make([]string, len(g.toks))
	for i := range g.toks {
		out.Parts[i] = unquote(g.toks[i].Value)
	}
	out.Value = out.Parts[0]
	if len(out.Parts) > 1 {
		out.Value = strings.Join(out.Parts, "")
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
	if !strings.ContainsAny(text, "\\\"\n") {
		return `"` + text + `"`
	}
	return `"` + strings.NewReplacer(`\`, `\\`, `"`, `\"`, "\n", `\n`).Replace(text) + `"`
}

func (l *lowering) quantity(g *gQuantity) Quantity {
	q := Quantity{Negative: g.minus.Value != "", Number: l.number(&g.number)}
	q.Span = q.Number.Span
	if q.Negative {
		q.Span = l.span(&g.minus).To(q.Span)
	}
	if g.unit.Value != "" {
		u := UnitRef{g.unit.Value, l.span(&g.unit)}
		q.Unit = &u
		q.Span = q.Span.To(u.Span)
	}
	return q
}

func (l *lowering) optionalQuantity(g *gQuantity) *Quantity {
	if g == nil {
		return nil
	}
	q := l.quantity(g)
	return &q
}

func (l *lowering) unitRef(g *gUnitRef) UnitRef {
	span := l.span(&g.first).To(l.span(&g.last))
	return UnitRef{string(l.src.Text[span.Start:span.End]), span}
}

func (l *lowering) path(g *gPath) Path {
	out := Path{Steps: make([]Step, len(g.steps))}
	for i := range g.steps {
		s := &g.steps[i]
		step := Step{Name: l.name(&s.name)}
		span := step.Name.Span
		if s.key.Value != "" {
			step.Key = &Key{Text: s.key.Value, Number: s.key.Type == tokNumber, Span: l.span(&s.key)}
			span = span.To(l.span(&s.close))
		}
		if i == 0 {
			out.Span = span
		}
		out.Span = out.Span.To(span)
		out.Steps[i] = step
	}
	return out
}

func (l *lowering) raw(g *gRaw) Raw {
	if g.ones.Value == "" {
		n := l.number(&g.number)
		return Raw{Number: &n, Span: n.Span}
	}
	r := Raw{Ones: true, Number: l.optionalNumber(&g.less), Span: l.span(&g.ones)}
	if r.Number != nil {
		r.Span = r.Span.To(r.Number.Span)
	}
	return r
}

func (l *lowering) raws(g *gRaws) RawRange {
	r := RawRange{Low: l.raw(&g.low)}
	r.Span = r.Low.Span
	if g.ranged {
		h := l.raw(&g.high)
		r.High = &h
		r.Span = r.Span.To(h.Span)
	}
	return r
}

func (l *lowering) entry(g *gEntry) *Entry {
	e := &Entry{Raws: l.raws(&g.Raws), Text: l.texts(g.Text)}
	e.Span = e.Raws.Span.To(l.span(&g.First))
	switch g.First.Value {
	case "absent", "fault", "reserved":
		e.Class = l.name(&g.First)
		if g.Name.Value != "" {
			e.Name = l.name(&g.Name)
			e.Span = e.Span.To(e.Name.Span)
		}
	default:
		e.Name = l.name(&g.First)
		if g.Name.Value != "" {
			l.problems.Report(diag.UnexpectedWord, l.span(&g.Name), fmt.Sprintf("%s is a second word, and a state has one", g.Name.Value),
				"join the words by _, or put a text in quotes behind the first")
		}
	}
	if e.Text.Given {
		e.Span = e.Span.To(e.Text.Span)
	}
	return e
}

func (l *lowering) entries(g []*gEntry) []*Entry {
	var out []*Entry
	for _, e := range g {
		out = append(out, l.entry(e))
	}
	return out
}

func (l *lowering) point(g *gPoint) *CurvePoint {
	p := &CurvePoint{X: l.quantity(&g.X.gQuantity), Y: l.quantity(&g.Y.gQuantity)}
	p.Span = p.X.Span.To(p.Y.Span)
	return p
}

func (l *lowering) runs(runs []gRun) []PlaceRun {
	out := make([]PlaceRun, 0, len(runs))
	for i := range runs {
		g := &runs[i]
		r := PlaceRun{Relative: g.plus.Value != "", Heavy: l.bit(&g.heavy), End: g.end.Value != ""}
		r.Span = r.Heavy.Span
		if r.Relative {
			r.Span = l.span(&g.plus).To(r.Span)
		}
		if g.light.Value != "" {
			b := l.bit(&g.light)
			r.Light = &b
			r.Span = r.Span.To(b.Span)
		}
		if r.End {
			r.Span = r.Span.To(l.span(&g.end))
		}
		out = append(out, r)
	}
	return out
}

// bit reads byte.bit; what has another form is told here.
func (l *lowering) bit(t *token) BitRef {
	out := BitRef{Span: l.span(t)}
	whole, bit, ok := strings.Cut(t.Value, ".")
	b, err1 := strconv.ParseUint(whole, 10, 16)
	i, err2 := strconv.ParseUint(bit, 10, 16)
	if !ok || err1 != nil || err2 != nil {
		l.problems.Report(diag.BadPlace, out.Span, clip(t.Value)+" is no position: it is written byte.bit",
			"write a place such as 0.7..1.0, from the heaviest bit to the lightest")
		out.Bad = true
		return out
	}
	out.Byte, out.Bit = int(b), int(i)
	return out
}

func (l *lowering) id(g *gID) IDRef {
	if g.Form == nil {
		n := l.number(&g.Number)
		return IDRef{Number: &n, Span: n.Span}
	}
	path := l.path(g.Form)
	id := IDRef{Form: &path, Span: path.Span}
	for _, f := range g.Fields {
		v := &IDFieldValue{Name: l.name(&f.Name), Usually: f.Usually.Value != "", Value: l.number(&f.Value)}
		id.Fields = append(id.Fields, v)
		id.Span = id.Span.To(v.Value.Span)
	}
	if g.Close.Value != "" {
		id.Span = id.Span.To(l.span(&g.Close))
	}
	return id
}

// first is the formula's first token.
func (g *gExpr) first() *token {
	switch {
	case g.path != nil:
		return &g.path.steps[0].name
	case g.open.Value != "":
		return &g.open
	case g.left != nil:
		return g.left.first()
	case g.op.Value != "":
		return &g.op
	case g.number.Value != "":
		return &g.number
	}
	return &g.raw
}

// last is the formula's last token.
func (g *gExpr) last() *token {
	switch {
	case g.close.Value != "":
		return &g.close
	case g.right != nil:
		return g.right.last()
	case g.unit.Value != "":
		return &g.unit
	case g.number.Value != "":
		return &g.number
	case g.raw.Value != "":
		return &g.raw
	}
	if s := &g.path.steps[len(g.path.steps)-1]; s.close.Value != "" {
		return &s.close
	}
	return &g.path.steps[len(g.path.steps)-1].name
}

func (l *lowering) expr(g *gExpr) Expr {
	span := l.span(g.first()).To(l.span(g.last()))
	switch {
	case g.left != nil:
		return &Operation{Op: g.op.Value[0], Left: l.expr(g.left), Right: l.expr(g.right), Span: span}
	case g.op.Value != "":
		return &Negation{Operand: l.expr(g.right), Span: span}
	case g.number.Value != "":
		x := &Literal{Number: l.number(&g.number), Span: span}
		if g.unit.Value != "" {
			x.Unit = &UnitRef{g.unit.Value, l.span(&g.unit)}
		}
		return x
	case g.raw.Value != "":
		return &RawRef{Span: span}
	}
	ref := &Reference{Path: l.path(g.path), Span: span}
	if g.operand != nil {
		ref.Operand = l.expr(g.operand)
	}
	return ref
}
