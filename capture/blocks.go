package capture

import (
	"bytes"
	"errors"
	"io"
)

// blockSize is how much is read at once.
const blockSize = 256 << 10

// maxLine is the longest line that can be a record, without its LF: an FD frame
// in screen form, in binary digits, takes about 700 bytes.
const maxLine = 4096

// bufferSize has room for a block, the start of a line that the last block left
// over, and the LF that a last line may lack; the fast path may look at the
// slack.
const bufferSize = blockSize + maxLine + 1 + slack

// idleReads is how many reads in a row may give nothing, as in package bufio.
const idleReads = 100

// blockKind says what a block is.
type blockKind uint8

const (
	wholeLines   blockKind = iota // one or more, each with its LF
	overlongLine                  // the first maxLine bytes of a line, whose rest is skipped
	cutLine                       // what stood of a line where the text broke off
)

// block is a stretch of a text.
type block struct {
	kind   blockKind
	data   []byte // has slack bytes of capacity behind it
	offset int64  // of data in the text
}

// blockReader cuts a text into blocks. It keeps one buffer, so a block is
// valid until the next one is asked for. How the reader below it splits the
// text makes no difference to lines and errors.
type blockReader struct {
	r          io.Reader
	buf        []byte
	start, end int // what is read and not yet handed out
	offset     int64
	skipping   bool // inside an overlong line
	err        error
}

func newBlockReader(r io.Reader) *blockReader { return &blockReader{r: r} }

// next returns the next block, or the error that ends the text (io.EOF at its
// end, else a *DamageError).
func (b *blockReader) next() (block, error) {
	for {
		if b.err == nil {
			b.fill()
		}
		data := b.buf[b.start:b.end]
		if b.skipping {
			i := bytes.IndexByte(data, '\n')
			if i >= 0 {
				b.take(i + 1)
				b.skipping = false
				continue
			}
			b.take(len(data))
			if b.err != nil {
				return block{}, b.finish()
			}
			continue
		}
		last := bytes.LastIndexByte(data, '\n')
		switch {
		case last >= 0:
			return b.block(wholeLines, last+1), nil
		case len(data) > maxLine:
			b.skipping = true
			return b.block(overlongLine, maxLine), nil
		case b.err == nil:
			continue
		case len(data) == 0:
			return block{}, b.finish()
		case errors.Is(b.err, io.EOF):
			// The last line has no LF: give it one, which is not of the text.
			b.buf[b.end] = '\n'
			out := b.block(wholeLines, len(data))
			out.data = out.data[:len(data)+1]
			return out, nil
		default:
			// Half a frame can look like a whole one.
			return b.block(cutLine, len(data)), nil
		}
	}
}

// finish frees the buffer and returns what ended the text.
func (b *blockReader) finish() error {
	b.buf, b.start, b.end = nil, 0, 0
	return b.err
}

func (b *blockReader) block(kind blockKind, n int) block {
	out := block{kind, b.buf[b.start : b.start+n], b.offset}
	b.take(n)
	return out
}

func (b *blockReader) take(n int) {
	b.start += n
	b.offset += int64(n)
}

// fill moves what is left to the buffer's front and reads once.
func (b *blockReader) fill() {
	if b.buf == nil {
		b.buf = make([]byte, bufferSize)
	}
	if b.start > 0 {
		copy(b.buf, b.buf[b.start:b.end])
		b.end -= b.start
		b.start = 0
	}
	room := b.buf[b.end : blockSize+maxLine]
	for range idleReads {
		n, err := b.r.Read(room)
		b.end += n
		if err != nil && !errors.Is(err, io.EOF) {
			err = &DamageError{Offset: b.offset + int64(b.end), Err: err}
		}
		b.err = err
		if n > 0 || err != nil {
			return
		}
	}
	b.err = &DamageError{Offset: b.offset + int64(b.end), Err: io.ErrNoProgress}
}
