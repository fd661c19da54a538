package schema

import (
	"fmt"
	"math/big"

	"busloom/diag"
	"busloom/schema/internal/syntax"
	"busloom/unit"
)

// constant is a declared constant: evaluated when first needed.
type constant struct {
	state evalState
	value reduced
}

type evalState uint8

const (
	notEvaluated evalState = iota
	evaluating
	evaluated
	failed
)

// reduced is a formula as far as it has been reduced: a*raw + b in a unit, or
// a curve of that.
type reduced struct {
	a, b *big.Rat
	// unit is of the whole; with a curve, the curve's result unit.
	unit unit.Unit
	// written is set while unit is one that the formula itself writes.
	written bool
	// difference marks the difference of two points, which can't be a point
	// again.
	difference bool
	curve      *Curve
}

func (r reduced) constant() bool { return r.curve == nil && r.a.Sign() == 0 }

// mostBits bounds the numerators and denominators of factors and offsets, so
// that a run-time value stays within a few machine words.
const mostBits = 128

// mostBitsBetween bounds them while a formula is reduced, so that a long
// formula costs no more than it is long.
const mostBitsBetween = 8192

func tooLong(bits int, numbers ...*big.Rat) bool {
	for _, r := range numbers {
		if r.Num().BitLen() > bits || r.Denom().BitLen() > bits {
			return true
		}
	}
	return false
}

// evaluator reduces one formula. Each method reports what is wrong where it is
// and returns false.
type evaluator struct {
	c          *compiler
	src        *source
	inConstant bool
}

// defineConstants evaluates them all, so that unused ones are checked too.
func (c *compiler) defineConstants() {
	eachDecl(c, func(src *source, d *syntax.ConstDecl) {
		if sym := c.own(src, nsFormula, d.Name); sym != nil {
			sym.constant = &constant{}
		}
	})
	eachDecl(c, func(src *source, d *syntax.ConstDecl) {
		if sym := c.own(src, nsFormula, d.Name); sym != nil {
			c.constantValue(sym)
		}
	})
}

func (c *compiler) constantValue(sym *symbol) (reduced, bool) {
	k := sym.constant
	switch k.state {
	case evaluated:
		return k.value, true
	case failed:
		return reduced{}, false
	case evaluating:
		c.report(diag.ConstantCycle, sym.name.Span, fmt.Sprintf("the constant %s is defined by itself", sym.name.Text), "end the ring with a number")
		return reduced{}, false
	}
	k.state = evaluating
	v, ok := (&evaluator{c: c, src: sym.src, inConstant: true}).eval(sym.decl.(*syntax.ConstDecl).Expr)
	if !ok {
		k.state = failed
		return reduced{}, false
	}
	v.written = false
	k.state, k.value = evaluated, v
	return v, true
}

func (e *evaluator) eval(x syntax.Expr) (reduced, bool) {
	v, ok := e.evalNode(x)
	if ok && tooLong(mostBitsBetween, v.a, v.b) {
		e.c.report(diag.TooPrecise, x.ExprSpan(), "the numbers of this formula grow beyond what can be kept exactly", "write shorter numbers")
		return v, false
	}
	return v, ok
}

func (e *evaluator) evalNode(x syntax.Expr) (reduced, bool) {
	switch x := x.(type) {
	case *syntax.Literal:
		return e.literal(x)
	case *syntax.RawRef:
		if e.inConstant {
			e.c.report(diag.NotAffine, x.Span, "raw is a member's value, a constant has none", "write a number")
			return reduced{}, false
		}
		return reduced{a: big.NewRat(1, 1), b: new(big.Rat)}, true
	case *syntax.Negation:
		return e.negation(x)
	case *syntax.Reference:
		return e.reference(x)
	case *syntax.Operation:
		left, ok := e.eval(x.Left)
		if !ok {
			return reduced{}, false
		}
		right, ok := e.eval(x.Right)
		if !ok {
			return reduced{}, false
		}
		if left.curve != nil || right.curve != nil {
			e.c.report(diag.NotAffine, x.Span, "nothing can be computed from a curve's result", "put the arithmetic inside the curve's brackets, or into the curve's points")
			return reduced{}, false
		}
		switch x.Op {
		case '+', '-':
			return e.sum(x, left, right)
		case '*':
			return e.product(x, left, right)
		default:
			return e.quotient(x, left, right)
		}
	}
	return reduced{}, false // a part that couldn't be read
}

