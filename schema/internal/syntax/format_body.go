package syntax

import (
	"bytes"
	"strings"
	"unicode/utf8"

	"busloom/diag"
)

// body writes items; the members of a paragraph have their at in one column.
func (f *formatter) body(b *Body) {
	if b == nil {
		return
	}
	widths := f.nameWidths(b.Items)
	for i, item := range b.Items {
		f.item(item, widths[i])
	}
}

// nameWidths gives each member the width of the longest name in its paragraph.
func (f *formatter) nameWidths(items []Item) []int {
	widths := make([]int, len(items))
	start, wide := 0, 0
	settle := func(to int) {
		for i := start; i < to; i++ {
			widths[i] = wide
		}
		start, wide = to, 0
	}
	for i, item := range items {
		if i > 0 && f.blankWithin(items[i-1].ItemSpan().End, item.ItemSpan().Start) {
			settle(i)
		}
		if m, ok := item.(*Member); ok {
			wide = max(wide, len(m.Name.Text))
		}
	}
	settle(len(items))
	return widths
}

// blankWithin reports whether a blank line stands between two offsets.
func (f *formatter) blankWithin(from, to int) bool {
	between := f.src.Text[from:to]
	for {
		i := bytes.IndexByte(between, '\n')
		if i < 0 {
			return false
		}
		between = between[i+1:]
		if j := bytes.IndexByte(between, '\n'); j >= 0 && len(bytes.TrimSpace(between[:j])) == 0 {
			return true
		}
	}
}

func (f *formatter) item(item Item, width int) {
	switch i := item.(type) {
	case *Member:
		f.member(i, width)
	case *Group:
		f.element(i.Span, f.group(i))
	case *Select:
		f.block(i.Span, i.Selector.Span.End, "select "+path(&i.Selector), func() { f.branches(i) })
	default:
		f.element(item.ItemSpan(), f.fact(item))
	}
}

// branches writes a selection's inside. otherwise may stand anywhere in it and
// is written where it stands.
func (f *formatter) branches(s *Select) {
	otherwise := s.Otherwise
	write := func(before int) {
		o := otherwise
		if o == nil || o.Whole.Start > before {
			return
		}
		otherwise = nil
		if o.Body == nil {
			f.element(o.Whole, "otherwise "+o.Word)
		} else {
			f.block(o.Whole, o.Span.End, "otherwise", func() { f.body(o.Body) })
		}
	}
	for _, w := range s.Whens {
		write(w.Span.Start)
		var choices []string
		for _, c := range w.Choices {
			choices = append(choices, choice(c))
		}
		f.block(w.Span, w.Choices[len(w.Choices)-1].Span.End, "when "+strings.Join(choices, ", "), func() { f.body(w.Body) })
	}
	write(len(f.src.Text))
}

func (f *formatter) group(g *Group) string {
	text := g.Name.Text
	switch {
	case g.Low != nil:
		text += "[" + g.Low.Raw + ".." + g.High.Raw + "]"
	case len(g.Keys) > 0:
		var keys []string
		for _, k := range g.Keys {
			keys = append(keys, k.Text)
		}
		text += "[" + strings.Join(keys, ", ") + "]"
	}
	text += " is " + path(&g.Shape) + " from byte " + g.Origin.Raw
	if g.Step != nil {
		text += " step " + g.Step.Raw
	}
	return text + f.texts(g.Text)
}

func (f *formatter) fact(item Item) string {
	switch i := item.(type) {
	case *FromFact:
		text := "from any"
		if !i.Any {
			join := ", "
			if i.OneFitted {
				join = " or "
			}
			var all []string
			for _, s := range i.Senders {
				all = append(all, s.Text)
			}
			text = "from " + strings.Join(all, join)
		}
		if len(i.Receivers) > 0 {
			text += " to " + names(i.Receivers)
		}
		return text
	case *TimingFact:
		return timing(i)
	case *FillFact:
		return "fill " + i.Value.Raw
	case *DefaultCodesFact:
		return "default codes " + path(&i.Path)
	case *UnusedFact:
		var all []string
		for _, r := range i.Runs {
			all = append(all, run(r))
		}
		return "unused " + strings.Join(all, ", ")
	case *HoldsFact:
		return "holds " + path(&i.Shape) + " from byte " + i.Origin.Raw
	case *RelayedFact:
		text := "relayed by " + i.By.Text + " to " + i.To.Text
		if i.As != nil {
			text += " as " + id(i.As)
		}
		return text
	case *ReplacedFact:
		return "replaced by " + path(&i.Path)
	case *Note:
		return note(i)
	}
	return ""
}

