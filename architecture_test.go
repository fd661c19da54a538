package busloom

import (
	"bufio"
	"bytes"
	"encoding/json"
	"io"
	"os"
	"os/exec"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// layer is one row of the table in DEVELOPERS.md.
type layer struct {
	level string
	may   map[string]bool // packages of the module and named modules
}

// readLayers reads the table between the layers markers of DEVELOPERS.md:
// | level | `package` | purpose | `import`, `import` |
func readLayers(t *testing.T) map[string]layer {
	text, err := os.ReadFile("DEVELOPERS.md")
	require.NoError(t, err)
	_, rest, ok := strings.Cut(string(text), "<!-- layers -->")
	require.True(t, ok, "DEVELOPERS.md has no <!-- layers --> marker")
	table, _, ok := strings.Cut(rest, "<!-- /layers -->")
	require.True(t, ok, "DEVELOPERS.md has no <!-- /layers --> marker")
	out := map[string]layer{}
	lines := bufio.NewScanner(strings.NewReader(table))
	for lines.Scan() {
		cells := strings.Split(lines.Text(), "|")
		if len(cells) != 6 || !strings.Contains(cells[2], "`") {
			continue
		}
		l := layer{level: strings.TrimSpace(cells[1]), may: map[string]bool{}}
		for name := range strings.SplitSeq(cells[4], ",") {
			if name = strings.Trim(strings.TrimSpace(name), "`"); name != "" && name != "—" {
				l.may[name] = true
			}
		}
		out[strings.Trim(strings.TrimSpace(cells[2]), "`")] = l
	}
	require.NoError(t, lines.Err())
	return out
}

// TestLayers holds the imports of every package (tests aside) against the
// table in DEVELOPERS.md, both ways: nothing is imported that the table
// doesn't allow, and the table allows nothing that isn't imported.
func TestLayers(t *testing.T) {
	layers := readLayers(t)
	out, err := exec.Command("go", "list", "-json=ImportPath,Imports", "./...").Output()
	require.NoError(t, err)
	seen := map[string]bool{}
	dec := json.NewDecoder(bytes.NewReader(out))
	for {
		var pkg struct {
			ImportPath string
			Imports    []string
		}
		err := dec.Decode(&pkg)
		if err == io.EOF {
			break
		}
		require.NoError(t, err)
		if pkg.ImportPath == "busloom" {
			continue // tests of the whole only
		}
		name := strings.TrimPrefix(pkg.ImportPath, "busloom/")
		l, ok := layers[name]
		if !ok {
			t.Errorf("package %s isn't in the table of DEVELOPERS.md", name)
			continue
		}
		seen[name] = true
		used := map[string]bool{}
		for _, path := range pkg.Imports {
			if !strings.Contains(path, ".") && !strings.HasPrefix(path, "busloom/") {
				continue // standard library
			}
			dep := strings.TrimPrefix(path, "busloom/")
			allowed := ""
			for may := range l.may {
				if dep == may || (strings.Contains(may, ".") && strings.HasPrefix(dep, may)) {
					allowed = may
				}
			}
			if allowed == "" {
				t.Errorf("%s imports %s, which the table doesn't allow", name, dep)
			}
			used[allowed] = true
			if below, ok := layers[dep]; ok && below.level >= l.level {
				t.Errorf("%s (layer %s) imports %s (layer %s): only lower layers may be imported", name, l.level, dep, below.level)
			}
		}
		for may := range l.may {
			if !used[may] {
				t.Errorf("the table lets %s import %s, but it doesn't", name, may)
			}
		}
	}
	for name := range layers {
		if !seen[name] {
			t.Errorf("the table names %s, which doesn't exist", name)
		}
	}
}
