package schema

import (
	"errors"
	"fmt"
	"math/big"
	"strings"

	"busloom/diag"
	"busloom/schema/internal/syntax"
	"busloom/unit"
)

// unitResult is a looked-up unit text, and the declared units it is made of.
type unitResult struct {
	unit     unit.Unit
	err      error
	declared []*symbol
}

// defineUnits adds the declared units to the table. They may need each other
// in any order, so whatever can be defined is, until nothing moves.
func (c *compiler) defineUnits() {
	type pending struct {
		src *source
		sym *symbol
		d   *syntax.UnitDecl
	}
	var left []pending
	eachDecl(c, func(src *source, d *syntax.UnitDecl) {
		sym := c.own(src, nsUnit, d.Name)
		if sym == nil {
			return
		}
		if d.Value == nil {
			c.defineUnit(sym, d, unit.Unit{})
			return
		}
		left = append(left, pending{src, sym, d})
	})
	for progress := true; progress; {
		progress = false
		var still []pending
		for _, p := range left {
			of := unit.Unit{}
			if ref := p.d.Value.Unit; ref != nil {
				r := c.lookupUnit(ref.Text)
				if r.err != nil {
					still = append(still, p)
					continue
				}
				var ok bool
				if of, ok = c.unit(p.src, *ref); !ok {
					progress = true
					continue
				}
			}
			c.defineUnit(p.sym, p.d, of)
			clear(c.unitCache)
			progress = true
		}
		left = still
	}
	told := map[string]bool{} // units of rings that are reported
	for _, p := range left {
		if told[p.d.Name.Text] {
			continue
		}
		var unknown *unit.UnknownUnit
		if err := c.lookupUnit(p.d.Value.Unit.Text).err; errors.As(err, &unknown) {
			if other := c.symbols[symbolKey{nsUnit, unknown.Text}]; other != nil {
				c.report(diag.BadUnitDefinition, p.d.Value.Unit.Span, fmt.Sprintf("the unit %s is defined by %s, which isn't defined itself", p.d.Name.Text, unknown.Text),
					"define one of the units by a known one, or by none").Also(other.name.Span, unknown.Text+" is declared here")
				for next := unknown; next != nil && !told[next.Text]; {
					told[next.Text] = true
					d, isUnit := c.symbols[symbolKey{nsUnit, next.Text}].decl.(*syntax.UnitDecl)
					next = nil
					if isUnit && d.Value != nil && d.Value.Unit != nil {
						if err := c.lookupUnit(d.Value.Unit.Text).err; !errors.As(err, &next) || c.symbols[symbolKey{nsUnit, next.Text}] == nil {
							next = nil
						}
					}
				}
				continue
			}
		}
		c.unit(p.src, *p.d.Value.Unit)
	}
	// The definitions in the order of the text.
	eachDecl(c, func(src *source, d *syntax.UnitDecl) {
		if sym := c.own(src, nsUnit, d.Name); sym != nil && sym.unit != nil {
			c.net.Units = append(c.net.Units, *sym.unit)
		}
	})
}

func (c *compiler) defineUnit(sym *symbol, d *syntax.UnitDecl, of unit.Unit) {
	var value *big.Rat
	if d.Value != nil {
		value = d.Value.Value()
	}
	err := c.units.Define(d.Name.Text, value, of)
	switch {
	case errors.Is(err, unit.ErrPoint):
		c.report(diag.BadUnitDefinition, d.Value.Span, "degC is a point on a scale, so no unit can be a multiple of it", "define the unit by K")
	case err != nil:
		span := d.Name.Span
		remedy := "choose another name"
		if value != nil && value.Sign() <= 0 {
			span, remedy = d.Value.Span, "write how much of a known unit it is"
		}
		c.report(diag.BadUnitDefinition, span, err.Error(), remedy)
	default:
		sym.unit = &unit.Definition{Name: d.Name.Text, Text: d.Text.Value, Value: value, Of: of}
	}
}

func (c *compiler) lookupUnit(text string) unitResult {
	if r, ok := c.unitCache[text]; ok {
		return r
	}
	var r unitResult
	r.unit, r.err = c.units.Lookup(text)
	for _, part := range strings.FieldsFunc(text, func(r rune) bool { return r == '*' || r == '/' }) {
		name, _, _ := strings.Cut(part, "^")
		if sym := c.symbols[symbolKey{nsUnit, name}]; sym != nil {
			r.declared = append(r.declared, sym)
		}
	}
	c.unitCache[text] = r
	return r
}

