package schema

import (
	"fmt"
	"path"
	"path/filepath"
	"sort"
	"strings"

	"busloom/crc"
	"busloom/diag"
	"busloom/schema/internal/syntax"
	"busloom/unit"
)

// namespace tells declarations apart that may share a name.
type namespace uint8

const (
	nsBus namespace = iota
	nsECU
	nsUnit
	nsFormula // constants and curves
	nsTable   // codes and states
	nsCRC
	nsIDForm
	nsShape
	nsMessage
	numNamespaces
)

// nsWords name what is looked for, with the article.
var nsWords = [...]string{nsBus: "a bus", nsECU: "an ECU", nsUnit: "a unit", nsFormula: "a constant or curve", nsTable: "a table of codes or states",
	nsCRC: "a checksum method", nsIDForm: "an id form", nsShape: "a shape", nsMessage: "a message"}

type symbolKey struct {
	space namespace
	name  string
}

// symbol is one declared name. Of its values, the one of its namespace is set
// once its pass has proven it; nil means that it is broken.
type symbol struct {
	space namespace
	word  string // what it is, with the article
	name  syntax.Name
	src   *source
	decl  syntax.Decl
	used  bool

	bus      *Bus
	ecu      *ECU
	unit     *unit.Definition
	constant *constant
	curve    *Curve
	table    *table
	crc      *crc.Params
	form     *idForm
	shape    *shape
	message  *draft
}

// declareNames gives every declaration its symbol.
func (c *compiler) declareNames() {
	folded := map[symbolKey]*symbol{}
	for _, src := range c.order {
		for _, d := range src.tree.Decls {
			sym := symbolOf(src, d)
			if sym == nil || sym.name.Text == "" {
				continue
			}
			key := symbolKey{sym.space, sym.name.Text}
			if first := c.symbols[key]; first != nil {
				c.report(diag.DuplicateName, sym.name.Span, fmt.Sprintf("%s is already the name of %s", key.name, first.word), "rename one of the two").
					Also(first.name.Span, "first declared here")
				continue
			}
			if sym.space == nsCRC && isBuiltinMethod(key.name) {
				c.report(diag.DuplicateName, sym.name.Span, fmt.Sprintf("%s is a checksum method that the language has already", key.name), "choose another name")
				continue
			}
			low := symbolKey{sym.space, strings.ToLower(key.name)}
			if like := folded[low]; like != nil {
				c.report(diag.NameCaseClash, sym.name.Span, fmt.Sprintf("%s differs from %s in letter case only", key.name, like.name.Text), "rename one of the two").
					Also(like.name.Span, "the other one")
			} else {
				folded[low] = sym
			}
			c.symbols[key] = sym
			src.own[key] = sym
		}
	}
}

func symbolOf(src *source, d syntax.Decl) *symbol {
	make := func(space namespace, word string, name syntax.Name) *symbol {
		return &symbol{space: space, word: word, name: name, src: src, decl: d}
	}
	switch d := d.(type) {
	case *syntax.BusDecl:
		return make(nsBus, "a bus", d.Name)
	case *syntax.ECUDecl:
		return make(nsECU, "an ECU", d.Name)
	case *syntax.UnitDecl:
		return make(nsUnit, "a unit", d.Name)
	case *syntax.ConstDecl:
		return make(nsFormula, "a constant", d.Name)
	case *syntax.CurveDecl:
		return make(nsFormula, "a curve", d.Name)
	case *syntax.TableDecl:
		if d.States {
			return make(nsTable, "a table of states", d.Name)
		}
		return make(nsTable, "a table of codes", d.Name)
	case *syntax.CRCDecl:
		return make(nsCRC, "a checksum method", d.Name)
	case *syntax.IDFormDecl:
		return make(nsIDForm, "an id form", d.Name)
	case *syntax.ShapeDecl:
		return make(nsShape, "a shape", d.Name)
	case *syntax.MessageDecl:
		return make(nsMessage, "a message", d.Name)
	}
	return nil
}

// own is the symbol of a declaration, nil if its name lost to an earlier one.
func (c *compiler) own(src *source, space namespace, name syntax.Name) *symbol {
	sym := src.own[symbolKey{space, name.Text}]
	if sym == nil || sym.name.Span != name.Span {
		return nil
	}
	return sym
}

// eachDecl calls f for every declaration of one kind, in order.
func eachDecl[D syntax.Decl](c *compiler, f func(*source, D)) {
	for _, src := range c.order {
		for _, d := range src.tree.Decls {
			if d, ok := d.(D); ok {
				f(src, d)
			}
		}
	}
}

// visible finds a name in a file and the files it uses. A prefix selects the
// used file; without one, names of prefixed files count only for what can't be
// written with a prefix.
func (c *compiler) visible(src *source, space namespace, prefix, name string) *symbol {
	key := symbolKey{space, name}
	if prefix == "" {
		if sym := src.own[key]; sym != nil {
			sym.used = true
			return sym
		}
	}
	unprefixed := space == nsBus || space == nsECU || space == nsUnit
	for _, u := range src.uses {
		if u.as != prefix && !(prefix == "" && unprefixed) {
			continue
		}
		if sym := u.target.own[key]; sym != nil {
			sym.used, u.needed = true, true
			return sym
		}
	}
	return nil
}

// resolveName finds a bus or an ECU.
func (c *compiler) resolveName(src *source, space namespace, name syntax.Name) *symbol {
	if sym := c.visible(src, space, "", name.Text); sym != nil {
		return sym
	}
	c.unknown(src, space, "", name)
	return nil
}

