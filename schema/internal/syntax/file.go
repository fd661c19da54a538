package syntax

import (
	"fmt"

	"busloom/diag"
)

// LanguageVersion is the version that this program reads.
const LanguageVersion = 1

// file reads the whole token list.
func (p *parser) file() *File {
	f := &File{Source: p.src}
	from := p.version(f)
	for _, at := range p.tokens.declarations(from) {
		word := p.tokens.word(at.from)
		if !declWords[word] {
			p.strayTokens(at)
			continue
		}
		switch word {
		case "network":
			if g, ok := parsePiece(p, p.parsers.network, at); ok {
				n := &Network{Span: p.pieceSpan(at), Name: p.name(g.Name), Text: p.texts(g.Texts)}
				if f.Network != nil {
					p.problems.Report(diag.DuplicateName, n.Span, "the network is named a second time", "keep one network line").
						Also(f.Network.Span, "it is named here")
				} else {
					f.Network = n
				}
			}
		case "use":
			if g, ok := parsePiece(p, p.parsers.use, at); ok {
				f.Uses = append(f.Uses, &Use{Span: p.pieceSpan(at), Path: p.texts([]token{g.Path}), As: p.optionalName(g.As)})
			}
		default:
			if d := p.declaration(word, at); d != nil {
				f.Decls = append(f.Decls, d)
			}
		}
	}
	return f
}

// version reads the first line; it returns the index of the token after it.
func (p *parser) version(f *File) int {
	if p.tokens.word(0) != "busloom" {
		at := p.span(0, 0)
		if len(p.tokens) > 0 {
			at = p.tokenSpan(&p.tokens[0])
		}
		p.problems.Report(diag.MissingVersion, at, "a description begins with its language version",
			fmt.Sprintf("write busloom %d on the first line", LanguageVersion))
		return 0
	}
	to := 1
	if len(p.tokens) > 1 && (p.tokens[1].Type == tokNumber || p.tokens[1].Type == tokInvalid) {
		to = 2
	}
	g, ok := parsePiece(p, p.parsers.version, piece{0, to})
	if !ok {
		return to
	}
	f.Version = p.number(g.Number)
	if !f.Version.Value.IsInt() || f.Version.Value.Num().Cmp(bigVersion) != 0 {
		p.problems.Report(diag.UnknownVersion, f.Version.Span, fmt.Sprintf("this program knows version %d of the language, not %s", LanguageVersion, clip(g.Number.Value)),
			"use a Busloom that knows it, or write the file in the version that this one knows")
	}
	return to
}

// strayTokens tells of tokens that begin no declaration.
func (p *parser) strayTokens(at piece) {
	if p.hasInvalid(at) && at.to-at.from == 1 {
		return
	}
	t := &p.tokens[at.from]
	if t.Type == tokInvalid {
		return
	}
	if t.Value == "}" {
		p.problems.Report(diag.UnclosedBlock, p.tokenSpan(t), "this brace closes nothing", "remove it, or open the block that it closes")
		return
	}
	remedy := "declarations begin with bus, ecu, unit, const, codes, states, curve, idform, crc, shape or message"
	if near := diag.Nearest(t.Value, keys(declWords)); near != "" && t.Type == tokWord {
		remedy = "did you mean " + near + "?"
	}
	p.problems.Report(diag.UnexpectedWord, p.tokenSpan(t), clip(t.Value)+" begins no declaration", remedy)
}

func keys(set map[string]bool) []string {
	var out []string
	for k := range set {
		out = append(out, k)
	}
	return out
}

// declaration reads any declaration but network and use.
func (p *parser) declaration(word string, at piece) Decl {
	switch word {
	case "bus":
		if g, ok := parsePiece(p, p.parsers.bus, at); ok {
			d := &BusDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Rate: p.quantity(&g.Rate), Text: p.texts(g.Texts)}
			if g.FD != nil {
				q := p.quantity(g.FD)
				d.FD = &q
			}
			return d
		}
	case "ecu":
		if g, ok := parsePiece(p, p.parsers.ecu, at); ok {
			return &ECUDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Buses: p.names(g.Buses), Source: p.optionalNumber(g.Source), Text: p.texts(g.Texts)}
		}
	case "unit":
		if g, ok := parsePiece(p, p.parsers.unit, at); ok {
			d := &UnitDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Text: p.texts(g.Texts)}
			if g.Value != nil {
				q := p.quantity(g.Value)
				d.Value = &q
			}
			return d
		}
	case "const":
		if g, ok := parsePiece(p, p.parsers.constant, at); ok {
			return &ConstDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Expr: p.expr(&g.Expr), Text: p.texts(g.Texts)}
		}
	case "idform":
		if g, ok := parsePiece(p, p.parsers.idform, at); ok {
			d := &IDFormDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Bits: p.number(g.Bits), Text: p.texts(g.Texts)}
			for _, f := range g.Fields {
				d.Fields = append(d.Fields, &IDFormField{p.name(f.Name), p.number(f.Width)})
			}
			return d
		}
	case "crc":
		if g, ok := parsePiece(p, p.parsers.crc, at); ok {
			return p.crcDecl(g, at)
		}
	default:
		return p.blockDecl(word, at)
	}
	return nil
}

