package busloom

import (
	"bytes"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

var update = flag.Bool("update", false, "rewrite the outputs shown in the documents; the run still fails where one changed")

// documents are the files whose command blocks are run.
var documents = []string{"README.md", "DEVELOPERS.md", "docs/language.md", "docs/database.md", "docs/output.md"}

var consoleBlock = regexp.MustCompile("(?ms)^```console\n(.*?)^```$")

// notRun are the commands that a test can't run inside of itself, with the
// check that stands in.
var notRun = map[string][]string{
	"make test":     {"make", "-n", "test"},
	"make bench":    {"make", "-n", "bench"},
	"make fuzz":     {"make", "-n", "fuzz"},
	"make generate": {"make", "-n", "generate"},
}

// TestDocuments runs every command block of the documents and holds its output
// against what is shown. A block is lines of "$ command" with their output
// (standard output and error together, and "[exit code N]" where it isn't 0).
// A line of "..." stands for any lines.
func TestDocuments(t *testing.T) {
	bin := t.TempDir()
	build := exec.Command("go", "build", "-o", filepath.Join(bin, "busloom"), "./cmd/busloom")
	out, err := build.CombinedOutput()
	require.NoError(t, err, string(out))

	for _, name := range documents {
		t.Run(name, func(t *testing.T) {
			text, err := os.ReadFile(name)
			require.NoError(t, err)
			dir := t.TempDir()
			for _, share := range []string{"schemas", "testdata", "docs"} {
				path, err := filepath.Abs(share)
				require.NoError(t, err)
				require.NoError(t, os.Symlink(path, filepath.Join(dir, share)))
			}
			blocks := 0
			changed := consoleBlock.ReplaceAllFunc(text, func(block []byte) []byte {
				blocks++
				body := consoleBlock.FindSubmatch(block)[1]
				return []byte("```console\n" + runBlock(t, bin, dir, string(body)) + "```")
			})
			if !bytes.Equal(changed, text) && *update {
				require.NoError(t, os.WriteFile(name, changed, 0o644))
				t.Errorf("%s was rewritten: review the change and run again", name)
			}
			t.Logf("%d blocks", blocks)
		})
	}
}

// runBlock runs the commands of a block and returns it with the output that
// they gave.
func runBlock(t *testing.T, bin, dir, block string) string {
	var out strings.Builder
	lines := strings.SplitAfter(block, "\n")
	for i := 0; i < len(lines); {
		command, ok := strings.CutPrefix(lines[i], "$ ")
		if !ok {
			if lines[i] != "" {
				t.Errorf("a console block doesn't begin with a command: %q", lines[i])
			}
			i++
			continue
		}
		i++
		// A command goes on after a backslash.
		for strings.HasSuffix(command, "\\\n") && i < len(lines) {
			command += lines[i]
			i++
		}
		shown := ""
		for i < len(lines) && !strings.HasPrefix(lines[i], "$ ") {
			shown += lines[i]
			i++
		}
		out.WriteString("$ " + command)
		if instead, ok := notRun[strings.TrimSpace(command)]; ok {
			run := exec.Command(instead[0], instead[1:]...)
			text, err := run.CombinedOutput()
			require.NoError(t, err, "%s: %s", command, text)
			out.WriteString(shown)
			continue
		}
		got := runCommand(t, bin, dir, command)
		if matches(shown, got) {
			out.WriteString(shown)
			continue
		}
		if !*update {
			t.Errorf("$ %s\nshown:\n%s\ngot:\n%s", strings.TrimSpace(command), shown, got)
		}
		out.WriteString(got)
	}
	return out.String()
}

func runCommand(t *testing.T, bin, dir, command string) string {
	run := exec.Command("sh", "-c", command)
	run.Dir = dir
	if strings.HasPrefix(command, "make ") {
		run.Dir = "" // it builds, which needs the whole module
	}
	run.Env = append(os.Environ(), "PATH="+bin+":"+os.Getenv("PATH"), "NO_COLOR=1", "LC_ALL=C", "MAKEFLAGS=", "MAKELEVEL=", "BUSLOOM_BIN="+filepath.Join(bin, "busloom"))
	text, err := run.CombinedOutput()
	got := string(text)
	if got != "" && !strings.HasSuffix(got, "\n") {
		got += "\n"
	}
	if exit, ok := err.(*exec.ExitError); ok {
		return got + fmt.Sprintf("[exit code %d]\n", exit.ExitCode())
	}
	require.NoError(t, err)
	return got
}

// matches compares shown with got; a line "..." in shown stands for any lines.
func matches(shown, got string) bool {
	parts := strings.Split("\n"+shown, "\n...\n")
	got = "\n" + got
	for i, part := range parts {
		if i > 0 {
			part = "\n" + part
			at := strings.Index(got, part)
			if i == len(parts)-1 {
				return strings.HasSuffix(got, part)
			}
			if at < 0 {
				return false
			}
			got = got[at+len(part):]
			continue
		}
		if len(parts) == 1 {
			return got == part
		}
		if !strings.HasPrefix(got, part+"\n") {
			return false
		}
		got = got[len(part):]
	}
	return true
}
