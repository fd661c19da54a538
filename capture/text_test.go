package capture

import (
	"bytes"
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"strings"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
	"go.einride.tech/can"
	"pgregory.net/rapid"
)

// readAll reads a text to its end.
func readAll(t require.TestingT, r io.Reader, opts Options) (frames []frame.Frame, source *Text, rejects []Reject, err error) {
	opts.Reject = func(r Reject) { rejects = append(rejects, r) }
	source = NewText("test.log", r, opts)
	batch := make([]frame.Frame, 7)
	for {
		n, e := source.Read(batch)
		for _, f := range batch[:n] {
			clear(f.Data[f.Len:]) // undefined
			frames = append(frames, f)
		}
		if e != nil {
			require.Zero(t, n)
			if !errors.Is(e, io.EOF) {
				err = e
			}
			counts := source.Counts()
			require.Equal(t, counts.Records, int64(len(frames))+counts.Malformed)
			require.Equal(t, counts.Malformed, int64(len(rejects)))
			return frames, source, rejects, err
		}
	}
}

func TestForms(t *testing.T) {
	type want struct {
		time  int64
		iface string
		id    uint32
		flags frame.Flags
		dlc   uint8
		data  string
	}
	for _, c := range []struct {
		line string
		want want
	}{
		{"(1699999999.123456) can0 123#1122", want{1699999999123456000, "can0", 0x123, 0, 2, "\x11\x22"}},
		{"(1699999999.123456789) vcan10 7FF#", want{1699999999123456789, "vcan10", 0x7FF, 0, 0, ""}},
		{"(0.5) can0 18DAF110#01.02.ff", want{500000000, "can0", 0x18DAF110, frame.Extended, 3, "\x01\x02\xff"}},
		{"(1.0) can0 123#R", want{1e9, "can0", 0x123, frame.Remote, 0, ""}},
		{"(1.0) can0 123#R5", want{1e9, "can0", 0x123, frame.Remote, 5, ""}},
		{"(1.0) can0 123#R8_C", want{1e9, "can0", 0x123, frame.Remote, 12, ""}},
		{"(1.0) can0 123##0", want{1e9, "can0", 0x123, frame.FD, 0, ""}},
		{"(1.0) can0 123##3000102030405060708090A0B", want{1e9, "can0", 0x123, frame.FD | frame.BitRateSwitch | frame.ErrorPassive, 9, "\x00\x01\x02\x03\x04\x05\x06\x07\x08\x09\x0a\x0b"}},
		{"(1.0) can0 12345678##5" + strings.Repeat("AB", 64), want{1e9, "can0", 0x12345678, frame.Extended | frame.FD | frame.BitRateSwitch, 15, strings.Repeat("\xab", 64)}},
		{"(1.0) can0 123#1122334455667788_9", want{1e9, "can0", 0x123, 0, 9, "\x11\x22\x33\x44\x55\x66\x77\x88"}},
		{"(1.0) can0 20000004#0008000000006000", want{1e9, "can0", 4, frame.Error, 8, "\x00\x08\x00\x00\x00\x00\x60\x00"}},
		{"(1.0) can0 123#11 R", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{"(1.0) can0 123#11 T", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{"can0 123#11", want{0, "can0", 0x123, 0, 1, "\x11"}},

		{"  can0  123   [8]  11 22 33 44 55 66 77 88", want{0, "can0", 0x123, 0, 8, "\x11\x22\x33\x44\x55\x66\x77\x88"}},
		{" (1699999999.123456)  can0  123   [2]  11 22   '.\"'", want{1699999999123456000, "can0", 0x123, 0, 2, "\x11\x22"}},
		{" (2023-11-14 22:13:19.123456)  can0  18DAF110   [1]  FF", want{1699999999123456000, "can0", 0x18DAF110, frame.Extended, 1, "\xff"}},
		{" (000.001234)  can0  123   [0] ", want{1234000, "can0", 0x123, 0, 0, ""}},
		{"  can0  123   [3]  remote request", want{0, "can0", 0x123, frame.Remote, 3, ""}},
		{"  can0  20000040   [8]  00 00 00 00 00 00 00 00   ERRORFRAME", want{0, "can0", 0x40, frame.Error, 8, "\x00\x00\x00\x00\x00\x00\x00\x00"}},
		{"  can0  123  [12]  00 01 02 03 04 05 06 07 08 09 0A 0B", want{0, "can0", 0x123, frame.FD, 9, "\x00\x01\x02\x03\x04\x05\x06\x07\x08\x09\x0a\x0b"}},
		{"  can0  TX B E  123  [08]  00 01 02 03 04 05 06 07", want{0, "can0", 0x123, frame.FD | frame.BitRateSwitch | frame.ErrorPassive, 8, "\x00\x01\x02\x03\x04\x05\x06\x07"}},
		{"  can0  RX - -  123   [1]  AA", want{0, "can0", 0x123, 0, 1, "\xaa"}},
		{"  can0  123   {B}  11 22 33 44 55 66 77 88", want{0, "can0", 0x123, 0, 11, "\x11\x22\x33\x44\x55\x66\x77\x88"}},
	} {
		for _, end := range []string{"", "\n", "\r\n"} {
			frames, source, rejects, err := readAll(t, strings.NewReader(c.line+end), Options{})
			require.NoError(t, err)
			require.Empty(t, rejects, c.line)
			require.Len(t, frames, 1, c.line)
			f := frames[0]
			got := want{f.Time, source.Interfaces()[f.Bus], f.ID, f.Flags, f.DLC, string(f.Payload())}
			require.Equal(t, c.want, got, c.line)
			require.Equal(t, int64(1), f.Record)
		}
	}
}

func TestRejectsSayWhere(t *testing.T) {
	text := "# comment\n\n(1.0) can0 123#11\n"
	for _, c := range []struct {
		line, message string
	}{
		{"(1.0 can0 123#11", "test.log:4:5: ' ' stands here: expected the closing parenthesis of the time"},
		{"(1.0) can0", "test.log:4:11: the line ends after the interface: expected an identifier"},
		{"(1.0) can0 12#11", "test.log:4:14: the identifier is cut short: '#' stands here: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)"},
		{"(1.0) can0 8FF#11", "test.log:4:12: the identifier 8FF needs more than 11 bits: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)"},
		{"(1.0) can0 123#1", "test.log:4:17: half a byte: the line ends here: expected a second hex digit"},
		{"(1.0) can0 123#112233445566778899", "test.log:4:32: the data has more than 8 bytes: expected the line's end"},
		{"(1.0) can0 123##8", "test.log:4:17: '8' stands here: expected the FD flags, a digit from 0 to 7"},
		{"(1.0) can0 123##0112233445566778899", "test.log:4:18: an FD frame can't have 9 bytes: expected 0 to 8, 12, 16, 20, 24, 32, 48 or 64 bytes"},
		{"(99999999999.0) can0 123#11", "test.log:4:2: the time is beyond what can be counted in nanoseconds: expected a time before the year 2262"},
		{"  can0  123   [3]  11 22", "test.log:4:25: the line ends here: expected byte 3 of 3"},
		{"  can0  123   [9]  11 22", "test.log:4:16: no such frame has 9 bytes: expected a length that a frame can have"},
		{"\x00\xff\xfe", "test.log:4:1: this is no name of an interface: expected a name such as can0 between the time and the identifier"},
		{strings.Repeat("x", 5000), "test.log:4:4097: the line is longer than 4096 bytes: expected a record of a capture"},
	} {
		frames, _, rejects, err := readAll(t, strings.NewReader(text+c.line+"\n(2.0) can0 123#22\n"), Options{})
		require.NoError(t, err)
		require.Len(t, frames, 2)
		require.Len(t, rejects, 1)
		require.Equal(t, c.message, rejects[0].Error())
		require.Equal(t, int64(2), rejects[0].Record)
		require.Equal(t, int64(len(text)), rejects[0].Offset)
		require.Equal(t, int64(3), frames[1].Record)
		require.Equal(t, int64(len(text)+len(c.line)+1), frames[1].Offset)
	}
}

func TestTimesSincePrevious(t *testing.T) {
	frames, _, rejects, err := readAll(t, strings.NewReader("(1.0) a 1##\n(0.5) a 100#\n(0.25) a 100#\n(9000000000.0) a 100#\n(9000000000.0) a 100#\n"), Options{Times: SincePrevious})
	require.NoError(t, err)
	require.Len(t, rejects, 2) // the first line, and the sum that overflows
	require.Equal(t, []int64{500e6, 750e6}, []int64{frames[0].Time, frames[1].Time})
}

func zipped(t require.TestingT, texts ...string) []byte {
	var b bytes.Buffer
	for _, text := range texts {
		w := gzip.NewWriter(&b)
		_, err := io.WriteString(w, text)
		require.NoError(t, err)
		require.NoError(t, w.Close())
	}
	return b.Bytes()
}

// Archives are made by the standard library, read by another one.
func TestArchives(t *testing.T) {
	var lines strings.Builder
	for i := range 40000 {
		fmt.Fprintf(&lines, "(%d.%06d) can%d %03X#%016X\n", i/1000, i%1000*7, i%3, i%2048, i*0x9E3779B9)
	}
	whole := zipped(t, lines.String())
	plain, _, _, err := readAll(t, strings.NewReader(lines.String()), Options{})
	require.NoError(t, err)
	require.Len(t, plain, 40000)
	frames, _, _, err := readAll(t, bytes.NewReader(whole), Options{})
	require.NoError(t, err)
	require.Equal(t, plain, frames)

	two, _, _, err := readAll(t, bytes.NewReader(zipped(t, "(1.0) a 100#\n", "(2.0) a 100#\n")), Options{})
	require.NoError(t, err)
	require.Len(t, two, 2)

	frames, _, _, err = readAll(t, bytes.NewReader(whole[:len(whole)/2]), Options{})
	var damage *DamageError
	require.ErrorAs(t, err, &damage)
	require.Equal(t, "test.log", damage.Name)
	require.Greater(t, len(frames), 10000, "what was readable is handed out")
	require.Equal(t, plain[:len(frames)-1], frames[:len(frames)-1])

	broken := bytes.Clone(whole)
	broken[len(broken)/2] ^= 0x55
	_, _, _, err = readAll(t, bytes.NewReader(broken), Options{})
	require.ErrorAs(t, err, &damage)
	_, _, _, err = readAll(t, bytes.NewReader([]byte{0x1f, 0x8b}), Options{})
	require.ErrorAs(t, err, &damage)
	_, _, _, err = readAll(t, bytes.NewReader(nil), Options{})
	require.NoError(t, err)
}

// endless gives n bytes without a newline, then a record.
type endless struct {
	left int64
	tail string
}

func (e *endless) Read(p []byte) (int, error) {
	if e.left > 0 {
		n := int(min(int64(len(p)), e.left))
		for i := range p[:n] {
			p[i] = 'x'
		}
		e.left -= int64(n)
		return n, nil
	}
	n := copy(p, e.tail)
	e.tail = e.tail[n:]
	if n == 0 {
		return 0, io.EOF
	}
	return n, nil
}

// A line of a gigabyte is one malformed record; nothing of its size is kept.
func TestEndlessLine(t *testing.T) {
	source := &endless{left: 1 << 30, tail: "\n(1.0) can0 123#11\n"}
	text := NewText("test.log", source, Options{})
	batch := make([]frame.Frame, 4)
	total := 0
	for {
		n, err := text.Read(batch)
		total += n
		if err != nil {
			require.ErrorIs(t, err, io.EOF)
			break
		}
	}
	require.Equal(t, 1, total)
	require.Equal(t, frame.Counts{Records: 2, Malformed: 1, Bytes: 1<<30 + 19}, text.Counts())
	require.Len(t, text.blocks.buf, blockSize+maxLine+slack+64, "the buffer never grows")
}

func TestReadingAllocatesNothing(t *testing.T) {
	line := "(1699999999.123456) can0 123#1122334455667788\n"
	text := NewText("test.log", &endless{tail: strings.Repeat(line, 50000)}, Options{})
	batch := make([]frame.Frame, 100)
	require.Zero(t, testing.AllocsPerRun(100, func() {
		if n, err := text.Read(batch); n == 0 || err != nil {
			t.Fatal(n, err)
		}
	}))
}

func TestChainSharesInterfaces(t *testing.T) {
	one := NewText("a", strings.NewReader("(1.0) can1 100#\n(1.0) can0 100#\n"), Options{})
	two := NewText("b", strings.NewReader("(1.0) can0 100#\n(1.0) can2 100#\n"), Options{})
	chain := NewChain(one, two)
	batch := make([]frame.Frame, 10)
	var buses []uint16
	for {
		n, err := chain.Read(batch)
		for _, f := range batch[:n] {
			buses = append(buses, f.Bus)
		}
		if err != nil {
			break
		}
	}
	require.Equal(t, []uint16{0, 1, 1, 2}, buses)
	require.Equal(t, []string{"can1", "can0", "can2"}, chain.Interfaces())
	require.Equal(t, int64(4), chain.Counts().Records)
	require.NoError(t, chain.Close())
}

// logText writes a frame in log form.
func logText(f *frame.Frame, iface string) string {
	id := fmt.Sprintf("%03X", f.ID)
	if f.Flags&frame.Extended != 0 {
		id = fmt.Sprintf("%08X", f.ID)
	}
	body := fmt.Sprintf("#%X", f.Payload())
	switch {
	case f.Flags&frame.Remote != 0:
		body = fmt.Sprintf("#R%d", f.DLC)
	case f.Flags&frame.FD != 0:
		flags := 0
		if f.Flags&frame.BitRateSwitch != 0 {
			flags |= 1
		}
		if f.Flags&frame.ErrorPassive != 0 {
			flags |= 2
		}
		body = fmt.Sprintf("##%d%X", flags, f.Payload())
	}
	return fmt.Sprintf("(%d.%09d) %s %s%s\n", f.Time/1e9, f.Time%1e9, iface, id, body)
}

func TestWrittenFramesComeBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var text strings.Builder
		var want []frame.Frame
		for i := range rapid.IntRange(1, 20).Draw(t, "frames") {
			f := frame.Frame{Time: rapid.Int64Range(0, 4e18).Draw(t, "time"), Record: int64(i + 1), Offset: int64(text.Len())}
			if rapid.Bool().Draw(t, "extended") {
				f.Flags = frame.Extended
			}
			f.ID = rapid.Uint32Range(0, map[bool]uint32{false: 1<<11 - 1, true: 1<<29 - 1}[f.Flags != 0]).Draw(t, "id")
			f.DLC = uint8(rapid.IntRange(0, 8).Draw(t, "dlc"))
			switch rapid.IntRange(0, 2).Draw(t, "kind") {
			case 1:
				f.Flags |= frame.Remote
			case 2:
				f.DLC = uint8(rapid.IntRange(0, 15).Draw(t, "fd dlc"))
				f.Flags |= frame.FD | rapid.SampledFrom([]frame.Flags{0, frame.BitRateSwitch, frame.ErrorPassive}).Draw(t, "fd flags")
			}
			if f.Flags&frame.Remote == 0 {
				f.Len, _ = frame.LenOfDLC(f.DLC, f.Flags&frame.FD != 0)
				copy(f.Data[:], rapid.SliceOfN(rapid.Byte(), int(f.Len), int(f.Len)).Draw(t, "data"))
			}
			want = append(want, f)
			text.WriteString(logText(&f, "can0"))
		}
		got, _, rejects, err := readAll(t, strings.NewReader(text.String()), Options{})
		require.NoError(t, err)
		require.Empty(t, rejects)
		require.Equal(t, want, got)
	})
}

// Classic frames also come back from the text that the CAN library writes.
func TestLibraryText(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		in := can.Frame{IsExtended: rapid.Bool().Draw(t, "extended"), Length: uint8(rapid.IntRange(0, 8).Draw(t, "length"))}
		in.ID = rapid.Uint32Range(0, map[bool]uint32{false: 1<<11 - 1, true: 1<<29 - 1}[in.IsExtended]).Draw(t, "id")
		copy(in.Data[:], rapid.SliceOfN(rapid.Byte(), int(in.Length), int(in.Length)).Draw(t, "data"))
		frames, _, rejects, err := readAll(t, strings.NewReader("(1.0) can0 "+in.String()+"\n"), Options{})
		require.NoError(t, err)
		require.Empty(t, rejects, in.String())
		got, err := frames[0].ToLibrary()
		require.NoError(t, err)
		require.Equal(t, in, got)
	})
}
