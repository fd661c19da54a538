package syntax

import (
	"os"
	"path/filepath"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

// heronFiles are the demo's descriptions, real text to try everything on.
func heronFiles(t testing.TB) map[string]string {
	out := map[string]string{}
	err := filepath.Walk("../../../schemas", func(path string, info os.FileInfo, err error) error {
		if err != nil || filepath.Ext(path) != ".bus" {
			return err
		}
		text, err := os.ReadFile(path)
		out[path] = string(text)
		return err
	})
	require.NoError(t, err)
	require.NotEmpty(t, out)
	return out
}

func TestHeronFormats(t *testing.T) {
	for name, text := range heronFiles(t) {
		checkFormat(t, name, text)
	}
}

// checkFormat proves what Format promises: the same tree, every comment, and
// nothing left to do the second time.
func checkFormat(t require.TestingT, name, text string) string {
	list := &diag.List{}
	once, ok := Format(diag.NewFile(name, []byte(text)), list)
	require.True(t, ok, "%s: %v", name, list.Sorted())
	twice, ok := Format(diag.NewFile(name, once), list)
	require.True(t, ok, "%s laid out can't be read:\n%s\n%v", name, once, list.Sorted())
	require.Equal(t, string(once), string(twice), name)
	require.Equal(t, outline(Parse(diag.NewFile("a", []byte(text)), list)), outline(Parse(diag.NewFile("b", once), list)), name)
	require.Equal(t, comments(text), comments(string(once)), name)
	return string(once)
}
