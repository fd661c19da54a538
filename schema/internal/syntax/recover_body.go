package syntax

import (
	"strings"

	"busloom/diag"
)

// mendEntries reads a table of which at least one entry is broken.
func (r *reader) mendEntries(inside piece) []*Entry {
	var out []*Entry
	for _, at := range r.beforeColons(inside, r.beginOfRaws) {
		if g, err := parse(r, r.parsers.entry, at); err == nil {
			out = append(out, r.entry(g))
		} else {
			r.tell(at, err, "entry")
		}
	}
	return out
}

func (r *reader) mendPoints(inside piece) []*CurvePoint {
	var out []*CurvePoint
	begin := func(at piece, i int) int {
		if i > 0 && r.isPunct(at.toks[i-1], "-") {
			return i - 1
		}
		return i
	}
	for _, at := range r.beforeColons(inside, begin) {
		if g, err := parse(r, r.parsers.point, at); err == nil {
			out = append(out, r.point(g))
		} else {
			r.tell(at, err, "point")
		}
	}
	return out
}

// beginOfRaws goes from the last token before a colon back to the first of the
// raw values, whole or not.
func (r *reader) beginOfRaws(at piece, i int) int {
	joins := func(i int) bool { return r.isPunct(at.toks[i], "-") || r.isPunct(at.toks[i], "..") }
	if !joins(i) && !at.toks[i].is(tokNumber) && !at.toks[i].is(tokKeyword) {
		return i + 1 // nothing before the colon
	}
	for i > 0 && (joins(i-1) || joins(i) && (at.toks[i-1].is(tokNumber) || at.toks[i-1].is(tokKeyword))) {
		i--
	}
	return i
}

// beforeColons cuts a table where the values before a colon begin, and where a
// number begins a line.
func (r *reader) beforeColons(inside piece, begin func(at piece, last int) int) []piece {
	starts := map[int]bool{}
	for i, t := range inside.toks {
		if r.isPunct(t, ":") && i > 0 {
			starts[begin(inside, i-1)] = true
		}
		if i > 0 && r.beginsLine(inside, i) && (t.is(tokNumber) || t.is(tokKeyword)) && !r.isPunct(inside.toks[i-1], "..") {
			starts[i] = true
		}
	}
	return r.cutAt(inside, func(i int) bool { return starts[i] })
}

func (r *reader) cutAt(at piece, begins func(i int) bool) []piece {
	var out []piece
	start := 0
	for i := 1; i <= len(at.toks); i++ {
		if i < len(at.toks) && !begins(i) {
			continue
		}
		end := at.end
		if i < len(at.toks) {
			end = int(at.toks[i].start)
		}
		out = append(out, piece{at.toks[start:i:i], end})
		start = i
	}
	return out
}

// mendItems reads a body of which at least one item is broken.
func (r *reader) mendItems(inside piece) []Item {
	var out []Item
	for _, at := range r.cutItems(inside) {
		if item := r.mendItem(at); item != nil {
			out = append(out, item)
		}
	}
	return out
}

func (r *reader) mendItem(at piece) Item {
	g, err := parse(r, r.parsers.item, at)
	if err == nil {
		return r.item(g)
	}
	// A line that can't go on the item before it.
	good, stray := r.splitStray(at, func(p piece) error {
		_, err := parse(r, r.parsers.item, p)
		return err
	})
	if len(stray.toks) > 0 {
		r.tellItem(stray, nil)
		g, _ := parse(r, r.parsers.item, good)
		return r.item(g)
	}
	before := r.problems.Len()
	switch {
	case at.toks[0].is(tokMember):
		r.mendMember(at)
	case r.isWord(at.toks[0], "select") && r.indexOf(at, 0, "{") > 0:
		if s := r.mendSelect(at); s != nil {
			return s
		}
	default:
		r.tellItem(at, err)
	}
	if r.problems.Len() == before && !r.holdsInvalid(at) {
		r.tell(at, err, "item")
	}
	return nil
}

