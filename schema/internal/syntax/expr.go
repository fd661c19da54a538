package syntax

import (
	"fmt"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// maxDepth bounds nesting of parentheses and of selections, so that no text
// can exhaust the stack.
const maxDepth = 64

// gExpr is a formula as the hand-written parser leaves it: a tree whose tokens
// are whole. The library calls Parse for it.
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
func (e *gExpr) Parse(lex *lexer.PeekingLexer) error {
	if k := lex.Peek(); !beginsAtom(k) {
		return participle.NextMatch
	}
	got, err := parseSum(lex, 0)
	if err != nil {
		return err
	}
	*e = *got
	return nil
}

func beginsAtom(t *token) bool {
	return t.Type == tokNumber || t.Type == tokWord || t.Value == "raw" && t.Type == tokKeyword ||
		t.Type == tokPunct && (t.Value == "(" || t.Value == "-")
}

func isPunct(t *token, values ...string) bool {
	if t.Type != tokPunct {
		return false
	}
	for _, v := range values {
		if t.Value == v {
			return true
		}
	}
	return false
}

func parseSum(lex *lexer.PeekingLexer, depth int) (*gExpr, error) {
	return parseLevel(lex, depth, parseProduct, "+", "-")
}

func parseProduct(lex *lexer.PeekingLexer, depth int) (*gExpr, error) {
	return parseLevel(lex, depth, parseSigned, "*", "/")
}

func parseLevel(lex *lexer.PeekingLexer, depth int, below func(*lexer.PeekingLexer, int) (*gExpr, error), ops ...string) (*gExpr, error) {
	left, err := below(lex, depth)
	if err != nil {
		return nil, err
	}
	for isPunct(lex.Peek(), ops...) {
		op := *lex.Next()
		if next := lex.Peek(); op.Value == "/" && next.Type != tokNumber && !isPunct(next, "(") && glued(&op, next) {
			return nil, &gluedError{op}
		}
		right, err := below(lex, depth)
		if err != nil {
			return nil, err
		}
		left = &gExpr{op: op, left: left, right: right}
	}
	return left, nil
}

func parseSigned(lex *lexer.PeekingLexer, depth int) (*gExpr, error) {
	if isPunct(lex.Peek(), "-") {
		op := *lex.Next()
		if depth >= maxDepth {
			return nil, tooDeep(&op)
		}
		operand, err := parseSigned(lex, depth+1)
		if err != nil {
			return nil, err
		}
		return &gExpr{op: op, right: operand}, nil
	}
	return parseAtom(lex, depth)
}

func tooDeep(at *token) error {
	return &deepError{at: *at}
}

// deepError is nesting beyond maxDepth.
type deepError struct{ at token }

func (e *deepError) Error() string            { return e.Message() }
func (e *deepError) Message() string          { return fmt.Sprintf("nested more than %d deep", maxDepth) }
func (e *deepError) Position() lexer.Position { return e.at.Pos }

func parseAtom(lex *lexer.PeekingLexer, depth int) (*gExpr, error) {
	t := lex.Peek()
	switch {
	case t.Type == tokNumber:
		e := &gExpr{number: *lex.Next()}
		if lex.Peek().Type == tokUnit {
			e.unit = *lex.Next()
		}
		return e, nil
	case t.Type == tokKeyword && t.Value == "raw":
		return &gExpr{raw: *lex.Next()}, nil
	case isPunct(t, "("):
		open := *lex.Next()
		inner, end, err := parseInner(lex, depth, &open)
		if err != nil {
			return nil, err
		}
		wrapped := *inner
		wrapped.open, wrapped.close = open, end
		return &wrapped, nil
	case t.Type == tokWord:
		path := &gPath{Steps: []*gStep{{Name: *lex.Next()}}}
		for isPunct(lex.Peek(), ".") {
			lex.Next()
			if lex.Peek().Type != tokWord {
				return nil, wrong(lex.Peek(), "a name")
			}
			path.Steps = append(path.Steps, &gStep{Name: *lex.Next()})
		}
		e := &gExpr{path: path}
		if isPunct(lex.Peek(), "(") {
			open := *lex.Next()
			inner, end, err := parseInner(lex, depth, &open)
			if err != nil {
				return nil, err
			}
			e.operand, e.open, e.close = inner, open, end
		}
		return e, nil
	}
	return nil, wrong(t, "a number, raw, a name or a parenthesis")
}

func parseInner(lex *lexer.PeekingLexer, depth int, open *token) (*gExpr, token, error) {
	if depth >= maxDepth {
		return nil, token{}, tooDeep(open)
	}
	inner, err := parseSum(lex, depth+1)
	if err != nil {
		return nil, token{}, err
	}
	if !isPunct(lex.Peek(), ")") {
		return nil, token{}, wrong(lex.Peek(), "an operator or the closing parenthesis")
	}
	return inner, *lex.Next(), nil
}

// expectedError is an error of the hand-written part that knows what was
// expected in plain words.
type expectedError struct {
	at   token
	want string
}

func (e *expectedError) Error() string            { return e.Message() }
func (e *expectedError) Message() string          { return "expected " + e.want }
func (e *expectedError) Position() lexer.Position { return e.at.Pos }

func wrong(at *token, want string) error { return &expectedError{*at, want} }

// gluedError is raw/teeth: neither a unit nor, to the eye, a division.
type gluedError struct{ at token }

func (e *gluedError) Error() string            { return e.Message() }
func (e *gluedError) Message() string          { return "a stroke without blanks" }
func (e *gluedError) Position() lexer.Position { return e.at.Pos }
