package capture

import (
	"bytes"
	"compress/gzip"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"
	"testing/iotest"

	"busloom/frame"

	"github.com/stretchr/testify/require"
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

// dribble gives at most size bytes at a time.
type dribble struct {
	r    io.Reader
	size int
}

func (d *dribble) Read(p []byte) (int, error) { return d.r.Read(p[:min(len(p), d.size)]) }

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

// numberedLines writes lines of log form.
func numberedLines(n int) string {
	var lines strings.Builder
	for i := range n {
		fmt.Fprintf(&lines, "(%d.%06d) can%d %03X#%016X\n", i/1000, i%1000*7, i%3, i%2048, uint64(i)*0x9E3779B97F4A7C15)
	}
	return lines.String()
}

// Archives are made by the standard library, read by another one.
func TestArchives(t *testing.T) {
	lines := numberedLines(40000)
	whole := zipped(t, lines)
	plain, _, _, err := readAll(t, strings.NewReader(lines), Options{})
	require.NoError(t, err)
	require.Len(t, plain, 40000)
	frames, source, _, err := readAll(t, bytes.NewReader(whole), Options{})
	require.NoError(t, err)
	require.Equal(t, plain, frames)
	require.Equal(t, int64(len(lines)), source.Counts().Bytes)

	two, _, _, err := readAll(t, bytes.NewReader(zipped(t, "(1.0) a 100#\n", "(2.0) a 100#\n")), Options{})
	require.NoError(t, err)
	require.Len(t, two, 2)

	var damage *DamageError
	_, _, _, err = readAll(t, bytes.NewReader([]byte{0x1f, 0x8b}), Options{})
	require.ErrorAs(t, err, &damage)
	require.EqualError(t, err, "test.log: after 0 bytes of text: the archive's header is damaged or cut short: unexpected EOF")
	_, _, _, err = readAll(t, bytes.NewReader(nil), Options{})
	require.NoError(t, err)
	empty, _, _, err := readAll(t, bytes.NewReader(zipped(t, "")), Options{})
	require.NoError(t, err)
	require.Empty(t, empty)
}

// What is readable before the damage is handed out, and nothing else: half a
// line may look like a whole one, with fewer bytes.
func TestDamagedArchives(t *testing.T) {
	lines := numberedLines(10000)
	whole := zipped(t, lines)
	plain, _, _, err := readAll(t, strings.NewReader(lines), Options{})
	require.NoError(t, err)
	breaksInLine := 0
	for i := range 24 {
		at := len(whole) * (2*i + 40) / 90
		damaged := whole[:at]
		if i%4 == 0 {
			damaged = bytes.Clone(whole)
			damaged[at] ^= 0x55
		}
		frames, source, rejects, err := readAll(t, bytes.NewReader(damaged), Options{})
		var damage *DamageError
		require.ErrorAs(t, err, &damage)
		require.Equal(t, "test.log", damage.Name)
		require.Contains(t, err.Error(), "the archive is damaged or cut short")
		require.Equal(t, source.Counts().Bytes, damage.Offset)
		if i%4 == 0 {
			continue // a wrong byte may make wrong text before it is noticed
		}
		require.Greater(t, len(frames), 1000)
		require.Equal(t, plain[:len(frames)], frames)
		if len(rejects) > 0 {
			breaksInLine++
			require.Len(t, rejects, 1)
			require.Equal(t, "the text breaks off inside this line", rejects[0].Problem)
			require.Equal(t, int64(len(frames)+1), rejects[0].Record)
			require.Equal(t, damage.Offset, rejects[0].Offset+int64(rejects[0].Column)-1)
		}
	}
	require.NotZero(t, breaksInLine)
}

func TestFailingReaders(t *testing.T) {
	failure := errors.New("the disk is on fire")
	frames, _, rejects, err := readAll(t, io.MultiReader(strings.NewReader("(1.0) a 100#\n(1.0) a 100#11"), iotest.ErrReader(failure)), Options{})
	require.ErrorIs(t, err, failure)
	require.EqualError(t, err, "test.log: after 27 bytes of text: the disk is on fire")
	require.Len(t, frames, 1)
	require.Len(t, rejects, 1)
	require.Equal(t, 15, rejects[0].Column)

	_, _, _, err = readAll(t, iotest.ErrReader(failure), Options{})
	require.ErrorIs(t, err, failure)
	_, _, _, err = readAll(t, &dribble{strings.NewReader("(1.0) a 100#\n"), 0}, Options{})
	require.ErrorIs(t, err, io.ErrNoProgress)
}

func TestOpen(t *testing.T) {
	_, err := Open(filepath.Join(t.TempDir(), "missing.log"), Options{})
	require.ErrorIs(t, err, os.ErrNotExist)
	path := filepath.Join(t.TempDir(), "one.log")
	require.NoError(t, os.WriteFile(path, []byte("(1.0) a 100#\n"), 0o600))
	text, err := Open(path, Options{})
	require.NoError(t, err)
	require.Equal(t, path, text.Name())
	n, err := text.Read(nil)
	require.Zero(t, n)
	require.NoError(t, err)
	batch := make([]frame.Frame, 4)
	n, err = text.Read(batch)
	require.Equal(t, 1, n)
	require.NoError(t, err)
	for range 2 { // the end stays the end
		n, err = text.Read(batch)
		require.Zero(t, n)
		require.ErrorIs(t, err, io.EOF)
	}
	require.NoError(t, text.Close())
	require.NoError(t, text.Close())
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
	text := NewText("test.log", &endless{left: 1 << 30, tail: "\n(1.0) can0 123#11\n"}, Options{})
	batch := make([]frame.Frame, 4)
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	total := 0
	for {
		n, err := text.Read(batch)
		total += n
		if err != nil {
			require.ErrorIs(t, err, io.EOF)
			break
		}
	}
	runtime.ReadMemStats(&after)
	require.Equal(t, 1, total)
	require.Equal(t, frame.Counts{Records: 2, Malformed: 1, Bytes: 1<<30 + 19}, text.Counts())
	require.Less(t, after.TotalAlloc-before.TotalAlloc, uint64(1<<20))

	// An endless comment is no record, and an endless last line is one.
	for start, want := range map[string]frame.Counts{
		"# ": {Bytes: 100002},
		"x":  {Records: 1, Malformed: 1, Bytes: 100001},
	} {
		_, source, _, err := readAll(t, io.MultiReader(strings.NewReader(start), &endless{left: 100000}), Options{})
		require.NoError(t, err)
		require.Equal(t, want, source.Counts())
	}
}

// However the reader below splits the text, it comes to the same.
func TestPiecesMakeNoDifference(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	var b strings.Builder
	for i := range 300 {
		switch random.IntN(12) {
		case 0:
			b.WriteString("# comment")
		case 1:
			b.WriteString("(1.5) can0 123#1")
		case 2: // at the border of what a line can be
			b.WriteString(strings.Repeat("x", maxLine-2+random.IntN(5)))
		case 3:
			b.WriteString("#" + strings.Repeat("x", maxLine-2+random.IntN(5)))
		case 4:
			b.WriteString(strings.Repeat("y", random.IntN(20000)))
		case 5:
			b.WriteString("can0 123#11" + strings.Repeat(" ", maxLine-13+random.IntN(5)))
		default:
			fmt.Fprintf(&b, "(%d.%06d) can0 %03X#%04X", i/40, i, i, i)
		}
		b.WriteString([]string{"\n", "\r\n"}[random.IntN(2)])
	}
	b.WriteString("(7.000000) can0 123#11")
	text := b.String()
	frames, source, rejects, err := readAll(t, strings.NewReader(text), Options{})
	require.NoError(t, err)
	require.Greater(t, len(frames), 100)
	require.Greater(t, len(rejects), 50)
	require.Equal(t, int64(strings.Count(text, "\n")+1), source.Counts().Records+source.OtherLines(), "every line is accounted for")
	for _, size := range []int{3, 100, maxLine - 1, maxLine, maxLine + 1, 32 << 10} {
		again, source2, rejects2, err := readAll(t, &dribble{strings.NewReader(text), size}, Options{})
		require.NoError(t, err)
		require.Equal(t, frames, again, size)
		require.Equal(t, rejects, rejects2, size)
		require.Equal(t, source.Counts(), source2.Counts())
		require.Equal(t, source.OtherLines(), source2.OtherLines())
	}
}

// Bytes of no meaning are rejected line by line.
func TestNoise(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	noise := make([]byte, 1<<20)
	for i := range noise {
		noise[i] = byte(random.Uint32())
	}
	noise[0], noise[len(noise)-1] = 'x', 'x' // no archive, no line end
	_, source, rejects, err := readAll(t, bytes.NewReader(noise), Options{})
	require.NoError(t, err)
	require.Equal(t, int64(len(noise)), source.Counts().Bytes)
	require.Equal(t, int64(bytes.Count(noise, []byte("\n"))+1), source.Counts().Records+source.OtherLines())
	require.Greater(t, len(rejects), 4000)
	zeros, source, _, err := readAll(t, bytes.NewReader(make([]byte, 1<<20)), Options{})
	require.NoError(t, err)
	require.Empty(t, zeros)
	require.Equal(t, int64(1), source.Counts().Malformed)
}

func TestManyInterfaces(t *testing.T) {
	var text strings.Builder
	for i := range maxInterfaces + 2 {
		fmt.Fprintf(&text, "(1.000000) if%d 123#\n(1.000000) if%d 123#\n", i, i)
	}
	frames, source, rejects, err := readAll(t, strings.NewReader(text.String()), Options{})
	require.NoError(t, err)
	require.Len(t, source.Interfaces(), maxInterfaces)
	for i, f := range frames {
		require.Equal(t, i/2, int(f.Bus))
	}
	require.Len(t, rejects, 4)
	require.Equal(t, "test.log:8193:12: this is the interface number 4097: expected one of the 4096 interfaces seen so far", rejects[0].Error())
}

func TestReadingAllocatesNothing(t *testing.T) {
	for _, line := range []string{
		"(1699999999.123456) can0 123#1122334455667788\n",
		"(1699999999.123456789) can_chassis 18DAF110##1112233445566778899001122 R\r\n",
		" (1699999999.123456)  can0  RX - -  123   [8]  11 22 33 44 55 66 77 88   '.\"3DUfw.'\n",
		" (2023-11-14 22:13:19.123456)  can0  123   [3]  33`22`11   `3\".`\n",
	} {
		text := NewText("test.log", &endless{tail: strings.Repeat(line, 50000)}, Options{})
		batch := make([]frame.Frame, 100)
		require.Zero(t, testing.AllocsPerRun(100, func() {
			if n, err := text.Read(batch); n == 0 || err != nil {
				t.Fatal(n, err)
			}
		}), line)
	}
}
