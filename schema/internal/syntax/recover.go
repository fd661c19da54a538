package syntax

import (
	"errors"

	"github.com/alecthomas/participle/v2"

	"busloom/diag"
)

// Recovery. A declaration that can't be read whole is taken apart at its
// braces and at the words that begin items, entries, branches and clauses;
// each part is read by itself, and what is good of it is kept. Only here do
// lines and indentation matter.

// mend reads a broken declaration.
func (r *reader) mend(at piece, cause error) Decl {
	word := r.firstWord(at)
	open := r.indexOf(at, 0, "{")
	if open < 0 {
		r.tell(at, cause, word)
		return nil
	}
	at = r.balance(at)
	end := r.closing(at, open)
	if end+1 < len(at.toks) {
		r.stray(piece{at.toks[end+1:], at.end})
		at = piece{at.toks[: end+1 : end+1], int(at.toks[end+1].start)}
		if g, err := parse(r, r.parsers.decl, at); err == nil {
			return r.decl(g, r.spanOf(at))
		}
	}
	inside := r.inside(at, open, end)
	hollow := r.hollow(at, open, end)
	switch word {
	case "codes", "states":
		entries := r.mendEntries(inside)
		if d, ok := r.mendHead(hollow, at).(*TableDecl); ok {
			d.Entries = entries
			return d
		}
	case "curve":
		points := r.mendPoints(inside)
		if d, ok := r.mendHead(hollow, at).(*CurveDecl); ok {
			d.Points = points
			return d
		}
	case "shape":
		items := r.mendItems(inside)
		if d, ok := r.mendHead(hollow, at).(*ShapeDecl); ok {
			d.Body.Items, d.Body.Span = items, r.tokSpan(at.toks[open]).To(r.tokSpan(at.toks[end]))
			return d
		}
	case "message":
		items := r.mendItems(inside)
		if d, ok := r.mendHead(hollow, at).(*MessageDecl); ok {
			d.Body.Items, d.Body.Span = items, r.tokSpan(at.toks[open]).To(r.tokSpan(at.toks[end]))
			return d
		}
	default: // idform, crc
		if g, err := parse(r, r.parsers.decl, at); err == nil {
			return r.decl(g, r.spanOf(at))
		} else {
			r.tell(at, err, word)
		}
	}
	return nil
}

// mendHead reads a declaration whose braces were emptied.
func (r *reader) mendHead(hollow, whole piece) Decl {
	g, err := parse(r, r.parsers.decl, hollow)
	if err != nil {
		r.tell(hollow, err, r.firstWord(whole))
		return nil
	}
	return r.decl(g, r.spanOf(whole))
}

// mendLine reads a broken declaration without braces. What follows its mistake
// on a line of its own is read as another declaration.
func (r *reader) mendLine(out []Decl, at piece, cause error) []Decl {
	for range maxProblems {
		i := max(r.indexAt(at, cause), 1)
		for i < len(at.toks) && !(r.beginsLine(at, i) && at.toks[i].is(tokWord)) {
			i++
		}
		line := at
		if i < len(at.toks) {
			line = piece{at.toks[:i:i], int(at.toks[i].start)}
		}
		if g, err := parse(r, r.parsers.decl, line); err == nil {
			out = append(out, r.decl(g, r.spanOf(line)))
		} else {
			r.tell(line, err, r.firstWord(at))
		}
		if i == len(at.toks) {
			return out
		}
		at = piece{at.toks[i:], at.end}
		if !declWords[r.firstWord(at)] {
			r.stray(at)
			return out
		}
		g, err := parse(r, r.parsers.decl, at)
		if err == nil {
			return append(out, r.decl(g, r.spanOf(at)))
		}
		cause = err
	}
	return out
}

// splitStray divides a piece where its mistake begins a line, if what stands
// before is good.
func (r *reader) splitStray(at piece, try func(piece) error) (good, stray piece) {
	err := try(at)
	if err == nil {
		return at, piece{}
	}
	i := r.indexAt(at, err)
	if i < 1 || i >= len(at.toks) || at.toks[i].line == at.toks[i-1].line {
		return at, piece{}
	}
	good = piece{at.toks[:i:i], int(at.toks[i].start)}
	if try(good) != nil {
		return at, piece{}
	}
	return good, piece{at.toks[i:], at.end}
}

// indexAt is the token at which an error stands.
func (r *reader) indexAt(at piece, err error) int {
	var pe participle.Error
	if !errors.As(err, &pe) {
		return len(at.toks)
	}
	offset := int32(pe.Position().Offset)
	for i, t := range at.toks {
		if t.start >= offset {
			return i
		}
	}
	return len(at.toks)
}

func (r *reader) isPunct(t tok, value string) bool {
	return (t.is(tokPunct) || t.is(tokClosing) && value == "}") && (t.is(tokClosing) || r.tokText(t) == value)
}

func (r *reader) isWord(t tok, words ...string) bool {
	if !t.is(tokWord) {
		return false
	}
	for _, w := range words {
		if r.tokText(t) == w {
			return true
		}
	}
	return false
}

