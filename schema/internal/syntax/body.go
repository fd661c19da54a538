package syntax

import (
	"fmt"

	"busloom/diag"
)

// body reads the items of a body. Each item is a piece of its own, so one that
// is broken doesn't hide the others.
func (p *parser) body(at piece, depth int) *Body {
	b := &Body{Span: p.pieceSpan(at)}
	if at.from >= at.to && at.from > 0 {
		end := p.tokenSpan(&p.tokens[at.from-1]).End
		b.Span = p.span(end, end)
	}
	for _, item := range p.tokens.items(at.from, at.to) {
		if i := p.item(item, depth); i != nil {
			b.Items = append(b.Items, i)
		}
	}
	return b
}

func (p *parser) item(at piece, depth int) Item {
	first, second := at.from, at.from+1
	switch {
	case second < at.to && p.tokens.word(first) != "" && p.tokens.keyword(second, "at"):
		return p.member(at)
	case second < at.to && p.tokens.word(first) != "" && (p.tokens.keyword(second, "is") || p.tokens.punct(second, "[")):
		if g, ok := parsePiece(p, p.parsers.group, at); ok {
			return p.group(g, at)
		}
	case p.tokens.word(first) == "select":
		return p.selection(at, depth)
	case factWords[p.tokens.word(first)]:
		if g, ok := parsePiece(p, p.parsers.fact, at); ok {
			return p.fact(g, at)
		}
	default:
		p.noItem(at)
	}
	return nil
}

// noItem tells of tokens that begin no item.
func (p *parser) noItem(at piece) {
	if p.hasInvalid(at) {
		return
	}
	t := &p.tokens[at.from]
	if t.Type == tokKeyword {
		p.problems.Report(diag.UnexpectedWord, p.tokenSpan(t), fmt.Sprintf("%s is a reserved word and can't be a name", t.Value), "choose another name: at, is, ones and raw are taken")
		return
	}
	remedy := "a member is written name at place; facts begin with from, every, on, fill, default, unused, holds, relayed, replaced, note or select"
	if near := diag.Nearest(t.Value, keys(factWords)); near != "" && t.Type == tokWord {
		remedy = "did you mean " + near + "? A member is written name at place"
	}
	p.problems.Report(diag.UnexpectedWord, p.tokenSpan(t), clip(t.Value)+" begins no member and no fact", remedy)
}

func (p *parser) group(g *gGroup, at piece) *Group {
	out := &Group{At: At{p.pieceSpan(at)}, Name: p.name(g.Name), Low: p.optionalNumber(g.Low), High: p.optionalNumber(g.High),
		Shape: p.path(&g.Shape), Origin: p.number(g.Origin), Step: p.optionalNumber(g.Step), Text: p.texts(g.Texts)}
	for _, k := range g.Keys {
		out.Keys = append(out.Keys, Key{Text: k.Value, Span: p.tokenSpan(&k)})
	}
	return out
}

func (p *parser) selection(at piece, depth int) Item {
	if depth >= maxDepth {
		p.problems.Report(diag.NestedTooDeep, p.tokenSpan(&p.tokens[at.from]), fmt.Sprintf("selections are nested more than %d deep", maxDepth), "split the message")
		return nil
	}
	open, ok := p.tokens.open(at)
	if !ok {
		if _, ok := parsePiece(p, p.parsers.selectP, at); ok {
			p.unexpected(at, p.pieceSpan(at).End, "{")
		}
		return nil
	}
	close, closed := p.tokens.closing(open, at.to)
	if !closed {
		p.problems.Report(diag.UnclosedBlock, p.tokenSpan(&p.tokens[open]), "this block isn't closed", "add the closing brace }")
	} else if close+1 < at.to {
		p.noItem(piece{close + 1, at.to})
	}
	out := &Select{At: At{p.pieceSpan(piece{at.from, min(close+1, at.to)})}, Word: p.tokenSpan(&p.tokens[at.from])}
	head, good := parsePiece(p, p.parsers.selectP, piece{at.from, open})
	if good {
		out.Selector = p.path(&head.Path)
	}
	for _, b := range p.tokens.branches(open+1, close) {
		p.branch(out, b, depth)
	}
	if !good {
		return nil
	}
	return out
}