// tellItem tells of tokens that are no item; err is nil if that is all that is
// known of them.
func (r *reader) tellItem(at piece, err error) {
	first := at.toks[0]
	word := r.tokText(first)
	known := first.is(tokMember) || first.is(tokGroup) || r.isWord(first) || factWords[word] && first.is(tokWord)
	if known && err != nil {
		r.tell(at, err, "item")
		return
	}
	if first.is(tokInvalid) || r.holdsInvalid(at) && !known {
		return
	}
	switch {
	case first.is(tokKeyword):
		r.report(diag.UnexpectedWord, r.tokSpan(first), word+" is a reserved word and names nothing", "choose another name: at, is, ones and raw are taken")
	case first.is(tokWord) && len(at.toks) > 1 && (r.isPunct(at.toks[1], "+") || at.toks[1].is(tokNumber) && strings.Contains(r.tokText(at.toks[1]), ".")):
		r.report(diag.UnexpectedWord, r.tokSpan(first), "the word at is missing behind "+word, "write a member as name, at and its place: "+word+" at 0.7..1.0")
	default:
		remedy := "write a member as name, at and its place, or begin with from, every, on, fill, default, unused, holds, relayed, replaced, note or select"
		if near := nearest(word, factWords); near != "" && first.is(tokWord) {
			remedy = "did you mean " + near + "?"
		}
		r.report(diag.UnexpectedWord, r.tokSpan(first), describe(first, word)+" begins no member and no fact", remedy)
	}
}

// continuing are words that go on an item, so that one of them first on a line
// begins nothing.
var continuing = wordSet("then", "to", "or", "step", "lost", "repeated", "allowed", "as", "over", "apart", "after", "by", "end",
	"magnitude", "decimal", "ascii", "utf8", "change", "request", "from")

// cutItems cuts the inside of a broken body where items seem to begin.
func (r *reader) cutItems(inside piece) []piece {
	braces, others := 0, 0
	member := len(inside.toks) > 0 && inside.toks[0].is(tokMember)
	return r.cutAt(inside, func(i int) bool {
		// What stands at i-1 counts for the nesting at i.
		switch prev := inside.toks[i-1]; {
		case r.isPunct(prev, "{"):
			braces++
		case r.isPunct(prev, "}"):
			braces = max(braces-1, 0)
		case r.isPunct(prev, "(") || r.isPunct(prev, "["):
			others++
		case r.isPunct(prev, ")") || r.isPunct(prev, "]"):
			others = max(others-1, 0)
		}
		if braces > 0 {
			return false
		}
		t := inside.toks[i]
		if !r.beginsItem(inside, i, member) {
			return false
		}
		if others > 0 && !r.beginsLine(inside, i) {
			return false
		}
		others = 0
		member = t.is(tokMember)
		return true
	})
}

func (r *reader) beginsItem(in piece, i int, inMember bool) bool {
	t, prev := in.toks[i], in.toks[i-1]
	if r.isPunct(prev, ".") {
		return false
	}
	switch {
	case t.is(tokMember):
		return true
	case t.is(tokGroup):
		// wheel[front_left].speed is a path behind such words.
		return !r.isWord(prev, "by", "select", "codes", "states", "over", "counter", "default", "holds") && !(prev.is(tokPunct) && !r.isPunct(prev, "}"))
	case t.is(tokInvalid):
		return r.beginsLine(in, i)
	case t.is(tokKeyword):
		return r.beginsLine(in, i) && r.isKeywordName(in, i)
	case !t.is(tokWord) || !r.beginsLine(in, i) || prev.is(tokPunct) && !r.isPunct(prev, "}") && !r.isPunct(prev, "]") && !r.isPunct(prev, ")"):
		return false
	}
	word := r.tokText(t)
	switch {
	case word == "note" || word == "replaced":
		return !inMember
	case word == "from":
		return i+1 >= len(in.toks) || !r.isWord(in.toks[i+1], "byte")
	case word == "fill":
		return !r.isWord(prev, "ascii", "utf8")
	case word == "on":
		return !r.isWord(prev, "or")
	case factWords[word]:
		return true
	case word == "when" || word == "otherwise":
		return false
	}
	return !clauseWords[word] && !continuing[word] && !r.isWord(prev, "initial", "codes", "states", "by", "note", "to", "from", "as", "over", "counter")
}

// isKeywordName reports whether a reserved word is written where a member's
// name would stand: at at 0.7.
func (r *reader) isKeywordName(in piece, i int) bool {
	return i+1 < len(in.toks) && in.toks[i+1].is(tokKeyword)
}