// indexOf finds a sign from an index on, or -1.
func (r *reader) indexOf(at piece, from int, value string) int {
	for i := from; i < len(at.toks); i++ {
		if r.isPunct(at.toks[i], value) {
			return i
		}
	}
	return -1
}

// closing is the index of the brace that closes the one at open; in a balanced
// piece there is one.
func (r *reader) closing(at piece, open int) int {
	depth := 0
	for i := open; i < len(at.toks); i++ {
		if r.isPunct(at.toks[i], "{") {
			depth++
		} else if r.isPunct(at.toks[i], "}") {
			if depth--; depth == 0 {
				return i
			}
		}
	}
	return len(at.toks) - 1
}

// inside is what stands between two braces, hollow the piece without it.
func (r *reader) inside(at piece, open, end int) piece {
	return piece{at.toks[open+1 : end : end], int(at.toks[end].start)}
}

func (r *reader) hollow(at piece, open, end int) piece {
	return piece{append(at.toks[:open+1:open+1], at.toks[end:]...), at.end}
}

// balance puts closing braces in where they are missing, each told of at its
// opening brace. Which one lacks its partner shows in the indentation: the
// block whose brace closes further left than it was opened. Without such a
// sign it is the outermost.
func (r *reader) balance(at piece) piece {
	for range 16 {
		open, missing := r.unclosed(at)
		if missing == 0 {
			return at
		}
		r.report(diag.UnclosedBlock, r.tokSpan(at.toks[open]), "this block isn't closed", "add the closing brace }")
		to := r.blockEnd(at, open)
		toks := append(at.toks[:to:to], r.closingAt(at, to))
		at = piece{append(toks, at.toks[to:]...), at.end}
	}
	// Whatever is left was told of often enough.
	_, missing := r.unclosed(at)
	for range missing {
		at.toks = append(at.toks[:len(at.toks):len(at.toks)], r.closingAt(at, len(at.toks)))
	}
	return at
}

func (r *reader) closingAt(at piece, to int) tok {
	last := at.toks[to-1]
	return tok{start: last.end, end: last.end, line: last.line, kind: int8(tokClosing)}
}

// unclosed finds the brace to blame, and how many lack a partner.
func (r *reader) unclosed(at piece) (open, missing int) {
	var stack []int
	suspect := -1
	for i, t := range at.toks {
		switch {
		case r.isPunct(t, "{"):
			stack = append(stack, i)
		case r.isPunct(t, "}") && len(stack) > 0:
			o := stack[len(stack)-1]
			stack = stack[:len(stack)-1]
			if suspect < 0 && t.is(tokPunct) && r.beginsLine(at, i) && r.column(int(t.start)) < r.indent(at, o) {
				suspect = o
			}
		}
	}
	if len(stack) == 0 {
		return 0, 0
	}
	if suspect >= 0 {
		return suspect, len(stack)
	}
	return stack[0], len(stack)
}

// blockEnd is where a block that lacks its brace seems to end: before the
// first line that is indented no more than the line that opens it.
func (r *reader) blockEnd(at piece, open int) int {
	indent := r.indent(at, open)
	for i := open + 1; i < len(at.toks); i++ {
		if r.beginsLine(at, i) && r.column(int(at.toks[i].start)) <= indent {
			return i
		}
	}
	return len(at.toks)
}

func (r *reader) beginsLine(at piece, i int) bool {
	return i == 0 || at.toks[i].line != at.toks[i-1].line
}

// indent is the indentation of the line of token i.
func (r *reader) indent(at piece, i int) int {
	for i > 0 && at.toks[i-1].line == at.toks[i].line {
		i--
	}
	return r.column(int(at.toks[i].start))
}

// column counts the bytes before an offset on its line, up to more than any
// sensible indentation.
func (r *reader) column(offset int) int {
	n := 0
	for n < offset && n < 1000 && r.text[offset-1-n] != '\n' {
		n++
	}
	return n
}

// stray tells of tokens that belong to no declaration.
func (r *reader) stray(at piece) {
	depth := 0
	for _, t := range at.toks {
		if r.isPunct(t, "{") {
			depth++
		} else if r.isPunct(t, "}") {
			if depth--; depth < 0 {
				r.report(diag.UnclosedBlock, r.tokSpan(t), "this brace closes nothing", "remove it, or remove one that closes its block too early")
				return
			}
		}
	}
	first := at.toks[0]
	if first.is(tokInvalid) {
		return
	}
	word := r.tokText(first)
	remedy := "begin a declaration with bus, ecu, unit, const, codes, states, curve, idform, crc, shape or message"
	if near := nearest(word, declWords); near != "" && first.is(tokWord) {
		remedy = "did you mean " + near + "? " + "A declaration begins with such a word"
	}
	r.report(diag.UnexpectedWord, r.tokSpan(first), describe(first, word)+" begins no declaration", remedy)
}

func (r *reader) holdsInvalid(at piece) bool {
	for _, t := range at.toks {
		if t.is(tokInvalid) {
			return true
		}
	}
	return false
}
