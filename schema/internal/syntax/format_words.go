package syntax

import (
	"fmt"
	"strings"
)

// The canonical text of everything that fits into a line.

func names(list []Name) string {
	var out []string
	for _, n := range list {
		out = append(out, n.Text)
	}
	return strings.Join(out, ", ")
}

func bytesOf(n Number) string {
	if n.Raw == "1" {
		return "1 byte"
	}
	return n.Raw + " bytes"
}

func quantity(q *Quantity) string {
	out := q.Number.Raw
	if q.Negative {
		out = "-" + out
	}
	if q.Unit != nil {
		out += " " + q.Unit.Text
	}
	return out
}

func path(p *Path) string {
	var out strings.Builder
	for i, s := range p.Steps {
		if i > 0 {
			out.WriteByte('.')
		}
		out.WriteString(s.Name.Text)
		if s.Key != nil {
			out.WriteString("[" + s.Key.Text + "]")
		}
	}
	return out.String()
}

func raw(r *Raw) string {
	if !r.Ones {
		return r.Number.Raw
	}
	if r.Number == nil {
		return "ones"
	}
	return "ones - " + r.Number.Raw
}

func rawRange(r *RawRange) string {
	if r.High == nil {
		return raw(&r.Low)
	}
	return raw(&r.Low) + ".." + raw(r.High)
}

func choice(c ChoiceRef) string {
	if c.Name != nil {
		return c.Name.Text
	}
	return rawRange(c.Raws)
}

func id(i *IDRef) string {
	if i.Number != nil {
		return i.Number.Raw
	}
	var fields []string
	for _, f := range i.Fields {
		word := f.Name.Text + " "
		if f.Usually {
			word += "usually "
		}
		fields = append(fields, word+f.Value.Raw)
	}
	return path(i.Form) + "(" + strings.Join(fields, ", ") + ")"
}

func bit(b BitRef) string { return fmt.Sprintf("%d.%d", b.Byte, b.Bit) }

func run(r PlaceRun) string {
	out := bit(r.Heavy)
	if r.Relative {
		out = "+" + out
	}
	if r.Light != nil {
		out += ".." + bit(*r.Light)
	}
	if r.End {
		out += "..end"
	}
	return out
}

func place(p Place) string {
	var out []string
	for _, r := range p.Runs {
		out = append(out, run(r))
	}
	return strings.Join(out, " then ")
}

func note(n *Note) string { return "note " + n.Key.Text + " " + quote(n.Text.Value) }

func timing(t *TimingFact) string {
	out := ""
	word := "change"
	if t.OnRequest {
		word = "request"
	}
	switch {
	case t.Every == nil:
		out = "on " + word
	case t.OnChange || t.OnRequest:
		out = "every " + quantity(t.Every) + " or on " + word
	default:
		out = "every " + quantity(t.Every)
	}
	if t.Gap != nil {
		out += ", at least " + quantity(t.Gap) + " apart"
	}
	if t.Lost != nil {
		out += ", lost after " + quantity(t.Lost)
	}
	return out
}

func kind(k *KindClause) string {
	switch k.Word {
	case "text":
		out := "text " + k.Encoding
		if k.Fill != nil {
			out += " fill " + k.Fill.Raw
		}
		return out
	case "always":
		return "always " + k.Always.Raw
	case "counter":
		out := "counter " + k.Low.Raw + ".." + k.High.Raw
		if k.Step != nil {
			out += " step " + k.Step.Raw
		}
		if k.AllowLost != nil {
			out += " lost " + k.AllowLost.Raw + " allowed"
		}
		if k.AllowRepeated != nil {
			out += " repeated " + k.AllowRepeated.Raw + " allowed"
		}
		return out
	case "checksum":
		return method(k.Method)
	}
	return k.Word
}

func method(m *MethodRef) string {
	if m.E2E {
		out := "checksum e2e profile " + m.Profile.Raw
		if m.Mode.Text != "" {
			out += " " + m.Mode.Text
		}
		out += ", id"
		for _, n := range m.IDs {
			out += " " + n.Raw
		}
		return out + ", counter " + path(m.Counter)
	}
	var feeds []string
	for _, f := range m.Feeds {
		feeds = append(feeds, feed(f))
	}
	return "checksum " + path(&m.Name) + " over " + strings.Join(feeds, ", ")
}

func feed(f FeedRef) string {
	switch {
	case f.Const != nil:
		return f.Const.Raw
	case f.End:
		return "bytes " + f.First.Raw + "..end"
	case f.Last != nil:
		return "bytes " + f.First.Raw + ".." + f.Last.Raw
	}
	return "byte " + f.First.Raw
}

// How tightly operators bind; formula puts parentheses only where they are
// needed.
const (
	bindSum     = 1
	bindProduct = 2
	bindSign    = 3
)

func formula(e Expr, around int) string {
	text, binds := "", bindSign+1
	switch e := e.(type) {
	case *Operation:
		binds = bindSum
		if e.Op == '*' || e.Op == '/' {
			binds = bindProduct
		}
		// The right side of a - b and a / b binds tighter than the operator.
		text = formula(e.Left, binds) + " " + string(e.Op) + " " + formula(e.Right, binds+1)
	case *Negation:
		binds = bindSign
		text = "-" + formula(e.Operand, bindSign+1)
	case *Literal:
		text = e.Number.Raw
		if e.Unit != nil {
			text += " " + e.Unit.Text
		}
	case *RawRef:
		text = "raw"
	case *Reference:
		text = path(&e.Path)
		if e.Operand != nil {
			text += "(" + formula(e.Operand, 0) + ")"
		}
	}
	if binds < around {
		return "(" + text + ")"
	}
	return text
}
