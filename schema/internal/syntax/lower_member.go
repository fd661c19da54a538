package syntax

import (
	"fmt"

	"busloom/diag"
)

func (l *lowering) member(g *gMember) *Member {
	m := &Member{Name: l.name(&g.Name), Place: l.place(&g.Place), Text: l.texts(g.Text)}
	m.Span = m.Name.Span.To(m.Place.Span)
	if m.Text.Given {
		m.Span = m.Span.To(m.Text.Span)
	}
	l.clauses(m, g.Clauses)
	return m
}

func (l *lowering) place(g *gPlace) Place {
	p := Place{Runs: l.runs(g.runs)}
	p.Span = p.Runs[0].Span.To(p.Runs[len(p.Runs)-1].Span)
	return p
}

// clauses fills in a member's clauses. Each may stand once.
func (l *lowering) clauses(m *Member, clauses []*gClause) {
	seen := map[string]diag.Span{}
	once := func(what string, span diag.Span) bool {
		m.Span = m.Span.To(span)
		if first, ok := seen[what]; ok {
			l.problems.Report(diag.RepeatedClause, span, what+" is given a second time for "+m.Name.Text, "keep one of the two").
				Also(first, "the first time")
			return false
		}
		seen[what] = span
		return true
	}
	var formula diag.Span
	for _, c := range clauses {
		word := l.span(&c.Begins.word)
		switch {
		case c.Expr != nil:
			x := l.expr(c.Expr)
			if once("the formula", word.To(x.ExprSpan())) {
				m.Expr, formula = x, seen["the formula"]
			}
		case c.In != nil:
			u := l.unitRef(c.In)
			if once("in", word.To(u.Span)) {
				m.In = &u
			}
		case c.Within != nil:
			w := &WithinClause{Low: l.quantity(&c.Within.Low), High: l.quantity(&c.Within.High)}
			w.Span = word.To(w.High.Span)
			if once("within", w.Span) {
				m.Within = w
			}
		case c.Table != nil:
			if c.Table.Path == nil {
				m.Span = m.Span.To(l.span(&c.Table.Close))
			}
			if t := l.used(&c.Begins.word, c.Table); once(c.Begins.word.Value, t.Span) {
				if m.Table != nil {
					l.problems.Report(diag.RepeatedClause, t.Span, m.Name.Text+" has codes and states", "keep states, and list the codes in that table: a table of states has codes too").
						Also(m.Table.Span, "the other table")
					continue
				}
				m.Table = t
			}
		case c.Initial != nil:
			if i := l.initial(word, c.Initial); once("initial", i.Span) {
				m.Initial = i
			}
		case c.Tolerance != nil:
			q := l.quantity(c.Tolerance)
			if once("tolerance", word.To(q.Span)) {
				m.Tolerance = &q
			}
		case c.Replaced != nil:
			path := l.path(c.Replaced)
			if once("replaced by", word.To(path.Span)) {
				m.Replaced = &path
			}
		case c.Note != nil:
			n := l.note(c.Note)
			m.Span = m.Span.To(n.Span)
			m.Notes = append(m.Notes, n)
		case c.Kind != nil:
			if k := l.kind(c.Kind); once("the kind of value", k.Span) {
				m.Kind = k
			}
		}
	}
	l.checkClauses(m, seen, formula)
}

// checkClauses refuses clauses that can't stand beside each other, whatever
// their names mean.
func (l *lowering) checkClauses(m *Member, seen map[string]diag.Span, formula diag.Span) {
	refuse := func(span diag.Span, problem, remedy string) {
		l.problems.Report(diag.ClauseNotAllowed, span, problem, remedy)
	}
	if m.In != nil && m.Expr == nil {
		refuse(seen["in"], "in names the unit of a formula's result, and "+m.Name.Text+" has no formula", "write the formula before it: = raw * 1 with in and the unit")
		m.In = nil
	}
	kind := ""
	switch {
	case m.Kind != nil:
		kind = m.Kind.Word
	case m.Table != nil && m.Table.States:
		kind = "states"
	}
	switch kind {
	case "", "signed", "sign magnitude", "float", "packed decimal":
		if m.Table != nil && m.Table.States && kind != "" && kind != "signed" {
			refuse(m.Table.Span, fmt.Sprintf("a %s number has no states", kind), "write codes for the values that aren't numbers, or remove "+kind)
			m.Table = nil
		}
		return
	}
	plain := fmt.Sprintf("the kind %s", kind)
	for _, c := range []struct {
		given bool
		span  diag.Span
		what  string
		drop  func()
	}{
		{m.Expr != nil, formula, "a formula", func() { m.Expr = nil }},
		{m.In != nil, seen["in"], "a unit", func() { m.In = nil }},
		{m.Within != nil, seen["within"], "a range", func() { m.Within = nil }},
		{m.Tolerance != nil, seen["tolerance"], "a tolerance", func() { m.Tolerance = nil }},
		{m.Table != nil && kind != "states", m.tableSpan(), "a table of codes or states", func() { m.Table = nil }},
		{m.Initial != nil && (kind == "checksum" || kind == "always"), seen["initial"], "an initial value", func() { m.Initial = nil }},
	} {
		if c.given {
			refuse(c.span, fmt.Sprintf("%s can't stand with %s: only numbers have it", c.what, plain), fmt.Sprintf("remove it, or remove %s", kind))
			c.drop()
		}
	}
}

