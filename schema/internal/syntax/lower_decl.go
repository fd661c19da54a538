package syntax

import (
	"fmt"

	"busloom/diag"
)

// decl makes a declaration; whole is the span of its tokens.
func (l *lowering) decl(g *gDecl, whole diag.Span) Decl {
	spans := func(name *token) Spans {
		head := whole
		head.End = l.span(name).End
		return Spans{HeadSpan: head, WholeSpan: whole}
	}
	switch {
	case g.Message != nil:
		m := g.Message
		return &MessageDecl{Spans: spans(&m.Name), Name: l.name(&m.Name), ID: l.id(&m.ID), Bus: l.name(&m.Bus),
			FD: m.FD.Value != "", AtLeast: m.Least.Value != "", Size: l.number(&m.Size), Text: l.texts(m.Text), Body: l.body(&m.Body)}
	case g.Shape != nil:
		s := g.Shape
		return &ShapeDecl{Spans: spans(&s.Name), Name: l.name(&s.Name), Size: l.number(&s.Size), Text: l.texts(s.Text), Body: l.body(&s.Body)}
	case g.Table != nil:
		t := g.Table
		return &TableDecl{Spans: spans(&t.Name), States: t.Word.Value == "states", Name: l.name(&t.Name), ByTopByte: t.ByTop.Value != "",
			Text: l.texts(t.Text), Entries: l.entries(t.Entries)}
	case g.Curve != nil:
		c := g.Curve
		d := &CurveDecl{Spans: spans(&c.Name), Name: l.name(&c.Name), From: l.unitRef(&c.From), To: l.unitRef(&c.To), Outside: l.name(&c.Outside), Text: l.texts(c.Text)}
		for _, p := range c.Points {
			d.Points = append(d.Points, l.point(p))
		}
		return d
	case g.IDForm != nil:
		f := g.IDForm
		d := &IDFormDecl{Spans: spans(&f.Name), Name: l.name(&f.Name), Bits: l.number(&f.Bits), Text: l.texts(f.Text)}
		for _, field := range f.Fields {
			d.Fields = append(d.Fields, &IDFormField{l.name(&field.Name), l.number(&field.Width)})
		}
		return d
	case g.CRC != nil:
		return l.crc(g.CRC, spans(&g.CRC.Name))
	case g.Bus != nil:
		b := g.Bus
		return &BusDecl{Spans: spans(&b.Name), Name: l.name(&b.Name), Rate: l.quantity(&b.Rate), FD: l.optionalQuantity(b.FD), Text: l.texts(b.Text)}
	case g.ECU != nil:
		e := g.ECU
		return &ECUDecl{Spans: spans(&e.Name), Name: l.name(&e.Name), Buses: l.names(e.Buses.toks), Source: l.optionalNumber(&e.Source), Text: l.texts(e.Text)}
	case g.Unit != nil:
		u := g.Unit
		if NotUnit(u.Name.Value) {
			l.problems.Report(diag.UnexpectedWord, l.span(&u.Name), fmt.Sprintf("a unit can't be called %s, which means something else behind a number", u.Name.Value), "choose another name")
		}
		return &UnitDecl{Spans: spans(&u.Name), Name: l.name(&u.Name), Value: l.optionalQuantity(u.Value), Text: l.texts(u.Text)}
	}
	c := g.Const
	return &ConstDecl{Spans: spans(&c.Name), Name: l.name(&c.Name), Expr: l.expr(c.Expr), Text: l.texts(c.Text)}
}

func (l *lowering) crc(g *gCRC, spans Spans) *CRCDecl {
	d := &CRCDecl{Spans: spans, Name: l.name(&g.Name), Bits: l.number(&g.Bits), Text: l.texts(g.Text)}
	numbers := map[string]**Number{"polynomial": &d.Polynomial, "initial": &d.Initial, "final": &d.Final, "check": &d.Check}
	flags := map[string]*bool{"input": &d.ReflectIn, "output": &d.ReflectOut}
	again := func(t *token) {
		l.problems.Report(diag.RepeatedClause, l.span(t), t.Value+" is given a second time", "keep one of the two")
	}
	for _, item := range g.Items {
		if to := numbers[item.Key.Value]; to != nil {
			if *to != nil {
				again(&item.Key)
				continue
			}
			*to = l.optionalNumber(&item.Value)
			continue
		}
		flag := flags[item.Reflected.Value]
		if *flag {
			again(&item.Reflected)
		}
		*flag = true
	}
	return d
}

func (l *lowering) network(g *gNetwork, span diag.Span) *Network {
	return &Network{Span: span, Name: l.name(&g.Name), Text: l.texts(g.Text)}
}

func (l *lowering) use(g *gUse, span diag.Span) *Use {
	u := &Use{Span: span, Path: l.texts(gTexts{[]token{g.Path}})}
	if g.As.Value != "" {
		n := l.name(&g.As)
		u.As = &n
	}
	return u
}
