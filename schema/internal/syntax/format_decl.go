package syntax

import (
	"strings"

	"busloom/diag"
)

// tree writes the parts of a file in the order of the text.
func (f *formatter) tree(t *File) {
	f.element(t.Version.Span, "busloom "+t.Version.Raw)
	if n := t.Network; n != nil {
		f.upTo(t, n.Span.Start)
		f.element(n.Span, "network "+n.Name.Text+f.texts(n.Text))
	}
	f.upTo(t, len(f.src.Text)+1)
	for _, d := range t.Decls {
		_, isLine := d.(lineDecl)
		f.apart = f.apart || !isLine
		f.declaration(d)
		f.apart = !isLine
	}
	f.remaining(len(f.src.Text) + 1)
}

// lineDecl is a declaration that is one line long.
type lineDecl interface{ oneLine() }

func (*BusDecl) oneLine()    {}
func (*ECUDecl) oneLine()    {}
func (*UnitDecl) oneLine()   {}
func (*ConstDecl) oneLine()  {}
func (*IDFormDecl) oneLine() {}
func (*CRCDecl) oneLine()    {}

// upTo writes the use lines that stand before an offset.
func (f *formatter) upTo(t *File, offset int) {
	for f.uses < len(t.Uses) && t.Uses[f.uses].Span.Start < offset {
		u := t.Uses[f.uses]
		f.uses++
		text := "use " + quote(u.Path.Value)
		if u.As != nil {
			text += " as " + u.As.Text
		}
		f.element(u.Span, text)
	}
}

// texts writes the quoted texts of a head; further ones go on below.
func (f *formatter) texts(t Text) string {
	var out strings.Builder
	for i, part := range t.Parts {
		if i == 0 {
			out.WriteString(" " + quote(part))
		} else {
			out.WriteString("\n" + f.indent() + indentation + indentation + quote(part))
		}
	}
	return out.String()
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
		f.block(d.Whole(), headEnd(d.HeadSpan, d.Text), text+f.texts(d.Text), func() {
			for _, e := range d.Entries {
				f.element(e.Span, f.entry(e))
			}
		})
	case *CurveDecl:
		text := "curve " + d.Name.Text + " from " + d.From.Text + " to " + d.To.Text + " outside " + d.Outside.Text
		f.block(d.Whole(), headEnd(d.HeadSpan.To(d.Outside.Span), d.Text), text+f.texts(d.Text), func() {
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
		f.block(d.Whole(), headEnd(d.HeadSpan.To(d.Size.Span), d.Text), text+f.texts(d.Text), func() { f.body(d.Body) })
	case *MessageDecl:
		text := "message " + d.Name.Text + " " + id(&d.ID) + " on " + d.Bus.Text + ", "
		if d.FD {
			text += "fd "
		}
		if d.AtLeast {
			text += "at least "
		}
		text += bytesOf(d.Size)
		f.block(d.Whole(), headEnd(d.HeadSpan.To(d.Size.Span), d.Text), text+f.texts(d.Text), func() { f.body(d.Body) })
	}
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

// headEnd is where a head ends: with its text, if it has one.
func headEnd(head diag.Span, text Text) int {
	return max(head.End, text.Span.End)
}
