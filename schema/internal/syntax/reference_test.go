package syntax

import (
	"os"
	"regexp"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

// The examples of the reference are written in the canonical layout, and none
// has a syntax error but those that show one.
func TestReferenceExamples(t *testing.T) {
	text, err := os.ReadFile("../../../docs/language.md")
	require.NoError(t, err)
	blocks := regexp.MustCompile("(?ms)^```bus(?:-error (\\w+))?\n(.*?)^```").FindAllSubmatch(text, -1)
	require.Greater(t, len(blocks), 10)
	for _, b := range blocks {
		list := &diag.List{}
		Parse(diag.NewFile("language.md", b[2]), list)
		if code := string(b[1]); code != "" {
			for _, d := range list.Sorted() {
				require.Equal(t, code, string(d.Code), d.Error())
			}
			continue
		}
		require.Equal(t, string(b[2]), checkFormat(t, "language.md", string(b[2])))
	}
}
