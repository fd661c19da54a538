package explain_test

import (
	"strings"
	"testing"

	"busloom/diag"
	"busloom/explain"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

// TestPages compiles both examples of every page: the wrong one gives the
// page's code and no other error, the right one gives neither errors nor the
// code.
func TestPages(t *testing.T) {
	for _, info := range diag.Codes() {
		t.Run(string(info.Code), func(t *testing.T) {
			page, ok := explain.Page(info.Code)
			require.True(t, ok, "code %s has no page", info.Code)
			require.True(t, strings.HasPrefix(page, "# "+string(info.Code)+": "+info.Title+"\n"), "the page's title isn't the catalogue's: %s", info.Title)
			wrong, right, err := explain.Examples(page)
			require.NoError(t, err)
			codes, text := problems(t, wrong)
			require.Contains(t, codes, info.Code, text)
			for code := range codes {
				other, _ := diag.Lookup(code)
				if code != info.Code && other.Severity == diag.Error && info.Code != diag.TooManyErrors {
					t.Errorf("the wrong example also gives %s:\n%s", code, text)
				}
			}
			codes, text = problems(t, right)
			for code := range codes {
				other, _ := diag.Lookup(code)
				if code == info.Code || other.Severity == diag.Error {
					t.Errorf("the right example gives %s:\n%s", code, text)
				}
			}
		})
	}
}

func problems(t *testing.T, e explain.Example) (map[diag.Code]bool, string) {
	var list *diag.List
	if strings.HasSuffix(e.Files[0].Name, ".json") {
		_, list = schema.LoadDatabase(diag.NewFile(e.Files[0].Name, []byte(e.Files[0].Text)))
	} else {
		files := schema.MapFiles{}
		for _, f := range e.Files {
			files[f.Name] = f.Text
		}
		_, list = schema.Compile(files, e.Files[0].Name)
	}
	var b strings.Builder
	require.NoError(t, diag.Render(&b, list.Sorted(), diag.Style{Notes: true}))
	codes := map[diag.Code]bool{}
	for _, d := range list.Sorted() {
		codes[d.Code] = true
	}
	return codes, b.String()
}
