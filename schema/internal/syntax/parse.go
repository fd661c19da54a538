package syntax

import (
	"fmt"
	"math/big"
	"runtime"
	"slices"
	"sync"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"

	"busloom/diag"
)

// LanguageVersion is the version of the language that this program reads.
const LanguageVersion = 1

const (
	// maxProblems is how many syntax errors of one file are told.
	maxProblems = 100
	// maxText is the longest text, so that offsets fit into a token.
	maxText = 1 << 30
)

// Parse reads a description. Every mistake is reported once, in the order of
// the text; what could be read is in the tree, which is never nil.
func Parse(src *diag.File, problems *diag.List) *File {
	p, ok := newParser(src, problems)
	if !ok {
		return &File{Source: src}
	}
	f := p.tree()
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

// parser is what all pieces of a file share. Nothing in it changes while they
// are parsed, so that they can be parsed side by side.
type parser struct {
	file     *diag.File
	text     string
	toks     []tok
	comments []tok
	parsers  *parsers
	found    diag.List // the problems
}

func newParser(src *diag.File, problems *diag.List) (*parser, bool) {
	if len(src.Text) > maxText {
		problems.Report(diag.Unreadable, diag.Span{File: src}, fmt.Sprintf("a description has at most %d bytes, this one has %d", maxText, len(src.Text)), "divide it, and join the parts with use")
		return nil, false
	}
	s := scan(src.Text)
	p := &parser{file: src, text: string(src.Text), toks: s.toks, comments: s.comments, parsers: theParsers()}
	p.reportBad(s.bad)
	p.cutDepth()
	return p, true
}

// handOver gives the problems away in the order of the text, up to a limit.
func (p *parser) handOver(to *diag.List) {
	sorted := p.found.Sorted()
	var shown diag.List
	for i, d := range sorted {
		if i == maxProblems {
			shown.Report(diag.TooManyErrors, d.Span, fmt.Sprintf("%d more problems in this file aren't shown", len(sorted)-i),
				"mend the first ones: the others often go with them")
			break
		}
		*shown.Report(d.Code, d.Span, d.Problem, d.Remedy) = *d
	}
	to.Add(&shown)
}

// piece is a stretch of tokens that is parsed by itself.
type piece struct {
	toks []tok
	end  int // offset of what follows
}

// reader parses the pieces of one part of a file.
type reader struct {
	*parser
	lowering
}

func (p *parser) reader(problems *diag.List) *reader {
	return &reader{parser: p, lowering: lowering{src: p.file, problems: problems, numbers: map[string]*big.Rat{}}}
}

func (r *reader) report(code diag.Code, span diag.Span, problem, remedy string) *diag.Diagnostic {
	return r.problems.Report(code, span, problem, remedy)
}

func (r *reader) tokSpan(t tok) diag.Span {
	return diag.Span{File: r.src, Start: int(t.start), End: int(t.end)}
}

func (r *reader) tokText(t tok) string { return r.text[t.start:t.end] }

func (r *reader) spanOf(p piece) diag.Span {
	return r.tokSpan(p.toks[0]).To(r.tokSpan(p.toks[len(p.toks)-1]))
}

// parse runs one production over one piece.
func parse[T any](r *reader, with *participle.Parser[T], p piece) (*T, error) {
	peeking, err := lexer.Upgrade(&sliceLexer{text: r.text, toks: p.toks, end: p.end})
	if err != nil {
		return nil, err
	}
	return with.ParseFromLexer(peeking)
}

// tree reads the whole file: the version, then the declarations.
func (p *parser) tree() *File {
	f := &File{Source: p.file}
	r := p.reader(&p.found)
	rest := r.version(f)
	pieces := p.cut(rest)
	pieces = r.header(f, pieces)
	f.Decls = p.decls(pieces)
	return f
}

// version reads the first line and returns the index of what follows it.
func (r *reader) version(f *File) int {
	write := fmt.Sprintf("write busloom %d as the first line", LanguageVersion)
	if len(r.toks) == 0 {
		r.report(diag.MissingVersion, diag.Span{File: r.src}, "the file is empty, and a description begins with its language version", write)
		return 0
	}
	first := r.toks[0]
	if !first.is(tokWord) || r.tokText(first) != "busloom" {
		if !first.is(tokInvalid) {
			r.report(diag.MissingVersion, r.tokSpan(first), "a description begins with its language version", write)
		}
		return 0
	}
	to := 1
	if len(r.toks) > 1 && (r.toks[1].is(tokNumber) || r.toks[1].is(tokInvalid)) {
		to = 2
	}
	if to == 2 && r.toks[1].is(tokInvalid) {
		return to
	}
	g, err := parse(r, r.parsers.version, piece{r.toks[:to], len(r.text)})
	if err != nil {
		r.report(diag.MissingVersion, r.tokSpan(first), "the number of the language version is missing behind busloom", write)
		return to
	}
	f.Version = r.number(&g.Number)
	if f.Version.Value.Cmp(big.NewRat(LanguageVersion, 1)) != 0 {
		r.report(diag.UnknownVersion, f.Version.Span, fmt.Sprintf("this program knows version %d of the language, not %s", LanguageVersion, clip(f.Version.Raw)),
			"use a Busloom that knows it, or write the file in the version that this one knows")
	}
	return to
}

// header reads network and use, and returns the other pieces.
func (r *reader) header(f *File, pieces []piece) []piece {
	rest := pieces[:0:0]
	for _, at := range pieces {
		word := r.firstWord(at)
		if word != "network" && word != "use" {
			rest = append(rest, at)
			continue
		}
		if len(rest) > 0 {
			r.report(diag.UnexpectedWord, r.tokSpan(at.toks[0]), word+" stands behind a declaration", "move it up: network and use come before all declarations")
		}
		at, stray := r.splitStray(at, func(p piece) error {
			var err error
			if word == "network" {
				_, err = parse(r, r.parsers.network, p)
			} else {
				_, err = parse(r, r.parsers.use, p)
			}
			return err
		})
		if word == "use" {
			if g, err := parse(r, r.parsers.use, at); err == nil {
				f.Uses = append(f.Uses, r.use(g, r.spanOf(at)))
			} else {
				r.tell(at, err, word)
			}
		} else if g, err := parse(r, r.parsers.network, at); err != nil {
			r.tell(at, err, word)
		} else if n := r.network(g, r.spanOf(at)); f.Network == nil {
			f.Network = n
		} else {
			r.report(diag.RepeatedClause, n.Span, "the network is named a second time", "keep one of the two").Also(f.Network.Span, "the first time")
		}
		if len(stray.toks) > 0 {
			rest = append(rest, stray)
		}
	}
	return rest
}

// decls parses declarations, side by side if there are many. The result does
// not depend on how many are parsed at once.
func (p *parser) decls(pieces []piece) []Decl {
	const share = 64 // pieces of one batch
	batches := (len(pieces) + share - 1) / share
	out := make([][]Decl, batches)
	lists := make([]diag.List, batches)
	work := make(chan int, batches)
	for b := range batches {
		work <- b
	}
	close(work)
	var wait sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), batches) {
		wait.Go(func() {
			numbers := map[string]*big.Rat{}
			for b := range work {
				r := p.reader(&lists[b])
				r.numbers = numbers
				for i := b * share; i < min((b+1)*share, len(pieces)); i++ {
					out[b] = r.declaration(out[b], pieces[i])
				}
			}
		})
	}
	wait.Wait()
	for b := range lists {
		p.found.Add(&lists[b])
	}
	return slices.Concat(out...)
}

// declaration reads one piece: whole if it can, else what is good of it.
func (r *reader) declaration(out []Decl, at piece) []Decl {
	word := r.firstWord(at)
	if !declWords[word] {
		r.stray(at)
		return out
	}
	g, err := parse(r, r.parsers.decl, at)
	if err == nil {
		return append(out, r.decl(g, r.spanOf(at)))
	}
	switch word {
	case "bus", "ecu", "unit", "const":
		return r.mendLine(out, at, err)
	}
	before := r.problems.Len()
	d := r.mend(at, err)
	if r.problems.Len() == before {
		// The parts are good and the whole isn't: tell of the whole.
		r.tell(at, err, word)
	}
	if d != nil {
		out = append(out, d)
	}
	return out
}

func (r *reader) firstWord(at piece) string {
	if len(at.toks) > 0 && at.toks[0].is(tokWord) {
		return r.tokText(at.toks[0])
	}
	return ""
}