// mendMember tells what is wrong with a member: in its table, in its head and
// in each clause.
func (r *reader) mendMember(at piece) {
	tables := 0
	for open := r.indexOf(at, 0, "{"); open >= 0 && tables < 4; open = r.indexOf(at, open+2, "{") {
		tables++
		end := r.closing(at, open)
		if end <= open {
			break
		}
		if end > open+1 {
			r.mendEntries(r.inside(at, open, end))
		}
		at = r.hollow(at, open, end)
	}
	depth := 0
	parts := r.cutAt(at, func(i int) bool {
		if prev := at.toks[i-1]; r.isPunct(prev, "(") {
			depth++
		} else if r.isPunct(prev, ")") {
			depth = max(depth-1, 0)
		}
		if !r.beginsClause(at, i) {
			return false
		}
		// A clause that begins a line ends an unclosed parenthesis.
		if depth > 0 && !r.beginsLine(at, i) {
			return false
		}
		depth = 0
		return true
	})
	if _, err := parse(r, r.parsers.item, parts[0]); err != nil {
		r.tell(parts[0], err, "member")
	}
	texts := false
	for _, part := range parts[1:] {
		if part.toks[0].is(tokString) {
			texts = true
			if len(part.toks) > 1 && !part.toks[1].is(tokString) {
				r.tellLeftOver(piece{part.toks[1:], part.end}, "clause")
			}
			continue
		}
		if texts {
			r.report(diag.UnexpectedWord, r.tokSpan(part.toks[0]), describe(part.toks[0], r.tokText(part.toks[0]))+" stands behind the member's text, which ends it", "put the text last")
			texts = false
			continue
		}
		if _, err := parse(r, r.parsers.clause, part); err != nil {
			r.tell(part, err, "clause")
		}
	}
}

func (r *reader) beginsClause(at piece, i int) bool {
	t, prev := at.toks[i], at.toks[i-1]
	switch {
	case r.isPunct(t, "="):
		return true
	case t.is(tokString):
		return !prev.is(tokString) && !(i >= 2 && r.isWord(at.toks[i-2], "note"))
	case !t.is(tokWord) || !clauseWords[r.tokText(t)]:
		return false
	case prev.is(tokPunct) && !r.isPunct(prev, "}") && !r.isPunct(prev, ")") && !r.isPunct(prev, "]"):
		return false
	}
	return !r.isWord(prev, "initial", "codes", "states", "by", "note", "over", "checksum")
}

// mendSelect reads a select of which at least one branch is broken; nil if its
// head is.
func (r *reader) mendSelect(at piece) Item {
	open := r.indexOf(at, 0, "{")
	end := r.closing(at, open)
	var stray piece
	if end+1 < len(at.toks) {
		stray = piece{at.toks[end+1:], at.end}
		r.tellItem(stray, nil)
	}
	at = piece{at.toks[: end+1 : end+1], at.end}
	inside := r.inside(at, open, end)
	var s *Select
	g, err := parse(r, r.parsers.item, r.hollow(at, open, end))
	if err != nil {
		r.tell(r.hollow(at, open, end), err, "select")
		s = &Select{} // for the branches' own mistakes
	} else {
		s = r.selection(g.Select)
	}
	s.Span = r.spanOf(at)
	depth := 0
	for _, b := range r.cutAt(inside, func(i int) bool {
		if r.isPunct(inside.toks[i-1], "{") {
			depth++
		} else if r.isPunct(inside.toks[i-1], "}") {
			depth = max(depth-1, 0)
		}
		return depth == 0 && r.isWord(inside.toks[i], "when", "otherwise")
	}) {
		r.mendBranch(s, b)
	}
	if err != nil {
		return nil
	}
	return s
}

// tellBranch tells of tokens that are no branch.
func (r *reader) tellBranch(at piece) {
	first := at.toks[0]
	if r.holdsInvalid(at) {
		return
	}
	remedy := "a selection holds branches: when 0 { ... }, and otherwise at the end"
	if near := nearest(r.tokText(first), branchWords); near != "" {
		remedy = "did you mean " + near + "?"
	}
	r.report(diag.UnexpectedWord, r.tokSpan(first), r.plain(first)+" begins no branch of the selection", remedy)
}

func (r *reader) mendBranch(s *Select, at piece) {
	g, err := parse(r, r.parsers.branch, at)
	if err == nil {
		r.branch(s, g)
		return
	}
	if !r.isWord(at.toks[0], "when", "otherwise") {
		r.tellBranch(at)
		return
	}
	open := r.indexOf(at, 0, "{")
	if open < 0 {
		r.tell(at, err, "branch")
		return
	}
	end := r.closing(at, open)
	if end+1 < len(at.toks) {
		stray := piece{at.toks[end+1:], at.end}
		at = piece{at.toks[: end+1 : end+1], at.end}
		r.tellBranch(stray)
		if g, err := parse(r, r.parsers.branch, at); err == nil {
			r.branch(s, g)
			return
		}
	}
	items := r.mendItems(r.inside(at, open, end))
	hollow := r.hollow(at, open, end)
	g, err = parse(r, r.parsers.branch, hollow)
	if err != nil {
		r.tell(hollow, err, "branch")
		return
	}
	whens := len(s.Whens)
	r.branch(s, g)
	if len(s.Whens) > whens {
		s.Whens[whens].Body.Items = items
	} else if s.Otherwise != nil && s.Otherwise.Body != nil {
		s.Otherwise.Body.Items = items
	}
}
