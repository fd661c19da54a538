package syntax

import (
	"bytes"
	"strings"
	"unicode/utf8"

	"busloom/diag"
)

// widest is how wide a line gets before its clauses go on below it.
const widest = 110

const indentation = "  "

// Format lays a description out in the one canonical way. It keeps every
// comment and the paragraphs; ok is false, with problems reported, if the text
// has syntax errors.
func Format(src *diag.File, problems *diag.List) (out []byte, ok bool) {
	own := &diag.List{}
	tree := Parse(src, own)
	problems.Add(own)
	if own.Failed() {
		return nil, false
	}
	f := &formatter{src: src}
	for _, t := range scan(src.Text) {
		if t.Type == tokComment {
			f.comments = append(f.comments, t)
		}
	}
	f.file(tree)
	return f.out.Bytes(), true
}

// formatter writes lines. Comments are written where they stand: those before
// the end of an element on lines above it, those behind it on its line.
type formatter struct {
	src      *diag.File
	comments []token
	out      bytes.Buffer
	level    int
	// lastLine is the source line of what was written last, to see blank
	// lines; 0 at the start of a block.
	lastLine int
}

func (f *formatter) lineOf(offset int) int {
	line, _ := f.src.Position(offset)
	return line
}

// text returns the source's line of a span's last byte.
func (f *formatter) endLine(s diag.Span) int { return f.lineOf(max(s.Start, s.End-1)) }

// paragraph writes a blank line if the source has one before the line.
func (f *formatter) paragraph(line int) {
	if f.lastLine > 0 && line > f.lastLine+1 {
		f.out.WriteByte('\n')
	}
}

func (f *formatter) indent() string { return strings.Repeat(indentation, f.level) }

// above writes the comments that stand before an offset, each on its line.
func (f *formatter) above(offset int) {
	for len(f.comments) > 0 && f.comments[0].Pos.Offset < offset {
		c := f.comments[0]
		f.comments = f.comments[1:]
		line := f.lineOf(c.Pos.Offset)
		f.paragraph(line)
		f.out.WriteString(f.indent() + strings.TrimRight(c.Value, " \t") + "\n")
		f.lastLine = line
	}
}

// behind returns the comment that stands on the source line after an element,
// ready to be put behind it.
func (f *formatter) behind(line int) string {
	if len(f.comments) > 0 && f.lineOf(f.comments[0].Pos.Offset) == line {
		c := f.comments[0]
		f.comments = f.comments[1:]
		return "  " + strings.TrimRight(c.Value, " \t")
	}
	return ""
}

// element writes one element of whole lines with its comments.
func (f *formatter) element(s diag.Span, text string) {
	f.above(s.End)
	f.paragraph(f.lineOf(s.Start))
	end := f.endLine(s)
	f.out.WriteString(f.indent() + text + f.behind(end) + "\n")
	f.lastLine = end
}

// block writes head {, the inside, and }.
func (f *formatter) block(head, whole diag.Span, text string, inside func()) {
	open := f.openBrace(head, whole)
	f.above(open)
	f.paragraph(f.lineOf(head.Start))
	f.out.WriteString(f.indent() + text + " {" + f.behindOpen(open) + "\n")
	f.level++
	f.lastLine = 0
	inside()
	// Blank lines before the closing brace go.
	f.aboveClose(whole.End - 1)
	f.level--
	end := f.endLine(whole)
	f.out.WriteString(f.indent() + "}" + f.behind(end) + "\n")
	f.lastLine = end
}

// openBrace is the offset of the brace that follows a head.
func (f *formatter) openBrace(head, whole diag.Span) int {
	for _, t := range scan(f.src.Text[head.End:whole.End]) {
		if t.Type == tokPunct && t.Value == "{" {
			return head.End + t.Pos.Offset
		}
	}
	return head.End
}

// behindOpen is a comment on the line of an opening brace, unless something
// else of the block stands on that line before it.
func (f *formatter) behindOpen(open int) string {
	line := f.lineOf(open)
	if len(f.comments) == 0 || f.lineOf(f.comments[0].Pos.Offset) != line {
		return ""
	}
	if strings.TrimSpace(string(f.src.Text[open+1:f.comments[0].Pos.Offset])) != "" {
		return ""
	}
	return f.behind(line)
}

func (f *formatter) aboveClose(offset int) { f.above(offset) }

