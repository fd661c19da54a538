package syntax

import (
	"errors"
	"fmt"
	"regexp"
	"sort"
	"strings"
	"unicode"
	"unicode/utf8"

	"github.com/alecthomas/participle/v2"

	"busloom/diag"
)

// Saying in plain words what the lexer and the parser found.

// reportBad tells what the lexer couldn't read.
func (p *parser) reportBad(bad []badToken) {
	for _, b := range bad {
		text := p.text[b.start:b.end]
		span := diag.Span{File: p.file, Start: int(b.start), End: int(b.end)}
		switch {
		case b.number != nil:
			p.found.Report(diag.BadNumber, span, clip(text)+" can't be read as a number: "+clip(strings.TrimPrefix(b.number.Error(), fmt.Sprintf("%q: ", text))),
				"write it as 12, 0.25, 1e-3, 0x1F, 0b101 or 100/255")
		case text[0] == '"' && utf8.ValidString(text):
			p.found.Report(diag.UnclosedText, span, "this text has no closing quote on its line",
				`close it with ", and go on in a second text on the next line if it is long`)
		case text[0] == '"':
			p.found.Report(diag.Unreadable, span, "this text isn't valid UTF-8", "save the file as UTF-8")
		case !utf8.ValidString(text):
			p.found.Report(diag.Unreadable, span, "these bytes aren't valid UTF-8", "save the file as UTF-8")
		default:
			what := "these signs are"
			if utf8.RuneCountInString(text) == 1 {
				what = "this sign is"
			}
			remedy := "remove it; texts go in quotes, comments begin with //"
			if strings.ContainsFunc(text, unicode.IsLetter) {
				what = "this word has letters that are"
				remedy = "names are made of the letters a to z, digits and _; anything can stand in a text in quotes or behind //"
			}
			p.found.Report(diag.Unreadable, span, what+" no part of the language", remedy)
		}
	}
}

func (p *parser) reportDepth(t tok) {
	p.found.Report(diag.NestedTooDeep, diag.Span{File: p.file, Start: int(t.start), End: int(t.end)},
		fmt.Sprintf("braces are nested more than %d deep here", maxDepth), "put the inner selections into shapes or messages of their own")
}

// expectation finds the first thing that the library says was expected.
var expectation = regexp.MustCompile(`\(expected \(*("[^"]+"|<[a-z]+>|[gG][A-Z]\w*)`)

// inWords translates what the library calls a token or a production.
var inWords = map[string]string{
	"<word>": "a name", "<number>": "a number", "<string>": "a text in quotes", "<unit>": "a unit such as km/h",
	"<member>": "a member", "<group>": "a group", "<punct>": "a sign",
	"gQuantity": "a quantity such as 50 ms", "gValue": "a number", "gPath": "a name", "gRun": "a place such as 0.7..1.0",
	"gPlace": "a place such as 0.7..1.0, its heaviest bit first", "gRaws": "a raw value such as 14, 0xF0..0xFD or ones - 1",
	"gExpr": "a formula such as raw * 0.01 km/h", "gUnitRef": "a unit such as km/h",
	"gNames": "a name", "gSenders": "a sender's name, or any", "gNumbers": "a number", "gTexts": "a text in quotes", "GEntry": "an entry such as 0: off", "GPoint": "a point such as 2500: 20",
	"GChoice": "a raw value or a state such as 0, 1..3 or off", "GID": "an identifier such as 0x1A0, or an id form with its fields",
	"GFeed": "what the checksum runs over, such as bytes 0..6 or 0x23", "GBody": "{", "GIDField": "a field and its value, such as priority 3",
	"GIDFormField": "a field and its width, such as priority 3", "GWait": "at least ... apart, or lost after ...",
	"GInitial": "a quantity, a state or a code", "GUsed": "a table's name, or a table in braces", "GWithin": "a range such as 0..300 km/h",
	"GItem": "a member or a fact", "GClause": "a clause", "GBranch": "when or otherwise", "GDecl": "a declaration",
}

// wordHelp says more than a single expected word does.
var wordHelp = map[string]string{
	"bytes": "the length in bytes, such as 8 bytes", "bits": "the width in bits, such as 29 bits",
	"hold": "hold, extend or none", "input": "input or output", "change": "change or request", "ascii": "ascii or utf8",
	"nothing": "nothing, unknown or {", "polynomial": "polynomial, initial, final, check, reflected or }",
	"both": "both, alternating, low or nibble", "signed": "a kind of value",
}

