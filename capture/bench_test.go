package capture

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"strconv"
	"strings"
	"testing"

	"busloom/frame"

	"go.einride.tech/can"
)

// benchLines is how many lines a benchmark reads per round.
const benchLines = 200_000

// benchText writes lines with 20 identifiers on two interfaces, 4000 lines a
// second; each line is made from its time and number.
func benchText(line func(b *bytes.Buffer, micros int64, i int)) []byte {
	var b bytes.Buffer
	for i := range benchLines {
		line(&b, 1_700_000_000_000_000+int64(i)*250, i)
	}
	return b.Bytes()
}

// classicLog is a line of 46 bytes, its end included.
func classicLog(b *bytes.Buffer, micros int64, i int) {
	fmt.Fprintf(b, "(%d.%06d) can%d %03X#%016X\n", micros/1e6, micros%1e6, i%2, 0x100+i%20*16, uint64(i)*0x9E3779B97F4A7C15)
}

func BenchmarkReadLog(b *testing.B) {
	classic := benchText(classicLog)
	for _, c := range []struct {
		name string
		text []byte
	}{
		{"classic", classic},
		{"crlf", bytes.ReplaceAll(classic, []byte("\n"), []byte("\r\n"))},
		{"direction", bytes.ReplaceAll(classic, []byte("\n"), []byte(" R\n"))},
		{"long name", bytes.ReplaceAll(classic, []byte(" can"), []byte(" can_chassis"))},
		{"padded name", bytes.ReplaceAll(classic, []byte(" can"), []byte("   can"))},
		{"extended", benchText(func(b *bytes.Buffer, us int64, i int) {
			fmt.Fprintf(b, "(%d.%06d) can%d %08X#%016X\n", us/1e6, us%1e6, i%2, 0x18FEF100+i%20, uint64(i)*0x9E3779B97F4A7C15)
		})},
		{"mixed lengths", benchText(func(b *bytes.Buffer, us int64, i int) {
			fmt.Fprintf(b, "(%d.%06d) can%d %03X#%s\n", us/1e6, us%1e6, i%2, 0x100+i%20*16, fmt.Sprintf("%016X", uint64(i)*0x9E3779B97F4A7C15)[:i%20%9*2])
		})},
		{"nanoseconds", benchText(func(b *bytes.Buffer, us int64, i int) {
			fmt.Fprintf(b, "(%d.%06d%03d) can%d %03X#%016X\n", us/1e6, us%1e6, i%1000, i%2, 0x100+i%20*16, uint64(i)*0x9E3779B97F4A7C15)
		})},
		{"FD 64", benchText(func(b *bytes.Buffer, us int64, i int) {
			fmt.Fprintf(b, "(%d.%06d) can%d %03X##1%s\n", us/1e6, us%1e6, i%2, 0x100+i%20*16, strings.Repeat(fmt.Sprintf("%016X", uint64(i)*0x9E3779B97F4A7C15), 8))
		})},
		{"screen", benchText(func(b *bytes.Buffer, us int64, i int) {
			fmt.Fprintf(b, " (%d.%06d)  can%d  %03X   [8]  % 02X\n", us/1e6, us%1e6, i%2, 0x100+i%20*16, fmt.Appendf(nil, "%08d", i))
		})},
	} {
		b.Run(c.name, func(b *testing.B) { benchReader(b, c.text, readOurs) })
	}
}

// The reader that anyone would write first, on the same text: a scanner, a
// cut at the blanks, and the CAN library's own parser.
func BenchmarkPlainReader(b *testing.B) {
	b.Run("classic", func(b *testing.B) { benchReader(b, benchText(classicLog), readPlain) })
}

// benchReader reads a text over and over; read returns the number of frames and
// a checksum, so that no reader can get away with less work.
func benchReader(b *testing.B, text []byte, read func(io.Reader) (frames int, sum uint64, err error)) {
	wantFrames, wantSum, err := readPlainOrOurs(text)
	if err != nil {
		b.Fatal(err)
	}
	b.SetBytes(int64(len(text)))
	b.ReportAllocs()
	frames := 0
	for b.Loop() {
		n, sum, err := read(bytes.NewReader(text))
		if err != nil || n != wantFrames || sum != wantSum {
			b.Fatal(n, sum, err)
		}
		frames += n
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(frames), "ns/frame")
}

// readPlainOrOurs gives the figures that a text must come to: the plain
// reader's where it can read the text.
func readPlainOrOurs(text []byte) (int, uint64, error) {
	if n, sum, err := readPlain(bytes.NewReader(text)); err == nil {
		return n, sum, nil
	}
	return readOurs(bytes.NewReader(text))
}

func readOurs(r io.Reader) (frames int, sum uint64, err error) {
	source := NewText("bench.log", r, Options{})
	batch := make([]frame.Frame, 256)
	for {
		n, err := source.Read(batch)
		for i := range batch[:n] {
			f := &batch[i]
			sum += uint64(f.Time) + uint64(f.ID)<<20 + uint64(f.Len)
			if f.Len > 0 {
				sum += uint64(f.Data[0])<<40 + uint64(f.Data[f.Len-1])<<48
			}
		}
		frames += n
		if err != nil {
			if errors.Is(err, io.EOF) {
				err = nil
			}
			if source.Counts().Malformed > 0 {
				err = errors.New("malformed records")
			}
			return frames, sum, err
		}
	}
}

func readPlain(r io.Reader) (frames int, sum uint64, err error) {
	lines := bufio.NewScanner(r)
	for lines.Scan() {
		fields := strings.Fields(lines.Text())
		if len(fields) != 3 {
			return 0, 0, fmt.Errorf("line %d has %d fields", frames+1, len(fields))
		}
		var seconds, micros int64
		whole, fraction, _ := strings.Cut(strings.Trim(fields[0], "()"), ".")
		if len(fraction) != 6 {
			return 0, 0, errors.New("no microseconds")
		}
		if seconds, err = strconv.ParseInt(whole, 10, 64); err != nil {
			return 0, 0, err
		}
		if micros, err = strconv.ParseInt(fraction, 10, 64); err != nil {
			return 0, 0, err
		}
		var f can.Frame
		if err := f.UnmarshalString(fields[2]); err != nil {
			return 0, 0, err
		}
		sum += uint64(seconds*1e9+micros*1000) + uint64(f.ID)<<20 + uint64(f.Length)
		if f.Length > 0 {
			sum += uint64(f.Data[0])<<40 + uint64(f.Data[f.Length-1])<<48
		}
		frames++
	}
	return frames, sum, lines.Err()
}
