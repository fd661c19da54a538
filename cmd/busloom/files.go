package main

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
)

// output is where a command writes its data: standard output, or a file that
// appears whole or not at all.
type outputFile struct {
	io.Writer
	file *os.File
	path string
}

// createOutput opens path for writing; "" and "-" are standard output.
func createOutput(std *streams, path string) (*outputFile, error) {
	if path == "" || path == "-" {
		return &outputFile{Writer: std.out}, nil
	}
	// A device or a pipe can't be replaced by renaming: write into it.
	if info, err := os.Stat(path); err == nil && !info.Mode().IsRegular() {
		if info.IsDir() {
			return nil, ioError(fmt.Errorf("%s is a folder", path))
		}
		f, err := os.OpenFile(path, os.O_WRONLY, 0)
		if err != nil {
			return nil, ioError(err)
		}
		return &outputFile{Writer: f, file: f}, nil
	}
	if info, err := os.Stat(path); err == nil && info.Mode().Perm()&0o200 == 0 {
		return nil, ioError(fmt.Errorf("%s is read-only", path))
	}
	f, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".*")
	if err != nil {
		var where *os.PathError
		if errors.As(err, &where) {
			err = where.Err
		}
		return nil, ioError(fmt.Errorf("can't write %s: %w", path, err))
	}
	return &outputFile{Writer: f, file: f, path: path}, nil
}

// keep makes the file appear under its name.
func (o *outputFile) keep() error {
	if o.file == nil {
		return nil
	}
	if o.path == "" {
		return o.file.Close()
	}
	mode := os.FileMode(0o644)
	if info, err := os.Stat(o.path); err == nil {
		mode = info.Mode().Perm()
	}
	err := o.file.Chmod(mode)
	if e := o.file.Sync(); err == nil {
		err = e
	}
	if e := o.file.Close(); err == nil {
		err = e
	}
	if err == nil {
		err = os.Rename(o.file.Name(), o.path)
	}
	if err != nil {
		os.Remove(o.file.Name())
		return fmt.Errorf("can't write %s: %w", o.path, err)
	}
	return nil
}

// drop removes what was written; it does nothing after keep.
func (o *outputFile) drop() {
	if o.file != nil && o.path != "" {
		o.file.Close()
		os.Remove(o.file.Name())
	}
}

// checkNotInput refuses to write over a file that is read.
func checkNotInput(out string, inputs ...string) error {
	to, err := os.Stat(out)
	if out == "" || err != nil || !to.Mode().IsRegular() {
		return nil
	}
	for _, in := range inputs {
		if from, err := os.Stat(in); err == nil && os.SameFile(from, to) {
			return usageError("-o %s would overwrite what is read", out)
		}
	}
	return nil
}
