package syntax

// Cutting a file's tokens at its declarations. A correct file is cut by its
// grammar alone; lines and indentation count only where braces don't match.

// cut cuts the tokens from an index on at declaration words outside of braces.
func (p *parser) cut(from int) []piece {
	var out []piece
	start, depth := from, 0
	flush := func(to int) {
		if to > start {
			out = append(out, piece{p.toks[start:to:to], p.endOf(to)})
		}
		start = to
	}
	unclosed := false
	for i := from; ; i++ {
		if i >= len(p.toks) {
			if depth == 0 || unclosed {
				break
			}
			// The block of the last piece never closes: go through the piece
			// again, and end it where a declaration begins a line.
			unclosed, depth, i = true, 0, start
		}
		switch t := p.toks[i]; {
		case t.is(tokPunct) && p.text[t.start] == '{':
			depth++
		case t.is(tokPunct) && p.text[t.start] == '}':
			depth = max(depth-1, 0)
		case i == start || !t.is(tokWord) || !declWords[p.text[t.start:t.end]]:
		case depth == 0 && (!p.isName(start, i) || p.isListBroken(start, i)), depth > 0 && unclosed && p.looksLikeDecl(i):
			depth = 0
			flush(i)
		}
	}
	flush(len(p.toks))
	return out
}

// endOf is the offset of what follows a piece that ends before token i.
func (p *parser) endOf(i int) int {
	if i < len(p.toks) {
		return int(p.toks[i].start)
	}
	return len(p.text)
}

func (p *parser) wordAt(i int) string {
	if i >= 0 && i < len(p.toks) && p.toks[i].is(tokWord) {
		return p.text[p.toks[i].start:p.toks[i].end]
	}
	return ""
}

// isName reports whether the word at i, outside of braces, is a name in the
// declaration that begins at start, though it could begin one itself.
func (p *parser) isName(start, i int) bool {
	prev := p.toks[i-1]
	if prev.is(tokPunct) {
		c := p.text[prev.start]
		return c != '}' && c != ')' && c != ']'
	}
	kind := p.wordAt(start)
	if !declWords[kind] {
		return false
	}
	if i == start+1 {
		return true
	}
	switch kind {
	case "use":
		return i == start+3 && p.wordAt(i-1) == "as"
	case "ecu":
		return i == start+3 && p.wordAt(i-1) == "on"
	case "message":
		return i == start+2 || i-1 > start+2 && p.wordAt(i-1) == "on"
	case "curve":
		return i == start+3 && p.wordAt(i-1) == "from" || i-1 > start+3 && p.wordAt(i-1) == "to"
	}
	return false
}

// isListBroken reports whether a declaration begins at i though a list of names
// or a formula would go on there: the one thing that tells is that a name can't
// follow a name.
func (p *parser) isListBroken(start, i int) bool {
	switch p.wordAt(start) {
	case "ecu", "unit", "const":
		next := p.wordAt(i + 1)
		return p.toks[i-1].is(tokPunct) && p.looksLikeDecl(i) && next != "with" && !declWords[next]
	}
	return false
}

// looksLikeDecl reports whether a declaration seems to begin at i where the
// grammar expects none: its word begins a line, and the next tokens are those
// of a declaration and of nothing else.
func (p *parser) looksLikeDecl(i int) bool {
	if !p.firstOnLine(i) || i+1 >= len(p.toks) || !p.toks[i+1].is(tokWord) || p.firstOnLine(i+1) {
		return false
	}
	after := func(words ...string) bool {
		for _, w := range words {
			if i+2 < len(p.toks) && p.text[p.toks[i+2].start:p.toks[i+2].end] == w {
				return true
			}
		}
		return false
	}
	number := i+2 < len(p.toks) && p.toks[i+2].is(tokNumber)
	switch p.wordAt(i) {
	case "ecu":
		return after("on")
	case "unit":
		return i+2 >= len(p.toks) || p.toks[i+2].line != p.toks[i].line || after("=")
	case "const":
		return after("=")
	case "codes", "states":
		return after("{", "by")
	case "curve":
		return after("from")
	case "message":
		return number || p.wordAt(i+2) != ""
	case "bus", "idform", "crc", "shape":
		return number
	}
	return false
}

func (p *parser) firstOnLine(i int) bool { return i == 0 || p.toks[i-1].line != p.toks[i].line }

// cutDepth takes out what is nested deeper than the language allows, so that
// no text exhausts the stack: the brace becomes a token that nothing expects.
func (p *parser) cutDepth() {
	depth, told := 0, false
	kept := p.toks[:0]
	for _, t := range p.toks {
		open := t.is(tokPunct) && p.text[t.start] == '{'
		if open {
			if depth++; depth == maxDepth+1 {
				t.kind = int8(tokInvalid)
				kept = append(kept, t)
				if !told {
					p.reportDepth(t)
				}
				told = true
			}
		}
		if depth <= maxDepth {
			kept = append(kept, t)
		}
		if t.is(tokPunct) && p.text[t.start] == '}' {
			depth = max(depth-1, 0)
		}
	}
	p.toks = kept
}
