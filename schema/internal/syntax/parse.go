package syntax

import (
	"errors"
	"fmt"
	"regexp"
	"strings"
	"sync"

	"busloom/diag"
	"busloom/unit"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// mostProblems is how many syntax errors of one file are told.
const mostProblems = 100

// Parse reads a description. Every problem is reported, once; what could be
// read is in the tree, so that its checks can go on.
func Parse(src *diag.File, problems *diag.List) *File {
	p := &parser{src: src, problems: &diag.List{}, parsers: theParsers()}
	all := scan(src.Text)
	p.tokens = make(tokens, 0, len(all))
	for _, t := range all {
		if t.Type != tokComment {
			p.tokens = append(p.tokens, t)
		}
	}
	p.reportInvalid()
	f := p.file()
	p.handOver(problems)
	return f
}

// theParsers builds the grammar once; it can't fail for a grammar that the
// tests build.
var theParsers = sync.OnceValue(func() *parsers {
	p, err := newParsers()
	if err != nil {
		panic("syntax: " + err.Error())
	}
	return p
})

type parser struct {
	src      *diag.File
	tokens   tokens
	problems *diag.List
	parsers  *parsers
}

func (p *parser) handOver(to *diag.List) {
	sorted := p.problems.Sorted()
	for i, d := range sorted {
		if i == mostProblems {
			to.Report(diag.TooManyErrors, d.Span, fmt.Sprintf("%d more problems in this file aren't shown", len(sorted)-i),
				"mend the first ones: the others often go with them")
			// The count of errors must still be right.
			return
		}
		to.Report(d.Code, d.Span, d.Problem, d.Remedy)
	}
}

func (p *parser) span(from, to int) diag.Span {
	s := diag.Span{File: p.src, Start: from, End: to}
	return s
}

func (p *parser) tokenSpan(t *token) diag.Span {
	return p.span(t.Pos.Offset, t.Pos.Offset+len(t.Value))
}

// pieceSpan is the span of a piece of tokens.
func (p *parser) pieceSpan(at piece) diag.Span {
	if at.from >= at.to || at.from >= len(p.tokens) {
		return p.span(len(p.src.Text), len(p.src.Text))
	}
	return p.tokenSpan(&p.tokens[at.from]).To(p.tokenSpan(&p.tokens[at.to-1]))
}

// reportInvalid tells what the lexer couldn't read, and numbers that aren't.
func (p *parser) reportInvalid() {
	for i := range p.tokens {
		t := &p.tokens[i]
		switch {
		case t.Type == tokInvalid && t.Value[0] == '"':
			p.problems.Report(diag.UnclosedText, p.tokenSpan(t), "this text has no closing quote on its line",
				`close it with ", and go on in a second text on the next line if it is long`)
		case t.Type == tokInvalid:
			what := "these bytes are"
			if len([]rune(t.Value)) == 1 {
				what = "this sign is"
			}
			p.problems.Report(diag.Unreadable, p.tokenSpan(t), what+" no part of the language",
				"remove it; texts go in quotes, comments begin with //")
		case t.Type == tokNumber:
			if _, err := unit.ParseNumber(t.Value); err != nil {
				p.problems.Report(diag.BadNumber, p.tokenSpan(t), "this can't be read as a number: "+err.Error(),
					"write it as 12, 0.25, 1e-3, 0x1F, 0b101 or 100/255, with a blank between a number and a word")
				t.Type = tokInvalid
			}
		}
	}
}

// hasInvalid reports whether a piece has a token that was reported already.
func (p *parser) hasInvalid(at piece) bool {
	for i := at.from; i < at.to; i++ {
		if p.tokens[i].Type == tokInvalid {
			return true
		}
	}
	return false
}

// parsePiece runs one production over one piece and tells what is wrong.
func parsePiece[T any](p *parser, with *participle.Parser[T], at piece) (*T, bool) {
	if p.hasInvalid(at) {
		return nil, false
	}
	end := lexer.Position{Offset: len(p.src.Text)}
	if at.to < len(p.tokens) {
		end = p.tokens[at.to].Pos
	}
	peeking, err := lexer.Upgrade(&sliceLexer{tokens: p.tokens[at.from:at.to], end: end})
	if err != nil {
		p.syntaxError(at, err)
		return nil, false
	}
	got, err := with.ParseFromLexer(peeking)
	if err != nil {
		p.syntaxError(at, err)
		return nil, false
	}
	return got, true
}

// expectation finds the first thing that the library says was expected.
var expectation = regexp.MustCompile(`\(expected ("[^"]+"|<[a-z]+>|[A-Z]\w*)`)

// inWords translates what the library calls a token or a production.
var inWords = map[string]string{
	"<word>": "a name", "<number>": "a number", "<string>": "a text in quotes", "<unit>": "a unit", "<punct>": "a sign",
	"GQuantity": "a number", "GPath": "a name", "GRun": "a place such as 0.7..1.0", "GRaw": "a raw value: a number or ones",
	"GRawRange": "a raw value: a number or ones", "GExpr": "a formula", "GEntry": "a raw value, a colon and a word",
	"GChoice": "a raw value or a state", "GID": "an identifier", "GFeed": "a number, byte or bytes", "GStep": "a name",
	"GClause": "a clause", "GIDField": "a field of the id form", "GIDFormField": "a field and its width",
	"GWait": "at least ... apart, or lost after ...", "GMethod": "a checksum method", "GTable": "a table",
}

func (p *parser) syntaxError(at piece, err error) {
	var deep *deepError
	if errors.As(err, &deep) {
		p.problems.Report(diag.NestedTooDeep, p.tokenSpan(&deep.at), deep.Message(), "split the formula with constants, or remove parentheses")
		return
	}
	var stroke *gluedError
	if errors.As(err, &stroke) {
		p.problems.Report(diag.UnitNeedsOwnLine, p.tokenSpan(&stroke.at), "a stroke without blanks belongs to a unit or a fraction, and here is neither",
			"put blanks around / to divide")
		return
	}
	var pe participle.Error
	offset := p.pieceSpan(at).End
	want := ""
	if errors.As(err, &pe) {
		offset = pe.Position().Offset
		var own *expectedError
		if errors.As(err, &own) {
			want = own.want
		} else if m := expectation.FindStringSubmatch(pe.Message()); m != nil {
			want = inWords[m[1]]
			if strings.HasPrefix(m[1], `"`) {
				want = "the word " + strings.Trim(m[1], `"`)
				if len(strings.Trim(m[1], `"`)) <= 2 && !isLetter(m[1][1]) {
					want = strings.Trim(m[1], `"`)
				}
			}
		}
	}
	p.unexpected(at, offset, want)
}

// unexpected tells what stands at an offset and what was expected there.
func (p *parser) unexpected(at piece, offset int, want string) {
	i := at.from
	for i < at.to && p.tokens[i].Pos.Offset < offset {
		i++
	}
	if i >= at.to {
		span := p.pieceSpan(at)
		span.Start = max(span.Start, span.End-1)
		last := p.tokens[at.to-1].Value
		if want == "" {
			want = "more"
		}
		p.problems.Report(diag.UnexpectedWord, span, fmt.Sprintf("after %s something is missing: expected %s", clip(last), want), "complete it; docs/language.md has the form")
		return
	}
	t := &p.tokens[i]
	problem := fmt.Sprintf("%s can't stand here", clip(t.Value))
	if want != "" {
		problem += ": expected " + want
	}
	remedy := "remove it, or see docs/language.md for what can stand here"
	if t.Type == tokWord || t.Type == tokUnit {
		if near := diag.Nearest(t.Value, knownWords(want)); near != "" && near != t.Value {
			remedy = "did you mean " + near + "?"
		}
	}
	p.problems.Report(diag.UnexpectedWord, p.tokenSpan(t), problem, remedy)
}

func glued(a, b *token) bool { return a.Pos.Offset+len(a.Value) == b.Pos.Offset }

func clip(text string) string {
	if len(text) > 40 {
		text = text[:40] + "…"
	}
	return text
}

func knownWords(want string) []string {
	if strings.HasPrefix(want, "the word ") {
		return []string{strings.TrimPrefix(want, "the word ")}
	}
	var out []string
	for _, set := range []map[string]bool{declWords, factWords, clauseWords} {
		for w := range set {
			out = append(out, w)
		}
	}
	return out
}
