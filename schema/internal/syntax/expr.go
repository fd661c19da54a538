package syntax

import (
	"fmt"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// Bounds of what a text may nest, so that none can exhaust the stack.
const (
	maxDepth      = 64  // parentheses of a formula, braces of a file
	maxOperations = 256 // operators of one formula
)

// gExpr is a formula, read by hand: a tree whose tokens are whole.
type gExpr struct {
	op          token // + - * / for an operation; - alone with right for a negation
	left, right *gExpr
	number      token
	unit        token
	raw         token
	path        *gPath
	operand     *gExpr
	open, close token // parentheses around this node, or around the operand
}

// Parse implements participle.Parseable: sums of products of atoms.
func (g *gExpr) Parse(lex *lexer.PeekingLexer) error {
	if !beginsAtom(lex) {
		return participle.NextMatch
	}
	r := &exprReader{lex: lex}
	got, err := r.sum(0)
	if err != nil {
		return err
	}
	*g = *got
	return nil
}

func beginsAtom(lex *lexer.PeekingLexer) bool {
	t := lex.Peek()
	return t.Type == tokNumber || t.Type == tokKeyword && t.Value == "raw" || isPunct(t, "(", "-") || beginsStep(lex)
}

type exprReader struct {
	lex        *lexer.PeekingLexer
	operations int
}

func (r *exprReader) sum(depth int) (*gExpr, error) {
	left, err := r.product(depth)
	for err == nil && isPunct(r.lex.Peek(), "+", "-") {
		left, err = r.operation(left, depth, r.product)
	}
	return left, err
}

func (r *exprReader) product(depth int) (*gExpr, error) {
	left, err := r.signed(depth)
	for err == nil && isPunct(r.lex.Peek(), "*", "/") {
		left, err = r.operation(left, depth, r.signed)
	}
	return left, err
}

func (r *exprReader) operation(left *gExpr, depth int, below func(int) (*gExpr, error)) (*gExpr, error) {
	op := *r.lex.Next()
	if r.operations++; r.operations > maxOperations {
		return nil, &deepError{op, fmt.Sprintf("this formula has more than %d operators", maxOperations)}
	}
	if next := r.lex.Peek(); op.Value == "/" && next.Type != tokNumber && !isPunct(next, "(") && glued(&op, next) {
		return nil, &gluedError{op}
	}
	right, err := below(depth)
	return &gExpr{op: op, left: left, right: right}, err
}

func (r *exprReader) signed(depth int) (*gExpr, error) {
	if !isPunct(r.lex.Peek(), "-") {
		return r.atom(depth)
	}
	op := *r.lex.Next()
	operand, err := r.atom(depth)
	return &gExpr{op: op, right: operand}, err
}

func (r *exprReader) atom(depth int) (*gExpr, error) {
	t := r.lex.Peek()
	switch {
	case t.Type == tokNumber:
		e := &gExpr{number: *r.lex.Next()}
		if r.lex.Peek().Type == tokUnit {
			e.unit = *r.lex.Next()
		}
		return e, nil
	case t.Type == tokKeyword && t.Value == "raw":
		return &gExpr{raw: *r.lex.Next()}, nil
	case isPunct(t, "("):
		open := *r.lex.Next()
		inner, end, err := r.inner(depth, &open)
		if err != nil {
			return nil, err
		}
		if inner.path != nil && inner.operand != nil {
			// The node has parentheses of its own: those around it go.
			return inner, nil
		}
		inner.open, inner.close = open, end
		return inner, nil
	case beginsStep(r.lex):
		e := &gExpr{path: &gPath{}}
		if err := e.path.Parse(r.lex); err != nil {
			return nil, err
		}
		if !isPunct(r.lex.Peek(), "(") {
			return e, nil
		}
		open := *r.lex.Next()
		inner, end, err := r.inner(depth, &open)
		e.operand, e.open, e.close = inner, open, end
		return e, err
	}
	return nil, wrong(t, "a number, raw, a name or a parenthesis")
}

func (r *exprReader) inner(depth int, open *token) (*gExpr, token, error) {
	if depth >= maxDepth {
		return nil, token{}, &deepError{*open, fmt.Sprintf("parentheses are nested more than %d deep", maxDepth)}
	}
	inner, err := r.sum(depth + 1)
	if err != nil {
		return nil, token{}, err
	}
	if !isPunct(r.lex.Peek(), ")") {
		return nil, token{}, wrong(r.lex.Peek(), "an operator or the closing parenthesis")
	}
	return inner, *r.lex.Next(), nil
}

// deepError is more nesting, or more operators, than the language allows.
type deepError struct {
	at      token
	problem string
}

func (e *deepError) Error() string            { return e.Message() }
func (e *deepError) Message() string          { return e.problem }
func (e *deepError) Position() lexer.Position { return e.at.Pos }

// gluedError is raw/teeth: no unit and, to the eye, no division.
type gluedError struct{ at token }

func (e *gluedError) Error() string            { return e.Message() }
func (e *gluedError) Message() string          { return "a stroke without blanks" }
func (e *gluedError) Position() lexer.Position { return e.at.Pos }