func (p *parser) branch(s *Select, at piece, depth int) {
	word := p.tokens.word(at.from)
	if word != "when" && word != "otherwise" {
		if !p.hasInvalid(at) {
			t := &p.tokens[at.from]
			p.problems.Report(diag.UnexpectedWord, p.tokenSpan(t), clip(t.Value)+" can't stand here: expected when or otherwise", "a select has branches: when 0 { ... } and otherwise")
		}
		return
	}
	open, hasBody := p.tokens.open(at)
	var body *Body
	if hasBody {
		close, closed := p.tokens.closing(open, at.to)
		if !closed {
			p.problems.Report(diag.UnclosedBlock, p.tokenSpan(&p.tokens[open]), "this block isn't closed", "add the closing brace }")
		} else if close+1 < at.to {
			p.noItem(piece{close + 1, at.to})
		}
		body = p.body(piece{open + 1, close}, depth+1)
	}
	span := p.pieceSpan(at)
	if word == "when" {
		g, ok := parsePiece(p, p.parsers.when, piece{at.from, open})
		if !ok {
			return
		}
		if !hasBody {
			p.unexpected(at, span.End, "{")
			return
		}
		w := &When{Span: span, Body: body}
		for _, c := range g.Choices {
			w.Choices = append(w.Choices, p.choice(c))
		}
		s.Whens = append(s.Whens, w)
		return
	}
	o := &Otherwise{Span: p.tokenSpan(&p.tokens[at.from]), Whole: span, Body: body}
	if hasBody {
		if open != at.from+1 {
			p.unexpected(at, p.tokens[at.from+1].Pos.Offset, "nothing, unknown or {")
			return
		}
	} else {
		g, ok := parsePiece(p, p.parsers.otherwise, at)
		if !ok {
			return
		}
		o.Word = g.Word.Value
	}
	if s.Otherwise != nil {
		p.repeated(&p.tokens[at.from])
		return
	}
	s.Otherwise = o
}

func (p *parser) choice(g *gChoice) ChoiceRef {
	if g.Raws == nil {
		n := p.name(g.Name)
		return ChoiceRef{Name: &n, Span: n.Span}
	}
	r := p.rawRange(g.Raws)
	return ChoiceRef{Raws: &r, Span: r.Span}
}

func (p *parser) fact(g *gFact, at piece) Item {
	a := At{p.pieceSpan(at)}
	switch {
	case g.From != nil:
		f := &FromFact{At: a, Receivers: p.names(g.From.Receivers)}
		first := p.name(g.From.First)
		f.Senders = append([]Name{first}, p.names(g.From.Senders)...)
		for _, j := range g.From.Join {
			if (j.Value == "or") != (g.From.Join[0].Value == "or") {
				p.problems.Report(diag.UnexpectedWord, p.tokenSpan(&j), "senders are joined all by or, or all by commas", "from A or B: one of them is fitted; from A, B: both send")
			}
			f.OneFitted = j.Value == "or"
		}
		if first.Text == "any" && len(f.Senders) == 1 {
			f.Any, f.Senders = true, nil
		}
		return f
	case g.Timing != nil:
		return p.timing(g.Timing, a)
	case g.Fill.Value != "":
		return &FillFact{a, p.number(g.Fill)}
	case g.Default != nil:
		return &DefaultCodesFact{a, p.path(g.Default)}
	case g.Unused != nil:
		return &UnusedFact{a, p.runs(g.Unused.Runs)}
	case g.Holds != nil:
		return &HoldsFact{a, p.path(&g.Holds.Shape), p.number(g.Holds.Origin)}
	case g.Relayed != nil:
		f := &RelayedFact{At: a, By: p.name(g.Relayed.By), To: p.name(g.Relayed.To)}
		if g.Relayed.As != nil {
			id := p.id(g.Relayed.As)
			f.As = &id
		}
		return f
	case g.Replaced != nil:
		return &ReplacedFact{a, p.path(&g.Replaced.Path)}
	}
	return &Note{a, p.name(g.Note.Key), p.texts([]token{g.Note.Text})}
}

