package schema

import (
	"os"
	"path/filepath"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// Texts that were sound or nearly so, with words taken out, doubled or put
// elsewhere: whatever comes out, the compiler says what is wrong and where.
func TestDamagedTexts(t *testing.T) {
	paths, err := filepath.Glob("testdata/c*/*.bus")
	require.NoError(t, err)
	files := MapFiles{}
	shared, err := filepath.Glob("testdata/c*/common/*.bus")
	require.NoError(t, err)
	for _, p := range append(paths, shared...) {
		text, err := os.ReadFile(p)
		require.NoError(t, err)
		files[filepath.ToSlash(p)] = string(text)
	}
	splices := []string{"", " ", "0", "0.0", "raw", "ones", "}", "{", "at", "select page {", "255", "1/0", "Test", "[a]", "1..2", "-", "\"x\"", "signed", "always 1"}
	rapid.Check(t, func(t *rapid.T) {
		path := filepath.ToSlash(rapid.SampledFrom(paths).Draw(t, "path"))
		text := files[path]
		for range rapid.IntRange(1, 4).Draw(t, "edits") {
			from := rapid.IntRange(0, len(text)).Draw(t, "from")
			to := min(len(text), from+rapid.IntRange(0, 12).Draw(t, "length"))
			text = text[:from] + rapid.SampledFrom(splices).Draw(t, "splice") + text[to:]
		}
		damaged := MapFiles{path: text}
		for name, text := range files {
			if name != path {
				damaged[name] = text
			}
		}
		network, list := Compile(damaged, path)
		require.Equal(t, list.Failed(), network == nil)
		for _, d := range list.Sorted() {
			require.NotEmpty(t, d.Problem)
			require.NotEmpty(t, d.Remedy, d.Error())
			if d.Span.Known() {
				require.LessOrEqual(t, d.Span.Start, d.Span.End, d.Error())
				require.LessOrEqual(t, d.Span.End, len(d.Span.File.Text), d.Error())
			}
			if d.Severity == diag.Error {
				require.True(t, d.Span.Known(), d.Error())
			}
		}
	})
}
