package diag

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func TestPositionsCountRunes(t *testing.T) {
	f := NewFile("a.bus", []byte("one\r\nzwö x\n\nlast"))
	for _, c := range []struct{ offset, line, column int }{{0, 1, 1}, {3, 1, 4}, {5, 2, 1}, {9, 2, 4}, {10, 2, 5}, {12, 3, 1}, {13, 4, 1}, {17, 4, 5}, {99, 4, 5}, {-1, 1, 1}} {
		line, column := f.Position(c.offset)
		require.Equal(t, []int{c.line, c.column}, []int{line, column}, "offset %d", c.offset)
	}
	require.Equal(t, "zwö x", string(f.Line(2)))
	require.Equal(t, "one", string(f.Line(1)), "the CR belongs to the line's end")
	require.Equal(t, "last", string(f.Line(4)))
	require.Nil(t, f.Line(5))
	require.Nil(t, f.Line(0))
	require.Equal(t, 4, f.Lines())
}

func sample() *List {
	f := NewFile("van.bus", []byte("busloom 1\n\tspeed at 0.7..1.0\nother at 1.7..1.0\n"+strings.Repeat("x", 300)+" here "+strings.Repeat("y", 300)+"\n"))
	l := &List{}
	l.Report(Overlap, Span{f, 38, 46}, "speed and other share bit 1.7", "move one of them").Also(Span{f, 11, 16}, "speed is here")
	d := l.Report(BadPlace, Span{f, 20, 28}, "this can't be", "write it otherwise")
	d.Picture = "byte | 7 6\n   0 | H L\n"
	l.Report(UnusedBits, Span{f, 0, 7}, "bits 3.7..3.0 are unused", "name them unused")
	at := bytes.Index(f.Text, []byte("here"))
	l.Report(NobodyListens, Span{f, at, at + 4}, "nobody hears this", "")
	l.Report(DatabaseVersion, Span{}, "without a place", "compile again")
	return l
}

func TestRender(t *testing.T) {
	var b bytes.Buffer
	require.NoError(t, Render(&b, sample().Sorted(), Style{}))
	require.Equal(t, `error DB02: without a place
  to mend: compile again
van.bus:2:11: error PL01: this can't be
    2 |     speed at 0.7..1.0
      |              ^^^^^^^^
      | byte | 7 6
      |    0 | H L
  to mend: write it otherwise
van.bus:3:10: error PL02: speed and other share bit 1.7
    3 | other at 1.7..1.0
      |          ^^^^^^^^
  van.bus:2:2: speed is here
    2 |     speed at 0.7..1.0
      |     ^^^^^
  to mend: move one of them
van.bus:4:302: warning NE03: nobody hears this
    4 | … `+strings.Repeat("x", 59)+" here "+strings.Repeat("y", 55)+` …
      |   `+strings.Repeat(" ", 60)+`^^^^
`, b.String())
	b.Reset()
	require.NoError(t, Render(&b, sample().Sorted(), Style{Notes: true, Color: true}))
	require.Contains(t, b.String(), "\x1b[1;36mnote PL04:\x1b[0m bits 3.7..3.0 are unused\n")
	require.Contains(t, b.String(), "\x1b[1;31merror PL02:\x1b[0m")
}

func TestRenderJSON(t *testing.T) {
	var b bytes.Buffer
	require.NoError(t, RenderJSON(&b, sample().Sorted()))
	var got []map[string]any
	require.NoError(t, json.Unmarshal(b.Bytes(), &got))
	require.Len(t, got, 5)
	require.Equal(t, "PL02", got[3]["code"])
	require.Equal(t, "error", got[3]["severity"])
	require.Equal(t, map[string]any{"file": "van.bus", "line": 3.0, "column": 10.0, "endLine": 3.0, "endColumn": 18.0, "offset": 38.0, "endOffset": 46.0}, got[3]["span"])
	require.Equal(t, "speed is here", got[3]["related"].([]any)[0].(map[string]any)["message"])
	require.NotContains(t, got[0], "span")
	b.Reset()
	require.NoError(t, RenderJSON(&b, nil))
	require.Equal(t, "[]\n", b.String())
}

// A terminal gets no control characters from a file, and any span of any text
// can be shown.
func TestRenderIsSafe(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		text := rapid.SliceOf(rapid.Byte()).Draw(t, "text")
		from := rapid.IntRange(0, len(text)).Draw(t, "from")
		to := rapid.IntRange(from, len(text)).Draw(t, "to")
		l := &List{}
		l.Report(Unreadable, Span{NewFile("x", text), from, to}, "problem", "remedy")
		var b bytes.Buffer
		require.NoError(t, Render(&b, l.Sorted(), Style{}))
		for _, r := range b.String() {
			require.False(t, r != '\n' && (r < ' ' || r == 0x7f || r >= 0x80 && r < 0xa0), "%q", b.String())
		}
	})
}

func TestCatalogue(t *testing.T) {
	seen := map[Code]bool{}
	for _, info := range Codes() {
		require.Regexp(t, `^[A-Z]{2}[0-9]{2}$`, string(info.Code))
		require.False(t, seen[info.Code], info.Code)
		seen[info.Code] = true
		require.NotEmpty(t, info.Title)
	}
	_, ok := Lookup("XX00")
	require.False(t, ok)
	require.Panics(t, func() { (&List{}).Report("XX00", Span{}, "", "") })
}

func TestNearest(t *testing.T) {
	names := []string{"chassis", "powertrain", "body", "Brake", "km/h"}
	for wanted, want := range map[string]string{"chasis": "chassis", "CHASSIS": "chassis", "bdoy": "body", "brake": "Brake", "kmh": "km/h", "steering": "", "": ""} {
		require.Equal(t, want, Nearest(wanted, names), wanted)
	}
}

func TestCounts(t *testing.T) {
	l := sample()
	require.True(t, l.Failed())
	require.Equal(t, []int{3, 1, 1, 5}, []int{l.Count(Error), l.Count(Warning), l.Count(Note), l.Len()})
	more := &List{}
	more.Add(l)
	require.Equal(t, 5, more.Len())
	require.Equal(t, "van.bus:3:10: error PL02: speed and other share bit 1.7", l.Sorted()[3].Error())
}
