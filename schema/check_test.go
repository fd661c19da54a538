package schema

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

var update = flag.Bool("update", false, "rewrite the golden diagnostics; the run still fails, so that nobody refreshes them by accident")

func render(t *testing.T, list *diag.List) string {
	var b bytes.Buffer
	require.NoError(t, diag.Render(&b, list.Sorted(), diag.Style{Notes: true}))
	return b.String()
}

// TestCheck compiles each wrong description of testdata/check. Its name begins
// with the code of its one mistake, and nothing else may be found in it. The
// golden beside it has the whole diagnostic as people see it.
func TestCheck(t *testing.T) {
	paths, err := filepath.Glob("testdata/check/*.bus")
	require.NoError(t, err)
	covered := map[diag.Code]bool{}
	for _, path := range paths {
		name := strings.TrimSuffix(filepath.Base(path), ".bus")
		code := diag.Code(name[:4])
		covered[code] = true
		t.Run(name, func(t *testing.T) {
			network, list := Compile(DiskFiles(), filepath.ToSlash(path))
			var codes []diag.Code
			for _, d := range list.Sorted() {
				codes = append(codes, d.Code)
				require.NotEmpty(t, d.Problem)
				require.NotEmpty(t, d.Remedy)
				require.NotRegexp(t, `[.]$`, d.Problem)
			}
			require.Equal(t, list.Failed(), network == nil)
			got := render(t, list)
			golden := strings.TrimSuffix(path, ".bus") + ".diag"
			if *update {
				require.NoError(t, os.WriteFile(golden, []byte(got), 0o644))
			}
			require.Equal(t, []diag.Code{code}, codes, "one mistake, one diagnostic:\n%s", got)
			want, err := os.ReadFile(golden)
			require.NoError(t, err)
			require.Equal(t, string(want), got)
			if *update {
				t.Error("golden refreshed; run again without -update")
			}
		})
	}
	for _, info := range diag.Codes() {
		switch info.Code[:2] {
		case "SY", "DB":
			continue // of the parser and of databases
		}
		require.True(t, covered[info.Code], "no wrong description for %s, %s", info.Code, info.Title)
	}
}

// TestClean compiles descriptions without a mistake: nothing may be said.
func TestClean(t *testing.T) {
	paths, err := filepath.Glob("testdata/clean/*.bus")
	require.NoError(t, err)
	require.NotEmpty(t, paths)
	for _, path := range paths {
		t.Run(filepath.Base(path), func(t *testing.T) {
			network, list := Compile(DiskFiles(), filepath.ToSlash(path))
			require.Empty(t, render(t, list))
			require.NotNil(t, network)
		})
	}
}
