package schema

import (
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// Files is where Compile reads descriptions from. Paths have forward slashes
// and are relative to wherever the root's path is relative to.
type Files interface {
	Read(path string) ([]byte, error)
}

// largestFile bounds what is read into memory at once.
const largestFile = 1 << 30

type diskFiles struct{}

// DiskFiles reads from the file system.
func DiskFiles() Files { return diskFiles{} }

func (diskFiles) Read(path string) ([]byte, error) {
	name := filepath.FromSlash(path)
	info, err := os.Stat(name)
	switch {
	case err != nil:
		return nil, err
	case info.IsDir():
		return nil, fmt.Errorf("it is a folder")
	case !info.Mode().IsRegular():
		// Opening a pipe would wait for its writer, and a device has no end.
		return nil, fmt.Errorf("it is no regular file")
	}
	f, err := os.Open(name)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	text, err := io.ReadAll(io.LimitReader(f, largestFile+1))
	if err == nil && len(text) > largestFile {
		err = fmt.Errorf("it is larger than %d MiB", largestFile>>20)
	}
	return text, err
}

// MapFiles are files in memory: path to text.
type MapFiles map[string]string

// Read implements Files.
func (m MapFiles) Read(path string) ([]byte, error) {
	text, ok := m[path]
	if !ok {
		return nil, &fs.PathError{Op: "open", Path: path, Err: fs.ErrNotExist}
	}
	return []byte(text), nil
}
