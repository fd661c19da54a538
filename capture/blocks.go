package capture

import (
	"bytes"
	"errors"
	"io"
)

// blockSize is how much is read at once.
const blockSize = 256 << 10

// maxLine is the longest line that can be a record: an FD frame in screen form
// with its text takes about 400 bytes.
const maxLine = 4096

// block is a stretch of whole lines. data ends in a line end (one is added to
// a last line that lacks it); slack bytes behind it may be looked at.
type block struct {
	data   []byte
	offset int64 // of data in the text
	// overlong is set for the start of a line longer than maxLine; the rest
	// of that line is skipped.
	overlong bool
	// open is set if the line end was added.
	open bool
}

// blockReader cuts a text into blocks. It keeps one buffer, so a block is
// valid until the next one is asked for.
type blockReader struct {
	r          io.Reader
	buf        []byte
	start, end int // what is read and not yet handed out
	offset     int64
	skipping   bool // inside an overlong line
	err        error
}

func newBlockReader(r io.Reader) *blockReader {
	return &blockReader{r: r, buf: make([]byte, blockSize+maxLine+slack+64)}
}

// next returns the next block, or the error that ends the text (io.EOF at its
// end).
func (b *blockReader) next() (block, error) {
	for {
		if b.err == nil {
			b.fill()
		}
		data := b.buf[b.start:b.end]
		if b.skipping {
			i := bytes.IndexByte(data, '\n')
			if i < 0 {
				b.take(len(data))
				if b.err != nil {
					return block{}, b.err
				}
				continue
			}
			b.take(i + 1)
			b.skipping = false
			continue
		}
		last := bytes.LastIndexByte(data, '\n')
		switch {
		case last >= 0:
			return b.block(last + 1), nil
		case len(data) > maxLine:
			b.skipping = true
			out := b.block(maxLine)
			out.overlong = true
			return out, nil
		case b.err == nil:
			continue
		case len(data) == 0:
			return block{}, b.err
		default:
			// The last line has no end: give it one.
			b.buf[b.end] = '\n'
			out := b.block(len(data))
			out.data = out.data[:len(out.data)+1]
			out.open = true
			return out, nil
		}
	}
}

func (b *blockReader) block(n int) block {
	out := block{data: b.buf[b.start : b.start+n], offset: b.offset}
	b.take(n)
	return out
}

func (b *blockReader) take(n int) {
	b.start += n
	b.offset += int64(n)
}

// fill moves what is left to the buffer's front and reads once.
func (b *blockReader) fill() {
	copy(b.buf, b.buf[b.start:b.end])
	b.end -= b.start
	b.start = 0
	room := b.buf[b.end : len(b.buf)-slack-64]
	if len(room) == 0 {
		return
	}
	n, err := b.r.Read(room)
	b.end += n
	if err != nil {
		if !errors.Is(err, io.EOF) {
			err = &DamageError{Offset: b.offset + int64(b.end), Err: err}
		}
		b.err = err
	}
}
