package syntax

import (
	"bytes"
	"io"
	"unicode/utf8"

	"github.com/alecthomas/participle/v2/lexer"
)

// The types of token. Keyword is one of the four reserved words; every other
// word of the language is a Word, so that clauses to come take no names away.
const (
	tokEOF lexer.TokenType = lexer.EOF - iota
	tokWord
	tokKeyword
	tokNumber
	tokUnit
	tokString
	tokPunct
	tokComment
	tokInvalid
)

var symbols = map[string]lexer.TokenType{
	"EOF": tokEOF, "Word": tokWord, "Keyword": tokKeyword, "Number": tokNumber, "Unit": tokUnit,
	"String": tokString, "Punct": tokPunct, "Comment": tokComment, "Invalid": tokInvalid,
}

// notUnits are the words that follow a number on its line without being its
// unit.
var notUnits = wordSet(
	"allowed", "alternating", "always", "apart", "as", "at", "bits", "both", "byte", "bytes", "check", "checksum", "codes", "counter",
	"decimal", "ecu", "extend", "fd", "fill", "final", "flag", "float", "from", "hold", "id", "in", "initial", "input",
	"is", "lost", "low", "nibble", "magnitude", "none", "note", "on", "ones", "or", "otherwise", "outside", "output", "over", "packed",
	"polynomial", "raw", "reflected", "repeated", "replaced", "select", "sign", "signed", "states", "step", "text",
	"then", "to", "tolerance", "when", "with", "within", "unused", "holds", "default", "relayed", "every", "end",
)

// NotUnit reports whether a word can't be the name of a unit, because it may
// follow a number as a word of the language.
func NotUnit(word string) bool { return notUnits[word] }

func wordSet(words ...string) map[string]bool {
	out := make(map[string]bool, len(words))
	for _, w := range words {
		out[w] = true
	}
	return out
}

// definition is the hand-written lexer as the parser library wants it.
type definition struct{}

func (definition) Symbols() map[string]lexer.TokenType { return symbols }

func (definition) Lex(name string, r io.Reader) (lexer.Lexer, error) {
	text, err := io.ReadAll(r)
	if err != nil {
		return nil, err
	}
	return definition{}.LexBytes(name, text)
}

func (definition) LexString(name, text string) (lexer.Lexer, error) {
	return definition{}.LexBytes(name, []byte(text))
}

func (definition) LexBytes(_ string, text []byte) (lexer.Lexer, error) {
	return &sliceLexer{tokens: scan(text)}, nil
}

// sliceLexer hands out tokens that were cut before.
type sliceLexer struct {
	tokens []lexer.Token
	end    lexer.Position
	next   int
}

func (s *sliceLexer) Next() (lexer.Token, error) {
	if s.next == len(s.tokens) {
		return lexer.EOFToken(s.end), nil
	}
	s.next++
	return s.tokens[s.next-1], nil
}

// scanner cuts a text into tokens. Blanks are not tokens; Position.Line tells
// lines apart.
type scanner struct {
	text      []byte
	at        int
	line      int
	lineStart int
	tokens    []lexer.Token
	// inCurve is set between the word curve and its brace: there, what follows
	// from and to is a unit.
	inCurve bool
}

func scan(text []byte) []lexer.Token {
	s := &scanner{text: text, line: 1, tokens: make([]lexer.Token, 0, len(text)/5+8)}
	if bytes.HasPrefix(text, []byte("\ufeff")) {
		s.at, s.lineStart = 3, 3
	}
	for s.at < len(text) {
		s.step()
	}
	return s.tokens
}

func (s *scanner) emit(kind lexer.TokenType, end int) {
	s.tokens = append(s.tokens, lexer.Token{
		Type:  kind,
		Value: string(s.text[s.at:end]),
		Pos:   lexer.Position{Offset: s.at, Line: s.line, Column: s.at - s.lineStart + 1},
	})
	s.at = end
}

func (s *scanner) step() {
	c := s.text[s.at]
	switch {
	case c == '\n':
		s.line++
		s.at++
		s.lineStart = s.at
	case c == ' ' || c == '\t' || c == '\r':
		s.at++
	case s.unitFollows():
		s.emit(tokUnit, s.endOfUnit(s.at))
	case isLetter(c):
		s.word()
	case c >= '0' && c <= '9':
		s.number()
	case c == '"':
		s.quoted()
	case c == '/' && s.peek(1) == '/':
		end := s.at
		for end < len(s.text) && s.text[end] != '\n' {
			end++
		}
		if end > s.at && s.text[end-1] == '\r' {
			end--
		}
		s.emit(tokComment, end)
	case c == '.' && s.peek(1) == '.':
		s.emit(tokPunct, s.at+2)
	case bytes.IndexByte([]byte("{}()[],:=+-*/."), c) >= 0:
		if c == '{' {
			s.inCurve = false
		}
		s.emit(tokPunct, s.at+1)
	default:
		s.invalid()
	}
}

