package syntax

import (
	"bytes"
	"io"
	"unicode"
	"unicode/utf8"

	"github.com/alecthomas/participle/v2/lexer"

	"busloom/unit"
)

// The types of token. Keyword is one of the four reserved words. A word inside
// braces that stands before at, is or [ names a member or a group: it has a
// type of its own, so that no word of the language is ever taken away from
// names by a clause to come.
const (
	tokEOF lexer.TokenType = lexer.EOF - iota
	tokWord
	tokMember // a name before at
	tokGroup  // a name before is or [
	tokKeyword
	tokNumber
	tokUnit
	tokString
	tokPunct
	tokComment
	tokInvalid
	tokClosing // a brace put in where the text lacks one
)

var symbols = map[string]lexer.TokenType{
	"EOF": tokEOF, "Word": tokWord, "Member": tokMember, "Group": tokGroup, "Keyword": tokKeyword,
	"Number": tokNumber, "Unit": tokUnit, "String": tokString, "Punct": tokPunct, "Comment": tokComment, "Invalid": tokInvalid,
}

// definition is the hand-written lexer as the parser library wants it.
type definition struct{}

func (definition) Symbols() map[string]lexer.TokenType { return symbols }

func (d definition) Lex(name string, r io.Reader) (lexer.Lexer, error) {
	text, err := io.ReadAll(r)
	if err != nil {
		return nil, err
	}
	return d.LexBytes(name, text)
}

func (d definition) LexString(name, text string) (lexer.Lexer, error) {
	return d.LexBytes(name, []byte(text))
}

func (definition) LexBytes(_ string, text []byte) (lexer.Lexer, error) {
	s := scan(text)
	return &sliceLexer{text: string(text), toks: s.toks, end: len(text)}, nil
}

// tok is a token in 16 bytes, since a file may have millions. The parser
// library gets its own form of it for one piece of text at a time.
type tok struct {
	start, end int32 // bytes of the text
	line       int32
	kind       int8
}

func (t tok) is(kind lexer.TokenType) bool { return lexer.TokenType(t.kind) == kind }

// sliceLexer hands a piece of the tokens to the parser library.
type sliceLexer struct {
	text string
	toks []tok
	next int
	end  int // offset of what follows the piece
}

func (s *sliceLexer) Next() (lexer.Token, error) {
	if s.next == len(s.toks) {
		return lexer.EOFToken(lexer.Position{Offset: s.end}), nil
	}
	t := s.toks[s.next]
	s.next++
	if t.is(tokClosing) {
		return lexer.Token{Type: tokPunct, Value: "}", Pos: lexer.Position{Offset: int(t.start), Line: int(t.line)}}, nil
	}
	return lexer.Token{
		Type:  lexer.TokenType(t.kind),
		Value: s.text[t.start:t.end],
		Pos:   lexer.Position{Offset: int(t.start), Line: int(t.line)},
	}, nil
}

// scanner cuts a text into tokens. Blanks are no tokens; lines are told apart
// by number.
type scanner struct {
	text     []byte
	at       int
	line     int32
	depth    int // of braces
	toks     []tok
	comments []tok
	bad      []badToken
}

// badToken is an Invalid token with what is wrong with it.
type badToken struct {
	tok
	number error // of a number that is none
}

func scan(text []byte) *scanner {
	s := &scanner{text: text, line: 1, toks: make([]tok, 0, len(text)/5+8)}
	if bytes.HasPrefix(text, []byte("\ufeff")) {
		s.at = 3
	}
	for s.at < len(text) {
		s.step()
	}
	return s
}

