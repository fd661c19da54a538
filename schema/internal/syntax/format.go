package syntax

import (
	"bytes"
	"sort"
	"strings"

	"busloom/diag"
)

// widest is how wide a line gets before a member's clauses go on below it.
const widest = 110

const indentation = "  "

// Format lays a description out in the one canonical way. It keeps every
// comment and the paragraphs; ok is false, with problems reported, if the text
// has syntax errors.
func Format(src *diag.File, problems *diag.List) (out []byte, ok bool) {
	own := &diag.List{}
	p, ok := newParser(src, own)
	if !ok {
		problems.Add(own)
		return nil, false
	}
	tree := p.tree()
	p.handOver(own)
	problems.Add(own)
	if own.Failed() {
		return nil, false
	}
	f := &formatter{src: src, toks: p.toks, comments: p.comments, start: true}
	f.tree(tree)
	return f.out.Bytes(), true
}

// formatter writes elements, which are whole lines. Comments before an element
// and within it go above it, a comment behind it stays behind it. A blank line
// is written where the source has one or more between two elements or
// comments.
type formatter struct {
	src      *diag.File
	toks     []tok
	comments []tok // those not written yet
	out      bytes.Buffer
	level    int
	uses     int // how many use lines were written
	// end is the source offset of what was written last.
	end int
	// start is set at the start of a block, where no blank line goes.
	start bool
	// apart asks for a blank line whatever the source has.
	apart bool
}

func (f *formatter) indent() string { return strings.Repeat(indentation, f.level) }

func (f *formatter) comment(c tok) string { return string(f.src.Text[c.start:c.end]) }

// space writes the blank line that belongs before what stands at an offset.
func (f *formatter) space(offset int) {
	if !f.start && (f.apart || offset > f.end && f.blankWithin(f.end, offset)) {
		f.out.WriteByte('\n')
	}
	f.start, f.apart = false, false
}

// remaining writes the comments before an offset, each on its line.
func (f *formatter) remaining(offset int) {
	for len(f.comments) > 0 && int(f.comments[0].start) < offset {
		c := f.comments[0]
		f.comments = f.comments[1:]
		f.space(int(c.start))
		f.out.WriteString(f.indent() + f.comment(c) + "\n")
		f.end = int(c.end)
	}
}

// above writes what goes above an element: the comments before it, the blank
// line, and the comments within it, except for a part that keeps its own.
func (f *formatter) above(s, except diag.Span) {
	f.remaining(s.Start)
	f.space(s.Start)
	before, kept := f.comments, 0
	for len(f.comments) > 0 && int(f.comments[0].start) < s.End {
		c := f.comments[0]
		f.comments = f.comments[1:]
		if except.Known() && int(c.start) > except.Start && int(c.start) < except.End {
			before[kept] = c
			kept++
			continue
		}
		f.out.WriteString(f.indent() + f.comment(c) + "\n")
	}
	if taken := len(before) - len(f.comments); kept > 0 {
		copy(before[taken-kept:taken], before[:kept])
		f.comments = before[taken-kept:]
	}
}

// write writes a line that ends at a source offset, with the comment behind it.
func (f *formatter) write(text string, end int) {
	f.out.WriteString(text)
	f.end = end
	if len(f.comments) > 0 {
		c := f.comments[0]
		if between := f.src.Text[min(end, int(c.start)):c.start]; int(c.start) >= end && len(bytes.Trim(between, " \t\r")) == 0 {
			f.out.WriteString("  " + f.comment(c))
			f.comments = f.comments[1:]
			f.end = int(c.end)
		}
	}
	f.out.WriteByte('\n')
}

// element writes one element without a block.
func (f *formatter) element(s diag.Span, text string) {
	f.above(s, diag.Span{})
	f.write(f.indent()+text, s.End)
}

// block writes head {, the inside, and }. The head's last part ends at an
// offset, the whole with the brace.
func (f *formatter) block(whole diag.Span, headEnd int, text string, inside func()) {
	open := f.find(headEnd, '{')
	f.above(diag.Span{File: f.src, Start: whole.Start, End: open}, diag.Span{})
	f.write(f.indent()+text+" {", open+1)
	f.inner(inside, whole.End-1)
	f.write(f.indent()+"}", whole.End)
}

// inner writes the inside of a block that closes at an offset.
func (f *formatter) inner(inside func(), closing int) {
	f.level++
	f.start = true
	inside()
	f.remaining(closing)
	f.level--
	f.start = false
}

// commentIn reports whether a comment stands within a span.
func (f *formatter) commentIn(s diag.Span) bool {
	i := sort.Search(len(f.comments), func(i int) bool { return int(f.comments[i].start) >= s.Start })
	return s.Known() && i < len(f.comments) && int(f.comments[i].start) < s.End
}

// find is the offset of the first such sign from an offset on.
func (f *formatter) find(offset int, sign byte) int {
	i := sort.Search(len(f.toks), func(i int) bool { return int(f.toks[i].start) >= offset })
	for ; i < len(f.toks); i++ {
		if f.toks[i].is(tokPunct) && f.src.Text[f.toks[i].start] == sign {
			return int(f.toks[i].start)
		}
	}
	return offset
}
