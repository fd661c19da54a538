package main

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"strings"

	"busloom/diag"
	"busloom/schema"

	"golang.org/x/term"
)

// problemFormat is how diagnostics are printed.
type problemFormat string

const (
	problemsText problemFormat = "text"
	problemsJSON problemFormat = "json"
)

func (f problemFormat) valid() error {
	if f != problemsText && f != problemsJSON {
		return usageError("--format is %q: it can be text or json", string(f))
	}
	return nil
}

// loadNetwork reads a description or a database. Problems are printed to
// stderr (notes only if asked for); with errors the result is an exitError.
func loadNetwork(std *streams, path string) (*schema.Network, error) {
	network, list, err := readNetwork(path)
	if err != nil {
		return nil, err
	}
	if err := diag.Render(std.err, list.Sorted(), diag.Style{Color: colorful(std.err)}); err != nil {
		return nil, ioError(err)
	}
	if list.Failed() {
		return nil, &exitError{exitDescription, fmt.Errorf("%s: %s", path, countProblems(list))}
	}
	return network, nil
}

func readNetwork(path string) (*schema.Network, *diag.List, error) {
	text, err := readDescription(path)
	if err != nil {
		return nil, nil, ioError(err)
	}
	if bytes.HasPrefix(text, []byte{0x1f, 0x8b}) || bytes.IndexByte(text[:min(len(text), 4096)], 0) >= 0 {
		return nil, nil, ioError(fmt.Errorf("%s isn't text: a description or a database is wanted here", path))
	}
	if schema.IsDatabase(text) {
		network, list := schema.LoadDatabase(diag.NewFile(path, text))
		return network, list, nil
	}
	network, list := schema.Compile(schema.DiskFiles(), path)
	return network, list, nil
}

// largestDescription bounds what is read into memory at once.
const largestDescription = 1 << 30

func readDescription(path string) ([]byte, error) {
	info, err := os.Stat(path)
	switch {
	case err != nil:
		return nil, err
	case info.IsDir():
		return nil, fmt.Errorf("%s is a folder, not a description", path)
	case !info.Mode().IsRegular():
		// A description is read more than once, which only a file allows.
		return nil, fmt.Errorf("%s is no regular file", path)
	}
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	text, err := io.ReadAll(io.LimitReader(f, largestDescription+1))
	if err != nil {
		return nil, err
	}
	if len(text) > largestDescription {
		return nil, fmt.Errorf("%s is larger than %d MiB", path, largestDescription>>20)
	}
	return text, nil
}

func countProblems(list *diag.List) string {
	return count(list.Count(diag.Error), "error") + ", " + count(list.Count(diag.Warning), "warning") +
		", " + count(list.Count(diag.Note), "note")
}

// count is 1 bus, 2 buses.
func count(n int, word string) string {
	switch {
	case n == 1:
	case strings.HasSuffix(word, "s"):
		word += "es"
	default:
		word += "s"
	}
	return fmt.Sprintf("%d %s", n, word)
}

// colorful reports whether w is a terminal whose user wants colours.
func colorful(w io.Writer) bool {
	if os.Getenv("NO_COLOR") != "" || os.Getenv("TERM") == "dumb" {
		return false
	}
	f, ok := w.(*os.File)
	return ok && term.IsTerminal(int(f.Fd()))
}
