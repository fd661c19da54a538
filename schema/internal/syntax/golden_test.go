package syntax

import (
	"bytes"
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

var update = flag.Bool("update", false, "rewrite the golden files; the run fails all the same")

// golden holds got against a file. A run that rewrites goldens fails, so that
// nobody does it by accident.
func golden(t *testing.T, file, got string) {
	want, err := os.ReadFile(file)
	if *update {
		if err != nil || string(want) != got {
			require.NoError(t, os.WriteFile(file, []byte(got), 0o644))
			t.Errorf("%s rewritten: read the difference, then run without -update", file)
		}
		return
	}
	require.NoError(t, err, "run with -update to make it")
	require.Equal(t, string(want), got)
}

// Each text in testdata/mistakes is held against all that is said of it, and
// against the names of the declarations and members that survive.
func TestMistakes(t *testing.T) {
	files, err := filepath.Glob("testdata/mistakes/*.bus")
	require.NoError(t, err)
	require.NotEmpty(t, files)
	for _, file := range files {
		t.Run(strings.TrimSuffix(filepath.Base(file), ".bus"), func(t *testing.T) {
			text, err := os.ReadFile(file)
			require.NoError(t, err)
			checkParse(t, string(text))
			list := &diag.List{}
			tree := Parse(diag.NewFile(filepath.Base(file), text), list)
			require.Positive(t, list.Count(diag.Error))
			var b bytes.Buffer
			diag.Render(&b, list.Sorted(), diag.Style{Notes: true})
			b.WriteString("\nwhat is left: " + strings.Join(survivors(tree), " ") + "\n")
			golden(t, strings.TrimSuffix(file, ".bus")+".diag", b.String())
			_, ok := Format(diag.NewFile(file, text), &diag.List{})
			require.False(t, ok)
		})
	}
}

// survivors names declarations, and in brackets what their bodies hold.
func survivors(f *File) []string {
	var out []string
	for _, d := range f.Decls {
		h := d.Head()
		name := strings.Join(strings.Fields(h.Text()), " ")
		switch d := d.(type) {
		case *MessageDecl:
			name += "[" + strings.Join(itemNames(d.Body), " ") + "]"
		case *ShapeDecl:
			name += "[" + strings.Join(itemNames(d.Body), " ") + "]"
		case *TableDecl:
			for _, e := range d.Entries {
				name += " " + e.Raws.Span.Text()
			}
		case *CurveDecl:
			for _, p := range d.Points {
				name += " " + p.X.Span.Text()
			}
		}
		out = append(out, name+";")
	}
	return out
}

func itemNames(b *Body) []string {
	var out []string
	for _, i := range b.Items {
		switch i := i.(type) {
		case *Member:
			out = append(out, i.Name.Text)
		case *Group:
			out = append(out, i.Name.Text)
		case *Select:
			name := "select("
			for _, w := range i.Whens {
				name += strings.Join(itemNames(w.Body), " ") + ";"
			}
			out = append(out, name+")")
		default:
			out = append(out, strings.Fields(i.ItemSpan().Text())[0])
		}
	}
	return out
}

// Each text in testdata/layout is laid out as its golden file has it.
func TestLayout(t *testing.T) {
	files, err := filepath.Glob("testdata/layout/*.bus")
	require.NoError(t, err)
	require.NotEmpty(t, files)
	for _, file := range files {
		t.Run(strings.TrimSuffix(filepath.Base(file), ".bus"), func(t *testing.T) {
			text, err := os.ReadFile(file)
			require.NoError(t, err)
			golden(t, strings.TrimSuffix(file, ".bus")+".fmt", checkFormat(t, file, string(text)))
		})
	}
}

func TestCodesOfMistakesAreAllTried(t *testing.T) {
	files, err := filepath.Glob("testdata/mistakes/*.diag")
	require.NoError(t, err)
	var all strings.Builder
	for _, file := range files {
		text, err := os.ReadFile(file)
		require.NoError(t, err)
		all.Write(text)
	}
	for _, info := range diag.Codes() {
		if strings.HasPrefix(string(info.Code), "SY") {
			require.Contains(t, all.String(), " "+string(info.Code)+": ")
		}
	}
}
