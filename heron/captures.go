package heron

import (
	"io"
	"os"
	"path/filepath"

	"github.com/klauspost/compress/gzip"
)

// CaptureName is the file name of a scenario's capture.
func CaptureName(s Scenario) string { return string(s) + ".log.gz" }

// WriteCaptures writes the capture of every scenario into a folder. A file is
// there whole or not at all.
func WriteCaptures(dir string) error {
	for _, s := range Scenarios() {
		err := Replace(filepath.Join(dir, CaptureName(s)), func(w io.Writer) error {
			// The gzip header stays empty: no time, no name.
			z, err := gzip.NewWriterLevel(w, gzip.BestCompression)
			if err != nil {
				return err
			}
			if err := Write(z, s, Options{}); err != nil {
				return err
			}
			return z.Close()
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// Replace writes a file beside its place and moves it there when it is whole.
func Replace(path string, write func(io.Writer) error) (err error) {
	f, err := os.CreateTemp(filepath.Dir(path), filepath.Base(path)+".*")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			f.Close()
			os.Remove(f.Name())
		}
	}()
	if err = write(f); err != nil {
		return err
	}
	if err = f.Chmod(0o644); err != nil {
		return err
	}
	if err = f.Close(); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}
