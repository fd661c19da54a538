package syntax

import (
	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// The small productions that occur everywhere, read by hand: the library calls
// their Parse methods. NextMatch says that the production doesn't begin here.

// gTexts are quoted texts side by side, or none.
type gTexts struct{ toks []token }

// Parse implements participle.Parseable.
func (g *gTexts) Parse(lex *lexer.PeekingLexer) error {
	for lex.Peek().Type == tokString {
		g.toks = append(g.toks, *lex.Next())
	}
	return nil
}

// gNames are names with commas between them.
type gNames struct{ toks []token }

// Parse implements participle.Parseable.
func (g *gNames) Parse(lex *lexer.PeekingLexer) error {
	if lex.Peek().Type != tokWord {
		return participle.NextMatch
	}
	for {
		g.toks = append(g.toks, *lex.Next())
		if !isPunct(lex.Peek(), ",") {
			return nil
		}
		lex.Next()
		if lex.Peek().Type != tokWord {
			return wrong(lex.Peek(), "a name")
		}
	}
}

// gSenders are names with commas or the word or between them.
type gSenders struct{ names, joints []token }

// Parse implements participle.Parseable.
func (g *gSenders) Parse(lex *lexer.PeekingLexer) error {
	if lex.Peek().Type != tokWord {
		return participle.NextMatch
	}
	for {
		g.names = append(g.names, *lex.Next())
		if t := lex.Peek(); !isPunct(t, ",") && (t.Type != tokWord || t.Value != "or") {
			return nil
		}
		g.joints = append(g.joints, *lex.Next())
		if lex.Peek().Type != tokWord {
			return wrong(lex.Peek(), "a name")
		}
	}
}

// gNumbers are numbers in a row.
type gNumbers struct{ toks []token }

// Parse implements participle.Parseable.
func (g *gNumbers) Parse(lex *lexer.PeekingLexer) error {
	if lex.Peek().Type != tokNumber {
		return participle.NextMatch
	}
	for lex.Peek().Type == tokNumber {
		g.toks = append(g.toks, *lex.Next())
	}
	return nil
}

// gQuantity is a signed number with an optional unit.
type gQuantity struct {
	minus  token
	number token
	unit   token
}

// Parse implements participle.Parseable.
func (g *gQuantity) Parse(lex *lexer.PeekingLexer) error {
	if isPunct(lex.Peek(), "-") {
		g.minus = *lex.Next()
		if lex.Peek().Type != tokNumber {
			return wrong(lex.Peek(), "a number")
		}
	}
	if lex.Peek().Type != tokNumber {
		return participle.NextMatch
	}
	g.number = *lex.Next()
	if lex.Peek().Type == tokUnit {
		g.unit = *lex.Next()
	}
	return nil
}

// gValue is a signed number without a unit.
type gValue struct{ gQuantity }

// Parse implements participle.Parseable.
func (g *gValue) Parse(lex *lexer.PeekingLexer) error {
	if err := g.gQuantity.Parse(lex); err != nil {
		return err
	}
	if g.unit.Value != "" {
		return wrong(&g.unit, "a number without a unit: the head of the curve has the units")
	}
	return nil
}

// gPath is name.name with keys in brackets.
type gPath struct{ steps []gStep }

type gStep struct {
	name, key, close token
}

// Parse implements participle.Parseable.
func (g *gPath) Parse(lex *lexer.PeekingLexer) error {
	if !beginsStep(lex) {
		return participle.NextMatch
	}
	for {
		s := gStep{name: *lex.Next()}
		if isPunct(lex.Peek(), "[") {
			lex.Next()
			if k := lex.Peek(); k.Type != tokWord && k.Type != tokNumber {
				return wrong(k, "a key: a name or a whole number")
			}
			s.key = *lex.Next()
			if !isPunct(lex.Peek(), "]") {
				return wrong(lex.Peek(), "]")
			}
			s.close = *lex.Next()
		}
		g.steps = append(g.steps, s)
		if !isPunct(lex.Peek(), ".") {
			return nil
		}
		lex.Next()
		if !beginsStep(lex) {
			return wrong(lex.Peek(), "a name")
		}
	}
}

// beginsStep reports whether a step of a path is next: a word, or a word
// before a bracket.
func beginsStep(lex *lexer.PeekingLexer) bool {
	switch t := lex.Peek(); t.Type {
	case tokWord:
		return true
	case tokGroup:
		mark := lex.MakeCheckpoint()
		lex.Next()
		bracket := isPunct(lex.Peek(), "[")
		lex.LoadCheckpoint(mark)
		return bracket
	}
	return false
}

// gRun is one run of bits: [+] byte.bit [.. byte.bit or end].
type gRun struct {
	plus, heavy, light, end token
}

// Parse implements participle.Parseable.
func (g *gRun) Parse(lex *lexer.PeekingLexer) error {
	t := lex.Peek()
	if isPunct(t, "+") {
		g.plus = *lex.Next()
		t = lex.Peek()
		if t.Type != tokNumber {
			return wrong(t, "a place such as +0.7..1.0")
		}
	}
	if t.Type != tokNumber {
		return participle.NextMatch
	}
	g.heavy = *lex.Next()
	if !isPunct(lex.Peek(), "..") {
		return nil
	}
	lex.Next()
	switch t := lex.Peek(); {
	case t.Type == tokNumber:
		g.light = *lex.Next()
	case t.Type == tokWord && t.Value == "end":
		g.end = *lex.Next()
	default:
		return wrong(t, "the place's lightest bit, such as 1.0, or end")
	}
	return nil
}

// gPlace is runs joined by then.
type gPlace struct{ runs []gRun }

// Parse implements participle.Parseable.
func (g *gPlace) Parse(lex *lexer.PeekingLexer) error {
	for {
		var r gRun
		if err := r.Parse(lex); err == participle.NextMatch && len(g.runs) > 0 {
			return wrong(lex.Peek(), "a place such as 0.7..1.0")
		} else if err != nil {
			return err
		}
		g.runs = append(g.runs, r)
		if t := lex.Peek(); t.Type != tokWord || t.Value != "then" {
			return nil
		}
		lex.Next()
	}
}

// gRaw is a number, or ones less a number.
type gRaw struct {
	ones, less, number token
}

func (g *gRaw) parse(lex *lexer.PeekingLexer) bool {
	switch t := lex.Peek(); {
	case t.Type == tokNumber:
		g.number = *lex.Next()
	case t.Type == tokKeyword && t.Value == "ones":
		g.ones = *lex.Next()
	default:
		return false
	}
	return true
}

// minus reads what is taken off ones.
func (g *gRaw) minus(lex *lexer.PeekingLexer) error {
	if g.ones.Value == "" || !isPunct(lex.Peek(), "-") {
		return nil
	}
	lex.Next()
	if lex.Peek().Type != tokNumber {
		return wrong(lex.Peek(), "a number")
	}
	g.less = *lex.Next()
	return nil
}

// gRaws is a raw value or a range of them.
type gRaws struct {
	low, high gRaw
	ranged    bool
}

// Parse implements participle.Parseable.
func (g *gRaws) Parse(lex *lexer.PeekingLexer) error {
	if !g.low.parse(lex) {
		return participle.NextMatch
	}
	if err := g.low.minus(lex); err != nil {
		return err
	}
	if !isPunct(lex.Peek(), "..") {
		return nil
	}
	lex.Next()
	g.ranged = true
	if !g.high.parse(lex) {
		return wrong(lex.Peek(), "a raw value: a number or ones")
	}
	return g.high.minus(lex)
}

// gUnitRef is a unit that doesn't stand behind a number: there the lexer knows
// no units, so what is glued together makes one.
type gUnitRef struct{ first, last token }

// Parse implements participle.Parseable.
func (g *gUnitRef) Parse(lex *lexer.PeekingLexer) error {
	t := lex.Peek()
	if t.Type != tokWord && t.Type != tokUnit {
		return participle.NextMatch
	}
	g.first = *lex.Next()
	g.last = g.first
	for {
		sign := lex.Peek()
		if !isPunct(sign, "/", "*", "^") || !glued(&g.last, sign) {
			return nil
		}
		power := sign.Value == "^"
		mark := lex.MakeCheckpoint()
		lex.Next()
		next := lex.Peek()
		if !glued(sign, next) || power != (next.Type == tokNumber) || (!power && next.Type != tokWord && next.Type != tokUnit) {
			lex.LoadCheckpoint(mark)
			return nil
		}
		g.last = *lex.Next()
	}
}

// gClauseBegins and gItemBegins take nothing from the text. They spare the library the trial
// of every alternative where none can begin, which is at the end of each member
// and of each body.
type (
	gClauseBegins struct{ word token }
	gItemBegins   struct{}
)

// Parse implements participle.Parseable.
func (g *gClauseBegins) Parse(lex *lexer.PeekingLexer) error {
	if t := lex.Peek(); isPunct(t, "=") || t.Type == tokWord && clauseWords[t.Value] {
		g.word = *t
		return nil
	}
	return participle.NextMatch
}

// Parse implements participle.Parseable.
func (*gItemBegins) Parse(lex *lexer.PeekingLexer) error {
	if t := lex.Peek(); t.Type == tokMember || t.Type == tokGroup || t.Type == tokWord && factWords[t.Value] {
		return nil
	}
	return participle.NextMatch
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

// glued reports whether nothing stands between two tokens.
func glued(a, b *token) bool { return a.Pos.Offset+len(a.Value) == b.Pos.Offset }

// expectedError is an error of the hand-written part that says in plain words
// what was expected.
type expectedError struct {
	at   token
	want string
}

func (e *expectedError) Error() string            { return e.Message() }
func (e *expectedError) Message() string          { return "expected " + e.want }
func (e *expectedError) Position() lexer.Position { return e.at.Pos }

func wrong(at *token, want string) error { return &expectedError{*at, want} }
