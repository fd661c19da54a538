package capture

import (
	"bytes"
	"fmt"

	"busloom/frame"
)

// parser turns blocks into frames. What it carries from line to line is its
// place in the text, the numbering of interfaces, and, for SincePrevious only,
// the last time. The clock is a mere memory: it saves work and changes nothing.
type parser struct {
	name   string
	opts   Options
	ifaces *interfaces
	clock  clock

	offset    int64 // of the next line
	line      int64 // lines read
	record    int64 // records read, malformed ones included
	malformed int64
	other     int64 // lines read that aren't records
	lastTime  int64 // of the last line with a time, for SincePrevious
}

// parse reads lines of data, which ends in a line end and may be looked at
// slack bytes beyond, into batch. It returns how many frames it filled and how
// many bytes it used; it stops when the batch is full or the data is used up.
func (p *parser) parse(data []byte, batch []frame.Frame) (n, used int) {
	reach := data[:min(len(data)+slack, cap(data))]
	for used < len(data) && n < len(batch) {
		f := &batch[n]
		if end := p.fastLine(reach, used, f); end > 0 && end <= len(data) {
			p.line++
			p.record++
			f.Record, f.Offset = p.record, p.offset
			p.offset += int64(end - used)
			used = end
			n++
			continue
		}
		end := used + bytes.IndexByte(data[used:], '\n') + 1
		if p.general(data[used:end-1], f) {
			n++
		}
		p.offset += int64(end - used)
		used = end
	}
	return n, used
}

// byteOrderMark may stand before UTF-8 text.
const byteOrderMark = "\xEF\xBB\xBF"

// general reads one line without its LF; it reports whether a frame came of it.
func (p *parser) general(line []byte, f *frame.Frame) bool {
	p.line++
	if len(line) > maxLine {
		p.overlong(line)
		return false
	}
	l := lineReader{text: bytes.TrimRight(line, "\r")}
	if p.offset == 0 && bytes.HasPrefix(line, []byte(byteOrderMark)) {
		l.at = len(byteOrderMark)
	}
	if l.other() {
		p.other++
		return false
	}
	p.record++
	if err := l.record(p, f); err != nil {
		if p.offset == 0 && (bytes.HasPrefix(line, []byte("\xFF\xFE")) || bytes.HasPrefix(line, []byte("\xFE\xFF"))) {
			err = &lineError{0, "the text is UTF-16", "ASCII or UTF-8: write the capture anew"}
		}
		p.reject(err)
		return false
	}
	f.Record, f.Offset = p.record, p.offset
	return true
}

// other reports whether the line is no record: blank, a comment, or a line of
// detail that the screen form puts below an error frame, behind a tab. A record
// behind a tab is known by its time, # or length.
func (l *lineReader) other() bool {
	start := l.at
	defer func() { l.at = start }()
	l.blanks()
	c := l.peek()
	if l.at == len(l.text) || c == '#' {
		return true
	}
	return l.text[start] == '\t' && c != '(' && !l.signOfRecord()
}

// signOfRecord reports whether the line has a # or a length in brackets. The
// words of an error frame's detail have { right behind them.
func (l *lineReader) signOfRecord() bool {
	for i, c := range l.text {
		switch {
		case c == '#', c == '[' && (i == 0 || l.text[i-1] != escape), c == '{' && i > 0 && l.text[i-1] == ' ':
			return true
		}
	}
	return false
}

// overlong counts a line of which only the start is known. Its length makes a
// comment no worse.
func (p *parser) overlong(start []byte) {
	l := lineReader{text: start[:maxLine]}
	if l.blanks(); l.peek() == '#' {
		p.other++
		return
	}
	p.record++
	p.reject(&lineError{maxLine, fmt.Sprintf("the line is longer than %d bytes", maxLine), "a record of a capture"})
}

// cut counts a line of which only the start is known, because the text breaks
// off inside it.
func (p *parser) cut(start []byte) {
	p.line++
	l := lineReader{text: start}
	if l.other() {
		p.other++
		return
	}
	p.record++
	p.reject(&lineError{len(start), "the text breaks off inside this line", "its rest, which the damage took"})
}

// reject counts and tells that the record just counted is malformed.
func (p *parser) reject(err *lineError) {
	p.malformed++
	if p.opts.Reject != nil {
		p.opts.Reject(Reject{
			File: p.name, Record: p.record, Line: p.line, Column: err.column + 1, Offset: p.offset,
			Problem: err.problem, Expected: err.expected,
		})
	}
}