func (e *evaluator) literal(x *syntax.Literal) (reduced, bool) {
	if x.Number.Value == nil {
		return reduced{}, false
	}
	v := reduced{a: new(big.Rat), b: x.Number.Value}
	if x.Unit != nil {
		u, ok := e.c.unit(e.src, *x.Unit)
		if !ok {
			return reduced{}, false
		}
		v.unit, v.written = u, true
	}
	return v, true
}

func (e *evaluator) negation(x *syntax.Negation) (reduced, bool) {
	v, ok := e.eval(x.Operand)
	if !ok {
		return v, false
	}
	if v.curve != nil {
		e.c.report(diag.NotAffine, x.Span, "nothing can be computed from a curve's result", "put the minus into the curve's points")
		return v, false
	}
	if _, literal := x.Operand.(*syntax.Literal); v.unit.Point && !literal {
		e.c.report(diag.PointArithmetic, x.Span, fmt.Sprintf("%s is a point on a scale, and its negative means nothing", x.Operand.ExprSpan().Text()), "write the number itself below zero")
		return v, false
	}
	v.a, v.b = new(big.Rat).Neg(v.a), new(big.Rat).Neg(v.b)
	return v, true
}

func (e *evaluator) reference(x *syntax.Reference) (reduced, bool) {
	sym := e.c.resolvePath(e.src, nsFormula, x.Path)
	if sym == nil {
		return reduced{}, false
	}
	_, isCurve := sym.decl.(*syntax.CurveDecl)
	switch {
	case isCurve && x.Operand == nil:
		e.c.report(diag.WrongKindOfName, x.Span, fmt.Sprintf("%s is a curve, so it needs something to be applied to", sym.name.Text), fmt.Sprintf("write %s(raw * ...)", sym.name.Text))
		return reduced{}, false
	case !isCurve && x.Operand != nil:
		e.c.report(diag.WrongKindOfName, x.Path.Span, fmt.Sprintf("%s is a constant, only a curve is applied to something", sym.name.Text), "write * before the bracket to multiply").
			Also(sym.name.Span, "declared here")
		return reduced{}, false
	case !isCurve:
		return e.c.constantValue(sym)
	case e.inConstant:
		e.c.report(diag.NotAffine, x.Span, "a constant can't be read off a curve", "write the number")
		return reduced{}, false
	}
	in, ok := e.eval(x.Operand)
	if !ok || sym.curve == nil {
		return reduced{}, false
	}
	if in.curve != nil {
		e.c.report(diag.NotAffine, x.Span, "a curve of a curve is more than the language follows", "make one curve of the two")
		return reduced{}, false
	}
	in, ok = e.convertTo(in, sym.curve.From, x.Operand.ExprSpan(), fmt.Sprintf("the curve %s takes %s", sym.name.Text, unitNoun(sym.curve.From)))
	if !ok {
		return reduced{}, false
	}
	return reduced{a: in.a, b: in.b, unit: sym.curve.To, written: true, curve: sym.curve}, true
}

func unitNoun(u unit.Unit) string {
	if u.IsPlain() {
		return "a plain number"
	}
	return u.Symbol
}

// convertTo turns a reduced formula into another unit. why begins the
// sentence if the dimensions differ.
func (e *evaluator) convertTo(v reduced, to unit.Unit, span diag.Span, why string) (reduced, bool) {
	if v.unit.Symbol == to.Symbol && v.unit.Dim == to.Dim {
		return v, true
	}
	if v.unit.Dim != to.Dim {
		remedy := "multiply by an amount in " + to.Symbol
		if to.IsPlain() {
			remedy = "leave the unit out"
		}
		e.c.report(diag.DimensionMistake, span, fmt.Sprintf("%s, but %s is %s", why, span.Text(), inUnit(v.unit)), remedy)
		return v, false
	}
	if to.Point && !v.unit.Point && v.difference {
		e.c.report(diag.PointArithmetic, span, fmt.Sprintf("%s is the difference of two temperatures, which is no temperature itself", span.Text()), "add it to a temperature, or write in K")
		return v, false
	}
	a, b, exact, err := unit.Convert(v.unit, to)
	if err != nil {
		e.c.report(diag.PointArithmetic, span, err.Error(), "write both in one unit")
		return v, false
	}
	if !exact {
		e.c.report(diag.TooPrecise, span, fmt.Sprintf("%s can't be turned into %s exactly, since pi is between them", v.unit.Symbol, to.Symbol), fmt.Sprintf("keep %s", v.unit.Symbol))
		return v, false
	}
	v.a = new(big.Rat).Mul(v.a, a)
	v.b = new(big.Rat).Mul(v.b, a)
	v.b.Add(v.b, b)
	v.unit = to
	return v, true
}