// emit adds the token from the current place to end. The token before it is
// then known to be a name, if this one is at, is or [ inside braces.
func (s *scanner) emit(kind lexer.TokenType, end int) {
	t := tok{start: int32(s.at), end: int32(end), line: s.line, kind: int8(kind)}
	s.at = end
	if s.depth > 0 && len(s.toks) > 0 {
		if last := &s.toks[len(s.toks)-1]; last.is(tokWord) || last.is(tokUnit) && s.isPlainWord(*last) {
			switch {
			case kind == tokKeyword && string(s.text[t.start:t.end]) == "at":
				last.kind = int8(tokMember)
			case kind == tokKeyword && string(s.text[t.start:t.end]) == "is", kind == tokPunct && s.text[t.start] == '[':
				last.kind = int8(tokGroup)
			}
		}
	}
	s.toks = append(s.toks, t)
}

func (s *scanner) isPlainWord(t tok) bool {
	return isLetter(s.text[t.start]) && s.endOfWord(int(t.start)) == int(t.end)
}

func (s *scanner) step() {
	c := s.text[s.at]
	switch {
	case c == '\n':
		s.line++
		s.at++
	case c == ' ' || c == '\t' || c == '\r':
		s.at++
	case isLetter(c):
		s.word()
	case c >= '0' && c <= '9':
		s.number()
	case c == '"':
		s.quoted()
	case c == '/' && s.peek(1) == '/':
		s.comment()
	case c == '.' && s.peek(1) == '.':
		s.emit(tokPunct, s.at+2)
	case isPunctByte(c):
		switch c {
		case '{':
			s.depth++
		case '}':
			s.depth = max(s.depth-1, 0)
		}
		s.emit(tokPunct, s.at+1)
	case s.unitBegins(s.at):
		s.emit(tokUnit, s.endOfUnit(s.at))
	default:
		s.invalid()
	}
}

