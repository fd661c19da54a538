package capture

import (
	"bytes"

	"busloom/frame"
)

// parser turns blocks into frames. What it carries from line to line is its
// place in the text, the numbering of interfaces and the last time.
type parser struct {
	name   string
	opts   Options
	ifaces *interfaces
	clock  clock

	offset    int64 // of the next line
	line      int64 // lines read
	record    int64 // records read, malformed ones included
	malformed int64
	lastTime  int64 // of the last frame, for SincePrevious
}

// parse reads lines of data, which ends in a line end and may be looked at
// slack bytes beyond, into batch. It returns how many frames it filled and how
// many bytes it used; it stops when the batch is full or the data is used up.
func (p *parser) parse(data []byte, batch []frame.Frame) (n, used int) {
	reach := data[:min(len(data)+slack, cap(data))]
	for used < len(data) && n < len(batch) {
		f := &batch[n]
		if end := p.fastLine(reach, used, f); end > used && end <= len(data) && p.opts.Times == AsWritten {
			p.line++
			p.record++
			f.Record, f.Offset = p.record, p.offset
			p.offset += int64(end - used)
			used = end
			n++
			continue
		}
		end := used + bytes.IndexByte(data[used:], '\n') + 1
		line := data[used : end-1]
		if len(line) > 0 && line[len(line)-1] == '\r' {
			line = line[:len(line)-1]
		}
		if p.general(line, f) {
			n++
		}
		p.offset += int64(end - used)
		used = end
	}
	return n, used
}

// general reads one line without its end; it reports whether a frame came of
// it.
func (p *parser) general(line []byte, f *frame.Frame) bool {
	p.line++
	// Blank lines, comments, and the lines of detail that the screen form
	// puts below error frames.
	if trimmed := bytes.TrimLeft(line, " "); len(trimmed) == 0 || trimmed[0] == '#' || trimmed[0] == '\t' || trimmed[0] == '\r' {
		return false
	}
	p.line--
	if len(line) > maxLine {
		p.reject(line, &lineError{maxLine, "the line is longer than 4096 bytes", "a record of a capture"})
		return false
	}
	l := lineReader{text: line}
	if err := l.record(p, f); err != nil {
		p.reject(line, err)
		return false
	}
	p.line++
	p.record++
	f.Record, f.Offset = p.record, p.offset
	return true
}

// reject counts and tells a malformed record.
func (p *parser) reject(_ []byte, err *lineError) {
	p.line++
	p.record++
	p.malformed++
	if p.opts.Reject != nil {
		p.opts.Reject(Reject{
			File: p.name, Record: p.record, Line: p.line, Column: err.column + 1, Offset: p.offset,
			Problem: err.problem, Expected: err.expected,
		})
	}
}