// tell reports why a piece can't be read, unless something unreadable in it
// was told of already. context is what the piece is, "" for a declaration.
func (r *reader) tell(at piece, err error, context string) {
	if r.holdsInvalid(at) {
		return
	}
	var deep *deepError
	if errors.As(err, &deep) {
		r.report(diag.NestedTooDeep, r.span(&deep.at), deep.problem, "split it with constants, or remove parentheses")
		return
	}
	var stroke *gluedError
	if errors.As(err, &stroke) {
		r.report(diag.UnitNeedsOwnLine, r.span(&stroke.at), "a stroke without blanks belongs to a unit or a fraction, and here is neither",
			"put blanks around / to divide")
		return
	}
	want := ""
	var own *expectedError
	var pe participle.Error
	if errors.As(err, &own) {
		want = own.want
	} else if errors.As(err, &pe) {
		if m := expectation.FindStringSubmatch(pe.Message()); m != nil {
			want = inPlainWords(m[1])
		} else if strings.Contains(pe.Message(), "too many iterations") {
			r.report(diag.NestedTooDeep, r.tokSpan(at.toks[0]), fmt.Sprintf("this has more than %d parts", participle.MaxIterations), "divide it")
			return
		}
	}
	i := r.indexAt(at, err)
	if i < len(at.toks) && want == "" {
		// A misspelt clause behind a number was taken for its unit.
		if i > 0 && at.toks[i-1].is(tokUnit) && nearest(r.tokText(at.toks[i-1]), clauseWords) != "" {
			i--
		}
		r.tellLeftOver(piece{at.toks[i:], at.end}, context)
		return
	}
	if want == "" {
		want = "more"
	}
	switch {
	case context == "message" && want == "(" && i > 0 && r.isWord(at.toks[i-1], "on"):
		r.report(diag.UnexpectedWord, r.tokSpan(at.toks[i-1]), "the identifier is missing before on", "write it behind the message's name: three hexadecimal digits such as 0x1A0, eight such as 0x18FEF100, or an id form with its fields")
		return
	case want == "," && i > 1 && i < len(at.toks) && r.isWord(at.toks[i-2], "profile"):
		want = "both, alternating, low, nibble or a comma"
	case want != "}":
	case context == "crc":
		want = "polynomial, initial, final, check, reflected or }"
	case context == "idform":
		want = "a comma or }"
	}
	// What is missing at the end of a line is told there, not at the next word.
	if i >= len(at.toks) || i > 0 && r.beginsLine(at, i) && at.toks[i].kind != int8(tokClosing) {
		last := at.toks[max(i-1, 0)]
		r.report(diag.UnexpectedWord, r.tokSpan(last), fmt.Sprintf("something is missing behind %s: expected %s", r.plain(last), want), remedyFor(want))
		return
	}
	t := at.toks[i]
	if t.is(tokClosing) {
		return // the missing brace was told of
	}
	problem := fmt.Sprintf("%s can't stand here: expected %s", r.plain(t), want)
	remedy := remedyFor(want)
	switch {
	case t.is(tokKeyword):
		remedy = r.tokText(t) + " is a reserved word; " + remedy
	case (t.is(tokMember) || t.is(tokGroup)) && i+1 < len(at.toks):
		problem = fmt.Sprintf("%s can't stand here, where it would name a member because of the %s behind it: expected %s", r.plain(t), r.tokText(at.toks[i+1]), want)
	case t.is(tokWord) || t.is(tokUnit):
		words := strings.FieldsFunc(want, func(c rune) bool { return c == ' ' || c == ',' })
		if near := diag.Nearest(r.tokText(t), words); near != "" && isLetter(near[0]) && (len(near) > 3 || near == want) {
			remedy = "did you mean " + near + "?"
		}
	}
	r.report(diag.UnexpectedWord, r.tokSpan(t), problem, remedy)
}

func inPlainWords(expected string) string {
	if word, ok := strings.CutPrefix(expected, `"`); ok {
		word = strings.TrimSuffix(word, `"`)
		if help := wordHelp[word]; help != "" {
			return help
		}
		return word
	}
	if w := inWords[expected]; w != "" {
		return w
	}
	return "something else"
}

func remedyFor(want string) string {
	switch {
	case want == ".." || want == "=" || want == "}" || want == "{" || want == ")" || want == "]" || want == "," || want == ":":
		return "write " + want + " here"
	case want == "more":
		return "complete it"
	case !strings.ContainsAny(want, " ") && isLetter(want[0]):
		return "put the word " + want + " there"
	}
	return "write " + want
}

// tellLeftOver tells of tokens that nothing takes.
func (r *reader) tellLeftOver(at piece, context string) {
	t := at.toks[0]
	if t.is(tokInvalid) || t.is(tokClosing) {
		return
	}
	problem := r.plain(t) + " can't stand here"
	remedy := "remove it"
	switch {
	case t.is(tokKeyword):
		problem += ": it is a reserved word"
	case t.is(tokUnit) && nearest(r.tokText(t), clauseWords) == "":
		problem = r.plain(t) + " behind a number is read as its unit, and can't stand here"
	case (t.is(tokWord) || t.is(tokUnit)) && (context == "clause" || context == "member" || context == "item"):
		problem = r.plain(t) + " is no clause of a member"
		remedy = "the clauses are: a kind, = formula, in, within, codes, states, initial, tolerance, replaced by, note, and a text at the end"
		if clauseWords[r.tokText(t)] {
			problem = r.plain(t) + " can't stand here"
		} else if near := nearest(r.tokText(t), clauseWords); near != "" {
			remedy = "did you mean " + near + "?"
		}
	case t.is(tokNumber):
		remedy = "remove it, or put the operator that is missing before it"
	case t.is(tokString):
		remedy = "a text stands at the end of a head, a member or an entry"
	case context == "entry":
		remedy = "an entry is raw values, a colon and a word: 0: off, 0xFE: fault, ones: absent"
	}
	r.report(diag.UnexpectedWord, r.tokSpan(t), problem, remedy)
}

// plain describes a token for a sentence.
func (r *reader) plain(t tok) string {
	if t.is(tokClosing) {
		return "the end"
	}
	return describe(t, r.tokText(t))
}

func describe(t tok, text string) string {
	if t.is(tokString) {
		return "the text " + clip(text)
	}
	return clip(text)
}

// nearest finds the word of a set that a word may be a slip of.
func nearest(word string, set map[string]bool) string {
	words := make([]string, 0, len(set))
	for w := range set {
		words = append(words, w)
	}
	sort.Strings(words)
	if near := diag.Nearest(word, words); near != word {
		return near
	}
	return ""
}

func clip(text string) string {
	if utf8.RuneCountInString(text) <= 40 {
		return text
	}
	return string([]rune(text)[:40]) + "…"
}