func (s *scanner) peek(ahead int) byte {
	if s.at+ahead < len(s.text) {
		return s.text[s.at+ahead]
	}
	return 0
}

func isLetter(c byte) bool {
	return c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c == '_'
}

func isWordByte(c byte) bool { return isLetter(c) || c >= '0' && c <= '9' }

func (s *scanner) endOfWord(at int) int {
	for at < len(s.text) && isWordByte(s.text[at]) {
		at++
	}
	return at
}

func (s *scanner) word() {
	end := s.endOfWord(s.at)
	kind := tokWord
	switch string(s.text[s.at:end]) {
	case "at", "is", "ones", "raw":
		kind = tokKeyword
	case "curve":
		s.inCurve = true
	}
	s.emit(kind, end)
}

// number takes digits with underscores, 0x and 0b, a point if a digit
// follows, an exponent, and a glued fraction. What is glued to it beyond that
// makes it a bad number, which is told later from its text.
func (s *scanner) number() {
	end := s.simpleNumber(s.at)
	if end+1 < len(s.text) && s.text[end] == '/' && isDigit(s.text[end+1]) {
		end = s.simpleNumber(end + 1)
	}
	s.emit(tokNumber, end)
}

func isDigit(c byte) bool { return c >= '0' && c <= '9' }

func (s *scanner) simpleNumber(at int) int {
	end := s.endOfWord(at)
	based := end-at > 1 && s.text[at] == '0' && (s.text[at+1] == 'x' || s.text[at+1] == 'b')
	if based {
		return end
	}
	if end+1 < len(s.text) && s.text[end] == '.' && isDigit(s.text[end+1]) {
		end = s.endOfWord(end + 1)
	}
	// 1e-3: the word ended at the sign.
	if c := s.text[end-1]; (c == 'e' || c == 'E') && end+1 < len(s.text) && (s.text[end] == '-' || s.text[end] == '+') && isDigit(s.text[end+1]) {
		end = s.endOfWord(end + 1)
	}
	return end
}

// quoted takes a text up to its quote on the same line.
func (s *scanner) quoted() {
	for end := s.at + 1; end < len(s.text) && s.text[end] != '\n'; end++ {
		switch s.text[end] {
		case '\\':
			end++
		case '"':
			if !utf8.Valid(s.text[s.at : end+1]) {
				s.emit(tokInvalid, end+1)
				return
			}
			s.emit(tokString, end+1)
			return
		}
	}
	end := s.at
	for end < len(s.text) && s.text[end] != '\n' && s.text[end] != '\r' {
		end++
	}
	s.emit(tokInvalid, end)
}

// invalid takes all bytes in a row that begin no token.
func (s *scanner) invalid() {
	end := s.at + 1
	for end < len(s.text) {
		c := s.text[end]
		if c <= ' ' || isWordByte(c) || bytes.IndexByte([]byte("{}()[],:=+-*/.\""), c) >= 0 {
			break
		}
		end++
	}
	s.emit(tokInvalid, end)
}

// unitFollows reports whether a unit begins here: after a number on the same
// line, after the word in, or after from and to in the head of a curve.
func (s *scanner) unitFollows() bool {
	if len(s.tokens) == 0 || !s.unitBegins(s.at) {
		return false
	}
	last := &s.tokens[len(s.tokens)-1]
	if last.Pos.Line != s.line {
		return false
	}
	word := string(s.text[s.at:s.endOfWord(s.at)])
	switch last.Type {
	case tokNumber:
		return !notUnits[word]
	case tokWord:
		if last.Value == "in" || (s.inCurve && (last.Value == "from" || last.Value == "to")) {
			return word != "at" && word != "is"
		}
	}
	return false
}

// unitBegins reports whether the byte can begin a name in a unit.
func (s *scanner) unitBegins(at int) bool {
	if at >= len(s.text) {
		return false
	}
	c := s.text[at]
	if isLetter(c) || c == '%' {
		return true
	}
	if c < utf8.RuneSelf {
		return false
	}
	r, _ := utf8.DecodeRune(s.text[at:])
	return r == '°' || r == 'µ' || r == 'μ' || r == 'Ω'
}

func (s *scanner) endOfUnit(at int) int {
	for {
		at = s.endOfUnitName(at)
		if at+1 < len(s.text) && s.text[at] == '^' && isDigit(s.text[at+1]) {
			at = s.endOfWord(at + 1)
		}
		if at >= len(s.text) || (s.text[at] != '/' && s.text[at] != '*') || !s.unitBegins(at+1) {
			return at
		}
		// V/raw divides by the raw value.
		switch string(s.text[at+1 : s.endOfWord(at+1)]) {
		case "raw", "ones", "at", "is":
			return at
		}
		at++
	}
}

func (s *scanner) endOfUnitName(at int) int {
	for at < len(s.text) {
		switch c := s.text[at]; {
		case isWordByte(c) || c == '%':
			at++
		case c >= utf8.RuneSelf && s.unitBegins(at):
			_, n := utf8.DecodeRune(s.text[at:])
			at += n
		default:
			return at
		}
	}
	return at
}