func (f *formatter) file(t *File) {
	f.element(t.Version.Span, "busloom "+t.Version.Raw)
	type part struct {
		span  diag.Span
		write func()
	}
	var parts []part
	if n := t.Network; n != nil {
		parts = append(parts, part{n.Span, func() { f.element(n.Span, "network "+n.Name.Text+f.texts(n.Text)) }})
	}
	for _, u := range t.Uses {
		parts = append(parts, part{u.Span, func() {
			text := "use " + quote(u.Path.Value)
			if u.As != nil {
				text += " as " + u.As.Text
			}
			f.element(u.Span, text)
		}})
	}
	for _, d := range t.Decls {
		parts = append(parts, part{d.Whole(), func() { f.declaration(d) }})
	}
	// Parts stand in three lists; the text has them in one order.
	for i := 1; i < len(parts); i++ {
		for j := i; j > 0 && parts[j].span.Start < parts[j-1].span.Start; j-- {
			parts[j], parts[j-1] = parts[j-1], parts[j]
		}
	}
	for _, p := range parts {
		p.write()
	}
	f.above(len(f.src.Text) + 1)
}

// texts writes the quoted texts of a head; further ones go on below.
func (f *formatter) texts(t Text) string {
	if !t.Given {
		return ""
	}
	out := ""
	for i, part := range t.Parts {
		if i == 0 {
			out += " " + quote(part)
		} else {
			out += "\n" + f.indent() + indentation + indentation + quote(part)
		}
	}
	return out
}

func (f *formatter) declaration(d Decl) {
	switch d := d.(type) {
	case *BusDecl:
		text := "bus " + d.Name.Text + " " + quantity(&d.Rate)
		if d.FD != nil {
			text += " fd " + quantity(d.FD)
		}
		f.element(d.Whole(), text+f.texts(d.Text))
	case *ECUDecl:
		text := "ecu " + d.Name.Text + " on " + names(d.Buses)
		if d.Source != nil {
			text += " with source " + d.Source.Raw
		}
		f.element(d.Whole(), text+f.texts(d.Text))
	case *UnitDecl:
		text := "unit " + d.Name.Text
		if d.Value != nil {
			text += " = " + quantity(d.Value)
		}
		f.element(d.Whole(), text+f.texts(d.Text))
	case *ConstDecl:
		f.element(d.Whole(), "const "+d.Name.Text+" = "+formula(d.Expr, 0)+f.texts(d.Text))
	case *TableDecl:
		text := "codes "
		if d.States {
			text = "states "
		}
		text += d.Name.Text
		if d.ByTopByte {
			text += " by top byte"
		}
		f.block(headEnd(d.HeadSpan, d.Text), d.Whole(), text+f.texts(d.Text), func() {
			for _, e := range d.Entries {
				f.element(e.Span, f.entry(e))
			}
		})
	case *CurveDecl:
		text := "curve " + d.Name.Text + " from " + d.From.Text + " to " + d.To.Text + " outside " + d.Outside.Text
		f.block(headEnd(d.HeadSpan.To(d.Outside.Span), d.Text), d.Whole(), text+f.texts(d.Text), func() {
			for _, p := range d.Points {
				f.element(p.Span, quantity(&p.X)+": "+quantity(&p.Y))
			}
		})
	case *IDFormDecl:
		text := "idform " + d.Name.Text + " " + d.Bits.Raw + " bits" + f.texts(d.Text) + " { "
		for i, x := range d.Fields {
			if i > 0 {
				text += ", "
			}
			text += x.Name.Text + " " + x.Width.Raw
		}
		f.element(d.Whole(), text+" }")
	case *CRCDecl:
		f.element(d.Whole(), f.crc(d))
	case *ShapeDecl:
		text := "shape " + d.Name.Text + " " + bytesOf(d.Size)
		f.block(headEnd(d.HeadSpan.To(d.Size.Span), d.Text), d.Whole(), text+f.texts(d.Text), func() { f.body(d.Body) })
	case *MessageDecl:
		text := "message " + d.Name.Text + " " + id(&d.ID) + " on " + d.Bus.Text + ", "
		if d.FD {
			text += "fd "
		}
		if d.AtLeast {
			text += "at least "
		}
		text += bytesOf(d.Size)
		f.block(headEnd(d.HeadSpan.To(d.Size.Span), d.Text), d.Whole(), text+f.texts(d.Text), func() { f.body(d.Body) })
	}
}

func headEnd(head diag.Span, text Text) diag.Span {
	if text.Given {
		return head.To(text.Span)
	}
	return head
}

func (f *formatter) crc(d *CRCDecl) string {
	var keys []string
	for _, k := range []struct {
		word  string
		value *Number
	}{{"polynomial", d.Polynomial}, {"initial", d.Initial}, {"final", d.Final}} {
		if k.value != nil {
			keys = append(keys, k.word+" "+k.value.Raw)
		}
	}
	if d.ReflectIn {
		keys = append(keys, "reflected input")
	}
	if d.ReflectOut {
		keys = append(keys, "reflected output")
	}
	if d.Check != nil {
		keys = append(keys, "check "+d.Check.Raw)
	}
	return "crc " + d.Name.Text + " " + d.Bits.Raw + " bits" + f.texts(d.Text) + " { " + strings.Join(keys, "  ") + " }"
}

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
		if i > 0 && f.blankBetween(items[i-1].ItemSpan(), item.ItemSpan()) {
			settle(i)
		}
		if m, ok := item.(*Member); ok {
			wide = max(wide, len(m.Name.Text))
		}
	}
	settle(len(items))
	return widths
}