// unit finds the unit of a text as a file sees it, and reports what is wrong.
func (c *compiler) unit(src *source, ref syntax.UnitRef) (unit.Unit, bool) {
	r := c.lookupUnit(ref.Text)
	for _, sym := range r.declared {
		if c.visible(src, nsUnit, "", sym.name.Text) != nil {
			continue
		}
		sym.used = true
		if !c.damaged {
			c.report(diag.UnknownUnit, ref.Span, fmt.Sprintf("the unit %s isn't visible here: it is declared in %s", sym.name.Text, sym.src.name), fmt.Sprintf("write use %q", relativePath(src.name, sym.src.name))).
				Also(sym.name.Span, "declared here")
		}
		return unit.Unit{}, false
	}
	if r.err == nil {
		return r.unit, true
	}
	var unknown *unit.UnknownUnit
	if !errors.As(r.err, &unknown) {
		c.report(diag.UnknownUnit, ref.Span, r.err.Error(), "write a unit such as km/h, m/s^2 or kg*m^2")
		return unit.Unit{}, false
	}
	// A unit that is declared but broken has been reported where it is.
	if c.damaged || c.symbols[symbolKey{nsUnit, unknown.Text}] != nil {
		return unit.Unit{}, false
	}
	near := unknown.Nearest
	if near == "" {
		near = c.nearest(unknown.Text, c.units.Symbols())
	}
	remedy := fmt.Sprintf("declare it: unit %s", unknown.Text)
	if near != "" {
		remedy = "did you mean " + near + "?"
	}
	c.report(diag.UnknownUnit, ref.Span, r.err.Error(), remedy)
	return unit.Unit{}, false
}

// quantity converts a quantity to a unit, as a value of it (a point to a
// point) or as an amount of it. what names the quantity in a sentence.
func (c *compiler) quantity(src *source, q syntax.Quantity, to unit.Unit, amount bool, what string) (*big.Rat, bool) {
	from := unit.Unit{}
	if q.Unit != nil {
		var ok bool
		if from, ok = c.unit(src, *q.Unit); !ok {
			return nil, false
		}
	}
	return c.convert(q.Value(), from, to, amount, q.Span, what)
}

func (c *compiler) convert(v *big.Rat, from, to unit.Unit, amount bool, span diag.Span, what string) (*big.Rat, bool) {
	if from.Symbol == to.Symbol && !amount {
		return v, true
	}
	if amount {
		if from.Point {
			c.report(diag.PointArithmetic, span, fmt.Sprintf("%s is an amount, and degC is a point on a scale", what), "write it in K")
			return nil, false
		}
		to = to.Difference()
	}
	if from.IsPlain() != to.IsPlain() || from.Dim != to.Dim {
		c.report(diag.DimensionMistake, span, fmt.Sprintf("%s is %s, but the value is %s", what, inUnit(from), inUnit(to)), fmt.Sprintf("write it %s", inUnitRemedy(to)))
		return nil, false
	}
	a, b, exact, err := unit.Convert(from, to)
	if err != nil {
		c.report(diag.DimensionMistake, span, fmt.Sprintf("%s is %s, but the value is %s", what, inUnit(from), inUnit(to)), fmt.Sprintf("write it %s", inUnitRemedy(to)))
		return nil, false
	}
	if !exact {
		c.report(diag.TooPrecise, span, fmt.Sprintf("%s can't be turned into %s exactly, since pi is between them", from.Symbol, to.Symbol), fmt.Sprintf("write it in %s", to.Symbol))
		return nil, false
	}
	out := new(big.Rat).Mul(a, v)
	return out.Add(out, b), true
}

// inUnit is "in km/h", or "a plain number".
func inUnit(u unit.Unit) string {
	if u.IsPlain() {
		return "a plain number"
	}
	return "in " + u.Symbol
}

func inUnitRemedy(u unit.Unit) string {
	if u.IsPlain() {
		return "without a unit"
	}
	return "in " + u.Symbol
}

// amountText is a number with its unit, exactly.
func amountText(v *big.Rat, u unit.Unit) string {
	if u.Symbol == "" {
		return numberText(v)
	}
	return numberText(v) + " " + u.Symbol
}

// numberText is exact as long as that is short enough to read, and otherwise
// rounded.
func numberText(v *big.Rat) string {
	if digits, ok := unit.FiniteDecimals(v); ok && digits <= 12 {
		return unit.FormatRat(v, digits)
	}
	if v.Num().BitLen() <= 40 && v.Denom().BitLen() <= 20 {
		return v.RatString()
	}
	return unit.FormatRat(v, 6)
}
