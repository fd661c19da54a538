package capture

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"

	"busloom/frame"

	"github.com/klauspost/compress/gzip"
)

// Times says how the times of a text are meant.
type Times uint8

// The ways of writing times. A line without a time has the time 0, or that of
// the line before. Dates don't tell their zone and are taken as UTC.
const (
	AsWritten     Times = iota // each is a time of its own: since 1970, a date, or since the first line
	SincePrevious              // each is the distance from the line before
)

// Options of a text reader.
type Options struct {
	Times Times
	// Reject is told each malformed record; nil ignores them (they are
	// counted all the same).
	Reject func(Reject)
}

// DamageError is a text that ended in an error: a damaged archive, a failing
// disk. What was read before it was handed out.
type DamageError struct {
	Name   string
	Offset int64 // in the text, after decompression
	Err    error
}

func (e *DamageError) Error() string {
	return fmt.Sprintf("%s: after %d bytes of text: %v", e.Name, e.Offset, e.Err)
}

func (e *DamageError) Unwrap() error { return e.Err }

// Text reads candump-style text, plain or gzip. It implements frame.Source: an
// error other than io.EOF is a *DamageError. Record numbers and, with
// SincePrevious, times begin anew in each text.
type Text struct {
	name   string
	blocks *blockReader
	parser parser
	rest   []byte // what is left of the current block
	closer io.Closer
	ended  error
}

var _ frame.Source = (*Text)(nil)

// Open opens a file.
func Open(path string, opts Options) (*Text, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	t := NewText(path, f, opts)
	t.closer = f
	return t, nil
}

// NewText reads a text from r; name stands in messages. Gzip is recognised by
// its first two bytes.
func NewText(name string, r io.Reader, opts Options) *Text {
	t := &Text{name: name}
	t.blocks = newBlockReader(&unpacker{r: r})
	t.parser = parser{name: name, opts: opts, ifaces: newInterfaces()}
	return t
}

// Close closes the file that Open opened. It may be called more than once.
func (t *Text) Close() error {
	if t.closer == nil {
		return nil
	}
	err := t.closer.Close()
	t.closer = nil
	return err
}

// Name is the file's name.
func (t *Text) Name() string { return t.name }

// Interfaces implements frame.Source.
func (t *Text) Interfaces() []string { return t.parser.ifaces.names }

// Counts implements frame.Source.
func (t *Text) Counts() frame.Counts {
	return frame.Counts{Records: t.parser.record, Malformed: t.parser.malformed, Bytes: t.blocks.offset}
}

// OtherLines is the number of lines read that aren't records: blank lines,
// comments, and the lines of detail below error frames.
func (t *Text) OtherLines() int64 { return t.parser.other }

// Read implements frame.Source.
func (t *Text) Read(batch []frame.Frame) (int, error) {
	if len(batch) == 0 {
		return 0, nil
	}
	for {
		for len(t.rest) == 0 {
			if t.ended != nil {
				return 0, t.ended
			}
			t.ended = t.nextBlock()
		}
		n, used := t.parser.parse(t.rest, batch)
		t.rest = t.rest[used:]
		if n > 0 {
			return n, nil
		}
	}
}

// nextBlock gets lines to parse; a block that is no whole lines is a record
// that can't be read.
func (t *Text) nextBlock() error {
	b, err := t.blocks.next()
	if err != nil {
		var damage *DamageError
		if errors.As(err, &damage) {
			damage.Name = t.name
		}
		return err
	}
	t.parser.offset = b.offset
	switch b.kind {
	case wholeLines:
		t.rest = b.data
	case overlongLine:
		t.parser.line++
		t.parser.overlong(b.data)
	case cutLine:
		t.parser.cut(b.data)
	}
	return nil
}

// unpacker is the plain text of r, gzip or not.
type unpacker struct {
	r    io.Reader
	text io.Reader
	gzip bool
}

func (u *unpacker) Read(p []byte) (int, error) {
	if u.text == nil {
		if err := u.recognise(); err != nil {
			return 0, err
		}
	}
	n, err := u.text.Read(p)
	if u.gzip && err != nil && !errors.Is(err, io.EOF) {
		err = fmt.Errorf("the archive is damaged or cut short: %w", err)
	}
	return n, err
}

// recognise looks for gzip's magic bytes (RFC 1952).
func (u *unpacker) recognise() error {
	in := bufio.NewReaderSize(u.r, 128<<10)
	magic, err := in.Peek(2)
	if err != nil && !errors.Is(err, io.EOF) {
		return err
	}
	u.text = in
	if !bytes.Equal(magic, []byte{0x1f, 0x8b}) {
		return nil
	}
	u.gzip = true
	if u.text, err = gzip.NewReader(in); err != nil {
		return fmt.Errorf("the archive's header is damaged or cut short: %w", err)
	}
	return nil
}