// blankBetween reports whether the source has a blank line between two spans.
func (f *formatter) blankBetween(a, b diag.Span) bool {
	from, to := f.endLine(a)+1, f.lineOf(b.Start)
	for line := from; line < to; line++ {
		if len(bytes.TrimSpace(f.src.Line(line))) == 0 {
			return true
		}
	}
	return false
}

func (f *formatter) item(item Item, width int) {
	switch i := item.(type) {
	case *Member:
		f.element(i.Span, f.member(i, width))
	case *Group:
		f.element(i.Span, f.group(i))
	case *Select:
		head := i.Word.To(i.Selector.Span)
		f.block(head, i.Span, "select "+path(&i.Selector), func() {
			for _, w := range i.Whens {
				var choices []string
				for _, c := range w.Choices {
					choices = append(choices, choice(c))
				}
				last := w.Choices[len(w.Choices)-1].Span
				f.block(diag.Span{File: w.Span.File, Start: w.Span.Start, End: last.End}, w.Span, "when "+strings.Join(choices, ", "), func() { f.body(w.Body) })
			}
			if o := i.Otherwise; o != nil {
				if o.Body == nil {
					f.element(o.Whole, "otherwise "+o.Word)
				} else {
					f.block(o.Span, o.Whole, "otherwise", func() { f.body(o.Body) })
				}
			}
		})
	default:
		f.element(item.ItemSpan(), f.fact(item))
	}
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
// between them, going on below where the line gets too wide.
func (f *formatter) member(m *Member, width int) string {
	head := m.Name.Text + strings.Repeat(" ", width-len(m.Name.Text)) + " at " + place(m.Place)
	var clauses []string
	if m.Kind != nil {
		clauses = append(clauses, kind(m.Kind))
	}
	if m.Expr != nil {
		text := "= " + formula(m.Expr, 0)
		if m.In != nil {
			text += " in " + m.In.Text
		}
		// The formula belongs to the kind: signed = raw * 2.
		if len(clauses) > 0 {
			clauses[0] += " " + text
		} else {
			clauses = append(clauses, text)
		}
	} else if m.In != nil {
		clauses = append(clauses, "in "+m.In.Text)
	}
	if m.Within != nil {
		clauses = append(clauses, "within "+quantity(&m.Within.Low)+".."+quantity(&m.Within.High))
	}
	if m.Table != nil {
		clauses = append(clauses, f.table(m.Table))
	}
	if m.Initial != nil {
		if m.Initial.Quantity != nil {
			clauses = append(clauses, "initial "+quantity(m.Initial.Quantity))
		} else {
			clauses = append(clauses, "initial "+m.Initial.Name.Text)
		}
	}
	if m.Tolerance != nil {
		clauses = append(clauses, "tolerance "+quantity(m.Tolerance))
	}
	if m.Replaced != nil {
		clauses = append(clauses, "replaced by "+path(m.Replaced))
	}
	for _, part := range m.Text.Parts {
		clauses = append(clauses, quote(part))
	}
	more := "\n" + f.indent() + indentation + indentation
	out, column := head, len(f.indent())+len(head)
	for i, c := range clauses {
		gap := "  "
		if i == 0 {
			gap = " "
		}
		first, _, lines := strings.Cut(c, "\n")
		if need := utf8.RuneCountInString(gap + first); i > 0 && column+need > widest {
			gap = more
			column = len(more) - 1
		}
		out += gap + c
		column += utf8.RuneCountInString(gap + first)
		if lines {
			column = utf8.RuneCountInString(c[strings.LastIndexByte(c, '\n')+1:])
		}
	}
	for _, n := range m.Notes {
		out += more + note(n)
	}
	return out
}

// table writes codes or states by name, or a table in place: on one line if it
// is short and has no texts.
func (f *formatter) table(t *TableClause) string {
	word := "codes"
	if t.States {
		word = "states"
	}
	if t.Path != nil {
		return word + " " + path(t.Path)
	}
	var all []string
	texts := false
	for _, e := range t.Entries {
		texts = texts || e.Text.Given
		all = append(all, f.entry(e))
	}
	if line := word + " { " + strings.Join(all, "  ") + " }"; !texts && len(line) <= 60 {
		return line
	}
	inner := f.indent() + indentation
	return word + " {\n" + inner + strings.Join(all, "\n"+inner) + "\n" + f.indent() + "}"
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