func (p *parser) timing(g *gTiming, a At) Item {
	f := &TimingFact{At: a}
	word := g.OnWord
	if g.Every != nil {
		q := p.quantity(g.Every)
		f.Every = &q
		word = g.OrWord
	}
	f.OnChange, f.OnRequest = word.Value == "change", word.Value == "request"
	for _, c := range g.Clauses {
		to, from := &f.Gap, c.Gap
		if c.Lost != nil {
			to, from = &f.Lost, c.Lost
		}
		if *to != nil {
			p.problems.Report(diag.RepeatedClause, p.quantity(from).Span, "this time is given a second time", "keep one of them")
			continue
		}
		q := p.quantity(from)
		*to = &q
	}
	return f
}

func (p *parser) member(at piece) Item {
	g, ok := parsePiece(p, p.parsers.member, at)
	if !ok {
		return nil
	}
	m := &Member{At: At{p.pieceSpan(at)}, Name: p.name(g.Name)}
	m.Place.Runs = p.runs(g.Runs)
	m.Place.Span = m.Place.Runs[0].Span.To(m.Place.Runs[len(m.Place.Runs)-1].Span)
	seen := map[string]bool{}
	once := func(what string, at token) bool {
		if seen[what] {
			p.repeated(&at)
			return false
		}
		seen[what] = true
		return true
	}
	var texts []token
	for _, c := range g.Clauses {
		switch {
		case c.Text.Value != "":
			texts = append(texts, c.Text)
		case c.Expr != nil:
			if once("=", c.Expr.first()) {
				m.Expr = p.expr(c.Expr)
			}
		case c.In.Value != "":
			if once("in", c.In) {
				u := p.unit(c.In)
				m.In = &u
			}
		case c.Within != nil:
			if once("within", c.Within.Word) {
				w := &WithinClause{Low: p.quantity(&c.Within.Low), High: p.quantity(&c.Within.High)}
				w.Span = p.tokenSpan(&c.Within.Word).To(w.High.Span)
				m.Within = w
			}
		case c.Table != nil:
			if once("codes or states", c.Table.Word) {
				m.Table = p.table(c.Table)
			}
		case c.Initial != nil:
			if once("initial", c.Initial.Word) {
				m.Initial = p.initial(c.Initial)
			}
		case c.Tolerance != nil:
			if once("tolerance", c.Tolerance.Word) {
				q := p.quantity(&c.Tolerance.Value)
				m.Tolerance = &q
			}
		case c.Replaced != nil:
			if once("replaced", c.Replaced.Word) {
				path := p.path(&c.Replaced.Path)
				m.Replaced = &path
			}
		case c.Note != nil:
			key := p.name(c.Note.Key)
			text := p.texts([]token{c.Note.Text})
			m.Notes = append(m.Notes, &Note{At{p.tokenSpan(&c.Note.Word).To(text.Span)}, key, text})
		case c.Kind != nil:
			k := p.kind(c.Kind)
			if seen["kind"] {
				p.problems.Report(diag.RepeatedClause, k.Span, "the kind of value is given a second time", "keep one of them")
			} else {
				m.Kind = k
			}
			seen["kind"] = true
		}
	}
	m.Text = p.texts(texts)
	p.checkClauses(m)
	return m
}

// checkClauses refuses clauses that can't stand on a kind, whatever their
// names mean.
func (p *parser) checkClauses(m *Member) {
	if m.Kind == nil {
		return
	}
	word := m.Kind.Word
	number := word == "signed" || word == "sign magnitude" || word == "float" || word == "packed decimal"
	refuse := func(span diag.Span, clause string) {
		p.problems.Report(diag.ClauseNotAllowed, span, fmt.Sprintf("%s can't stand on a member of kind %s", clause, word), "remove it, or remove the kind")
	}
	if number {
		if m.Table != nil && m.Table.States {
			refuse(m.Table.Span, "states")
		}
		return
	}
	if m.Expr != nil {
		refuse(m.Expr.ExprSpan(), "a formula")
		m.Expr = nil
	}
	if m.In != nil {
		refuse(m.In.Span, "in")
		m.In = nil
	}
	if m.Within != nil {
		refuse(m.Within.Span, "within")
		m.Within = nil
	}
	if m.Tolerance != nil {
		refuse(m.Tolerance.Span, "tolerance")
		m.Tolerance = nil
	}
	if m.Table != nil {
		refuse(m.Table.Span, "a table of codes or states")
		m.Table = nil
	}
}
