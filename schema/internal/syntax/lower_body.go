package syntax

import "busloom/diag"

func (l *lowering) body(g *gBody) *Body {
	b := &Body{Span: l.span(&g.Open).To(l.span(&g.Close))}
	for _, i := range g.Items {
		if item := l.item(i); item != nil {
			b.Items = append(b.Items, item)
		}
	}
	return b
}

func (l *lowering) item(g *gItem) Item {
	switch {
	case g.Member != nil:
		return l.member(g.Member)
	case g.Group != nil:
		return l.group(g.Group)
	case g.Select != nil:
		return l.selection(g.Select)
	case g.From != nil:
		return l.from(g.From)
	case g.Timing != nil:
		return l.timing(g.Timing)
	case g.Fill != nil:
		n := l.number(&g.Fill.Value)
		return &FillFact{At{l.span(&g.Fill.Word).To(n.Span)}, n}
	case g.Default != nil:
		p := l.path(&g.Default.Path)
		return &DefaultCodesFact{At{l.span(&g.Default.Word).To(p.Span)}, p}
	case g.Unused != nil:
		runs := l.runs(g.Unused.Runs)
		return &UnusedFact{At{l.span(&g.Unused.Word).To(runs[len(runs)-1].Span)}, runs}
	case g.Holds != nil:
		n := l.number(&g.Holds.Origin)
		return &HoldsFact{At{l.span(&g.Holds.Word).To(n.Span)}, l.path(&g.Holds.Shape), n}
	case g.Relayed != nil:
		f := &RelayedFact{By: l.name(&g.Relayed.By), To: l.name(&g.Relayed.To)}
		f.Span = l.span(&g.Relayed.Word).To(f.To.Span)
		if g.Relayed.As != nil {
			id := l.id(g.Relayed.As)
			f.As = &id
			f.Span = f.Span.To(id.Span)
		}
		return f
	case g.Replaced != nil:
		p := l.path(&g.Replaced.Path)
		return &ReplacedFact{At{l.span(&g.Replaced.Word).To(p.Span)}, p}
	}
	return l.note(g.Note)
}

func (l *lowering) from(g *gFrom) *FromFact {
	f := &FromFact{Senders: l.names(g.Senders.names), Receivers: l.names(g.Receivers.toks)}
	f.Span = l.span(&g.Word).To(f.Senders[len(f.Senders)-1].Span)
	if n := len(f.Receivers); n > 0 {
		f.Span = f.Span.To(f.Receivers[n-1].Span)
	}
	joints := g.Senders.joints
	for i := range joints {
		j := &joints[i]
		if (j.Value == "or") != (joints[0].Value == "or") {
			l.problems.Report(diag.UnexpectedWord, l.span(j), "senders are joined all by or, or all by commas, not by both",
				"write from A or B if one of them is fitted, from A, B if all of them send")
			break
		}
		f.OneFitted = j.Value == "or"
	}
	if f.Senders[0].Text == "any" && len(f.Senders) == 1 {
		f.Any, f.Senders = true, nil
	}
	return f
}

func (l *lowering) timing(g *gTiming) *TimingFact {
	f := &TimingFact{Every: l.optionalQuantity(g.Every)}
	word := &g.OnWord
	if f.Every != nil {
		f.Span = l.span(&g.EveryAt).To(f.Every.Span)
		word = &g.OrWord
	} else {
		f.Span = l.span(&g.OnAt)
	}
	if word.Value != "" {
		f.Span = f.Span.To(l.span(word))
	}
	f.OnChange, f.OnRequest = word.Value == "change", word.Value == "request"
	for _, w := range g.Waits {
		to, q, what := &f.Gap, w.Gap, "the least distance"
		if w.Lost != nil {
			to, q, what = &f.Lost, w.Lost, "lost after"
		}
		v := l.optionalQuantity(q)
		if *to != nil {
			l.problems.Report(diag.RepeatedClause, v.Span, what+" is given a second time", "keep one of the two").Also((*to).Span, "the first time")
			continue
		}
		*to = v
		f.Span = f.Span.To(v.Span)
		if w.Apart.Value != "" {
			f.Span = f.Span.To(l.span(&w.Apart))
		}
	}
	return f
}

func (l *lowering) group(g *gGroup) *Group {
	out := &Group{Name: l.name(&g.Name), Low: l.optionalNumber(&g.Low), High: l.optionalNumber(&g.High),
		Shape: l.path(&g.Shape), Origin: l.number(&g.Origin), Step: l.optionalNumber(&g.Step), Text: l.texts(g.Text)}
	for i := range g.Keys.toks {
		out.Keys = append(out.Keys, Key{Text: g.Keys.toks[i].Value, Span: l.span(&g.Keys.toks[i])})
	}
	out.Span = out.Name.Span.To(out.Origin.Span)
	if out.Step != nil {
		out.Span = out.Span.To(out.Step.Span)
	}
	if out.Text.Given {
		out.Span = out.Span.To(out.Text.Span)
	}
	return out
}

func (l *lowering) selection(g *gSelect) *Select {
	s := &Select{At: At{l.span(&g.Word).To(l.span(&g.Close))}, Word: l.span(&g.Word), Selector: l.path(&g.Path)}
	for _, b := range g.Branches {
		l.branch(s, b)
	}
	return s
}

func (l *lowering) branch(s *Select, g *gBranch) {
	if g.When.Value != "" {
		w := &When{Body: l.body(g.Body)}
		w.Span = l.span(&g.When).To(w.Body.Span)
		for _, c := range g.Choices {
			w.Choices = append(w.Choices, l.choice(c))
		}
		s.Whens = append(s.Whens, w)
		return
	}
	o := &Otherwise{Span: l.span(&g.Otherwise), Word: g.Word.Value}
	if g.Else != nil {
		o.Body = l.body(g.Else)
		o.Whole = o.Span.To(o.Body.Span)
	} else {
		o.Whole = o.Span.To(l.span(&g.Word))
	}
	if s.Otherwise != nil {
		l.problems.Report(diag.RepeatedClause, o.Span, "otherwise is given a second time", "keep one of the two").Also(s.Otherwise.Span, "the first time")
		return
	}
	s.Otherwise = o
}

func (l *lowering) choice(g *gChoice) ChoiceRef {
	if g.Raws == nil {
		n := l.name(&g.Name)
		return ChoiceRef{Name: &n, Span: n.Span}
	}
	r := l.raws(g.Raws)
	return ChoiceRef{Raws: &r, Span: r.Span}
}