func isPunctByte(c byte) bool {
	switch c {
	case '{', '}', '(', ')', '[', ']', ',', ':', '=', '+', '-', '*', '/', '.', '^':
		return true
	}
	return false
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

func isDigit(c byte) bool { return c >= '0' && c <= '9' }

func isWordByte(c byte) bool { return isLetter(c) || isDigit(c) }

func (s *scanner) endOfWord(at int) int {
	for at < len(s.text) && isWordByte(s.text[at]) {
		at++
	}
	return at
}

func (s *scanner) comment() {
	end := s.at
	for end < len(s.text) && s.text[end] != '\n' {
		end++
	}
	next := end
	for end > s.at && (s.text[end-1] == '\r' || s.text[end-1] == ' ' || s.text[end-1] == '\t') {
		end--
	}
	s.comments = append(s.comments, tok{start: int32(s.at), end: int32(end), line: s.line, kind: int8(tokComment)})
	s.at = next
}

// word takes a word; behind a number on its line it is a unit, with what is
// glued to it.
func (s *scanner) word() {
	end := s.endOfWord(s.at)
	if s.foreignLetter(end) {
		s.invalid()
		return
	}
	switch string(s.text[s.at:end]) {
	case "at", "is", "ones", "raw":
		s.emit(tokKeyword, end)
		return
	}
	if n := len(s.toks); n > 0 && s.toks[n-1].is(tokNumber) && s.toks[n-1].line == s.line && !notUnits[string(s.text[s.at:end])] {
		s.emit(tokUnit, s.endOfUnit(s.at))
		return
	}
	s.emit(tokWord, end)
}

// number takes digits with underscores, 0x and 0b, a point if a digit
// follows, an exponent, and a glued fraction. A unit may be glued to a decimal
// number (10ms), so the number ends before a letter that belongs to none.
func (s *scanner) number() {
	end := s.simpleNumber(s.at)
	// More than one stroke, or more than one point, is a mistake of its own.
	for end+1 < len(s.text) && (s.text[end] == '/' || s.text[end] == '.') && isDigit(s.text[end+1]) {
		end = s.simpleNumber(end + 1)
	}
	if plainNumber(s.text[s.at:end]) {
		s.emit(tokNumber, end)
		return
	}
	if _, err := unit.ParseNumber(string(s.text[s.at:end])); err != nil {
		s.emit(tokInvalid, end)
		s.bad = append(s.bad, badToken{tok: s.toks[len(s.toks)-1], number: err})
		return
	}
	s.emit(tokNumber, end)
}

// plainNumber reports whether a text is a decimal number without anything
// special, as most are.
func plainNumber(text []byte) bool {
	if len(text) > 30 {
		return false
	}
	points := 0
	for _, c := range text {
		if c == '.' {
			points++
		} else if !isDigit(c) {
			return false
		}
	}
	return points <= 1
}

func (s *scanner) simpleNumber(at int) int {
	if s.text[at] == '0' && at+1 < len(s.text) && (s.text[at+1] == 'x' || s.text[at+1] == 'b') {
		return s.endOfWord(at)
	}
	end := s.endOfDigits(at)
	if end+1 < len(s.text) && s.text[end] == '.' && isDigit(s.text[end+1]) {
		end = s.endOfDigits(end + 1)
	}
	if end+1 < len(s.text) && (s.text[end] == 'e' || s.text[end] == 'E') {
		exponent := end + 1
		if s.text[exponent] == '-' || s.text[exponent] == '+' {
			exponent++
		}
		if exponent < len(s.text) && isDigit(s.text[exponent]) {
			end = s.endOfDigits(exponent)
		}
	}
	return end
}

func (s *scanner) endOfDigits(at int) int {
	for at < len(s.text) && (isDigit(s.text[at]) || s.text[at] == '_') {
		at++
	}
	return at
}

// quoted takes a text up to its quote on the same line. One that isn't closed
// ends before a brace that ends the line, so that blocks stay matched.
func (s *scanner) quoted() {
	for end := s.at + 1; end < len(s.text) && s.text[end] != '\n'; end++ {
		switch s.text[end] {
		case '\\':
			if end+1 < len(s.text) && s.text[end+1] != '\n' {
				end++
			}
		case '"':
			if !utf8.Valid(s.text[s.at : end+1]) {
				s.emitInvalid(end + 1)
				return
			}
			s.emit(tokString, end+1)
			return
		}
	}
	end := s.at
	for end < len(s.text) && s.text[end] != '\n' {
		end++
	}
	for end > s.at+1 && (s.text[end-1] == '\r' || s.text[end-1] == ' ' || s.text[end-1] == '\t') {
		end--
	}
	if end > s.at+1 && s.text[end-1] == '{' {
		for end--; end > s.at+1 && (s.text[end-1] == ' ' || s.text[end-1] == '\t'); end-- {
		}
	}
	s.emitInvalid(end)
}

func (s *scanner) emitInvalid(end int) {
	s.emit(tokInvalid, end)
	s.bad = append(s.bad, badToken{tok: s.toks[len(s.toks)-1]})
}

// invalid takes all bytes in a row that begin no token, and whole words with
// letters that names can't have.
func (s *scanner) invalid() {
	end := s.at
	for end < len(s.text) {
		c := s.text[end]
		switch {
		case s.foreignLetter(end):
			_, n := utf8.DecodeRune(s.text[end:])
			end = s.endOfWord(end + n)
		case isWordByte(c) && end == s.at:
			end = s.endOfWord(end)
		case c == ' ', c == '\t', c == '\r', c == '\n', c == '"', isWordByte(c), isPunctByte(c), end > s.at && s.unitBegins(end):
			s.emitInvalid(end)
			return
		default:
			end++
		}
	}
	s.emitInvalid(end)
}

// foreignLetter reports whether a letter stands here that names can't have.
func (s *scanner) foreignLetter(at int) bool {
	if at >= len(s.text) || s.text[at] < utf8.RuneSelf || s.unitBegins(at) {
		return false
	}
	r, _ := utf8.DecodeRune(s.text[at:])
	return unicode.IsLetter(r)
}

// unitBegins reports whether a byte can begin a name in a unit.
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
	return r == '°' || r == 'µ' || r == 'μ' || r == 'Ω' || r == '\u2126'
}

// endOfUnit takes names with powers, joined by / and * without blanks.
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
