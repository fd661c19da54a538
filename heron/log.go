package heron

import (
	"bufio"
	"errors"
	"io"
	"strconv"
	"time"
)

// Options say how much of a scenario is written. Zero values mean the
// scenario's own length.
type Options struct {
	Duration time.Duration
	Frames   int64 // records, which are lines
}

// Write runs a scenario and writes what its three buses carry as candump log
// text: "(seconds.micros) interface ID#DATA" lines by time, can0 the chassis
// bus, can1 the powertrain, can2 the body. Bench goes on until one of the
// options ends it.
func Write(w io.Writer, s Scenario, o Options) error {
	c, err := scriptOf(s)
	if err != nil {
		return err
	}
	until, left := c.length, o.Frames
	if until == 0 {
		until = never / 2000
		if o.Duration <= 0 && o.Frames <= 0 {
			return errors.New("scenario " + string(s) + " has no end: give a duration or a number of frames")
		}
	}
	if o.Duration > 0 {
		until = min(until, o.Duration.Microseconds())
	}
	if left <= 0 {
		left = never
	}
	out := bufio.NewWriterSize(w, 1<<16)
	l := line{epoch: c.epoch}
	newNetwork(c).run(until, func(f *sent) bool {
		_, err = out.Write(l.of(f))
		left--
		return err == nil && left > 0
	})
	if err != nil {
		return err
	}
	return out.Flush()
}

// line formats records; the digits of a second are kept from one to the next.
type line struct {
	epoch  int64
	second int64
	head   []byte // "(1700000000."
	buf    []byte
}

const hexDigits = "0123456789ABCDEF"

func (l *line) of(f *sent) []byte {
	us := f.at / 1000
	if s := us/second + l.epoch; s != l.second {
		l.second = s
		l.head = append(strconv.AppendInt(append(l.head[:0], '('), s, 10), '.')
	}
	b := append(l.buf[:0], l.head...)
	part := us % second
	for div := int64(100_000); div > 0; div /= 10 {
		b = append(b, byte('0'+part/div%10))
	}
	b = append(b, ") can"...)
	b = append(b, '0'+f.bus, ' ')
	id, count := f.id, 3
	switch {
	case f.kind == errorRecord:
		id, count = id|0x20000000, 8
	case f.extended:
		count = 8
	}
	for i := count - 1; i >= 0; i-- {
		b = append(b, hexDigits[id>>(4*i)&15])
	}
	b = append(b, '#')
	switch {
	case f.kind == remoteRecord:
		b = append(b, 'R', '0'+f.size, '\n')
		l.buf = b
		return b
	case f.fd:
		b = append(b, '#', '1') // with the faster data phase
	}
	for _, x := range f.data[:f.size] {
		b = append(b, hexDigits[x>>4], hexDigits[x&15])
	}
	l.buf = append(b, '\n')
	return l.buf
}