// member writes a member: its clauses in the canonical order, two blanks
// between them, going on below where the line gets too wide. A table in place
// is written in lines if it has texts or comments, or is long.
func (f *formatter) member(m *Member, width int) {
	l := memberLine{more: "\n" + f.indent() + indentation + indentation}
	l.add(f.indent()+m.Name.Text+strings.Repeat(" ", width-len(m.Name.Text))+" at "+place(m.Place), "")
	gap := " "
	clause := func(text string) {
		l.add(text, gap)
		gap = "  "
	}
	if m.Kind != nil {
		clause(kind(m.Kind))
		gap = " " // the formula belongs to the kind: signed = raw * 2
	}
	if m.Expr != nil {
		text := "= " + formula(m.Expr, 0)
		if m.In != nil {
			text += " in " + m.In.Text
		}
		clause(text)
	}
	if l.clauses > 1 {
		gap = "  "
	}
	if m.Within != nil {
		clause("within " + quantity(&m.Within.Low) + ".." + quantity(&m.Within.High))
	}
	var table *TableClause // in lines
	var inside diag.Span
	head := ""
	if m.Table != nil {
		inside = f.braces(m.Table)
		if text := f.tableLine(m.Table); text != "" && !f.commentIn(inside) {
			clause(text)
		} else {
			word := "codes {"
			if m.Table.States {
				word = "states {"
			}
			clause(word)
			table, head = m.Table, l.take()
			l.add(f.indent()+"}", "")
		}
	}
	if m.Initial != nil {
		if m.Initial.Quantity != nil {
			clause("initial " + quantity(m.Initial.Quantity))
		} else {
			clause("initial " + m.Initial.Name.Text)
		}
	}
	if m.Tolerance != nil {
		clause("tolerance " + quantity(m.Tolerance))
	}
	if m.Replaced != nil {
		clause("replaced by " + path(m.Replaced))
	}
	// Notes have lines of their own, and the text still ends the member.
	for _, n := range m.Notes {
		l.text.WriteString(l.more + note(n))
	}
	for _, part := range m.Text.Parts {
		if len(m.Notes) > 0 {
			l.text.WriteString(l.more + quote(part))
		} else {
			clause(quote(part))
		}
	}
	if table == nil {
		f.above(m.Span, diag.Span{})
		f.write(l.take(), m.Span.End)
		return
	}
	f.above(m.Span, inside)
	f.write(head, inside.Start+1)
	f.inner(func() {
		for _, e := range table.Entries {
			f.element(e.Span, f.entry(e))
		}
	}, inside.End-1)
	f.write(l.take(), m.Span.End)
}

// memberLine collects the clauses of a member.
type memberLine struct {
	text    strings.Builder
	column  int
	clauses int
	more    string // begins a line on which the member goes on
}

func (l *memberLine) add(clause, gap string) {
	need := utf8.RuneCountInString(gap + clause)
	if l.clauses > 1 && l.column+need > widest {
		l.text.WriteString(l.more + clause)
		l.column = utf8.RuneCountInString(l.more+clause) - 1
	} else {
		l.text.WriteString(gap + clause)
		l.column += need
	}
	l.clauses++
}

// take returns what was collected and begins anew.
func (l *memberLine) take() string {
	out := l.text.String()
	*l = memberLine{more: l.more}
	return out
}

// braces is the span of a table's braces; unknown for a table by name.
func (f *formatter) braces(t *TableClause) diag.Span {
	if t.Path != nil {
		return diag.Span{}
	}
	open := f.find(t.Span.Start, '{')
	return diag.Span{File: f.src, Start: open, End: f.find(open, '}') + 1}
}

// tableLine writes codes or states by name, or a short table in place that has
// no texts; "" for others.
func (f *formatter) tableLine(t *TableClause) string {
	word := "codes"
	if t.States {
		word = "states"
	}
	if t.Path != nil {
		return word + " " + path(t.Path)
	}
	all := []string{word, " {"}
	for _, e := range t.Entries {
		if e.Text.Given {
			return ""
		}
		all = append(all, "  ", f.entry(e))
	}
	if len(t.Entries) > 0 {
		all[2] = " "
	}
	if line := strings.Join(append(all, " }"), ""); len(line) <= 60 {
		return line
	}
	return ""
}

func (f *formatter) entry(e *Entry) string {
	out := rawRange(&e.Raws) + ":"
	if e.Class.Text != "" {
		out += " " + e.Class.Text
	}
	if e.Name.Text != "" {
		out += " " + e.Name.Text
	}
	return out + f.texts(e.Text)
}
