package schema

import (
	"fmt"
	"slices"
	"strings"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// table is a table of codes or states. Entries may depend on the width of the
// signal (ones, by top byte), so their raw values are computed for each width.
type table struct {
	name     string // "" if in place
	text     string
	span     diag.Span
	states   bool
	topByte  bool
	entries  []*tableEntry
	widths   map[int]*sizedTable
	stateSet *StateSet
}

type tableEntry struct {
	tree  *syntax.Entry
	class CodeClass // 0: a state
	name  string
}

// sizedTable is a table at one width.
type sizedTable struct {
	codes    []Code
	states   []State
	problems []tableProblem
}

type tableProblem struct {
	code            diag.Code
	span, other     diag.Span
	problem, remedy string
}

// defineTables checks what no width is needed for.
func (c *compiler) defineTables() {
	eachDecl(c, func(src *source, d *syntax.TableDecl) {
		sym := c.own(src, nsTable, d.Name)
		if sym == nil {
			return
		}
		t := c.newTable(d.States, d.ByTopByte, d.Entries)
		if t == nil {
			return
		}
		t.name, t.text, t.span = d.Name.Text, d.Text.Value, d.Name.Span
		sym.table = t
		if !d.States {
			c.net.CodeSets = append(c.net.CodeSets, &CodeSet{Name: t.name, Text: t.text, Span: t.span})
			return
		}
		// As declared: ones is taken at the full width.
		full := t.at(64)
		t.stateSet = &StateSet{Name: t.name, Text: t.text, States: full.states, Codes: full.codes, Span: t.span}
		if len(full.problems) > 0 && !t.dependsOnWidth() {
			p := full.problems[0]
			c.report(p.code, p.span, p.problem, p.remedy).Also(p.other, "the other one")
			sym.table = nil
			return
		}
		c.net.StateSets = append(c.net.StateSets, t.stateSet)
	})
}

// newTable checks the entries one by one; nil if one is broken.
func (c *compiler) newTable(states, topByte bool, entries []*syntax.Entry) *table {
	t := &table{states: states, topByte: topByte, widths: map[int]*sizedTable{}}
	good := true
	names := map[string]syntax.Name{}
	for _, e := range entries {
		entry := &tableEntry{tree: e, name: e.Name.Text}
		if e.Class.Text != "" {
			class, ok := word(classWords, e.Class.Text)
			if !ok {
				good = false
				continue
			}
			entry.class = class
		}
		if entry.class == 0 && !states {
			c.report(diag.ClauseNotAllowed, e.Span, fmt.Sprintf("%s is no code: a code is absent, fault or reserved", e.Span.Text()), "write the class before the name, or make the table one of states")
			good = false
			continue
		}
		if entry.name != "" {
			low := strings.ToLower(entry.name)
			if first, ok := names[low]; ok {
				if first.Text == entry.name {
					c.report(diag.DuplicateName, e.Name.Span, fmt.Sprintf("%s is there twice in one table", entry.name), "rename one of the two, or give a range of values").Also(first.Span, "first here")
				} else {
					c.report(diag.NameCaseClash, e.Name.Span, fmt.Sprintf("%s differs from %s in letter case only", entry.name, first.Text), "rename one of the two").Also(first.Span, "the other one")
				}
				good = false
			} else {
				names[low] = e.Name
			}
		}
		for _, r := range []*syntax.Raw{&e.Raws.Low, e.Raws.High} {
			if r == nil || r.Number == nil {
				continue
			}
			v, ok := whole(*r.Number)
			switch {
			case !ok:
				c.report(diag.CodeTooWide, r.Span, fmt.Sprintf("%s is no raw value: those are whole and have at most 64 bits", r.Number.Raw), "write the bits as a whole number")
				good = false
			case topByte && v > 255:
				c.report(diag.CodeTooWide, r.Span, fmt.Sprintf("%s is more than the top byte can be", r.Number.Raw), "write 0 to 0xFF")
				good = false
			}
		}
		t.entries = append(t.entries, entry)
	}
	if !good {
		return nil
	}
	return t
}

func (t *table) dependsOnWidth() bool {
	if t.topByte {
		return true
	}
	for _, e := range t.entries {
		if e.tree.Raws.Low.Ones || (e.tree.Raws.High != nil && e.tree.Raws.High.Ones) {
			return true
		}
	}
	return false
}

// rawValue is a raw value at a width; ok is false if the width can't hold it.
func rawValue(r syntax.Raw, width int) (v uint64, ok bool) {
	if r.Number != nil {
		if v, ok = whole(*r.Number); !ok {
			return 0, false
		}
	}
	ones := onesOf(width)
	if r.Ones {
		return ones - v, v <= ones
	}
	return v, v <= ones
}

// onesOf has width bits set.
func onesOf(width int) uint64 { return ^uint64(0) >> (64 - width) }

// rawRange is a range of raw values at a width; problem says why it can't be.
func rawRange(r syntax.RawRange, width int) (out RawRange, code diag.Code, problem string) {
	for _, end := range []struct {
		raw *syntax.Raw
		to  *uint64
	}{{&r.Low, &out.Low}, {r.High, &out.High}} {
		if end.raw == nil {
			out.High = out.Low
			continue
		}
		v, ok := rawValue(*end.raw, width)
		if !ok {
			return out, diag.CodeTooWide, fmt.Sprintf("%s doesn't fit into %s, which hold 0 to %d", end.raw.Span.Text(), counted(width, "bit"), onesOf(width))
		}
		*end.to = v
	}
	if out.Low > out.High {
		return out, diag.EmptyRange, fmt.Sprintf("the range %s is upside down: %d is above %d", r.Span.Text(), out.Low, out.High)
	}
	return out, "", ""
}

// at is the table for signals of a width of 1 to 64 bits.
func (t *table) at(width int) *sizedTable {
	if s, ok := t.widths[width]; ok {
		return s
	}
	s := &sizedTable{}
	t.widths[width] = s
	if t.topByte && width%8 != 0 {
		s.problems = append(s.problems, tableProblem{code: diag.CodeTooWide, span: t.span,
			problem: fmt.Sprintf("the table goes by the top byte, and %s are no whole bytes", counted(width, "bit")), remedy: "use a table written with ones"})
		return s
	}
	type placed struct {
		raw   RawRange
		entry *tableEntry
	}
	var all []placed
	entryWidth := width
	if t.topByte {
		entryWidth = 8
	}
	for _, e := range t.entries {
		r, code, problem := rawRange(e.tree.Raws, entryWidth)
		if code != "" {
			remedy := "write a value that fits"
			if code == diag.EmptyRange {
				remedy = "write the lower value first"
			}
			s.problems = append(s.problems, tableProblem{code: code, span: e.tree.Raws.Span, problem: problem, remedy: remedy})
			continue
		}
		if t.topByte {
			below := onesOf(width) >> 8 // the bits under the top byte
			r.Low, r.High = r.Low<<(width-8), r.High<<(width-8)|below
		}
		all = append(all, placed{r, e})
	}
	slices.SortStableFunc(all, func(a, b placed) int { return compareRaw(a.raw, b.raw) })
	for i, p := range all {
		if i > 0 && all[i-1].raw.High >= p.raw.Low {
			a, b := all[i-1], p
			if b.entry.tree.Span.Start < a.entry.tree.Span.Start {
				a, b = b, a
			}
			s.problems = append(s.problems, tableProblem{code: diag.CodeClash, span: b.entry.tree.Raws.Span, other: a.entry.tree.Raws.Span,
				problem: fmt.Sprintf("%s and %s both name raw %d in %s", a.entry.tree.Raws.Span.Text(), b.entry.tree.Raws.Span.Text(), p.raw.Low, counted(width, "bit")),
				remedy:  "let each raw value have one meaning"})
			continue
		}
		if p.entry.class == 0 {
			s.states = append(s.states, State{Raw: p.raw, Name: p.entry.name, Text: p.entry.tree.Text.Value})
		} else {
			s.codes = append(s.codes, Code{Raw: p.raw, Class: p.entry.class, Name: p.entry.name, Text: p.entry.tree.Text.Value})
		}
	}
	return s
}

// inline is the table written at a member, made once for all uses of a shape;
// nil if it is broken.
func (c *compiler) inline(clause *syntax.TableClause) *table {
	t, ok := c.inlineTables[clause]
	if !ok {
		t = c.newTable(clause.States, false, clause.Entries)
		if t != nil {
			t.span = clause.Span
		}
		c.inlineTables[clause] = t
	}
	return t
}

// tableFor finds the codes or states of a member at its width and reports
// what is wrong with them there.
func (c *compiler) tableFor(src *source, clause *syntax.TableClause, width int) (*table, *sizedTable, bool) {
	var t *table
	if clause.Path != nil {
		sym := c.resolvePath(src, nsTable, *clause.Path)
		if sym == nil {
			return nil, nil, false
		}
		if sym.decl.(*syntax.TableDecl).States != clause.States {
			need, remedy := "codes", "write states "+sym.name.Text
			if clause.States {
				need, remedy = "states", "write codes "+sym.name.Text
			}
			c.report(diag.WrongKindOfName, clause.Path.Span, fmt.Sprintf("%s is %s, not one of %s", sym.name.Text, sym.word, need), remedy).Also(sym.name.Span, "declared here")
			return nil, nil, false
		}
		t = sym.table
	} else {
		t = c.inline(clause)
	}
	if t == nil {
		return nil, nil, false
	}
	return t, t.at(width), c.tableProblems(t, width, clause)
}

// tableProblems reports what is wrong with a table at a width: at the entry of
// a table in place, at the use of a named one.
func (c *compiler) tableProblems(t *table, width int, clause *syntax.TableClause) bool {
	problems := t.at(width).problems
	if len(problems) == 0 {
		return true
	}
	p := problems[0]
	if clause.Path == nil {
		d := c.report(p.code, p.span, p.problem, p.remedy)
		if p.other.Known() {
			d.Also(p.other, "the other one")
		}
		return false
	}
	d := c.report(p.code, clause.Path.Span, fmt.Sprintf("%s can't be used here: %s", t.name, p.problem), p.remedy).Also(p.span, "declared here")
	if p.other.Known() {
		d.Also(p.other, "the other one")
	}
	return false
}
