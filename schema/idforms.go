package schema

import (
	"fmt"
	"strings"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// idForm is a checked declaration of id fields.
type idForm struct {
	name   string
	bits   int
	fields []idFormField // heaviest first
}

type idFormField struct {
	name         string
	shift, width int
}

// defineIDForms checks that each form's fields fill an identifier.
func (c *compiler) defineIDForms() {
	eachDecl(c, func(src *source, d *syntax.IDFormDecl) {
		sym := c.own(src, nsIDForm, d.Name)
		if sym == nil {
			return
		}
		total, ok := whole(d.Bits)
		if !ok || (total != 11 && total != 29) {
			c.report(diag.BadIDForm, d.Bits.Span, fmt.Sprintf("an identifier has 11 or 29 bits, not %s", d.Bits.Raw), "write 11 bits or 29 bits")
			return
		}
		form := &idForm{name: d.Name.Text, bits: int(total)}
		seen := map[string]syntax.Name{}
		sum, good := 0, true
		for _, f := range d.Fields {
			low := strings.ToLower(f.Name.Text)
			if first, twice := seen[low]; twice {
				c.report(diag.DuplicateName, f.Name.Span, fmt.Sprintf("the form has the field %s twice", f.Name.Text), "rename one of the two").Also(first.Span, "first here")
				good = false
				continue
			}
			seen[low] = f.Name
			width, ok := wholeBelow(f.Width, 30)
			if !ok || width == 0 {
				c.report(diag.BadIDForm, f.Width.Span, fmt.Sprintf("a field has 1 to 29 bits, not %s", f.Width.Raw), "write its width in bits")
				good = false
				continue
			}
			sum += int(width)
			form.fields = append(form.fields, idFormField{name: f.Name.Text, width: int(width)})
		}
		if !good || (sum != form.bits && src.damaged) {
			return
		}
		if sum != form.bits {
			c.report(diag.BadIDForm, d.Name.Span, fmt.Sprintf("the fields of %s have %s together, the identifier has %d", d.Name.Text, counted(sum, "bit"), form.bits),
				"let the widths add up: name unused bits, too")
			return
		}
		shift := form.bits
		for i := range form.fields {
			shift -= form.fields[i].width
			form.fields[i].shift = shift
		}
		sym.form = form
	})
}

// id checks an identifier as a message or relay writes it.
func (c *compiler) id(src *source, ref *syntax.IDRef) (ID, bool) {
	if ref.Number != nil {
		return c.fixedID(ref.Number)
	}
	if ref.Form == nil {
		return ID{}, false
	}
	sym := c.resolvePath(src, nsIDForm, *ref.Form)
	if sym == nil || sym.form == nil {
		return ID{}, false
	}
	form := sym.form
	id := ID{Extended: form.bits == 29, Form: form.name}
	given := map[string]*syntax.IDFieldValue{}
	good := true
	for _, f := range ref.Fields {
		if first, twice := given[f.Name.Text]; twice {
			c.report(diag.BadIDFields, f.Name.Span, fmt.Sprintf("the field %s is given twice", f.Name.Text), "remove one of the two").Also(first.Name.Span, "first given here")
			good = false
			continue
		}
		given[f.Name.Text] = f
		var known []string
		found := false
		for _, k := range form.fields {
			known = append(known, k.name)
			found = found || k.name == f.Name.Text
		}
		if !found {
			remedy := "write one of " + listed(known)
			if near := c.nearest(f.Name.Text, known); near != "" {
				remedy = "did you mean " + near + "?"
			}
			c.report(diag.BadIDFields, f.Name.Span, fmt.Sprintf("the form %s has no field %s", form.name, f.Name.Text), remedy).Also(sym.name.Span, "the form")
			good = false
		}
	}
	for _, k := range form.fields {
		field := IDField{Name: k.name, Shift: k.shift, Width: k.width, Open: true}
		f := given[k.name]
		if f != nil {
			v, ok := wholeBelow(f.Value, 1<<k.width)
			if !ok {
				c.report(diag.BadIDFields, f.Value.Span, fmt.Sprintf("the field %s has %s and can't be %s", k.name, counted(k.width, "bit"), f.Value.Raw),
					fmt.Sprintf("write 0 to 0x%X", 1<<k.width-1)).Also(sym.name.Span, "the form")
				good = false
				continue
			}
			field.Value, field.Open, field.Usually = uint32(v), f.Usually, f.Usually
			id.Send |= field.Value << k.shift
			if !f.Usually {
				id.Value |= field.Value << k.shift
				id.Mask |= uint32(onesOf(k.width)) << k.shift
			}
		}
		id.Fields = append(id.Fields, field)
	}
	return id, good
}

// fixedID reads an identifier written as a number: its number of digits says
// how many bits it has.
func (c *compiler) fixedID(n *syntax.Number) (ID, bool) {
	digits, isHex := strings.CutPrefix(n.Raw, "0x")
	v, ok := wholeBelow(*n, 1<<32)
	switch {
	case !isHex || !ok || (len(digits) != 3 && len(digits) != 8):
		remedy := "write it as captures show it, such as 0x1A0 or 0x18FEF100"
		if ok && v <= 0x7FF {
			remedy = fmt.Sprintf("write 0x%03X (11 bits) or 0x%08X (29 bits)", v, v)
		} else if ok && v <= 0x1FFFFFFF {
			remedy = fmt.Sprintf("write 0x%08X", v)
		}
		c.report(diag.BadID, n.Span, fmt.Sprintf("%s doesn't tell 11 from 29 bits: an identifier has three hex digits or eight", n.Raw), remedy)
		return ID{}, false
	case len(digits) == 3 && v > 0x7FF:
		c.report(diag.BadID, n.Span, fmt.Sprintf("%s is above 0x7FF, the highest identifier of 11 bits", n.Raw), fmt.Sprintf("write 0x%08X if it has 29 bits", v))
		return ID{}, false
	case v > 0x1FFFFFFF:
		c.report(diag.BadID, n.Span, fmt.Sprintf("%s is above 0x1FFFFFFF, the highest identifier of 29 bits", n.Raw), "correct the number")
		return ID{}, false
	}
	id := ID{Extended: len(digits) == 8, Value: uint32(v), Send: uint32(v), Mask: 0x7FF}
	if id.Extended {
		id.Mask = 0x1FFFFFFF
	}
	return id, true
}

// open reports whether the identifier has an open field.
func (id ID) open() bool {
	for _, f := range id.Fields {
		if f.Open {
			return true
		}
	}
	return false
}