// blockDecl reads the declarations whose inside is cut further: the head up to
// the brace, then the pieces within.
func (p *parser) blockDecl(word string, at piece) Decl {
	open, ok := p.tokens.open(at)
	if !ok {
		// The head's own mistake is told if it has one, else the missing brace.
		if p.head(word, at) != nil {
			p.unexpected(at, p.pieceSpan(at).End, "{")
		}
		return nil
	}
	close, closed := p.tokens.closing(open, at.to)
	if !closed {
		p.problems.Report(diag.UnclosedBlock, p.tokenSpan(&p.tokens[open]), "this block isn't closed", "add the closing brace }")
	} else if close+1 < at.to {
		p.strayTokens(piece{close + 1, at.to})
	}
	d := p.head(word, piece{at.from, open})
	inside := piece{open + 1, close}
	whole := p.pieceSpan(piece{at.from, min(close+1, at.to)})
	switch d := d.(type) {
	case *TableDecl:
		d.WholeSpan = whole
		d.Entries = p.entries(inside)
	case *CurveDecl:
		d.WholeSpan = whole
		d.Points = p.points(inside)
	case *ShapeDecl:
		d.WholeSpan = whole
		d.Body = p.body(inside, 0)
	case *MessageDecl:
		d.WholeSpan = whole
		d.Body = p.body(inside, 0)
	case nil:
		// The head is broken; what is inside is still read for its mistakes.
		switch word {
		case "codes", "states":
			p.entries(inside)
		case "curve":
			p.points(inside)
		default:
			p.body(inside, 0)
		}
		return nil
	}
	return d
}

// head reads what stands before the brace.
func (p *parser) head(word string, at piece) Decl {
	switch word {
	case "codes", "states":
		if g, ok := parsePiece(p, p.parsers.table, at); ok {
			return &TableDecl{Spans: p.spans(at, g.Name), States: word == "states", Name: p.name(g.Name), ByTopByte: g.ByTop.Value != "", Text: p.texts(g.Texts)}
		}
	case "curve":
		if g, ok := parsePiece(p, p.parsers.curve, at); ok {
			return &CurveDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), From: p.unit(g.From), To: p.unit(g.To), Outside: p.name(g.Outside), Text: p.texts(g.Texts)}
		}
	case "shape":
		if g, ok := parsePiece(p, p.parsers.shape, at); ok {
			return &ShapeDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Size: p.number(g.Size), Text: p.texts(g.Texts)}
		}
	case "message":
		if g, ok := parsePiece(p, p.parsers.message, at); ok {
			return &MessageDecl{
				Spans: p.spans(at, g.Name), Name: p.name(g.Name), ID: p.id(&g.ID), Bus: p.name(g.Bus),
				FD: g.FD.Value != "", AtLeast: g.Least.Value != "", Size: p.number(g.Size), Text: p.texts(g.Texts),
			}
		}
	}
	return nil
}

func (p *parser) crcDecl(g *gCRC, at piece) Decl {
	d := &CRCDecl{Spans: p.spans(at, g.Name), Name: p.name(g.Name), Bits: p.number(g.Bits), Text: p.texts(g.Texts)}
	numbers := map[string]**Number{"polynomial": &d.Polynomial, "initial": &d.Initial, "final": &d.Final, "check": &d.Check}
	flags := map[string]*bool{"input": &d.ReflectIn, "output": &d.ReflectOut}
	for _, item := range g.Items {
		if to := numbers[item.Key.Value]; to != nil {
			if *to != nil {
				p.repeated(&item.Key)
				continue
			}
			*to = p.optionalNumber(item.Value)
			continue
		}
		flag := flags[item.Reflected.Value]
		if *flag {
			p.repeated(&item.Reflected)
		}
		*flag = true
	}
	return d
}

// repeated tells of a clause that stands there already.
func (p *parser) repeated(t *token) {
	p.problems.Report(diag.RepeatedClause, p.tokenSpan(t), clip(t.Value)+" is given a second time", "keep one of them")
}

func (p *parser) entries(at piece) []*Entry {
	var out []*Entry
	for _, e := range p.tokens.entries(at.from, at.to) {
		if g, ok := parsePiece(p, p.parsers.entry, e); ok {
			out = append(out, p.entry(g))
		}
	}
	return out
}

func (p *parser) points(at piece) []*CurvePoint {
	var out []*CurvePoint
	for _, e := range p.tokens.points(at.from, at.to) {
		if g, ok := parsePiece(p, p.parsers.point, e); ok {
			out = append(out, &CurvePoint{X: p.quantity(&g.X), Y: p.quantity(&g.Y), Span: p.pieceSpan(e)})
		}
	}
	return out
}
