package schema_test

import (
	"os"
	"regexp"
	"strings"
	"testing"

	"busloom/diag"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

var referenceBlock = regexp.MustCompile("(?ms)^```bus(?:-error (\\w+))?\n(.*?)^```")

// TestReference compiles every example of the language's reference: those of
// ```bus have no errors and no warnings, those of ```bus-error CODE have that
// code and no other error. An example may use the ones before it that begin
// with a comment naming a file.
func TestReference(t *testing.T) {
	text, err := os.ReadFile("../docs/language.md")
	require.NoError(t, err)
	blocks := referenceBlock.FindAllSubmatchIndex(text, -1)
	require.Greater(t, len(blocks), 10)
	files := schema.MapFiles{}
	for _, b := range blocks {
		line := 1 + strings.Count(string(text[:b[0]]), "\n")
		example, code := string(text[b[4]:b[5]]), diag.Code("")
		if b[2] >= 0 {
			code = diag.Code(text[b[2]:b[3]])
		}
		name := "example.bus"
		if m := regexp.MustCompile(`(?m)^// (\S+\.bus)$`).FindStringSubmatch(example); m != nil {
			name = m[1]
		}
		files[name] = example
		_, list := schema.Compile(files, name)
		var out strings.Builder
		require.NoError(t, diag.Render(&out, list.Sorted(), diag.Style{}))
		found := false
		for _, d := range list.Sorted() {
			found = found || d.Code == code
			if d.Severity == diag.Error && d.Code != code {
				t.Errorf("docs/language.md:%d: %s", line, out.String())
				break
			}
			if d.Severity == diag.Warning && code == "" {
				t.Errorf("docs/language.md:%d: %s", line, out.String())
				break
			}
		}
		require.True(t, code == "" || found, "docs/language.md:%d doesn't give %s", line, code)
	}
}