// sum adds or subtracts. Points: point + difference, difference + point and
// point - difference are points, point - point is a difference.
func (e *evaluator) sum(x *syntax.Operation, l, r reduced) (reduced, bool) {
	if l.unit.Dim != r.unit.Dim || l.unit.IsPlain() != r.unit.IsPlain() {
		e.c.report(diag.DimensionMistake, x.Span, fmt.Sprintf("%s is %s, %s is %s", x.Left.ExprSpan().Text(), inUnit(l.unit), x.Right.ExprSpan().Text(), inUnit(r.unit)),
			"give both units of one dimension")
		return l, false
	}
	out := reduced{unit: l.unit, written: l.written && r.written && l.unit.Symbol == r.unit.Symbol}
	switch {
	case l.unit.Point && r.unit.Point && x.Op == '+':
		e.c.report(diag.PointArithmetic, x.Span, fmt.Sprintf("%s and %s are both points on a scale, and their sum means nothing", x.Left.ExprSpan().Text(), x.Right.ExprSpan().Text()),
			"write what is added in K")
		return l, false
	case !l.unit.Point && r.unit.Point && x.Op == '-':
		e.c.report(diag.PointArithmetic, x.Span, fmt.Sprintf("the point %s can't be taken from the amount %s", x.Right.ExprSpan().Text(), x.Left.ExprSpan().Text()), "write what is taken away in K")
		return l, false
	case l.unit.Point && r.unit.Point:
		out.unit, out.difference, out.written = l.unit.Difference(), true, false
	case l.unit.Point:
		out.written = l.written
	case r.unit.Point:
		// The amount on the left goes into the unit of the point's steps.
		conv, ok := e.convertTo(l, r.unit.Difference(), x.Left.ExprSpan(), "")
		if !ok {
			return l, false
		}
		l, out.unit, out.written = conv, r.unit, r.written
	default:
		out.difference = l.difference && r.difference
		// A unit written on one side only is the result's.
		switch {
		case l.written && !r.written:
			out.written = true
		case r.written && !l.written:
			conv, ok := e.convertTo(l, r.unit, x.Left.ExprSpan(), "")
			if !ok {
				return l, false
			}
			l, out.unit, out.written = conv, r.unit, true
		}
	}
	if !r.unit.Point {
		var ok bool
		if r, ok = e.convertTo(r, out.unit.Difference(), x.Right.ExprSpan(), ""); !ok {
			return l, false
		}
	}
	if x.Op == '+' {
		out.a, out.b = new(big.Rat).Add(l.a, r.a), new(big.Rat).Add(l.b, r.b)
	} else {
		out.a, out.b = new(big.Rat).Sub(l.a, r.a), new(big.Rat).Sub(l.b, r.b)
	}
	return out, true
}

func (e *evaluator) noPoints(x *syntax.Operation, l, r reduced) bool {
	v := l
	if r.unit.Point {
		v = r
	}
	if !v.unit.Point {
		return true
	}
	word := "multiplied"
	if x.Op == '/' {
		word = "divided"
	}
	e.c.report(diag.PointArithmetic, x.Span, fmt.Sprintf("%s is a point on a scale, which can't be %s", v.unit.Symbol, word), fmt.Sprintf("write 0 %s + raw * ... K", v.unit.Symbol))
	return false
}

func (e *evaluator) product(x *syntax.Operation, l, r reduced) (reduced, bool) {
	if !e.noPoints(x, l, r) {
		return l, false
	}
	if !l.constant() && !r.constant() {
		e.c.report(diag.NotAffine, x.Span, fmt.Sprintf("%s multiplies raw by raw, and a formula has to be a straight line", x.Span.Text()), "write factor * raw + offset, or use a curve")
		return l, false
	}
	if l.constant() {
		l, r = r, l // l holds raw, if any does
	}
	out := reduced{a: new(big.Rat).Mul(l.a, r.b), b: new(big.Rat).Mul(l.b, r.b)}
	return e.combine(out, x, l, r, unit.Mul)
}