// resolvePath finds what a path of one name, or of a prefix and a name, means.
func (c *compiler) resolvePath(src *source, space namespace, p syntax.Path) *symbol {
	prefix, name := "", syntax.Name{}
	switch {
	case len(p.Steps) == 1 && p.Steps[0].Key == nil:
		name = p.Steps[0].Name
	case len(p.Steps) == 2 && p.Steps[0].Key == nil && p.Steps[1].Key == nil:
		prefix, name = p.Steps[0].Name.Text, p.Steps[1].Name
		if !c.hasPrefix(src, p.Steps[0].Name) {
			return nil
		}
	default:
		c.report(diag.WrongKindOfName, p.Span, fmt.Sprintf("%s can't name %s", pathText(p), nsWords[space]), "write its name, or the prefix of its file, a dot and its name")
		return nil
	}
	if sym := c.visible(src, space, prefix, name.Text); sym != nil {
		return sym
	}
	c.unknown(src, space, prefix, name)
	return nil
}

func (c *compiler) hasPrefix(src *source, prefix syntax.Name) bool {
	var names []string
	for _, u := range src.uses {
		if u.as == prefix.Text {
			return true
		}
		if u.as != "" {
			names = append(names, u.as)
		}
	}
	if c.damaged {
		return false
	}
	remedy := fmt.Sprintf("write use \"...\" as %s at the top of this file", prefix.Text)
	if near := c.nearest(prefix.Text, names); near != "" {
		remedy = "did you mean " + near + "?"
	}
	c.report(diag.UnknownName, prefix.Span, fmt.Sprintf("no used file has the prefix %s", prefix.Text), remedy)
	return false
}

// unknown reports a name that isn't visible, with the best guess at what was
// meant.
func (c *compiler) unknown(src *source, space namespace, prefix string, name syntax.Name) {
	for other := range numNamespaces {
		if other == space {
			continue
		}
		if sym := c.visible(src, other, prefix, name.Text); sym != nil {
			c.report(diag.WrongKindOfName, name.Span, fmt.Sprintf("%s is %s, but %s is needed here", name.Text, sym.word, nsWords[space]), "write the name of "+nsWords[space]).
				Also(sym.name.Span, "declared here")
			return
		}
	}
	if c.damaged {
		return
	}
	bare := strings.TrimPrefix(strings.TrimPrefix(nsWords[space], "an "), "a ")
	if sym := c.symbols[symbolKey{space, name.Text}]; sym != nil {
		sym.used = true
		remedy := fmt.Sprintf("write use %q", relativePath(src.name, sym.src.name))
		for _, u := range src.uses {
			if u.target == sym.src {
				u.needed = true
				remedy = "leave the prefix out"
				if u.as != "" {
					remedy = fmt.Sprintf("write %s.%s", u.as, name.Text)
				}
			}
		}
		if sym.src == src {
			remedy = "leave the prefix out"
		}
		c.report(diag.UnknownName, name.Span, fmt.Sprintf("%s isn't visible here: it is declared in %s", name.Text, sym.src.name), remedy).
			Also(sym.name.Span, "declared here")
		return
	}
	remedy := "declare it, or use the file that declares it"
	if near := c.nearest(name.Text, c.visibleNames(src, space, prefix)); near != "" {
		remedy = "did you mean " + near + "?"
	}
	c.report(diag.UnknownName, name.Span, fmt.Sprintf("there is no %s called %s", bare, name.Text), remedy)
}

func (c *compiler) visibleNames(src *source, space namespace, prefix string) []string {
	var out []string
	add := func(s *source) {
		for key := range s.own {
			if key.space == space {
				out = append(out, key.name)
			}
		}
	}
	if prefix == "" {
		add(src)
	}
	for _, u := range src.uses {
		if u.as == prefix {
			add(u.target)
		}
	}
	sort.Strings(out)
	return out
}

// pathText is a path in the language's form.
func pathText(p syntax.Path) string {
	if len(p.Steps) == 1 && p.Steps[0].Key == nil {
		return p.Steps[0].Name.Text
	}
	var b strings.Builder
	for i, s := range p.Steps {
		if i > 0 {
			b.WriteByte('.')
		}
		b.WriteString(s.Name.Text)
		if s.Key != nil {
			b.WriteString("[" + s.Key.Text + "]")
		}
	}
	return b.String()
}

// relativePath is the path by which the file from would use the file to.
func relativePath(from, to string) string {
	rel, err := filepath.Rel(filepath.FromSlash(path.Dir(from)), filepath.FromSlash(to))
	if err != nil {
		return to
	}
	return filepath.ToSlash(rel)
}

// noteUnused tells what nothing refers to. It runs on sound networks only: a
// mistake may be the reference that is missing.
func (c *compiler) noteUnused() {
	needed := map[*source]bool{c.root: true}
	for _, src := range c.order {
		for _, u := range src.uses {
			if u.needed || u.target.declares {
				needed[u.target] = true
			}
		}
	}
	for _, src := range c.order {
		for _, u := range src.uses {
			if !u.needed && !u.target.declares {
				c.report(diag.UnusedImport, u.tree.Path.Span, fmt.Sprintf("nothing of %q is used in this file", u.tree.Path.Value), "remove the line, if nothing is to come")
			}
		}
		if !needed[src] {
			continue // told of the whole file
		}
		for _, d := range src.tree.Decls {
			sym := symbolOf(src, d)
			if sym == nil || sym.space == nsMessage {
				continue
			}
			if own := src.own[symbolKey{sym.space, sym.name.Text}]; own != nil && !own.used {
				c.report(diag.UnusedName, sym.name.Span, fmt.Sprintf("nothing uses %s, %s", sym.name.Text, sym.word), "remove it, if nothing is to come")
			}
		}
	}
}
