package syntax

// Cutting a file's tokens into pieces: declarations first, then the items of
// bodies. Each piece is parsed by itself, so that a mistake stays within it.

// declWords begin a declaration.
var declWords = wordSet("network", "use", "bus", "ecu", "unit", "const", "codes", "states", "curve", "idform", "crc", "shape", "message")

// factWords begin a line of a body that isn't a member.
var factWords = wordSet("from", "every", "on", "fill", "default", "unused", "holds", "relayed", "replaced", "note", "select")

// clauseWords begin a clause of a member.
var clauseWords = wordSet("signed", "sign", "float", "packed", "flag", "bytes", "text", "always", "counter", "checksum",
	"in", "within", "codes", "states", "initial", "tolerance", "replaced", "note")

// piece is a stretch of a file's tokens.
type piece struct {
	from, to int // token indexes, to excluded
}

// tokens of the file being cut, with what is needed to look around.
type tokens []token

// word returns the text of a word token, "" for any other.
func (t tokens) word(i int) string {
	if i >= 0 && i < len(t) && t[i].Type == tokWord {
		return t[i].Value
	}
	return ""
}

func (t tokens) punct(i int, value string) bool {
	return i >= 0 && i < len(t) && t[i].Type == tokPunct && t[i].Value == value
}

func (t tokens) keyword(i int, value string) bool {
	return i >= 0 && i < len(t) && t[i].Type == tokKeyword && t[i].Value == value
}

// firstOnLine reports whether no token stands before i on its line.
func (t tokens) firstOnLine(i int) bool {
	return i == 0 || t[i-1].Pos.Line != t[i].Pos.Line
}

// beginsDecl reports whether the word at i, outside of braces, begins a
// declaration: it isn't a name in the one before.
func (t tokens) beginsDecl(i int) bool {
	if !declWords[t.word(i)] {
		return false
	}
	if t.firstOnLine(i) {
		return true
	}
	switch before := t[i-1]; {
	case before.Type == tokPunct && before.Value != "}" && before.Value != ")":
		return false
	case before.Type == tokWord && (declWords[before.Value] || before.Value == "on" || before.Value == "as" || before.Value == "with" ||
		before.Value == "from" || before.Value == "to" || before.Value == "outside" || before.Value == "by"):
		return false
	case before.Type == tokKeyword:
		return false
	}
	return true
}

// declarations cuts the tokens from i on at declaration words outside of
// braces. Where braces don't match, a declaration word that is first on its
// line and followed by a name and no member's at begins one all the same.
func (t tokens) declarations(from int) []piece {
	var out []piece
	broken := !t.balanced(from)
	depth, start := 0, from
	flush := func(to int) {
		if to > start {
			out = append(out, piece{start, to})
		}
		start = to
	}
	for i := from; i < len(t); i++ {
		switch {
		case t.punct(i, "{"):
			depth++
		case t.punct(i, "}"):
			depth = max(depth-1, 0)
		case depth == 0 && i > start && t.beginsDecl(i):
			flush(i)
		case depth > 0 && broken && t.firstOnLine(i) && t[i].Pos.Column == 1 && declWords[t.word(i)] && t.word(i+1) != "" && !t.keyword(i+1, "at"):
			depth = 0
			flush(i)
		}
	}
	flush(len(t))
	return out
}

func (t tokens) balanced(from int) bool {
	depth := 0
	for i := from; i < len(t); i++ {
		if t.punct(i, "{") {
			depth++
		} else if t.punct(i, "}") {
			if depth--; depth < 0 {
				return false
			}
		}
	}
	return depth == 0
}

// closing returns the index of the brace that closes the one at open, or to if
// there is none before it.
func (t tokens) closing(open, to int) (int, bool) {
	depth := 0
	for i := open; i < to; i++ {
		if t.punct(i, "{") {
			depth++
		} else if t.punct(i, "}") {
			if depth--; depth == 0 {
				return i, true
			}
		}
	}
	return to, false
}

// open returns the index of the first opening brace of a piece.
func (t tokens) open(p piece) (int, bool) {
	for i := p.from; i < p.to; i++ {
		if t.punct(i, "{") {
			return i, true
		}
	}
	return p.to, false
}