func (e *evaluator) quotient(x *syntax.Operation, l, r reduced) (reduced, bool) {
	if !e.noPoints(x, l, r) {
		return l, false
	}
	if !r.constant() {
		e.c.report(diag.NotAffine, x.Span, fmt.Sprintf("%s divides by raw, and a formula has to be a straight line", x.Span.Text()), "write factor * raw + offset, or use a curve")
		return l, false
	}
	if r.b.Sign() == 0 {
		e.c.report(diag.DivisionByZero, x.Right.ExprSpan(), fmt.Sprintf("%s is zero, so nothing can be divided by it", x.Right.ExprSpan().Text()), "divide by something else")
		return l, false
	}
	out := reduced{a: new(big.Rat).Quo(l.a, r.b), b: new(big.Rat).Quo(l.b, r.b)}
	return e.combine(out, x, l, r, unit.Div)
}

// combine gives a product or quotient its unit.
func (e *evaluator) combine(out reduced, x *syntax.Operation, l, r reduced, op func(u, v unit.Unit) (unit.Unit, error)) (reduced, bool) {
	switch {
	case r.unit.IsPlain():
		out.unit, out.written, out.difference = l.unit, l.written, l.difference
		return out, true
	case l.unit.IsPlain() && x.Op == '*':
		out.unit, out.written, out.difference = r.unit, r.written, r.difference
		return out, true
	}
	u, err := op(l.unit, r.unit)
	if err != nil {
		e.c.report(diag.PointArithmetic, x.Span, err.Error(), "write amounts in K")
		return out, false
	}
	out.unit = u
	return out, true
}

// formula is the outcome for a member.
type formula struct {
	affine *Affine
	curve  *Curve
	unit   unit.Unit
}

// reduce turns a member's formula into factor and offset, or a curve of them.
func (c *compiler) reduce(src *source, x syntax.Expr, in *syntax.UnitRef) (formula, bool) {
	e := &evaluator{c: c, src: src}
	v, ok := e.eval(x)
	if !ok {
		return formula{}, false
	}
	span := x.ExprSpan()
	if v.a.Sign() == 0 {
		c.report(diag.ConstantFormula, span, fmt.Sprintf("%s is the same for every raw value", span.Text()), "let raw occur, with a factor other than zero")
		return formula{}, false
	}
	if in != nil {
		to, ok := c.unit(src, *in)
		if !ok {
			return formula{}, false
		}
		if v.curve != nil {
			if to.Symbol != v.unit.Symbol {
				c.report(diag.NotAffine, in.Span, fmt.Sprintf("the curve %s gives %s, which stays its unit", v.curve.Name, unitNoun(v.unit)), "write a curve to "+to.Symbol)
				return formula{}, false
			}
		} else if v, ok = e.convertTo(v, to, span, "the result has to be in "+to.Symbol); !ok {
			return formula{}, false
		}
	} else if !v.unit.IsPlain() && !v.written {
		remedy := "write in and the unit of the result behind the formula"
		if op, isOp := x.(*syntax.Operation); isOp && op.Op == '/' {
			if lit, isLit := op.Right.(*syntax.Literal); isLit && lit.Unit != nil && lit.Number.Value != nil && op.Left.ExprSpan().Text() == "raw" {
				remedy = fmt.Sprintf("write raw * 1/%s %s, or in and the unit of the result", lit.Number.Raw, lit.Unit.Text)
			}
		}
		c.report(diag.NoUnit, span, fmt.Sprintf("the unit of %s isn't written in it", span.Text()), remedy)
		return formula{}, false
	}
	if tooLong(mostBits, v.a, v.b) {
		c.report(diag.TooPrecise, span, fmt.Sprintf("factor and offset of %s need numbers of more than %d bits", span.Text(), mostBits), "write fewer digits")
		return formula{}, false
	}
	return formula{affine: &Affine{A: v.a, B: v.b}, curve: v.curve, unit: v.unit}, true
}
