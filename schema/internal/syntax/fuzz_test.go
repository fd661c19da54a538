package syntax

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"busloom/diag"
	"busloom/schema/internal/syntax/gen"

	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// seeds are real descriptions, the golden texts and damaged copies of them.
func seeds(f *testing.F) {
	add := func(text string) {
		f.Add(text)
		f.Add(strings.Replace(text, "}", "", 1))
		f.Add(strings.Replace(text, "{", "", 1))
		f.Add(strings.ReplaceAll(text, "\n", " "))
		f.Add(text[:len(text)/2])
	}
	for _, text := range heronFiles(f) {
		add(text)
	}
	golden, err := filepath.Glob("testdata/*/*.bus")
	require.NoError(f, err)
	for _, name := range golden {
		text, err := os.ReadFile(name)
		require.NoError(f, err)
		add(string(text))
	}
	for i := range 20 {
		f.Add(gen.Text().Example(i))
	}
	f.Add("\xef\xbb\xbfbusloom 1\r\nbus a 500 kbit/s\r\n")
	f.Add("busloom 1\nconst k = ((((((-1))))))\n")
}

// wholeFile is the grammar of a file in one piece, to hold the cutting against.
type wholeFile struct {
	Version *gVersion `parser:"@@"`
	Head    []*struct {
		Network *gNetwork `parser:"(   @@"`
		Use     *gUse     `parser:"  | @@ )"`
	} `parser:"@@*"`
	Decls []*gDecl `parser:"@@*"`
}

var wholeParser = participle.MustBuild[wholeFile](participle.Lexer(definition{}), participle.UseLookahead(0))

// checkParse proves what Parse promises of any text.
func checkParse(t require.TestingT, text string) {
	src := diag.NewFile("fuzz.bus", []byte(text))
	list := &diag.List{}
	tree := Parse(src, list)
	require.NotNil(t, tree)
	require.LessOrEqual(t, list.Len(), maxProblems+1)
	for _, d := range list.Sorted() {
		for _, s := range append([]diag.Related{{Span: d.Span}}, d.Related...) {
			require.Same(t, src, s.Span.File, d.Error())
			require.True(t, 0 <= s.Span.Start && s.Span.Start <= s.Span.End && s.Span.End <= len(text), "%v: %d..%d of %d", d, s.Span.Start, s.Span.End, len(text))
		}
		require.NotEmpty(t, d.Problem)
		require.NotContains(t, d.Problem, "expected something else", "a production without a translation")
		require.NotEmpty(t, d.Remedy, d.Problem)
	}

	// The cutting and the grammar agree on what is correct.
	p, _ := newParser(src, &diag.List{})
	peeking, err := lexer.Upgrade(&sliceLexer{text: p.text, toks: p.toks, end: len(text)})
	require.NoError(t, err)
	_, err = wholeParser.ParseFromLexer(peeking)
	if err != nil {
		require.Positive(t, list.Count(diag.Error), "the grammar says %v, and nothing was reported of\n%s", err, text)
		return
	}
	r := p.reader(&diag.List{})
	for _, at := range p.cut(2) {
		var err error
		switch r.firstWord(at) {
		case "network":
			_, err = parse(r, r.parsers.network, at)
		case "use":
			_, err = parse(r, r.parsers.use, at)
		default:
			_, err = parse(r, r.parsers.decl, at)
		}
		require.NoError(t, err, "the grammar takes the whole, but not the piece %q of\n%s", r.spanOf(at).Text(), text)
	}
}

func FuzzParse(f *testing.F) {
	seeds(f)
	f.Fuzz(func(t *testing.T, text string) { checkParse(t, text) })
}

func FuzzFormat(f *testing.F) {
	seeds(f)
	f.Fuzz(func(t *testing.T, text string) {
		list := &diag.List{}
		out, ok := Format(diag.NewFile("fuzz.bus", []byte(text)), list)
		require.Equal(t, !list.Failed(), ok)
		if !ok {
			require.Nil(t, out)
			return
		}
		checkFormat(t, "fuzz.bus", text)
	})
}

// Damage to correct texts finds what random bytes hardly do.
func TestDamagedText(t *testing.T) {
	texts := gen.Text()
	rapid.Check(t, func(t *rapid.T) {
		text := texts.Draw(t, "text")
		for range rapid.IntRange(1, 3).Draw(t, "damages") {
			at := rapid.IntRange(0, len(text)).Draw(t, "at")
			to := min(len(text), at+rapid.IntRange(0, 6).Draw(t, "length"))
			text = text[:at] + rapid.SampledFrom([]string{"", " ", "{", "}", "\n", "(", "at ", "bus ", "\"", "0.", "x ", ",", "is", "message X 0x100 "}).Draw(t, "put") + text[to:]
		}
		checkParse(t, text)
	})
}