// items cuts a body at the words that begin its items.
func (t tokens) items(from, to int) []piece {
	var out []piece
	start := from
	braces, parens := 0, 0
	member := false // the current piece is a member
	for i := from; i < to; i++ {
		switch {
		case t.punct(i, "{"):
			braces++
			continue
		case t.punct(i, "}"):
			braces = max(braces-1, 0)
			continue
		case t.punct(i, "("), t.punct(i, "["):
			parens++
			continue
		case t.punct(i, ")"), t.punct(i, "]"):
			parens = max(parens-1, 0)
			continue
		}
		// A parenthesis that was never closed ends where a member begins.
		if braces == 0 && parens > 0 && t.word(i) != "" && t.keyword(i+1, "at") {
			parens = 0
		}
		if braces > 0 || parens > 0 {
			continue
		}
		begins, isMember := t.beginsItem(i, to, member && i > start)
		if !begins {
			continue
		}
		if i > start {
			out = append(out, piece{start, i})
		}
		start, member = i, isMember
	}
	if to > start {
		out = append(out, piece{start, to})
	}
	return out
}

// beginsItem reports whether an item begins at i: name at, name is, name [ ]
// is, or the word of a fact that isn't part of the member before it.
func (t tokens) beginsItem(i, to int, inMember bool) (begins, member bool) {
	word := t.word(i)
	if word == "" {
		return false, false
	}
	if t.keyword(i+1, "at") && t.word(i+2) != "least" {
		return true, true
	}
	if t.keyword(i+1, "is") {
		return true, false
	}
	if t.punct(i+1, "[") && !t.punct(i-1, ".") {
		for j := i + 2; j < to && j < i+2000; j++ {
			if t.punct(j, "]") {
				return t.keyword(j+1, "is"), false
			}
		}
		return false, false
	}
	if !factWords[word] {
		return false, false
	}
	before := t.word(i - 1)
	switch before {
	case "initial", "codes", "states", "by", "counter", "note", "from", "to", "over", "as":
		if word != "from" || before != "to" {
			return false, false
		}
	}
	if t.punct(i-1, ".") || t.punct(i-1, ",") {
		return false, false
	}
	switch word {
	case "note", "replaced":
		return !inMember, false
	case "from":
		return t.word(i+1) != "byte", false
	case "fill":
		return !(inMember && (before == "ascii" || before == "utf8")), false
	case "on":
		next := t.word(i + 1)
		return before != "or" && (next == "change" || next == "request"), false
	}
	return true, false
}

// entries cuts a table of codes or states: an entry begins where the raw
// values before a colon begin.
func (t tokens) entries(from, to int) []piece {
	return t.beforeColons(from, to, func(i int) int {
		for {
			if t[i].Type == tokNumber && i-2 >= from && t.punct(i-1, "-") && t.keyword(i-2, "ones") {
				i -= 2
			}
			if t[i].Type != tokNumber && !t.keyword(i, "ones") {
				return i + 1
			}
			if i-2 < from || !t.punct(i-1, "..") {
				return i
			}
			i -= 2
		}
	})
}

// points cuts the points of a curve: a point begins at the signed number
// before a colon.
func (t tokens) points(from, to int) []piece {
	return t.beforeColons(from, to, func(i int) int {
		if i-1 >= from && t.punct(i-1, "-") {
			return i - 1
		}
		return i
	})
}

func (t tokens) beforeColons(from, to int, begin func(last int) int) []piece {
	var out []piece
	start := from
	for i := from; i < to; i++ {
		if !t.punct(i, ":") || i == from {
			continue
		}
		if b := begin(i - 1); b > start && b < i {
			out = append(out, piece{start, b})
			start = b
		}
	}
	if to > start {
		out = append(out, piece{start, to})
	}
	return out
}

// branches cuts the inside of a select at when and otherwise.
func (t tokens) branches(from, to int) []piece {
	var out []piece
	start, depth := from, 0
	for i := from; i < to; i++ {
		switch {
		case t.punct(i, "{"):
			depth++
		case t.punct(i, "}"):
			depth = max(depth-1, 0)
		case depth == 0 && i > start && (t.word(i) == "when" || t.word(i) == "otherwise"):
			out = append(out, piece{start, i})
			start = i
		}
	}
	if to > start {
		out = append(out, piece{start, to})
	}
	return out
}