func (m *Member) tableSpan() diag.Span {
	if m.Table == nil {
		return diag.Span{}
	}
	return m.Table.Span
}

func (l *lowering) used(word *token, g *gUsed) *TableClause {
	t := &TableClause{States: word.Value == "states", Span: l.span(word)}
	if g.Path != nil {
		path := l.path(g.Path)
		t.Path = &path
		t.Span = t.Span.To(path.Span)
		return t
	}
	t.Entries = l.entries(g.Entries)
	if n := len(t.Entries); n > 0 {
		t.Span = t.Span.To(t.Entries[n-1].Span)
	}
	return t
}

func (l *lowering) initial(word diag.Span, g *gInitial) *InitialClause {
	i := &InitialClause{Span: word}
	if g.Value != nil {
		i.Quantity = l.optionalQuantity(g.Value)
		i.Span = i.Span.To(i.Quantity.Span)
		return i
	}
	n := l.name(&g.Name)
	i.Name = &n
	i.Span = i.Span.To(n.Span)
	return i
}

func (l *lowering) note(g *gNote) *Note {
	text := l.texts(gTexts{[]token{g.Text}})
	return &Note{At{l.span(&g.Word).To(text.Span)}, l.name(&g.Key), text}
}

func (l *lowering) kind(g *gKind) *KindClause {
	switch {
	case g.Simple.Value != "":
		return &KindClause{Word: g.Simple.Value, Span: l.span(&g.Simple)}
	case g.Two.Value != "":
		return &KindClause{Word: "sign magnitude", Span: l.span(&g.Two).To(l.span(&g.Second))}
	case g.Packed.Value != "":
		return &KindClause{Word: "packed decimal", Span: l.span(&g.Packed).To(l.span(&g.Decimal))}
	case g.Text.Value != "":
		k := &KindClause{Word: "text", Encoding: g.Encoding.Value, Fill: l.optionalNumber(&g.Fill), Span: l.span(&g.Text).To(l.span(&g.Encoding))}
		if k.Fill != nil {
			k.Span = k.Span.To(k.Fill.Span)
		}
		return k
	case g.AlwaysAt.Value != "":
		n := l.number(&g.Always)
		return &KindClause{Word: "always", Span: l.span(&g.AlwaysAt).To(n.Span), Always: &n}
	case g.Counter != nil:
		c := g.Counter
		k := &KindClause{Word: "counter", Low: l.optionalNumber(&c.Low), High: l.optionalNumber(&c.High), Step: l.optionalNumber(&c.Step),
			AllowLost: l.optionalNumber(&c.Lost), AllowRepeated: l.optionalNumber(&c.Repeated), Span: l.span(&c.Word)}
		for _, end := range []*token{&c.High, &c.Step, &c.LostEnd, &c.RepEnd} {
			if end.Value != "" {
				k.Span = k.Span.To(l.span(end))
			}
		}
		return k
	}
	m := l.method(g.Checksum)
	return &KindClause{Word: "checksum", Span: m.Span, Method: m}
}

func (l *lowering) method(g *gMethod) *MethodRef {
	m := &MethodRef{Span: l.span(&g.Word)}
	if g.Name == nil {
		m.E2E = true
		m.Profile = l.number(&g.Profile)
		if g.Mode.Value != "" {
			m.Mode = l.name(&g.Mode)
		}
		for i := range g.IDs.toks {
			m.IDs = append(m.IDs, l.number(&g.IDs.toks[i]))
		}
		path := l.path(g.Counter)
		m.Counter = &path
		m.Span = m.Span.To(path.Span)
		return m
	}
	m.Name = l.path(g.Name)
	for _, f := range g.Feeds {
		m.Feeds = append(m.Feeds, l.feed(f))
		m.Span = m.Span.To(m.Feeds[len(m.Feeds)-1].Span)
	}
	return m
}

func (l *lowering) feed(g *gFeed) FeedRef {
	if g.Const.Value != "" {
		n := l.number(&g.Const)
		return FeedRef{Const: &n, Span: n.Span}
	}
	f := FeedRef{First: l.optionalNumber(&g.First), Last: l.optionalNumber(&g.Last), End: g.End.Value != ""}
	f.Span = l.span(&g.Word).To(f.First.Span)
	if f.Last != nil {
		f.Span = f.Span.To(f.Last.Span)
	}
	if f.End {
		f.Span = f.Span.To(l.span(&g.End))
	}
	return f
}
